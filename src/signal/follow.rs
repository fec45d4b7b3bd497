//! The factors of many prediction polynomials, each found from those of the polynomial that stood in
//! its place before.
//!
//! All factors of a polynomial are improved at once by Newton's method on their product. For linear
//! factors that is the iteration of Durand and Kerner; written with remainders instead of values it
//! holds for quadratics as well: the change of a factor is the polynomial modulo that factor divided
//! by the product of all other factors modulo it. Nothing complex is computed, and two polynomials
//! go through the same instructions side by side; where one is done the next takes its lane.
//!
//! On the 1.09 million polynomials of `hvd-words` (seventeen frames a vowel, ten bands, orders 8 to
//! 14) four steps are the mean, and one in a hundred is not found so and goes to [`RootFinder`].
//!
//! *Source*: J. Dvorčuk (1969), Factorization of a polynomial into quadratic factors by Newton
//! method, Aplikace matematiky 14, 54-80 (from memory; the formulas below are derived in the
//! comments and tested by multiplying the factors back).

use std::ops::{Add, Div, Mul, Sub};

use super::factors::{Exchange, Factors, MAX_PAIRS, Pair};
use super::prediction::MAX_ORDER;
use super::roots::RootFinder;

/// Largest last change of a coefficient of a factor, and of the change that would have come next by
/// the quadratic convergence of the last two. With these the frequencies of the prediction
/// polynomials of speech differ from those of many more steps by less than 0.001 Hz.
const LAST_CHANGE: f64 = 1e-4;
/// See [`LAST_CHANGE`].
const NEXT_CHANGE: f64 = 1e-8;

/// The change taken to have come before the first: a start is believed as it is only if it is
/// better than [`LAST_CHANGE`] by far.
const CHANGE_BEFORE: f64 = 1e-4;

/// Steps after which the factors are sought from nothing; four are usual from a neighbouring frame.
const MAX_STEPS: usize = 20;

/// Steps after which, and then every fourth, real roots exchange their places in the factors.
const EXCHANGE_AFTER: usize = 7;

/// Finds the factors of many polynomials, reusing its storage.
#[derive(Debug, Clone, Default)]
pub struct FactorFinder {
    roots: RootFinder,
}

impl FactorFinder {
    /// Factors polynomials `1 + a1 z^-1 + ... + ap z^-p` of one order, each from the factors that
    /// stand in its place of `factors`, or from nothing where none stand there.
    ///
    /// *Shape*: `polynomials` holds `p + 1` coefficients for each of `factors`, the first 1, with
    /// `p` from 2 to [`MAX_ORDER`]. Afterwards `factors` holds theirs, `None` where they were not
    /// found or a coefficient is not finite. What is found depends on the start by far less than
    /// 0.01 Hz.
    pub fn follow(&mut self, order: usize, polynomials: &[f64], factors: &mut [Option<Factors>]) {
        let size = order + 1;
        if !(2..=MAX_ORDER).contains(&order) || polynomials.len() != size * factors.len() {
            factors.fill(None);
            return;
        }
        let polynomial = |item: usize| &polynomials[item * size..][..size];
        let mut bundle = Bundle::new(order);
        let mut next = 0;
        let mut working = 0;
        for lane in 0..LANES {
            working += usize::from(bundle.refill(lane, &mut next, factors, polynomial));
        }
        while working > 0 {
            let change = bundle.step();
            for lane in 0..LANES {
                let Some(item) = bundle.work[lane].item else {
                    continue;
                };
                match bundle.work[lane].judge(change.0[lane]) {
                    Verdict::GoOn => continue,
                    Verdict::Exchange => {
                        let mut there = bundle.take(lane);
                        there.separate(Exchange::Always);
                        bundle.put(lane, &there);
                        continue;
                    }
                    Verdict::Settled => {
                        let mut found = bundle.take(lane);
                        factors[item] = if found.belong_to(polynomial(item)) {
                            found.separate(Exchange::IfNearer);
                            Some(found)
                        } else {
                            Factors::by_roots(polynomial(item), &mut self.roots)
                        };
                    }
                    Verdict::GiveUp => {
                        factors[item] = Factors::by_roots(polynomial(item), &mut self.roots);
                    }
                }
                if !bundle.refill(lane, &mut next, factors, polynomial) {
                    working -= 1;
                }
            }
        }
    }
}

/// Polynomials worked on side by side: as many as the narrowest vector registers of the machines we
/// are built for hold. Four were no faster.
const LANES: usize = 2;

