//! Findings to one self-contained HTML page; no arithmetic here but that of laying out.
//!
//! [`Subject`] is what a page is about, [`Frame`] what stands around it, [`render`] makes the page.
//! Views hold ready-formatted text and coordinates; the template escapes every text.

mod chart;
mod confusion;
mod contrasts;
mod handout;
mod numbers;
mod order;
mod page;
mod pairs;
mod picture;
mod sentences;
mod speakers;
mod subject;

pub use handout::handout;
pub use page::{Frame, Nature, ReportError, render};
pub use picture::{Picture, PicturePoint};
pub use sentences::found;
pub use subject::Subject;
