//! Where outputs go: beside the input, into a folder, to the file that was named, or to standard output.

use std::collections::BTreeMap;
use std::ffi::OsStr;
use std::io::{IsTerminal, Write};
use std::path::{Component, Path, PathBuf};

use hence_workbook::older::OldFormat;
use hence_workbook::package::{Identity, may_write};
use hence_workbook::problem::Result as BookResult;
use hence_workbook::shelf::output_is_input;

use crate::Failure;
use crate::input::{self, DASH, Input, is_dash};
use crate::shelf::walk::AUDITED;

/// Where one output goes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Output {
    /// A file.
    File(PathBuf),
    /// Standard output.
    Stream,
}

impl Output {
    /// A place for a workbook that was named: a file, or `-`. Bytes are not written to a terminal.
    pub fn named(path: &Path) -> Result<Output, Failure> {
        if !is_dash(path) {
            return Ok(Output::File(path.to_owned()));
        }
        if std::io::stdout().is_terminal() {
            return Err(Failure::Message(
                "standard output is a terminal, which cannot show a workbook\nTry: send it to a file or a pipe, or \
                 name a file"
                    .to_owned(),
            ));
        }
        Ok(Output::Stream)
    }

    /// Refused where it would be the input, which is never written, or an existing file without `--force`.
    pub fn may_write(&self, input: &Path, force: bool) -> BookResult<()> {
        let Output::File(path) = self else { return Ok(()) };
        self.is_not(input)?;
        may_write(path, force)
    }

    /// Refused where it would be the input.
    pub fn is_not(&self, input: &Path) -> BookResult<()> {
        match self {
            Output::File(path) if input::identity(input) == Identity::of(path) => Err(output_is_input(path)),
            _ => Ok(()),
        }
    }

    /// As it is shown.
    pub fn shown(&self) -> String {
        match self {
            Output::File(path) => path.display().to_string(),
            Output::Stream => "standard output".to_owned(),
        }
    }
}

/// Writes bytes to standard output.
pub fn stream(bytes: &[u8]) -> Result<(), Failure> {
    let mut out = std::io::stdout().lock();
    out.write_all(bytes)?;
    out.flush()?;
    Ok(())
}

/// `NAME.audited.xlsx` beside the input.
fn audited_name(input: &Path) -> Result<PathBuf, Failure> {
    let mut name = input.file_stem().unwrap_or_default().to_owned();
    if name.to_string_lossy().ends_with(AUDITED) {
        return Err(Failure::Message(format!(
            "{}: this is an audited copy, and the input is never written\nTry: --out with another name, or fill \
             the workbook it was made from",
            input.display()
        )));
    }
    name.push(AUDITED);
    if let Some(extension) = extension(input) {
        name.push(".");
        name.push(extension);
    }
    Ok(input.with_file_name(name))
}

/// The extension of an output: the input's, but for a template, and for one of which only the values are read.
fn extension(input: &Path) -> Option<&OsStr> {
    let own = input.extension()?;
    if own.eq_ignore_ascii_case("xltm") {
        return Some(OsStr::new("xlsm"));
    }
    let other = OldFormat::has_extension(own) || own.eq_ignore_ascii_case("xltx");
    Some(if other { OsStr::new("xlsx") } else { own })
}

/// True where `--out` names a file rather than a folder.
fn names_a_file(out: &Path) -> bool {
    out.extension().is_some_and(|e| e.eq_ignore_ascii_case("xlsx") || e.eq_ignore_ascii_case("xlsm"))
}

