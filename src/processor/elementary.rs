//! Sine, cosine and exponential without branches, so that many go at once.
//!
//! Sine and cosine are polynomials after a three-part reduction by π/2 (Cody & Waite 1980; minimax coefficients of the fdlibm
//! kernels), absolute error below 3·10⁻¹⁶ for arguments up to 10⁵. The exponential is its Taylor series after a two-part reduction by
//! ln 2, relative error below 4·10⁻¹⁶.

use super::{Vectorised, mul_add, widest};
use num_complex::Complex64;

/// 1.5·2⁵²: adding it rounds to an integer.
const ROUND: f64 = 6_755_399_441_055_744.0;

/// Sine and cosine of |x| < 10⁵.
#[inline(always)]
#[must_use]
pub fn sin_cos<const FMA: bool>(x: f64) -> (f64, f64) {
    // π/2 in three parts of 33, 33 and 53 bits
    const P1: f64 = 1.570_796_326_734_125_6;
    const P2: f64 = 6.077_100_506_303_966e-11;
    const P3: f64 = 2.022_266_248_795_950_6e-21;
    let shifted = mul_add::<FMA>(x, std::f64::consts::FRAC_2_PI, ROUND);
    let quadrant = shifted.to_bits();
    let q = shifted - ROUND;
    let r = mul_add::<FMA>(-q, P3, mul_add::<FMA>(-q, P2, mul_add::<FMA>(-q, P1, x)));
    let z = r * r;
    let s = mul_add::<FMA>(
        z,
        mul_add::<FMA>(
            z,
            mul_add::<FMA>(
                z,
                mul_add::<FMA>(
                    z,
                    mul_add::<FMA>(z, 1.589_690_995_211_55e-10, -2.505_076_025_340_686_3e-8),
                    2.755_731_370_707_006_8e-6,
                ),
                -1.984_126_982_985_795e-4,
            ),
            8.333_333_333_322_49e-3,
        ),
        -1.666_666_666_666_663_2e-1,
    );
    let sin = mul_add::<FMA>(r * z, s, r);
    let c = mul_add::<FMA>(
        z,
        mul_add::<FMA>(
            z,
            mul_add::<FMA>(
                z,
                mul_add::<FMA>(
                    z,
                    mul_add::<FMA>(z, -1.135_964_755_778_819_5e-11, 2.087_572_321_298_175e-9),
                    -2.755_731_435_139_066e-7,
                ),
                2.480_158_728_947_673e-5,
            ),
            -1.388_888_888_887_411e-3,
        ),
        4.166_666_666_666_66e-2,
    );
    let cos = mul_add::<FMA>(z * z, c, mul_add::<FMA>(z, -0.5, 1.0));
    let swap = quadrant & 1 == 1;
    let (a, b) = if swap { (cos, sin) } else { (sin, cos) };
    let sin_sign = (quadrant & 2) << 62;
    let cos_sign = (quadrant.wrapping_add(1) & 2) << 62;
    (f64::from_bits(a.to_bits() ^ sin_sign), f64::from_bits(b.to_bits() ^ cos_sign))
}

/// e^x for x ≤ 700; 0 to rounding below −700.
#[inline(always)]
#[must_use]
pub fn exp<const FMA: bool>(x: f64) -> f64 {
    // ln 2 in two parts, the first with 21 zeros at its end
    const L1: f64 = 6.931_471_803_691_238e-1;
    const L2: f64 = 1.908_214_929_270_587_7e-10;
    let x = if x > -700.0 { x } else { -700.0 };
    let shifted = mul_add::<FMA>(x, std::f64::consts::LOG2_E, ROUND);
    let k = shifted - ROUND;
    let r = mul_add::<FMA>(-k, L2, mul_add::<FMA>(-k, L1, x));
    let mut sum = 1.0 / 6_227_020_800.0;
    for term in [
        1.0 / 479_001_600.0,
        1.0 / 39_916_800.0,
        1.0 / 3_628_800.0,
        1.0 / 362_880.0,
        1.0 / 40_320.0,
        1.0 / 5_040.0,
        1.0 / 720.0,
        1.0 / 120.0,
        1.0 / 24.0,
        1.0 / 6.0,
        0.5,
        1.0,
        1.0,
    ] {
        sum = mul_add::<FMA>(sum, r, term);
    }
    // the integer stands in the last bits of the shifted number
    let power = shifted.to_bits().wrapping_add(1023) << 52;
    sum * f64::from_bits(power)
}

/// e^{−ux} at many x ≥ 0, Re u ≥ 0; all slices of one length.
#[inline(always)]
pub fn falls<const FMA: bool>(u: Complex64, x: &[f64], re: &mut [f64], im: &mut [f64]) {
    let n = x.len().min(re.len()).min(im.len());
    let (x, re, im) = (&x[..n], &mut re[..n], &mut im[..n]);
    if u.im == 0.0 {
        for i in 0..n {
            re[i] = exp::<FMA>(-u.re * x[i]);
            im[i] = 0.0;
        }
        return;
    }
    for i in 0..n {
        let size = exp::<FMA>(-u.re * x[i]);
        let (sin, cos) = sin_cos::<FMA>(u.im * x[i]);
        re[i] = size * cos;
        im[i] = -size * sin;
    }
}

/// Cosine and sine of many angles, any sign, |angle| < 10⁵; all slices of one length.
pub fn cos_sin(angles_rad: &[f64], cos: &mut [f64], sin: &mut [f64]) {
    struct Work<'a>(&'a [f64], &'a mut [f64], &'a mut [f64]);

    impl Vectorised for Work<'_> {
        type Output = ();

        #[inline(always)]
        fn run<const FMA: bool>(self) {
            let n = self.0.len().min(self.1.len()).min(self.2.len());
            let (angles, cos, sin) = (&self.0[..n], &mut self.1[..n], &mut self.2[..n]);
            for i in 0..n {
                (sin[i], cos[i]) = sin_cos::<FMA>(angles[i]);
            }
        }
    }
    widest(Work(angles_rad, cos, sin));
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sine_and_cosine_agree_with_the_library_to_rounding() {
        for i in 0..200_000 {
            let x = (f64::from(i) * 0.37).powf(1.03) * if i % 2 == 0 { 1.0 } else { -1.0 };
            if x.abs() < 1e5 {
                let (s, c) = sin_cos::<false>(x);
                assert!((s - x.sin()).abs() < 4e-16 && (c - x.cos()).abs() < 4e-16, "x = {x}: {s} {c}");
            }
        }
    }

    #[test]
    fn the_exponential_agrees_with_the_library_to_rounding() {
        for i in 0..200_000 {
            let x = 20.0 - f64::from(i) * 0.0036;
            let (got, want) = (exp::<false>(x), x.exp());
            assert!((got - want).abs() < 6e-16 * want || x < -699.0, "x = {x}: {got:e} {want:e}");
        }
        assert!(exp::<false>(-1e6) < 1e-300 && exp::<false>(0.0) == 1.0);
    }

    #[test]
    fn falls_are_those_of_the_library() {
        for u in [Complex64::new(0.7, 0.0), Complex64::new(0.2, -3.0), Complex64::new(0.0, 1.5)] {
            let x: Vec<f64> = (0..40).map(|i| f64::from(i) * 0.9).collect();
            let (mut re, mut im) = (vec![0.0; 40], vec![0.0; 40]);
            falls::<false>(u, &x, &mut re, &mut im);
            for (i, x) in x.iter().enumerate() {
                assert!((Complex64::new(re[i], im[i]) - (-u * x).exp()).norm() < 1e-14, "{u} {x}");
            }
        }
    }
}
