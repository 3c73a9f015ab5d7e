//! e^{−jkR}/R for many distances at once, compiled for the processor it runs on.
//!
//! The sine and cosine are branch-free polynomials after a three-part reduction by π/2 (Cody & Waite 1980; minimax
//! coefficients of the fdlibm kernels), absolute error below 3·10⁻¹⁶ for arguments up to 10⁵. The same source is compiled for
//! AVX-512, AVX2 and the baseline, and chosen at run time: the only `unsafe` of the program.
#![allow(unsafe_code)]

/// Which instruction set the kernel was chosen for, e.g. "avx2".
#[must_use]
pub fn instruction_set() -> &'static str {
    #[cfg(target_arch = "x86_64")]
    {
        if std::is_x86_feature_detected!("avx512f") {
            return "avx512";
        }
        if std::is_x86_feature_detected!("avx2") && std::is_x86_feature_detected!("fma") {
            return "avx2";
        }
    }
    "baseline"
}

/// Squared distances to e^{−j(k − jα)R}/R.
#[inline(always)]
fn wave<const FMA: bool>(squared: &[f64], k: f64, alpha: f64, re: &mut [f64], im: &mut [f64]) {
    let n = squared.len().min(re.len()).min(im.len());
    let (squared, re, im) = (&squared[..n], &mut re[..n], &mut im[..n]);
    for i in 0..n {
        let r = squared[i].sqrt();
        let inverse = 1.0 / r;
        let (sin, cos) = sin_cos::<FMA>(k * r);
        re[i] = cos * inverse;
        im[i] = -sin * inverse;
    }
    if alpha != 0.0 {
        for i in 0..n {
            let decay = (-alpha * squared[i].sqrt()).exp();
            re[i] *= decay;
            im[i] *= decay;
        }
    }
}

/// Points on each of two elements with their weights, and how far apart they count.
#[derive(Debug, Clone, Copy)]
pub(super) struct PointPair<'a> {
    /// x, y, z of the points on the first element, m.
    pub(super) observers: &'a [Vec<f64>; 3],
    /// The same on the second.
    pub(super) sources: &'a [Vec<f64>; 3],
    /// Weight times P_0..P_3 at each point of the first element.
    pub(super) left: &'a [[f64; 4]],
    /// The same of the second.
    pub(super) right: &'a [[f64; 4]],
    /// Added to every squared distance, m².
    pub(super) offset_m2: f64,
    /// Take the static part 1/R − k²R/2 out.
    pub(super) rest_only: bool,
}

/// Real and imaginary parts of a 4 × 4 block of moments.
pub(super) type SplitBlock = ([[f64; 4]; 4], [[f64; 4]; 4]);

/// Most points on one element.
pub(super) const MOST_POINTS: usize = 8;
const ROOM: usize = MOST_POINTS * MOST_POINTS;

/// Σ_q Σ_r left_a right_b e^{−j(k − jα)R}/R for a pair of elements, 1/m; with `rest_only` less Σ (1/R − k²R/2).
pub(super) fn pair_block(pair: &PointPair, k_per_m: f64, alpha_per_m: f64) -> SplitBlock {
    #[cfg(target_arch = "x86_64")]
    {
        if std::is_x86_feature_detected!("avx512f") {
            // SAFETY: the processor has AVX-512F, checked on the line above.
            return unsafe { pair_avx512(pair, k_per_m, alpha_per_m) };
        }
        if std::is_x86_feature_detected!("avx2") && std::is_x86_feature_detected!("fma") {
            // SAFETY: the processor has AVX2 and FMA, checked on the line above.
            return unsafe { pair_avx2(pair, k_per_m, alpha_per_m) };
        }
    }
    pair_loop::<false>(pair, k_per_m, alpha_per_m)
}

/// Places on a line at which an element's field is wanted.
pub(super) const LINE_POINTS: usize = 16;