/// The output of one input: under `out` in the same folders as under the one that was walked.
fn output_for(input: &Input, out: Option<&Path>, several: bool) -> Result<Output, Failure> {
    let Input { path: input, inside } = input;
    let Some(out) = out else {
        return if is_dash(input) {
            Output::named(Path::new(DASH))
        } else {
            audited_name(input).map(Output::File)
        };
    };
    if several && (names_a_file(out) || is_dash(out)) {
        return Err(Failure::Message(format!(
            "--out {}: one file, but several workbooks are to be filled\nTry: --out with a folder",
            out.display()
        )));
    }
    if is_dash(out) {
        return Output::named(out);
    }
    if names_a_file(out) {
        let (have, want) = (out.extension(), extension(input));
        if !is_dash(input) && have.map(|e| e.to_ascii_lowercase()) != want.map(|e| e.to_ascii_lowercase()) {
            return Err(Failure::Message(format!(
                "--out {}: the output of {} is .{}, since the extension follows the content",
                out.display(),
                input.display(),
                want.unwrap_or_default().to_string_lossy()
            )));
        }
        return Ok(Output::File(out.to_owned()));
    }
    if is_dash(input) {
        return Err(Failure::Message(format!(
            "--out {}: a folder, but a workbook from standard input has no name\nTry: --out with a file",
            out.display()
        )));
    }
    let name = match audited_name(input) {
        Ok(path) => path.file_name().unwrap_or_default().to_owned(),
        // An audited copy keeps its name in another folder.
        Err(_) => {
            let renamed = input.with_extension(extension(input).unwrap_or_default());
            renamed.file_name().unwrap_or_default().to_owned()
        }
    };
    Ok(Output::File(out.join(inside.as_deref().unwrap_or(Path::new(""))).join(name)))
}

/// The output of every input; no two may be one, and none an input of another.
pub fn outputs_for(inputs: &[Input], out: Option<&Path>) -> Result<Vec<Output>, Failure> {
    let several = inputs.len() > 1 || inputs.iter().any(|input| input.inside.is_some());
    let mut outputs: Vec<Output> = Vec::new();
    let mut taken: BTreeMap<Option<Identity>, usize> = BTreeMap::new();
    let read: BTreeMap<Identity, usize> =
        inputs.iter().enumerate().map(|(i, input)| (cased(input::identity(&input.path)), i)).collect();
    for (i, input) in inputs.iter().enumerate() {
        let output = output_for(input, out, several)?;
        let place = match &output {
            Output::File(path) => {
                leads_nowhere(path)?;
                Some(cased(Identity::of(path)))
            }
            Output::Stream => None,
        };
        let clash = |j: usize, how: &str| {
            let (one, other) = (inputs[j].path.display(), input.path.display());
            let hint = "Try: fill them into different folders";
            Err(Failure::Message(format!("{one} and {other} {how} {}\n{hint}", output.shown())))
        };
        if let Some(j) = taken.insert(place.clone(), i) {
            return clash(j, "would both be written to");
        }
        // Of one workbook that is its own output, the workbook's problems tell.
        if let Some(j) = place.and_then(|place| read.get(&place)).filter(|j| **j != i) {
            return clash(*j, "are both read, but the second would be written to");
        }
        outputs.push(output);
    }
    Ok(outputs)
}

/// Refused where a `..` follows a folder that is not there: the folder would be made, and nothing come into it.
fn leads_nowhere(path: &Path) -> Result<(), Failure> {
    let mut before = PathBuf::new();
    for part in path.components() {
        if part == Component::ParentDir && !before.as_os_str().is_empty() && !before.is_dir() {
            let (path, before) = (path.display(), before.display());
            return Err(Failure::Message(format!(
                "--out {path}: {before} is no folder, so that nothing can be above it\nTry: leave out {before} and the .. after it"
            )));
        }
        before.push(part);
    }
    Ok(())
}

/// Where letters' case does not tell files apart, neither do two outputs that are not there yet.
fn cased(identity: Identity) -> Identity {
    match identity {
        Identity::Path(path) if cfg!(any(windows, target_os = "macos")) => {
            Identity::Path(path.to_string_lossy().to_lowercase().into())
        }
        other => other,
    }
}

