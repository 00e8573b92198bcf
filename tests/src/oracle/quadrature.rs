//! Gauss–Legendre quadrature.

/// Nodes and weights on [0, 1].
#[derive(Clone, Debug, PartialEq)]
pub struct Rule {
    points: Vec<(f64, f64)>,
}

impl Rule {
    /// Builds the rule with `n` nodes, exact for polynomials up to degree 2n − 1.
    ///
    /// Newton's method on the Legendre recurrence.
    pub fn new(n: usize) -> Self {
        let order = n as f64;
        let node = |i: usize| {
            let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (order + 0.5)).cos();
            let mut slope = 1.0;
            for _ in 0..100 {
                let (mut p, mut before) = (1.0, 0.0);
                for j in 0..n {
                    let j = j as f64;
                    (p, before) = (((2.0 * j + 1.0) * x * p - j * before) / (j + 1.0), p);
                }
                slope = order * (x * p - before) / (x * x - 1.0);
                let step = p / slope;
                x -= step;
                if step.abs() < 1e-15 {
                    break;
                }
            }
            (0.5 * (1.0 - x), 1.0 / ((1.0 - x * x) * slope * slope))
        };
        Self {
            points: (0..n).map(node).collect(),
        }
    }

    /// Integrates `f` from `a` to `b`.
    pub fn integrate(&self, a: f64, b: f64, f: impl Fn(f64) -> f64) -> f64 {
        (b - a)
            * self
                .points
                .iter()
                .map(|&(x, w)| w * f(a + (b - a) * x))
                .sum::<f64>()
    }

    /// Integrates `f` over the unit square.
    pub fn square(&self, f: impl Fn(f64, f64) -> f64) -> f64 {
        self.integrate(0.0, 1.0, |x| self.integrate(0.0, 1.0, |y| f(x, y)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn polynomials_up_to_the_order_are_exact() {
        for n in [1, 2, 5, 20, 64] {
            let rule = Rule::new(n);
            for degree in 0..i32::try_from(2 * n).unwrap() {
                let value = rule.integrate(0.0, 2.0, |x| x.powi(degree) / 2_f64.powi(degree));
                assert!(
                    (value - 2.0 / (f64::from(degree) + 1.0)).abs() < 1e-13,
                    "n {n}, degree {degree}"
                );
            }
        }
        let beyond = Rule::new(2).integrate(0.0, 1.0, |x| x.powi(4));
        assert!((beyond - 0.2).abs() > 1e-3);
    }

    #[test]
    fn smooth_functions_converge() {
        let value = Rule::new(20).square(|x, y| (x + 2.0 * y).exp());
        let exact = (1_f64.exp() - 1.0) * 0.5 * (2_f64.exp() - 1.0);
        assert!((value - exact).abs() < 1e-13);
    }
}
