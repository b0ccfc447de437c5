//! `hence fill`.
