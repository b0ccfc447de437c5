//! One sample program: built and run in a temporary folder as the comment at its top says, its text compared.
//!
//! The folder looks like the root of the repository, so the lines can be those of the comment and nothing is written
//! into the source tree.

use std::path::Path;
use std::process::{Command, Output};

use tempfile::TempDir;

use crate::{flood_wall, library};

/// What the samples are run with: curve and timing, none for the program's own.
const CASES: [&[&str]; 4] = [
    &[],
    &["3.5% to 30, 3% to 75, 2.5% after", "flows start, base start"],
    &["gamma mean 4% sd 3%", "flows end, base start"],
    // Its source is not spelt in ASCII alone.
    &["dk-2013", "flows middle, base middle"],
];

/// Where every program finds the library.
pub const LIBRARY_PATH: &str = "LD_LIBRARY_PATH=target/release ";

/// A program of the samples, in a folder where it can be built.
pub struct Sample {
    folder: TempDir,
    /// The lines that build it, then the one that runs it.
    pub lines: Vec<String>,
}

/// The commands in the comment at the top of a program: what is indented there by five columns after the mark.
fn commands(source: &str) -> Vec<String> {
    let comment =
        source.lines().take_while(|line| [" *", "/*", "//", "#"].iter().any(|m| line.starts_with(m)));
    let indented = comment.filter_map(|line| {
        [" *     ", "//     ", "#     "].iter().find_map(|mark| line.strip_prefix(mark)).map(str::to_owned)
    });
    indented.collect()
}

fn copy(from: &Path, to: &Path) {
    std::fs::create_dir_all(to).expect("a folder");
    for entry in std::fs::read_dir(from).expect("a folder of the repository") {
        let path = entry.expect("an entry").path();
        if path.is_file() {
            std::fs::copy(&path, to.join(path.file_name().expect("a name"))).expect("a copy");
        }
    }
}

impl Sample {
    pub fn new(program: &str) -> Sample {
        let root = library::root();
        let folder = tempfile::tempdir().expect("a temporary folder");
        let language = Path::new(program).parent().expect("samples/language");
        for part in [Path::new("include"), language] {
            copy(&root.join(part), &folder.path().join(part));
        }
        std::fs::copy(root.join("samples/flood-wall.csv"), folder.path().join("samples/flood-wall.csv"))
            .expect("the plan");
        let release = folder.path().join("target/release");
        std::fs::create_dir_all(&release).expect("a folder");
        std::fs::copy(library::folder().join("libhence.so"), release.join("libhence.so"))
            .expect("the library");
        let source = std::fs::read_to_string(root.join(program)).expect("the program");
        let mut lines = commands(&source);
        // The library was built above, for all of them.
        assert_eq!(lines.remove(0), "cargo build --release -p hence-ffi", "{program}");
        assert!(!lines.is_empty(), "{program} says how it is run");
        Sample { folder, lines }
    }

    /// Runs a line as a shell does; the arguments follow it.
    pub fn shell(&self, line: &str, arguments: &[&str], settings: &[(&str, &str)]) -> Output {
        let mut command = Command::new("sh");
        command.current_dir(&self.folder).args(["-ec", &format!("{line} \"$@\""), "sh"]).args(arguments);
        // Some languages write texts as the system has it.
        command.env("LC_ALL", "C.UTF-8").envs(settings.iter().copied());
        command.output().expect("a shell")
    }

    /// Builds it; a warning is a failure.
    pub fn build(&self, settings: &[(&str, &str)]) {
        for line in &self.lines[..self.lines.len() - 1] {
            let output = self.shell(line, &[], settings);
            let said = String::from_utf8_lossy(&output.stderr);
            assert!(output.status.success(), "{line}\n{said}");
            assert!(!said.contains("warning"), "{line}\n{said}");
        }
    }

    /// The line that runs it, with something put before the program.
    fn run_line(&self, before: &str) -> String {
        let line = self.lines.last().expect("a line that runs it");
        let program = line.strip_prefix(LIBRARY_PATH).expect("the library is found through LD_LIBRARY_PATH");
        format!("{LIBRARY_PATH}{before}{program}")
    }

    /// Runs every case, and lines that are not one, and compares.
    pub fn check(&self, before: &str, settings: &[(&str, &str)]) {
        let line = self.run_line(before);
        for case in CASES {
            let output = self.shell(&line, case, settings);
            let said = String::from_utf8_lossy(&output.stderr);
            assert!(output.status.success(), "{line} {case:?}: {}\n{said}", output.status);
            let (curve, timing) =
                (case.first().unwrap_or(&"uk-2003"), case.get(1).unwrap_or(&"flows middle"));
            let expected = flood_wall::text(curve, timing).expect("a text");
            let found = String::from_utf8(output.stdout).expect("UTF-8");
            for (i, (found, expected)) in found.lines().zip(expected.lines()).enumerate() {
                assert_eq!(found, expected, "{line} {case:?}, line {}", i + 1);
            }
            assert_eq!(found, expected, "{line} {case:?}");
        }

        let refused = flood_wall::text("3,5%", "flows middle").expect_err("a decimal comma");
        let expected = format!(
            "HENCE_ERR_SYNTAX: {}. Try: {} (argument 1, index {})",
            refused.message(),
            refused.hint().expect("a hint"),
            refused.at().expect("a place")
        );
        let output = self.shell(&line, &["3,5%"], settings);
        assert_eq!(output.status.code(), Some(1), "{line} 3,5%");
        assert_eq!(String::from_utf8_lossy(&output.stdout), "", "{line} 3,5%");
        let said = String::from_utf8_lossy(&output.stderr);
        assert!(said.contains(&expected), "{line} 3,5%: expected {expected}, found {said}");
    }

    /// Runs a program that takes no arguments, and compares.
    pub fn check_alone(&self, before: &str, expected: &str) {
        let line = self.run_line(before);
        let output = self.shell(&line, &[], &[]);
        let said = String::from_utf8_lossy(&output.stderr);
        assert!(output.status.success(), "{line}: {}\n{said}", output.status);
        assert_eq!(String::from_utf8_lossy(&output.stdout), expected, "{line}");
    }
}
