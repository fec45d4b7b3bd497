//! Observations of one speaker to values without the speaker's size.
