//! Findings to one self-contained HTML page; no arithmetic here.
