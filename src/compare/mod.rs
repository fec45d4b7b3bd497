//! Groups of tokens to differences, overlap and spread.
//!
//! The speaker is the unit of sampling everywhere: tokens of one speaker are not independent, so
//! they are averaged before anything is said about a group.

mod difference;
mod holm;
mod movement;
mod overlap;
mod plane;
mod resample;

pub use difference::{CONFIDENCE, Difference, PlaceTest, SpeakerMean, difference, place_test};
pub use holm::holm;
pub use movement::{MOVEMENT_POINTS, Movement, between, convex_hull, polygon_area};
pub use overlap::{Overlap, expected_pillai_if_merged, pillai_point_if_merged};
pub use plane::{Cloud, Ellipse};
pub use resample::{Permutation, Resampling, gaussian, permute, quantile};
