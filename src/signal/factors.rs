//! A prediction polynomial as the product of its real quadratic factors.
//!
//! A real polynomial is a product of real quadratics `z^2 - sum z + product` and, where its order
//! is odd, one `z - single`. A conjugate pair of roots is one quadratic, and so are two real roots:
//! a pair can meet on the real axis and part again without a special case.

use std::f64::consts::PI;

use super::prediction::MAX_ORDER;
use super::roots::RootFinder;

/// One real quadratic factor `z^2 - sum z + product`.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Pair {
    /// Sum of the two roots.
    pub sum: f64,
    /// Product of the two roots: the squared radius of a conjugate pair.
    pub product: f64,
}

impl Pair {
    /// A quarter of the discriminant: negative for a conjugate pair, else the squared half distance
    /// of two real roots.
    fn spread(self) -> f64 {
        0.25 * self.sum * self.sum - self.product
    }

    /// Angle of the upper root of a conjugate pair in radians; `None` for two real roots.
    pub fn angle(self) -> Option<f64> {
        let below = -self.spread();
        (below > 0.0).then(|| below.sqrt().atan2(0.5 * self.sum))
    }
}

/// How well the sum of the roots must agree with the second coefficient.
const SUM_TOLERANCE: f64 = 1e-6;

/// Most quadratic factors of a polynomial.
pub(super) const MAX_PAIRS: usize = MAX_ORDER / 2;

/// All factors of one polynomial.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Factors {
    pub(super) order: usize,
    pub(super) pairs: [Pair; MAX_PAIRS],
    pub(super) single: f64,
}

impl Factors {
    /// The quadratic factors, in no order.
    pub fn pairs(&self) -> &[Pair] {
        &self.pairs[..self.order / 2]
    }

    /// The root left over where the order is odd.
    pub fn single(&self) -> Option<f64> {
        (self.order % 2 == 1).then_some(self.single)
    }

    /// Cold start: pairs spread evenly over the upper half of a circle inside the unit circle.
    pub(super) fn cold(order: usize) -> Self {
        const RADIUS: f64 = 0.9;
        let count = order / 2;
        let mut pairs = [Pair::default(); MAX_PAIRS];
        for (k, pair) in pairs[..count].iter_mut().enumerate() {
            pair.sum = 2.0 * RADIUS * (PI * (k as f64 + 0.5) / count as f64).cos();
            pair.product = RADIUS * RADIUS;
        }
        Self {
            order,
            pairs,
            single: 0.3,
        }
    }

    /// The factors by way of the roots, found from nothing.
    pub(super) fn by_roots(a: &[f64], finder: &mut RootFinder) -> Option<Self> {
        let mut factors = Self::cold(a.len() - 1);
        let mut count = 0;
        let mut real = Vec::with_capacity(MAX_ORDER);
        for z in finder.upper_half(a).ok()? {
            if z.im > 0.0 {
                *factors.pairs.get_mut(count)? = Pair {
                    sum: 2.0 * z.re,
                    product: z.re * z.re + z.im * z.im,
                };
                count += 1;
            } else {
                real.push(z.re);
            }
        }
        real.sort_by(f64::total_cmp);
        if real.len() % 2 == 1 {
            factors.single = real.pop()?;
        }
        for two in real.chunks_exact(2) {
            *factors.pairs.get_mut(count)? = Pair {
                sum: two[0] + two[1],
                product: two[0] * two[1],
            };
            count += 1;
        }
        let whole = count == factors.order / 2 && factors.belong_to(a);
        factors.separate(Exchange::IfNearer);
        whole.then_some(factors)
    }

    /// Whether the roots add up to what the second coefficient says.
    pub(super) fn belong_to(&self, a: &[f64]) -> bool {
        let sum = self.pairs().iter().map(|p| p.sum).sum::<f64>() + self.single().unwrap_or(0.0);
        (sum + a[1]).abs() < SUM_TOLERANCE * (1.0 + a[1].abs())
    }

    /// Exchanges the single root with one of a pair of real roots, so that the two which may be
    /// about to leave the axis together are in one factor.
    pub(super) fn separate(&mut self, exchange: Exchange) {
        if self.order.is_multiple_of(2) {
            return;
        }
        let single = self.single;
        let mut nearest = (f64::INFINITY, 0, 0.0, 0.0);
        for (k, pair) in self.pairs().iter().enumerate() {
            let spread = pair.spread();
            if spread <= 0.0 {
                continue;
            }
            let (low, high) = (
                0.5 * pair.sum - spread.sqrt(),
                0.5 * pair.sum + spread.sqrt(),
            );
            let (to_low, to_high) = ((low - single).abs(), (high - single).abs());
            if to_low < nearest.0 {
                nearest = (to_low, k, low, high);
            }
            if to_high < nearest.0 {
                nearest = (to_high, k, high, low);
            }
        }
        let (distance, k, near, far) = nearest;
        if distance < (near - far).abs() || (exchange == Exchange::Always && distance.is_finite()) {
            self.pairs[k] = Pair {
                sum: single + near,
                product: single * near,
            };
            self.single = far;
        }
    }
}

/// When [`Factors::separate`] acts.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Exchange {
    /// Only if the single root is nearer to one of the pair than these to each other.
    IfNearer,
    /// Whenever there is a pair of real roots.
    Always,
}
