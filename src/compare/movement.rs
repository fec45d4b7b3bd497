//! How a vowel moves, and how much room the vowels take.

/// The proportions of the duration at which movement is read.
pub const MOVEMENT_POINTS: [f64; 5] = [0.20, 0.35, 0.50, 0.65, 0.80];

/// Movement of one token through the F1–F2 plane.
///
/// *Source*: Fox & Jacewicz 2009, JASA 126, 2603-2618.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Movement {
    /// Straight distance from 20 to 80 %, in hertz.
    pub vector_hz: f64,
    /// Length of the path through all five points, in hertz.
    pub trajectory_hz: f64,
    /// Length of the path over the time it takes (60 % of the duration), in hertz a second.
    pub rate_hz_per_s: f64,
    /// Change from 20 to 80 %: of F1, of F2, in hertz.
    pub change_hz: [f64; 2],
}

impl Movement {
    /// The movement along `track` (proportion; F1, F2 in hertz), linear between its points.
    ///
    /// `None` where the track does not cover 20 to 80 % or the duration is not above zero.
    pub fn of(track: &[(f64, [f64; 2])], duration_s: f64) -> Option<Self> {
        if duration_s.is_nan() || duration_s <= 0.0 {
            return None;
        }
        let mut points = [[0.0; 2]; 5];
        for (point, at) in points.iter_mut().zip(MOVEMENT_POINTS) {
            *point = between(track, at)?;
        }
        let length = |a: [f64; 2], b: [f64; 2]| (b[0] - a[0]).hypot(b[1] - a[1]);
        let trajectory_hz: f64 = points.windows(2).map(|w| length(w[0], w[1])).sum();
        Some(Self {
            vector_hz: length(points[0], points[4]),
            trajectory_hz,
            rate_hz_per_s: trajectory_hz / (0.60 * duration_s),
            change_hz: [points[4][0] - points[0][0], points[4][1] - points[0][1]],
        })
    }
}

/// The track at a proportion; `None` outside it.
pub fn between(track: &[(f64, [f64; 2])], at: f64) -> Option<[f64; 2]> {
    // Proportions come from tables and from code; 0.1 + 0.2 is not 0.3.
    const SAME: f64 = 1e-6;
    let after = track.iter().position(|(p, _)| *p >= at - SAME)?;
    let (right, b) = track[after];
    if (right - at).abs() <= SAME {
        return Some(b);
    }
    let (left, a) = track[after.checked_sub(1)?];
    let share = (at - left) / (right - left);
    Some([a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1])])
}

/// Area of a polygon over its corners in order (shoelace formula), without sign.
pub fn polygon_area(corners: &[[f64; 2]]) -> f64 {
    let next = corners.iter().cycle().skip(1);
    let twice: f64 = corners
        .iter()
        .zip(next)
        .map(|(a, b)| a[0] * b[1] - a[1] * b[0])
        .sum();
    0.5 * twice.abs()
}

/// Corners of the convex hull, in order.
///
/// *Source*: Andrew 1979, Inf. Process. Lett. 9, 216-219 (monotone chain).
pub fn convex_hull(points: &[[f64; 2]]) -> Vec<[f64; 2]> {
    let mut sorted = points.to_vec();
    sorted.sort_by(|a, b| a[0].total_cmp(&b[0]).then(a[1].total_cmp(&b[1])));
    sorted.dedup();
    if sorted.len() < 3 {
        return sorted;
    }
    let turn = |o: [f64; 2], a: [f64; 2], b: [f64; 2]| {
        (a[0] - o[0]) * (b[1] - o[1]) - (a[1] - o[1]) * (b[0] - o[0])
    };
    let chain = |points: &mut dyn Iterator<Item = [f64; 2]>| {
        let mut kept: Vec<[f64; 2]> = Vec::new();
        for p in points {
            while kept.len() >= 2 && turn(kept[kept.len() - 2], kept[kept.len() - 1], p) <= 0.0 {
                kept.pop();
            }
            kept.push(p);
        }
        kept.pop();
        kept
    };
    let mut hull = chain(&mut sorted.iter().copied());
    hull.extend(chain(&mut sorted.iter().rev().copied()));
    hull
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn movement_by_hand() {
        // Sections (30,40), (0,0), (30,40), (−60,−80) between 20, 35, 50, 65 and 80 %.
        let track = [
            (0.2, [500.0, 1_500.0]),
            (0.35, [530.0, 1_540.0]),
            (0.5, [530.0, 1_540.0]),
            (0.65, [560.0, 1_580.0]),
            (0.8, [500.0, 1_500.0]),
        ];
        let found = Movement::of(&track, 0.25).unwrap();
        assert!((found.vector_hz - 0.0).abs() < 1e-9);
        assert!((found.trajectory_hz - (50.0 + 0.0 + 50.0 + 100.0)).abs() < 1e-9);
        assert!((found.rate_hz_per_s - 200.0 / 0.15).abs() < 1e-9);
        assert_eq!(Movement::of(&track[1..], 0.25), None);
    }

    #[test]
    fn tracks_are_linear_between_their_points() {
        let track = [(0.3, [0.0, 10.0]), (0.4, [1.0, 30.0])];
        assert!((between(&track, 0.35).unwrap()[1] - 20.0).abs() < 1e-9);
        assert_eq!(between(&track, 0.1 + 0.2), Some([0.0, 10.0]));
        assert_eq!(between(&track, 0.5), None);
    }

    #[test]
    fn areas_of_published_averages() {
        // i æ ɑ u of Hillenbrand et al. 1995, Table V, men and women (the women's F1 of ɑ, 936,
        // from memory of the printed table); areas by the shoelace formula in a calculator.
        let men = [
            [342.0, 2_322.0],
            [588.0, 1_952.0],
            [768.0, 1_333.0],
            [378.0, 997.0],
        ];
        let women = [
            [437.0, 2_761.0],
            [669.0, 2_349.0],
            [936.0, 1_551.0],
            [459.0, 1_105.0],
        ];
        assert!((polygon_area(&men) - 307_260.0).abs() < 0.05);
        assert!((polygon_area(&women) - 437_428.0).abs() < 0.05);
    }

    #[test]
    fn the_hull_leaves_inner_points_out() {
        let points = [
            [0.0, 0.0],
            [4.0, 0.0],
            [2.0, 1.0],
            [4.0, 3.0],
            [0.0, 3.0],
            [2.0, 0.0],
        ];
        let hull = convex_hull(&points);
        assert_eq!(hull.len(), 4);
        assert!((polygon_area(&hull) - 12.0).abs() < 1e-12);
    }
}
