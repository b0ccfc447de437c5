//! What keeps a process from finishing a workbook, as problems of that workbook.

use std::time::Duration;

use crate::problem::{Place, Problem};

/// It asked for more memory than it may have.
pub fn out_of_memory(limit: u64) -> Problem {
    let message = format!("reading and filling it takes more than {} MB of memory", limit >> 20);
    Problem::error("memory-limit", Place::default(), message)
        .hint("--memory-limit with more, or split the workbook")
}

/// The system refused memory for a part or file; the limit is not known where that is seen.
pub(crate) fn refused_memory(what: &str) -> Problem {
    let message = format!("{what} takes more memory than there is");
    Problem::error("memory-limit", Place::default(), message)
        .hint("--memory-limit with more, or split the workbook")
}

/// It took longer than it may.
pub fn out_of_time(limit: Duration) -> Problem {
    let message = format!("reading and filling it takes more than {} seconds", limit.as_secs());
    Problem::error("time-limit", Place::default(), message)
        .hint("--time-limit with more, or split the workbook")
}

/// It ended in another way: by a signal, or by a fault of hence.
pub fn broke_off(how: &str) -> Problem {
    let message = format!("hence broke off while it worked on this workbook ({how})");
    Problem::error("broke-off", Place::default(), message)
        .hint("report the workbook as one that hence cannot fill")
}

/// The process could not be started.
pub fn not_started(why: &std::io::Error) -> Problem {
    let message = format!("no process of its own could be started for it: {why}");
    Problem::error("not-started", Place::default(), message).hint("fewer --jobs")
}
