//! Rate lines.