/// One number of each polynomial worked on.
#[derive(Debug, Clone, Copy)]
struct Lanes([f64; LANES]);

macro_rules! lane_by_lane {
    ($operator:ident, $method:ident, $sign:tt) => {
        impl $operator for Lanes {
            type Output = Self;
            #[inline(always)]
            fn $method(self, other: Self) -> Self {
                Self(std::array::from_fn(|lane| self.0[lane] $sign other.0[lane]))
            }
        }
    };
}
lane_by_lane!(Add, add, +);
lane_by_lane!(Sub, sub, -);
lane_by_lane!(Mul, mul, *);
lane_by_lane!(Div, div, /);

impl Lanes {
    const ZERO: Self = Self([0.0; LANES]);
    const ONE: Self = Self([1.0; LANES]);

    /// A NaN may be lost here: factors with one do not add up, and are refused for that.
    #[inline(always)]
    fn larger_magnitude(mut self, other: Self) -> Self {
        for lane in 0..LANES {
            let magnitude = other.0[lane].abs();
            if magnitude > self.0[lane] {
                self.0[lane] = magnitude;
            }
        }
        self
    }
}

/// What one lane works on.
#[derive(Debug, Clone, Copy)]
struct Work {
    item: Option<usize>,
    steps: usize,
    change: f64,
}

enum Verdict {
    GoOn,
    Exchange,
    Settled,
    GiveUp,
}

impl Work {
    fn judge(&mut self, change: f64) -> Verdict {
        let before = std::mem::replace(&mut self.change, change);
        self.steps += 1;
        if change < LAST_CHANGE && change * change * change <= NEXT_CHANGE * before * before {
            Verdict::Settled
        } else if self.steps == MAX_STEPS || !change.is_finite() {
            Verdict::GiveUp
        } else if self.steps >= EXCHANGE_AFTER && (self.steps - EXCHANGE_AFTER).is_multiple_of(4) {
            Verdict::Exchange
        } else {
            Verdict::GoOn
        }
    }
}

/// The polynomials worked on and their factors.
struct Bundle {
    order: usize,
    a: [Lanes; MAX_ORDER + 1],
    sums: [Lanes; MAX_PAIRS],
    products: [Lanes; MAX_PAIRS],
    single: Lanes,
    work: [Work; LANES],
}

impl Bundle {
    fn new(order: usize) -> Self {
        let idle = Work {
            item: None,
            steps: 0,
            change: 0.0,
        };
        let mut bundle = Self {
            order,
            a: [Lanes::ZERO; MAX_ORDER + 1],
            sums: [Lanes::ZERO; MAX_PAIRS],
            products: [Lanes::ZERO; MAX_PAIRS],
            single: Lanes::ZERO,
            work: [idle; LANES],
        };
        bundle.a[0] = Lanes::ONE;
        for lane in 0..LANES {
            bundle.put(lane, &Factors::cold(order));
        }
        bundle
    }

