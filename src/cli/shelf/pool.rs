//! The run over many workbooks: several processes at a time, results in the order of the inputs.

use std::collections::BTreeMap;
use std::num::NonZeroUsize;
use std::path::PathBuf;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::sync::mpsc::{self, RecvTimeoutError};
use std::time::Duration;

use hence_workbook::problem::WorkbookError;
use hence_workbook::shelf::{Done, Order};

use super::worker::{Limits, Slot, Task, work};
use crate::{Failure, limits};

/// How often signals and the time of each process are looked at.
const WATCH: Duration = Duration::from_millis(20);

/// How a run goes.
#[derive(Clone, Debug)]
pub struct Run {
    /// What is to be done with every workbook.
    pub order: Order,
    /// The user's folder of schedules.
    pub schedules: Option<PathBuf>,
    /// What each process may use.
    pub limits: Limits,
    /// How many processes at a time.
    pub jobs: NonZeroUsize,
}

/// What a run tells as it goes.
pub trait Listener {
    /// So many workbooks are done, in whatever order.
    fn counted(&mut self, done: usize);
    /// What became of a workbook, in the order of the inputs.
    fn ended(&mut self, index: usize, done: Result<Done, WorkbookError>);
}

/// Works on every workbook. One that fails does not keep the others from being done.
///
/// **Errors**: the signal that asked the run to stop; no process is at work then, and no temporary file is left.
pub fn run(tasks: &[Task], run: &Run, listener: &mut dyn Listener) -> Result<(), Failure> {
    limits::note_signals();
    let next = AtomicUsize::new(0);
    let stop = AtomicBool::new(false);
    let slots: Vec<Slot> = (0..run.jobs.get().min(tasks.len())).map(|_| Slot::default()).collect();
    let (to, from) = mpsc::channel();
    std::thread::scope(|scope| {
        for slot in &slots {
            let (to, next, stop) = (to.clone(), &next, &stop);
            scope.spawn(move || {
                while !stop.load(Ordering::SeqCst) {
                    let index = next.fetch_add(1, Ordering::SeqCst);
                    let Some(task) = tasks.get(index) else { break };
                    let done = work(task, &run.order, run.schedules.as_deref(), &run.limits, slot, stop);
                    if to.send((index, done)).is_err() {
                        break;
                    }
                }
            });
        }
        drop(to);
        // What ended before something earlier in order did.
        let mut early = BTreeMap::new();
        let (mut done, mut told) = (0, 0);
        loop {
            match from.recv_timeout(WATCH) {
                Ok((index, ended)) => {
                    early.insert(index, ended);
                    done += 1;
                    listener.counted(done);
                    while let Some(ended) = early.remove(&told) {
                        listener.ended(told, ended);
                        told += 1;
                    }
                }
                Err(RecvTimeoutError::Timeout) => {}
                Err(RecvTimeoutError::Disconnected) => return Ok(()),
            }
            if let Some(signal) = limits::stopped() {
                stop.store(true, Ordering::SeqCst);
                slots.iter().for_each(Slot::end);
                return Err(Failure::Stopped(signal));
            }
            slots.iter().for_each(|slot| slot.end_if_late(run.limits.time));
        }
    })
}
