//! `hence check`.
