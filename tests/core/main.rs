//! x

mod calendar;
mod prices;
mod timing;
