//! Double-double arithmetic.
