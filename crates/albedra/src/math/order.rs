//! The smaller and the larger of two numbers, with every tie and every NaN settled.

/// The smaller of two numbers; the first one if they are equal or cannot be compared.
#[inline(always)]
pub(crate) fn smaller(a: f64, b: f64) -> f64 {
    if b < a { b } else { a }
}

/// The larger of two numbers; the first one if they are equal or cannot be compared.
#[inline(always)]
pub(crate) fn larger(a: f64, b: f64) -> f64 {
    if b > a { b } else { a }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ties_and_nan_keep_the_first() {
        assert_eq!((smaller(1.0, 2.0), smaller(2.0, 1.0)), (1.0, 1.0));
        assert_eq!((larger(1.0, 2.0), larger(2.0, 1.0)), (2.0, 2.0));
        assert!(smaller(-0.0, 0.0).is_sign_negative() && larger(0.0, -0.0).is_sign_positive());
        assert!(smaller(f64::NAN, 1.0).is_nan() && larger(1.0, f64::NAN) == 1.0);
    }
}
