//! `hence names`.
