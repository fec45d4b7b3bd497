//! Recordings made by code, for tests that must know the truth.
//!
//! Invented speakers say single words of the shape h–vowel–d. The sound comes from a source–filter
//! model of its own: Liljencrants–Fant flow ([`flow`]), a cascade of moving resonances ([`tract`]),
//! words and speakers ([`voice`]), what a field recording does to them ([`spoil`]) and the folder a
//! survey would keep them in ([`folder`]). It shares no code with the program: an error in the
//! analysis cannot hide behind the same error here.

// Every test binary that includes this module uses a part of it, and nothing of it leaves that binary.
#![allow(dead_code, missing_docs, unreachable_pub)]

pub mod flow;
pub mod folder;
pub mod spoil;
pub mod tract;
pub mod voice;
