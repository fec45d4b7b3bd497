//! Groups of tokens to differences, overlap and spread.
//!
//! The speaker is the unit of sampling everywhere: tokens of one speaker are not independent, so
//! they are averaged before anything is said about a group.

mod chart;
mod check;
mod contrast;
mod difference;
mod findings;
mod holm;
mod movement;
mod norm_place;
mod overlap;
mod pairs;
mod panel;
mod plane;
mod progress;
mod resample;
mod sample;
mod single;
mod tally;

pub use chart::{GroupVowel, Space, SpeakerVowel, group_vowels, spaces, speaker_vowels};
pub use check::{
    NormCheck, Offset, PairCheck, Remark, STRONG_OFFSET, TELLING_OFFSET, VowelCheck, check,
};
pub use contrast::{Contrast, PlaceVerdict, SIGNIFICANCE, VowelContrast, contrast, contrasts};
pub use difference::{CONFIDENCE, Difference, PlaceTest, differences, mean_interval, place_test};
pub use findings::Findings;
pub use holm::holm;
pub use movement::{MOVEMENT_POINTS, Movement, between, convex_hull, polygon_area};
pub use norm_place::Spread;
pub use overlap::{Overlap, expected_pillai_if_merged, pillai_point_if_merged};
pub use pairs::{APART_AFFINITY, GroupPair, SpeakerPair, Verdict, pairs};
pub use panel::{Belonging, MEASURES, Measure, Panel, PanelSpeaker, PanelToken};
pub use plane::{Cloud, Ellipse};
pub use progress::{VowelProgress, Way, progress};
pub use resample::{Resampling, Test, gaussian, permute, quantile};
pub use sample::Side;
pub use tally::{Fate, Reliability, Tally};
