//! x

mod calendar;
mod irr;
mod measures;
mod prices;
mod tails;
mod timing;
