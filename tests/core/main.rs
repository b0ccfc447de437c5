//! Tests of the library from outside, by its specification and by published figures.
mod basis;
mod rateline;
mod schedule_factors;
mod schedules;
