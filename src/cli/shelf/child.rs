//! The process that works on one workbook: the same program, called by a word that no help names.
//!
//! Its arguments are the word, the number of its parent, the most memory it may have, the folder of schedules ("" for
//! none), input and output. Its order comes on standard input, its answer and the output's bytes go to standard output.

use std::ffi::OsString;
use std::io::stdout;
use std::path::{Path, PathBuf};
use std::process::ExitCode;

use hence_workbook::schedules;
use hence_workbook::shelf::{Order, work};

use super::wire;
use crate::limits;

/// The word.
pub const WORD: &str = "fill-one-workbook";

/// Whether this process was started to work on one workbook.
pub fn is_asked_for(args: &[OsString]) -> bool {
    args.len() == 7 && args[1] == WORD
}

/// Works on it.
pub fn run(args: &[OsString]) -> ExitCode {
    let number = |at: usize| args[at].to_str().and_then(|text| text.parse::<u64>().ok());
    let (Some(parent), Some(memory)) = (number(2), number(3)) else { return ExitCode::FAILURE };
    limits::limit_memory(memory);
    let order: Order = match wire::receive(&mut std::io::stdin().lock()) {
        Ok(order) => order,
        Err(_) => return ExitCode::FAILURE,
    };
    limits::end_with_parent(parent as u32);
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
