//! Columns to mean 0 and deviation 1 over the training rows.

use super::logistic::FitError;
use super::samples::Samples;

/// Mean and deviation of each column.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Standard {
    pub(super) mean: Vec<f64>,
    pub(super) deviation: Vec<f64>,
}

impl Standard {
    /// Means and deviations (dividing by N) of the rows.
    pub(super) fn fit(samples: &Samples) -> Result<Self, FitError> {
        let n = samples.rows.len() as f64;
        let mut standard = Self {
            mean: Vec::new(),
            deviation: Vec::new(),
        };
        for (column, feature) in samples.features.iter().enumerate() {
            let mean = samples.rows.iter().map(|r| r[column]).sum::<f64>() / n;
            let squares: f64 = samples
                .rows
                .iter()
                .map(|r| (r[column] - mean).powi(2))
                .sum();
            let deviation = (squares / n).sqrt();
            if deviation <= 1e-12 * mean.abs().max(1e-12) {
                return Err(FitError::Constant(feature.to_string()));
            }
            standard.mean.push(mean);
            standard.deviation.push(deviation);
        }
        Ok(standard)
    }

    /// One row in standardised columns.
    pub(super) fn apply(&self, row: &[f64]) -> Vec<f64> {
        row.iter()
            .zip(self.mean.iter().zip(&self.deviation))
            .map(|(x, (mean, deviation))| (x - mean) / deviation)
            .collect()
    }
}
