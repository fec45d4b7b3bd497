//! Roots of prediction polynomials.
//!
//! *Source*: O. Aberth (1973), Iteration methods for finding all zeros of a polynomial
//! simultaneously, Math. Comp. 27, 339-344, equation 4. Here the conjugate symmetry of a real
//! polynomial is used: only one root of every pair is iterated.

use super::prediction::MAX_ORDER;

/// A root's place in the z plane.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Complex {
    /// Real part.
    pub re: f64,
    /// Imaginary part.
    pub im: f64,
}

/// Iterations after which a polynomial is given up; none of the frames measured needed half of it.
const MAX_ITERATIONS: usize = 60;

/// Roots are moved until no step is longer than this; at 16 kHz it is far below 0.01 Hz.
const TOLERANCE: f64 = 1e-9;

/// Finds all roots of real polynomials, reusing its storage.
#[derive(Debug, Clone, Default)]
pub struct RootFinder {
    roots: Vec<Complex>,
}

/// The roots were not found within the allowed iterations, or the polynomial was not finite.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct NotConverged;

impl RootFinder {
    /// The roots with non-negative imaginary part of `1 + a1 z^-1 + ... + ap z^-p`, that is of
    /// `z^p + a1 z^(p-1) + ... + ap`.
    ///
    /// *Shape*: `a` holds `p + 1` coefficients, the first 1, with `p` at most [`MAX_ORDER`].
    /// Real roots are given with zero imaginary part.
    ///
    /// *Errors*: [`NotConverged`].
    pub fn upper_half(&mut self, a: &[f64]) -> Result<&[Complex], NotConverged> {
        let order = a.len() - 1;
        if order == 0 || order > MAX_ORDER || a.iter().any(|c| !c.is_finite()) {
            return Err(NotConverged);
        }
        all_roots(a, &mut self.roots)?;
        self.roots.retain(|z| z.im >= 0.0);
        Ok(&self.roots)
    }
}

/// Cold start: equally spaced on a circle inside the unit circle, turned off the real axis so that
/// real roots can be reached from either side.
fn start(order: usize, roots: &mut Vec<Complex>) {
    const RADIUS: f64 = 0.9;
    roots.clear();
    for k in 0..order {
        let angle = std::f64::consts::PI * (2.0 * k as f64 + 0.6) / order as f64;
        roots.push(Complex {
            re: RADIUS * angle.cos(),
            im: RADIUS * angle.sin(),
        });
    }
}

fn all_roots(a: &[f64], roots: &mut Vec<Complex>) -> Result<(), NotConverged> {
    let order = a.len() - 1;
    start(order, roots);
    let mut settled = [false; MAX_ORDER];
    for _ in 0..MAX_ITERATIONS {
        let mut moving = false;
        for i in 0..order {
            if settled[i] {
                continue;
            }
            let z = roots[i];
            // Horner for value and derivative.
            let (mut pr, mut pi, mut dr, mut di) = (a[0], 0.0, 0.0, 0.0);
            for &c in &a[1..] {
                let (r, s) = (dr * z.re - di * z.im + pr, dr * z.im + di * z.re + pi);
                dr = r;
                di = s;
                let (r, s) = (pr * z.re - pi * z.im + c, pr * z.im + pi * z.re);
                pr = r;
                pi = s;
            }
            // Sum of 1 / (z - z_j).
            let (mut sr, mut si) = (0.0, 0.0);
            for (j, other) in roots[..order].iter().enumerate() {
                if j != i {
                    let (x, y) = (z.re - other.re, z.im - other.im);
                    let norm = x * x + y * y + 1e-300;
                    let inv = 1.0 / norm;
                    sr += x * inv;
                    si -= y * inv;
                }
            }
            // step = p / (p' - p * sum)
            let (qr, qi) = (dr - (pr * sr - pi * si), di - (pr * si + pi * sr));
            let norm = qr * qr + qi * qi;
            if norm == 0.0 {
                settled[i] = true;
                continue;
            }
            let step = Complex {
                re: (pr * qr + pi * qi) / norm,
                im: (pi * qr - pr * qi) / norm,
            };
            roots[i].re -= step.re;
            roots[i].im -= step.im;
            if step.re.abs() + step.im.abs() < TOLERANCE {
                settled[i] = true;
            } else {
                moving = true;
            }
        }
        if !moving {
            for z in roots.iter_mut() {
                // A real root is found up to the tolerance on either side of the axis.
                if z.im.abs() < 1e-7 {
                    z.im = 0.0;
                }
            }
            return Ok(());
        }
    }
    Err(NotConverged)
}
