//! Signal analysis without phonetics: windows, spectra, prediction, roots.

pub mod discrete;
pub mod factors;
pub mod follow;
pub mod harmonics;
pub mod prediction;
pub mod roots;
pub mod spectrum;
pub mod window;
