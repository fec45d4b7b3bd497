//! An invented survey, synthesised by a source-filter model, for a first run without data.
