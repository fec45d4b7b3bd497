//! Reading and writing of files, whole and atomic.