/// A folder for outputs, made where it is missing; taken away again where nothing came to be in it.
pub struct Folder {
    made: Vec<PathBuf>,
}

impl Folder {
    /// Makes the folder that `--out` names, and those above it.
    pub fn make(out: Option<&Path>) -> Result<Folder, Failure> {
        let mut made = Vec::new();
        if let Some(out) = out.filter(|out| !names_a_file(out) && !is_dash(out)) {
            made = out
                .ancestors()
                .filter(|p| !p.as_os_str().is_empty() && !p.exists())
                .map(Path::to_owned)
                .collect();
            std::fs::create_dir_all(out)
                .map_err(|e| Failure::Message(format!("--out {}: {e}", out.display())))?;
        }
        Ok(Folder { made })
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        for folder in &self.made {
            // Only an empty folder goes: the system refuses to remove another.
            let _ = std::fs::remove_dir(folder);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{Output, audited_name, names_a_file, output_for, outputs_for};
    use crate::input::Input;
    use std::path::{Path, PathBuf};

    fn named(path: &str) -> Input {
        Input { path: path.into(), inside: None }
    }

    fn found(path: &str, inside: &str) -> Input {
        Input { path: path.into(), inside: Some(inside.into()) }
    }

    #[test]
    fn names_follow_the_input() {
        assert_eq!(audited_name(Path::new("a/plan.xlsx")).unwrap(), Path::new("a/plan.audited.xlsx"));
        assert_eq!(audited_name(Path::new("v1.2.xlsm")).unwrap(), Path::new("v1.2.audited.xlsm"));
        assert_eq!(audited_name(Path::new("plan.xltx")).unwrap(), Path::new("plan.audited.xlsx"));
        assert_eq!(audited_name(Path::new("plan.XLTM")).unwrap(), Path::new("plan.audited.xlsm"));
        assert!(output_for(&named("a.xltx"), Some(Path::new("o.xlsx")), false).is_ok());
        assert!(output_for(&named("a.xltx"), Some(Path::new("o.xlsm")), false).is_err());
        assert!(audited_name(Path::new("plan.audited.xlsx")).is_err());
        assert!(names_a_file(Path::new("x.XLSX")) && !names_a_file(Path::new("x.d")));
        assert!(output_for(&named("a.xlsx"), Some(Path::new("o.xlsx")), true).is_err());
        assert!(output_for(&named("a.xlsm"), Some(Path::new("o.xlsx")), false).is_err());
        let audited = output_for(&named("a.audited.xlsx"), Some(Path::new("d")), false).unwrap();
        assert_eq!(audited, Output::File(PathBuf::from("d/a.audited.xlsx")));
    }

    #[test]
    fn folders_under_a_walked_one_are_kept() {
        let inputs = [found("shelf/p.xlsx", ""), found("shelf/dams/p.xlsx", "dams")];
        let outputs = outputs_for(&inputs, Some(Path::new("o"))).unwrap();
        let paths = ["o/p.audited.xlsx", "o/dams/p.audited.xlsx"].map(|path| Output::File(path.into()));
        assert_eq!(outputs, paths);
        assert!(outputs_for(&inputs[..1], Some(Path::new("o.xlsx"))).is_err(), "a folder is not one file");
        let beside = outputs_for(&inputs, None).unwrap();
        assert_eq!(beside[1], Output::File("shelf/dams/p.audited.xlsx".into()));
    }

    #[test]
    fn two_inputs_never_share_an_output() {
        let two = |a: &str, b: &str, out| outputs_for(&[named(a), named(b)], out);
        assert!(two("a/p.xlsx", "b/p.xlsx", None).is_ok());
        assert!(two("a/p.xlsx", "b/p.xlsx", Some(Path::new("o"))).is_err());
        assert!(two("p.xlsx", "./p.xlsx", None).is_err());
        assert!(two("p.xlsx", "o/p.audited.xlsx", Some(Path::new("o"))).is_err(), "an input of another");
    }
}
