//! Signal analysis without phonetics: windows, spectra, prediction, roots, periodicity.