    /// Puts the next finite polynomial into a lane; false where there is none.
    fn refill<'a>(
        &mut self,
        lane: usize,
        next: &mut usize,
        factors: &mut [Option<Factors>],
        polynomial: impl Fn(usize) -> &'a [f64],
    ) -> bool {
        self.work[lane].item = None;
        while let Some(start) = factors.get_mut(*next) {
            let item = *next;
            *next += 1;
            let a = polynomial(item);
            if !a.iter().all(|c| c.is_finite()) {
                *start = None;
                continue;
            }
            for (to, &from) in self.a.iter_mut().zip(a) {
                to.0[lane] = from;
            }
            match start.as_ref().filter(|s| s.order == self.order) {
                Some(start) => self.put(lane, start),
                None => self.put(lane, &Factors::cold(self.order)),
            }
            self.work[lane] = Work {
                item: Some(item),
                steps: 0,
                change: CHANGE_BEFORE,
            };
            return true;
        }
        false
    }

    fn put(&mut self, lane: usize, factors: &Factors) {
        for (k, pair) in factors.pairs().iter().enumerate() {
            self.sums[k].0[lane] = pair.sum;
            self.products[k].0[lane] = pair.product;
        }
        self.single.0[lane] = factors.single;
    }

    fn take(&self, lane: usize) -> Factors {
        let mut pairs = [Pair::default(); MAX_PAIRS];
        for (k, pair) in pairs[..self.order / 2].iter_mut().enumerate() {
            pair.sum = self.sums[k].0[lane];
            pair.product = self.products[k].0[lane];
        }
        Factors {
            order: self.order,
            pairs,
            single: self.single.0[lane],
        }
    }

    /// Improves every factor once, those before it already improved; gives the largest change.
    ///
    /// Numbers modulo `z^2 - s z + t` are `u z + v` with `z^2 = s z - t`. Then
    /// `(u z + v) z = (u s + v) z - u t`,
    /// `(c z + d)(e z + h) = (c h + d e + c e s) z + d h - c e t`, and
    /// `1 / (c z + d) = (d + c s - c z) / (d^2 + c d s + c^2 t)`.
    #[inline(never)]
    fn step(&mut self) -> Lanes {
        let count = self.order / 2;
        let odd = self.order % 2 == 1;
        let a = &self.a[..=self.order];
        let (sums, products) = (&mut self.sums[..count], &mut self.products[..count]);
        let mut change = Lanes::ZERO;
        for i in 0..count {
            let (s, t) = (sums[i], products[i]);
            // The polynomial modulo this factor, by Horner's rule.
            let (mut u, mut v) = (Lanes::ONE, a[1]);
            for &coefficient in &a[2..] {
                (u, v) = (u * s + v, coefficient - u * t);
            }
            // The product of the other factors modulo this one; a factor is s - sums[j], ...
            let (mut c, mut d) = if odd {
                (Lanes::ONE, Lanes::ZERO - self.single)
            } else {
                (Lanes::ZERO, Lanes::ONE)
            };
            for j in 0..count {
                if j == i {
                    continue;
                }
                let (e, h) = (s - sums[j], products[j] - t);
                let ce = c * e;
                (c, d) = (c * h + d * e + ce * s, d * h - ce * t);
            }
            // Remainder over product.
            let w = d + c * s;
            let inverse = Lanes::ONE / (d * w + c * c * t);
            let uc = u * c;
            let du = (u * w - v * c - uc * s) * inverse;
            let dv = (v * w + uc * t) * inverse;
            sums[i] = s - du;
            products[i] = t + dv;
            change = change.larger_magnitude(du).larger_magnitude(dv);
        }
        if odd {
            let z = self.single;
            let mut value = Lanes::ONE;
            for &coefficient in &a[1..] {
                value = value * z + coefficient;
            }
            let mut others = Lanes::ONE;
            for (&s, &t) in sums.iter().zip(products.iter()) {
                others = others * ((z - s) * z + t);
            }
            let step = value / others;
            self.single = z - step;
            change = change.larger_magnitude(step);
        }
        change
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// [`NEXT_CHANGE`] of every factor, times coefficients of up to a hundred.
    const TOLERANCE: f64 = 1e-6;

    /// Coefficients of the product of quadratic factors and linear ones, by the definition.
    fn multiply(pairs: &[(f64, f64)], reals: &[f64]) -> Vec<f64> {
        let mut a = vec![1.0];
        let mut times = |factor: &[f64]| {
            let mut out = vec![0.0; a.len() + factor.len() - 1];
            for (i, x) in a.iter().enumerate() {
                for (j, y) in factor.iter().enumerate() {
                    out[i + j] += x * y;
                }
            }
            a = out;
        };
        for &(sum, product) in pairs {
            times(&[1.0, -sum, product]);
        }
        for &r in reals {
            times(&[1.0, -r]);
        }
        a
    }

    fn conjugate(radius: f64, angle: f64) -> (f64, f64) {
        (2.0 * radius * angle.cos(), radius * radius)
    }

    fn product(f: &Factors) -> Vec<f64> {
        let pairs: Vec<_> = f.pairs().iter().map(|p| (p.sum, p.product)).collect();
        multiply(&pairs, f.single().as_slice())
    }

    fn follow(a: &[f64], start: Option<Factors>) -> Option<Factors> {
        let mut factors = [start];
        FactorFinder::default().follow(a.len() - 1, a, &mut factors);
        factors[0]
    }

    #[track_caller]
    fn assert_product(f: &Factors, a: &[f64], tolerance: f64) {
        for (x, y) in product(f).iter().zip(a) {
            assert!((x - y).abs() < tolerance, "{x} for {y} in {f:?}");
        }
    }

    /// Five resonances whose place and width change with `phase`.
    fn vowel(phase: f64) -> Vec<f64> {
        let pairs: Vec<_> = [0.12, 0.41, 0.72, 1.1, 1.6]
            .iter()
            .zip([0.97, 0.95, 0.96, 0.9, 0.93])
            .map(|(&a, r)| conjugate(r, a + 0.08 * (phase * (1.0 + a)).sin()))
            .collect();
        multiply(&pairs, &[0.3 + 0.5 * phase.sin()])
    }

    #[test]
    fn finds_known_angles_from_nothing() {
        let known = [(0.97, 0.15), (0.9, 0.6), (0.95, 1.4), (0.8, 2.5)];
        let a = multiply(&known.map(|(r, w)| conjugate(r, w)), &[]);
        let found = follow(&a, None).expect("found");
        let mut angles: Vec<f64> = found.pairs().iter().filter_map(|p| p.angle()).collect();
        angles.sort_by(f64::total_cmp);
        for (found, (_, known)) in angles.iter().zip(known) {
            assert!((found - known).abs() < 1e-9, "{found} for {known}");
        }
    }

    #[test]
    fn follows_a_changing_polynomial() {
        let mut factors = None;
        for n in 0..200 {
            let a = vowel(f64::from(n) * 0.05);
            factors = follow(&a, factors);
            assert_product(&factors.expect("found"), &a, TOLERANCE);
        }
    }

    #[test]
    fn gives_the_same_beside_any_neighbour() {
        let rows: Vec<Vec<f64>> = (0..7).map(|n| vowel(f64::from(n) * 0.3)).collect();
        let mut together = vec![None; rows.len()];
        FactorFinder::default().follow(11, &rows.concat(), &mut together);
        for (a, both) in rows.iter().zip(together) {
            assert_eq!(follow(a, None), both);
        }
    }

    #[test]
    fn pairs_meet_on_the_axis_part_again_and_change_partners() {
        // The lower two of three real roots meet and leave the axis, then the upper two.
        let still = [conjugate(0.9, 0.5), conjugate(0.8, 1.9)];
        let mut factors = None;
        for n in -60..=60 {
            let gap = f64::from(n) * 0.004;
            // A quadratic whose roots are real for a positive gap and conjugate for a negative one.
            let meeting = (0.4, 0.04 - gap.abs() * gap);
            let a = multiply(&[still[0], still[1], meeting], &[0.7]);
            factors = follow(&a, factors);
            assert_product(&factors.expect("found"), &a, TOLERANCE);
        }
        for n in -60..=60 {
            let gap = f64::from(n) * 0.004;
            let meeting = (1.3, 0.65 * 0.65 + gap.abs() * gap);
            let a = multiply(&[still[0], still[1], meeting], &[-0.04]);
            factors = follow(&a, factors);
            assert_product(&factors.expect("found"), &a, TOLERANCE);
        }
    }

    #[test]
    fn tones_and_repeated_roots_are_found() {
        // On the unit circle, as a steady tone makes them.
        let tone = multiply(&[conjugate(1.0, 0.4), conjugate(1.0, 0.9)], &[]);
        assert_product(&follow(&tone, None).expect("found"), &tone, 1e-7);
        // A double pair: Newton's method turns linear, and the answer is as good as rounding lets it.
        let double = multiply(&[conjugate(0.9, 0.7), conjugate(0.9, 0.7)], &[]);
        if let Some(f) = follow(&double, None) {
            assert_product(&f, &double, 1e-5);
        }
    }

    #[test]
    fn what_has_no_answer_ends_without_one_and_harms_no_neighbour() {
        let good = vowel(0.0);
        let mut rows = vec![f64::NAN; 12];
        rows.extend(&good);
        rows.extend([1.0; 11]);
        rows.push(f64::INFINITY);
        rows.extend(&good);
        let mut factors = vec![None; 4];
        FactorFinder::default().follow(11, &rows, &mut factors);
        assert_eq!(factors[0], None);
        assert_eq!(factors[2], None);
        for k in [1, 3] {
            assert_product(&factors[k].expect("found"), &good, TOLERANCE);
        }
        // z^p: every root is zero.
        let mut zero = [0.0; 12];
        zero[0] = 1.0;
        if let Some(f) = follow(&zero, None) {
            assert_product(&f, &zero, 1e-5);
        }
    }

    #[test]
    fn a_start_of_another_order_is_no_start() {
        let start = follow(&multiply(&[conjugate(0.9, 0.7)], &[]), None);
        assert!(start.is_some());
        let a = vowel(1.0);
        assert_eq!(follow(&a, start), follow(&a, None));
    }
}
