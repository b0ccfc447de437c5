//! Published tables and worked examples, row by row; every file of values names its source.

mod npv;
