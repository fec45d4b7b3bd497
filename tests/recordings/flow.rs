//! Glottal flow: the derivative of the Liljencrants–Fant model, shaped by one number.
//!
//! *Source*: Fant, Liljencrants & Lin 1985, STL-QPSR 26(4), 1-13 (the model); Fant 1995, STL-QPSR
//! 36(2-3), 119-156 (all shape parameters from `Rd`).

use std::f64::consts::PI;

/// One period of flow derivative over a period of length 1, falling to −1 at the main excitation.
#[derive(Debug, Clone, Copy)]
pub struct Flow {
    growth: f64,
    omega: f64,
    excitation: f64,
    return_share: f64,
    decay: f64,
}

impl Flow {
    /// The pulse for `rd`: about 0.5 pressed, 1 modal, 2 breathy.
    pub fn shaped(rd: f64) -> Self {
        let ra = (-1.0 + 4.8 * rd) / 100.0;
        let rk = (22.4 + 11.8 * rd) / 100.0;
        let rg = rk / (4.0 * (0.11 * rd / (0.5 + 1.2 * rk) - ra));
        let peak = 1.0 / (2.0 * rg);
        let excitation = peak * (1.0 + rk);
        let omega = PI / peak;
        let rest = 1.0 - excitation;
        // decay * ra = 1 - exp(-decay * rest), by fixed point from the side where it contracts.
        let mut decay = 1.0 / ra;
        for _ in 0..200 {
            decay = (1.0 - (-decay * rest).exp()) / ra;
        }
        let mut flow = Self {
            growth: 0.0,
            omega,
            excitation,
            return_share: ra,
            decay,
        };
        // No net flow over the period: the growth of the open phase balances the areas.
        let (mut low, mut high) = (-50.0, 200.0);
        for _ in 0..200 {
            flow.growth = 0.5 * (low + high);
            if flow.open_area() + flow.return_area() > 0.0 {
                low = flow.growth;
            } else {
                high = flow.growth;
            }
        }
        flow
    }

    /// Flow derivative at `phase` of the period, 0 to 1.
    pub fn derivative(&self, phase: f64) -> f64 {
        if phase < self.excitation {
            self.scale() * (self.growth * phase).exp() * (self.omega * phase).sin()
        } else {
            let rest = 1.0 - self.excitation;
            -((-self.decay * (phase - self.excitation)).exp() - (-self.decay * rest).exp())
                / (self.decay * self.return_share)
        }
    }

    /// Whether the glottis is open at `phase`: where breath noise is made.
    pub fn openness(&self, phase: f64) -> f64 {
        if phase < self.excitation {
            (PI * phase / self.excitation).sin()
        } else {
            0.0
        }
    }

    fn scale(&self) -> f64 {
        -1.0 / ((self.growth * self.excitation).exp() * (self.omega * self.excitation).sin())
    }

    fn open_area(&self) -> f64 {
        let (a, w, te) = (self.growth, self.omega, self.excitation);
        self.scale() * ((a * te).exp() * (a * (w * te).sin() - w * (w * te).cos()) + w)
            / (a * a + w * w)
    }

    fn return_area(&self) -> f64 {
        let rest = 1.0 - self.excitation;
        let end = (-self.decay * rest).exp();
        -((1.0 - end) / self.decay - rest * end) / (self.decay * self.return_share)
    }
}
