//! What leaves the program: one writer a file, each to a string.
