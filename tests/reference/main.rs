//! x

mod npv;