/// Real and imaginary parts of moments at [`LINE_POINTS`] places.
pub(super) type LineMoments = [[[f64; LINE_POINTS]; 2]; 4];

/// Σ_q left_a e^{−j(k − jα)R}/R at places u, v, w for points x, y, z of an element with their weights, 1/m.
pub(super) fn line_moments(
    points: (&[[f64; 3]], &[[f64; 4]]),
    places: &[[f64; LINE_POINTS]; 3],
    offset_m2: f64,
    (k_per_m, alpha_per_m): (f64, f64),
) -> LineMoments {
    #[cfg(target_arch = "x86_64")]
    {
        if std::is_x86_feature_detected!("avx2") && std::is_x86_feature_detected!("fma") {
            // SAFETY: the processor has AVX2 and FMA, checked on the line above.
            return unsafe { line_avx2(points, places, offset_m2, (k_per_m, alpha_per_m)) };
        }
    }
    line_loop::<false>(points, places, offset_m2, (k_per_m, alpha_per_m))
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2,fma")]
fn line_avx2(
    points: (&[[f64; 3]], &[[f64; 4]]),
    places: &[[f64; LINE_POINTS]; 3],
    offset_m2: f64,
    k: (f64, f64),
) -> LineMoments {
    line_loop::<true>(points, places, offset_m2, k)
}

#[inline(always)]
fn line_loop<const FMA: bool>(
    (points, left): (&[[f64; 3]], &[[f64; 4]]),
    [u, v, w]: &[[f64; LINE_POINTS]; 3],
    offset_m2: f64,
    (k, alpha): (f64, f64),
) -> LineMoments {
    let mut out = [[[0.0; LINE_POINTS]; 2]; 4];
    let (mut squared, mut re, mut im) = ([1.0; LINE_POINTS], [0.0; LINE_POINTS], [0.0; LINE_POINTS]);
    for (p, weights) in points.iter().zip(left) {
        for q in 0..LINE_POINTS {
            let (dx, dy, dz) = (p[0] - u[q], p[1] - v[q], p[2] - w[q]);
            squared[q] = dx * dx + dy * dy + dz * dz + offset_m2;
        }
        wave::<FMA>(&squared, k, alpha, &mut re, &mut im);
        for ([sum_re, sum_im], l) in out.iter_mut().zip(weights) {
            for q in 0..LINE_POINTS {
                sum_re[q] = mul_add::<FMA>(re[q], *l, sum_re[q]);
                sum_im[q] = mul_add::<FMA>(im[q], *l, sum_im[q]);
            }
        }
    }
    out
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx512f")]
fn pair_avx512(pair: &PointPair, k: f64, alpha: f64) -> SplitBlock {
    pair_loop::<true>(pair, k, alpha)
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2,fma")]
fn pair_avx2(pair: &PointPair, k: f64, alpha: f64) -> SplitBlock {
    pair_loop::<true>(pair, k, alpha)
}

#[inline(always)]
fn pair_loop<const FMA: bool>(pair: &PointPair, k: f64, alpha: f64) -> SplitBlock {
    let (n, m) = (pair.left.len().min(MOST_POINTS), pair.right.len().min(MOST_POINTS));
    let [x, y, z] = pair.observers;
    let [u, v, w] = pair.sources;
    let (u, v, w) = (&u[..m], &v[..m], &w[..m]);
    let (mut squared, mut re, mut im) = ([1.0; ROOM], [0.0; ROOM], [0.0; ROOM]);
    for q in 0..n {
        let row = &mut squared[q * m..(q + 1) * m];
        for r in 0..m {
            let (dx, dy, dz) = (x[q] - u[r], y[q] - v[r], z[q] - w[r]);
            row[r] = dx * dx + dy * dy + dz * dz + pair.offset_m2;
        }
    }
    // whole vectors: the padding holds R = 1 and is not summed
    let count = (n * m).next_multiple_of(8).min(ROOM);
    wave::<FMA>(&squared[..count], k, alpha, &mut re[..count], &mut im[..count]);
    if pair.rest_only {
        // (k − jα)²/2
        let (half_re, half_im) = (0.5 * (k * k - alpha * alpha), -k * alpha);
        for i in 0..count {
            let r = squared[i].sqrt();
            re[i] += half_re * r - 1.0 / r;
            im[i] += half_im * r;
        }
    }
    let (mut out_re, mut out_im) = ([[0.0; 4]; 4], [[0.0; 4]; 4]);
    for q in 0..n {
        let (mut sum_re, mut sum_im) = ([0.0; 4], [0.0; 4]);
        for r in 0..m {
            let (a, b, weights) = (re[q * m + r], im[q * m + r], &pair.right[r]);
            for i in 0..4 {
                sum_re[i] = mul_add::<FMA>(a, weights[i], sum_re[i]);
                sum_im[i] = mul_add::<FMA>(b, weights[i], sum_im[i]);
            }
        }
        for a in 0..4 {
            for b in 0..4 {
                out_re[a][b] = mul_add::<FMA>(pair.left[q][a], sum_re[b], out_re[a][b]);
                out_im[a][b] = mul_add::<FMA>(pair.left[q][a], sum_im[b], out_im[a][b]);
            }
        }
    }
    (out_re, out_im)
}

/// Cosine and sine of many angles, any sign, |angle| < 10⁵; all slices of one length.
pub fn cos_sin(angles_rad: &[f64], cos: &mut [f64], sin: &mut [f64]) {
    #[cfg(target_arch = "x86_64")]
    {
        if std::is_x86_feature_detected!("avx2") && std::is_x86_feature_detected!("fma") {
            // SAFETY: the processor has AVX2 and FMA, checked on the line above.
            return unsafe { cos_sin_avx2(angles_rad, cos, sin) };
        }
    }
    cos_sin_loop::<false>(angles_rad, cos, sin);
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2,fma")]
fn cos_sin_avx2(angles: &[f64], cos: &mut [f64], sin: &mut [f64]) {
    cos_sin_loop::<true>(angles, cos, sin);
}

#[inline(always)]
fn cos_sin_loop<const FMA: bool>(angles: &[f64], cos: &mut [f64], sin: &mut [f64]) {
    let n = angles.len().min(cos.len()).min(sin.len());
    let (angles, cos, sin) = (&angles[..n], &mut cos[..n], &mut sin[..n]);
    for i in 0..n {
        (sin[i], cos[i]) = sin_cos::<FMA>(angles[i]);
    }
}

#[inline(always)]
fn mul_add<const FMA: bool>(a: f64, b: f64, c: f64) -> f64 {
    if FMA { a.mul_add(b, c) } else { a * b + c }
}

/// Sine and cosine of |x| < 10⁵.
#[inline(always)]
fn sin_cos<const FMA: bool>(x: f64) -> (f64, f64) {
    // π/2 in three parts of 33, 33 and 53 bits
    const P1: f64 = 1.570_796_326_734_125_6;
    const P2: f64 = 6.077_100_506_303_966e-11;
    const P3: f64 = 2.022_266_248_795_950_6e-21;
    const ROUND: f64 = 6_755_399_441_055_744.0; // 1.5·2⁵²: adding it rounds to an integer
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
    fn the_wave_decays_and_turns_as_it_should() {
        let r: Vec<f64> = (1..50).map(|i| f64::from(i) * 0.3).collect();
        let squared: Vec<f64> = r.iter().map(|r| r * r).collect();
        let (mut re, mut im) = (vec![0.0; r.len()], vec![0.0; r.len()]);
        wave::<false>(&squared, 0.7, 0.2, &mut re, &mut im);
        for (i, r) in r.iter().enumerate() {
            let want = num_complex::Complex64::new(-0.2 * r, -0.7 * r).exp() / r;
            assert!((want.re - re[i]).abs() < 1e-14 && (want.im - im[i]).abs() < 1e-14);
        }
    }
}
