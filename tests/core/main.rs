//! x

mod calendar;
mod irr;
mod prices;
mod timing;
