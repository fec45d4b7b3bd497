//! Groups of tokens to differences, overlap and spread.
