//! The processes that work on one workbook: the same program, called by a word that no help names.
//!
//! Arguments are the word, the number of the parent and the most memory that the process may have. To fill one, the folder of
//! schedules ("" for none), input and output follow; the order comes on standard input, the answer and the output's bytes
//! go to standard output. To take the values out of a workbook of an older format, its name follows; its bytes come on
//! standard input, and what was left behind and the values go to standard output.

use std::ffi::{OsStr, OsString};
use std::io::stdout;
use std::path::{Path, PathBuf};
use std::process::ExitCode;

use hence_workbook::older::convert;
use hence_workbook::schedules;
use hence_workbook::shelf::{Order, work};

use super::wire;
use crate::limits;

/// The word for filling one.
pub const FILL: &str = "fill-one-workbook";
/// The word for taking the values out of one.
pub const VALUES: &str = "values-of-one-workbook";

/// Whether this process was started to work on one workbook.
pub fn is_asked_for(args: &[OsString]) -> bool {
    args.get(1).is_some_and(|word| (word == FILL && args.len() == 7) || (word == VALUES && args.len() == 5))
}

/// Works on it.
pub fn run(args: &[OsString]) -> ExitCode {
    let number = |at: usize| args[at].to_str().and_then(|text| text.parse::<u64>().ok());
    let (Some(parent), Some(memory)) = (number(2), number(3)) else { return ExitCode::FAILURE };
    if args[1] == FILL { fill(args, parent as u32, memory) } else { values(&args[4], parent as u32, memory) }
}

/// Takes the values out of one.
fn values(name: &OsStr, parent: u32, memory: u64) -> ExitCode {
    limits::limit_memory(memory);
    let Ok(bytes) = wire::receive_bytes(&mut std::io::stdin().lock()) else { return ExitCode::FAILURE };
    limits::end_with_parent(parent);
    let read = convert(&name.to_string_lossy(), &bytes).map_err(|error| error.problems().to_vec());
    let mut to = stdout().lock();
    let sent = wire::send(&mut to, &read)
        .and_then(|()| read.map_or(Ok(()), |values| wire::send_bytes(&mut to, &values.bytes)));
    if sent.is_ok() { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}

fn fill(args: &[OsString], parent: u32, memory: u64) -> ExitCode {
    limits::limit_memory(memory);
    let order: Order = match wire::receive(&mut std::io::stdin().lock()) {
        Ok(order) => order,
        Err(_) => return ExitCode::FAILURE,
    };
    limits::end_with_parent(parent);
    let (input, output) = (PathBuf::from(&args[5]), PathBuf::from(&args[6]));
    #[cfg(debug_assertions)]
    misbehave(&input);
    let folder = Some(&args[4]).filter(|folder| !folder.is_empty()).map(Path::new);
    let catalogue = match schedules::catalogue(folder) {
        Ok(catalogue) => catalogue,
        Err(error) => {
            eprintln!("{error}");
            return ExitCode::FAILURE;
        }
    };
    let (done, bytes) = work(&input, &output, &order, &catalogue);
    let mut to = stdout().lock();
    let sent = wire::send(&mut to, &done)
        .and_then(|()| bytes.map_or(Ok(()), |bytes| wire::send_bytes(&mut to, &bytes)));
    if sent.is_ok() { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}

/// For tests, in builds for tests alone: a workbook of a certain name is one on which hence does what it never should.
#[cfg(debug_assertions)]
fn misbehave(input: &Path) {
    if std::env::var_os("HENCE_TEST_MISHAPS").is_none() {
        return;
    }
    match input.file_stem().and_then(|name| name.to_str()) {
        Some("panics") => panic!("as the test wants"),
        Some("aborts") => std::process::abort(),
        Some("hangs") => std::thread::sleep(std::time::Duration::from_secs(3600)),
        Some("eats") => {
            let mut eaten = Vec::new();
            loop {
                eaten.push(vec![1_u8; 16 << 20]);
            }
        }
        _ => {}
    }
}
