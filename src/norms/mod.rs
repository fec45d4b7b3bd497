//! Published vowel tables and how to read them.
