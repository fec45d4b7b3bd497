//! Normalized vowels to ranked vowel identities with probabilities.
