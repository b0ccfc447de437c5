//! The values of a workbook of an older format, taken out of it in a process with limits.

use std::ffi::OsString;
use std::io::{BufReader, Write};
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

use hence_workbook::older::Converted;
use hence_workbook::package::Package;
use hence_workbook::problem::{Problem, Result, WorkbookError};
use hence_workbook::shelf::mishap;

use super::worker::{Limits, Slot, Started, start, why};
use super::{child, wire};

/// How often the time is looked at.
const TICK: Duration = Duration::from_millis(20);

/// The workbook as a package that is read like any other.
pub fn values(name: &str, bytes: &[u8]) -> Result<Package> {
    let limits = Limits::default();
    let (slot, over) = (Slot::default(), AtomicBool::new(false));
    let converted = std::thread::scope(|scope| {
        scope.spawn(|| {
            while !over.load(Ordering::SeqCst) {
                slot.end_if_late(limits.time);
                std::thread::sleep(TICK);
            }
        });
        let converted = asked(name, bytes, &limits, &slot);
        over.store(true, Ordering::SeqCst);
        converted
    })?;
    Package::converted(name, bytes, converted)
}

fn asked(name: &str, bytes: &[u8], limits: &Limits, slot: &Slot) -> Result<Converted> {
    let arguments: [OsString; 4] = [
        child::VALUES.into(),
        std::process::id().to_string().into(),
        limits.memory.to_string().into(),
        name.into(),
    ];
    let Started { stdin, stdout, words } = start(&arguments, slot)?;
    // Its standard input stays open until it has ended: by that it knows that this process lives.
    let mut stdin = stdin;
    if let Some(to) = &mut stdin {
        // A process that does not read has ended, which is seen below.
        let _ = wire::send_bytes(to, bytes).and_then(|()| to.flush());
    }
    let received = stdout.map(|from| received(&mut BufReader::new(from)));
    let (status, late) = slot.wait();
    drop(stdin);
    let words = words.join().unwrap_or_default();
    match received {
        Some(Ok(answer)) if status.is_some_and(|status| status.success()) => {
            answer.map_err(WorkbookError::from)
        }
        _ if late => Err(mishap::out_of_time(limits.time).into()),
        _ => Err(why(status, &words, limits).into()),
    }
}

fn received(from: &mut impl std::io::Read) -> std::io::Result<std::result::Result<Converted, Vec<Problem>>> {
    let answer: std::result::Result<Converted, Vec<Problem>> = wire::receive(from)?;
    Ok(match answer {
        Ok(values) => Ok(Converted { bytes: wire::receive_bytes(from)?, ..values }),
        Err(problems) => Err(problems),
    })
}
