//! Units at the boundaries between rooms. Inside numeric loops plain `f64` is used, with the unit
//! in the name (`bandwidth_hz`, `step_s`).

/// A frequency in hertz.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct Hertz(pub f64);

/// A time or a duration in seconds.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct Seconds(pub f64);

/// A level in decibels, relative to what the context names.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct Decibels(pub f64);
