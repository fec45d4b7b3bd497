//! The models the program brings.

use super::model::Model;
use super::model_text::ModelError;

/// Texts of the models in `models/`, best first: the first that has an answer is asked.
const MODELS: [&str; 4] = [
    include_str!("../../models/american-english-movement.toml"),
    include_str!("../../models/american-english-movement-template.toml"),
    include_str!("../../models/american-english-steady.toml"),
    include_str!("../../models/american-english-steady-template.toml"),
];

/// The models for American English, best first.
///
/// # Errors
/// [`ModelError`] where a text compiled in is damaged; the tests read each.
pub fn shipped() -> Result<Vec<Model>, ModelError> {
    MODELS.iter().map(|text| Model::parse(text)).collect()
}
