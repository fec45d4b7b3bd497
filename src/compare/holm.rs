//! Correction for having looked at many vowels.

/// Holm's step-down correction; the result is in the order given.
///
/// *Source*: Holm 1979, Scand. J. Statist. 6, 65-70.
pub fn holm(p: &[f64]) -> Vec<f64> {
    let mut order: Vec<usize> = (0..p.len()).collect();
    order.sort_by(|a, b| p[*a].total_cmp(&p[*b]));
    let mut corrected = vec![1.0; p.len()];
    let mut running: f64 = 0.0;
    for (step, index) in order.into_iter().enumerate() {
        running = running.max(p[index] * (p.len() - step) as f64).min(1.0);
        corrected[index] = running;
    }
    corrected
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn agrees_with_a_general_library() {
        // statsmodels 0.15.0: multipletests([...], method='holm')[1].
        let corrected = holm(&[0.012, 0.2, 0.001, 0.04, 0.03, 0.6]);
        for (ours, theirs) in corrected.iter().zip([0.06, 0.4, 0.006, 0.12, 0.12, 0.6]) {
            assert!((ours - theirs).abs() < 1e-12, "{corrected:?}");
        }
        assert!(holm(&[]).is_empty());
    }
}
