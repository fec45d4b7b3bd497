//! The rows and columns of the tables the program reads and writes.
