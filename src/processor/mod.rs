//! The same source compiled for the processor it runs on.
//!
//! Takes a piece of work; runs it compiled for AVX-512, AVX2 with FMA, or the baseline, chosen at run time. The only `unsafe` of the
//! program stands here.
//! `elementary` holds the functions that such work needs.
#![allow(unsafe_code)]

mod elementary;

pub use elementary::{cos_sin, exp, falls, sin_cos};

/// Work that gains from wide vectors. Mark `run` and everything it calls `#[inline(always)]`: what is not inlined is compiled
/// for the baseline, closures given to `map` and `from_fn` among it.
pub trait Vectorised {
    /// What it gives.
    type Output;

    /// Do it; with `FMA` the processor multiplies and adds in one step ([`mul_add`]).
    fn run<const FMA: bool>(self) -> Self::Output;
}

/// Run some work with the widest vectors that the processor has.
#[inline]
pub fn widest<W: Vectorised>(work: W) -> W::Output {
    #[cfg(target_arch = "x86_64")]
    {
        if std::is_x86_feature_detected!("avx512f") {
            // SAFETY: the processor has AVX-512F, checked on the line above.
            return unsafe { avx512(work) };
        }
        if std::is_x86_feature_detected!("avx2") && std::is_x86_feature_detected!("fma") {
            // SAFETY: the processor has AVX2 and FMA, checked on the line above.
            return unsafe { avx2(work) };
        }
    }
    work.run::<false>()
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx512f,avx2,fma")]
fn avx512<W: Vectorised>(work: W) -> W::Output {
    work.run::<true>()
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2,fma")]
fn avx2<W: Vectorised>(work: W) -> W::Output {
    work.run::<true>()
}

/// Which instruction set work is run with, e.g. "avx2".
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

/// a·b + c, in one step where the processor can.
#[inline(always)]
#[must_use]
pub fn mul_add<const FMA: bool>(a: f64, b: f64, c: f64) -> f64 {
    if FMA { a.mul_add(b, c) } else { a * b + c }
}

#[cfg(test)]
mod tests {
    use super::*;

    struct Dot<'a>(&'a [f64], &'a [f64]);

    impl Vectorised for Dot<'_> {
        type Output = f64;

        #[inline(always)]
        fn run<const FMA: bool>(self) -> f64 {
            self.0.iter().zip(self.1).fold(0.0, |sum, (a, b)| mul_add::<FMA>(*a, *b, sum))
        }
    }

    #[test]
    fn the_widest_gives_what_the_baseline_gives_to_rounding() {
        let a: Vec<f64> = (0..97).map(|i| f64::from(i).sin()).collect();
        let b: Vec<f64> = (0..97).map(|i| f64::from(i).cos()).collect();
        let (wide, plain) = (widest(Dot(&a, &b)), Dot(&a, &b).run::<false>());
        assert!((wide - plain).abs() < 1e-13, "{wide} {plain}");
        assert!(["avx512", "avx2", "baseline"].contains(&instruction_set()));
    }
}
