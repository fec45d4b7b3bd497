//! The survey: what a folder holds, the plan, the run.
