//! Isophone: from recordings of many speakers to defensible statements about their vowels.
//!
//! The modules stand in the order in which data passes through them; each takes the type of the
//! one before it and gives the next. `DEVELOPERS.md` has the map and the table of who may import
//! whom, and `tests/architecture.rs` holds the code to it.

pub mod units;
pub mod vowel;

pub mod audio;
pub mod signal;

pub mod segments;

pub mod formants;

pub mod tokens;

pub mod normalize;

pub mod identify;

pub mod norms;

pub mod compare;

pub mod tables;

pub mod report;

pub mod demo;

pub mod files;

pub mod survey;

pub mod cli;
