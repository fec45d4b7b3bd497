//! One speaker against a group: a learner, a witness, a new voice.
//!
//! A single speaker gives no spread of its own, so the group's spread between speakers has to serve
//! for both: the question is whether the speaker could be one more of the group. This assumes that
//! speakers' means are about normally distributed. Strata are ignored but for their means: speakers
//! are compared as deviations from their stratum.
//!
//! *Source*: Crawford & Howell 1998, The Clinical Neuropsychologist 12, 482-486: t = (x − m) /
//! (s √((n+1)/n)) with n − 1 degrees of freedom; in the plane, Hotelling's T² of one against n.

use statrs::distribution::{ContinuousCDF, StudentsT};

use super::difference::{Difference, student_quantile};
use super::plane::{quadratic_form, scatter};
use super::resample::Test;
use super::sample::{Column, Layout, seconds};

/// The single speaker's deviation and those of the group, and the sign that makes it second less
/// first.
fn split(layout: &Layout, column: &Column) -> (f64, Vec<f64>, f64) {
    let alone = usize::from(layout.speakers()[1] == 1);
    let of = |group: usize| -> Vec<f64> {
        let own = column
            .centred
            .iter()
            .zip(&layout.groups)
            .filter(|(_, g)| **g == group);
        own.map(|(v, _)| *v).collect()
    };
    let sign = if alone == 1 { 1.0 } else { -1.0 };
    (
        of(alone).first().copied().unwrap_or(f64::NAN),
        of(1 - alone),
        sign,
    )
}

/// The difference in one number.
pub(super) fn difference(layout: &Layout, column: &Column) -> Difference {
    let found = column.estimate(layout, &seconds(&layout.groups));
    let (alone, group, sign) = split(layout, column);
    let n = group.len() as f64;
    let mean = group.iter().sum::<f64>() / n;
    let variance = group.iter().map(|v| (v - mean).powi(2)).sum::<f64>() / (n - 1.0);
    let value = sign * (alone - mean);
    let error = (variance * (n + 1.0) / n).sqrt();
    let able = group.len() >= 2 && error > 0.0;
    let p = if able {
        let freedom = n - 1.0;
        let tail = StudentsT::new(0.0, 1.0, freedom).map_or(0.5, |t| t.sf((value / error).abs()));
        2.0 * tail
    } else {
        1.0
    };
    let reach = error * student_quantile(n - 1.0);
    Difference {
        speakers: layout.speakers(),
        means: found.means,
        value,
        interval: able.then_some([value - reach, value + reach]),
        test: Test {
            p,
            smallest_p: if able { 0.0 } else { 1.0 },
        },
        hedges_g: able.then(|| {
            let small = 1.0 - 3.0 / (4.0 * (n - 1.0) - 1.0);
            small * value / variance.sqrt()
        }),
    }
}

/// Whether the speaker's place in the plane could be one more of the group's; `None` for a group of
/// fewer than three, or one whose places lie on a line.
pub(super) fn place(layout: &Layout, axes: &[Column; 2]) -> Option<Test> {
    let [(x, xs, _), (y, ys, _)] = [0, 1].map(|k| split(layout, &axes[k]));
    let n = xs.len() as f64;
    if xs.len() < 4 {
        return None;
    }
    let points: Vec<[f64; 2]> = xs.into_iter().zip(ys).map(|(x, y)| [x, y]).collect();
    let mean = [0, 1].map(|k| points.iter().map(|p| p[k]).sum::<f64>() / n);
    let covariance = scatter(&points, mean).map(|s| s / (n - 1.0));
    let t2 = n / (n + 1.0) * quadratic_form(covariance, [x - mean[0], y - mean[1]])?;
    // T² (n−2)/(2(n−1)) is F with 2 and m = n−2 degrees of freedom, whose tail is (1+2F/m)^(−m/2).
    let p = (1.0 + t2 / (n - 1.0)).powf(-(n - 2.0) / 2.0);
    Some(Test { p, smallest_p: 0.0 })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::compare::sample::Side;

    fn layout(group: usize, alone: usize) -> Layout {
        let mut sides = vec![Side { group, stratum: 0 }; 8];
        sides.push(Side {
            group: alone,
            stratum: 0,
        });
        Layout::of(&sides, |_| true).unwrap()
    }

    const GROUP: [f64; 8] = [5.1, 4.2, 6.0, 5.5, 4.9, 5.8, 4.4, 5.3];

    #[test]
    fn one_against_eight_agrees_with_a_general_library() {
        // The t statistic put together from numpy 2.4.6 mean and std(ddof=1), its tail from
        // scipy 1.17.1 stats.t.sf(|t|, 7) * 2 and its quantile from stats.t.ppf(0.975, 7).
        let layout = layout(0, 1);
        let column = Column::of(&layout, &[&GROUP[..], &[7.4]].concat());
        let found = difference(&layout, &column);
        assert!((found.value - 2.25).abs() < 1e-12);
        assert!((found.test.p - P_ONE).abs() < 1e-9, "{:?}", found.test);
        let interval = found.interval.unwrap();
        assert!((interval[0] - LOW).abs() < 1e-6, "{interval:?}");
    }

    #[test]
    fn the_sign_follows_the_sides() {
        let layout = layout(1, 0);
        let column = Column::of(&layout, &[&GROUP[..], &[7.4]].concat());
        assert!((difference(&layout, &column).value + 2.25).abs() < 1e-12);
    }

    #[test]
    fn the_plane_agrees_with_a_general_library() {
        // T² by numpy 2.4.6 cov and linalg.solve, the tail by scipy 1.17.1 stats.f.sf(F, 2, 6).
        let layout = layout(0, 1);
        let other = [1.0, 2.0, 1.5, 3.0, 2.5, 1.2, 2.2, 2.8];
        let axes = [
            Column::of(&layout, &[&GROUP[..], &[7.4]].concat()),
            Column::of(&layout, &[&other[..], &[0.2]].concat()),
        ];
        let found = place(&layout, &axes).unwrap();
        assert!((found.p - P_PLACE).abs() < 1e-9, "{found:?}");
    }

    const P_ONE: f64 = 0.012382516860050513;
    const LOW: f64 = 0.6581067736811992;
    const P_PLACE: f64 = 0.037511146393844515;
}
