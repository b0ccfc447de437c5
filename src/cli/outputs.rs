//! Where outputs go: beside the input, into a folder, to the file that was named, or to standard output.

use std::io::{IsTerminal, Write};
use std::path::{Path, PathBuf};

use hence_workbook::package::same_file;

use crate::Failure;
use crate::input::{DASH, is_dash};

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
    let stem = input.file_stem().unwrap_or_default().to_string_lossy();
    if stem.ends_with(".audited") {
        return Err(Failure::Message(format!(
            "{}: this is an audited copy, and the input is never written\nTry: --out with another name, or fill \
             the workbook it was made from",
            input.display()
        )));
    }
    let extension = output_extension(input).map(|e| format!(".{e}")).unwrap_or_default();
    Ok(input.with_file_name(format!("{stem}.audited{extension}")))
}

/// The extension of what is made from a file: that of a workbook, where the file is a template.
fn output_extension(input: &Path) -> Option<String> {
    let extension = input.extension()?.to_string_lossy();
    Some(match extension.to_ascii_lowercase().as_str() {
        "xltx" => "xlsx".to_owned(),
        "xltm" => "xlsm".to_owned(),
        _ => extension.into_owned(),
    })
}

/// True where `--out` names a file rather than a folder.
fn names_a_file(out: &Path) -> bool {
    out.extension().is_some_and(|e| e.eq_ignore_ascii_case("xlsx") || e.eq_ignore_ascii_case("xlsm"))
}

/// The output of one input.
fn output_for(input: &Path, out: Option<&Path>, several: bool) -> Result<Output, Failure> {
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
        let have = out.extension().map(|e| e.to_string_lossy().into_owned()).unwrap_or_default();
        let want = output_extension(input).unwrap_or_default();
        if !is_dash(input) && !have.eq_ignore_ascii_case(&want) {
            return Err(Failure::Message(format!(
                "--out {}: the output of {} is .{want}, since the extension follows the content",
                out.display(),
                input.display(),
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
            let extension = output_extension(input).unwrap_or_default();
            input.with_extension(extension).file_name().unwrap_or_default().to_owned()
        }
    };
    Ok(Output::File(out.join(name)))
}

/// The output of every input; no two may be one.
pub fn outputs_for(inputs: &[PathBuf], out: Option<&Path>) -> Result<Vec<Output>, Failure> {
    let mut outputs: Vec<Output> = Vec::new();
    for (i, input) in inputs.iter().enumerate() {
        let output = output_for(input, out, inputs.len() > 1)?;
        if let Some(j) = outputs.iter().position(|other| same(other, &output)) {
            return Err(Failure::Message(format!(
                "{} and {} would both be written to {}\nTry: fill them into different folders",
                inputs[j].display(),
                inputs[i].display(),
                output.shown()
            )));
        }
        outputs.push(output);
    }
    Ok(outputs)
}

fn same(a: &Output, b: &Output) -> bool {
    match (a, b) {
        (Output::File(a), Output::File(b)) => a == b || same_file(a, b),
        (a, b) => a == b,
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
    use std::path::{Path, PathBuf};

    #[test]
    fn names_follow_the_input() {
        assert_eq!(audited_name(Path::new("a/plan.xlsx")).unwrap(), Path::new("a/plan.audited.xlsx"));
        assert_eq!(audited_name(Path::new("v1.2.xlsm")).unwrap(), Path::new("v1.2.audited.xlsm"));
        assert_eq!(audited_name(Path::new("plan.xltx")).unwrap(), Path::new("plan.audited.xlsx"));
        assert_eq!(audited_name(Path::new("plan.XLTM")).unwrap(), Path::new("plan.audited.xlsm"));
        assert!(output_for(Path::new("a.xltx"), Some(Path::new("o.xlsx")), false).is_ok());
        assert!(output_for(Path::new("a.xltx"), Some(Path::new("o.xlsm")), false).is_err());
        assert!(audited_name(Path::new("plan.audited.xlsx")).is_err());
        assert!(names_a_file(Path::new("x.XLSX")) && !names_a_file(Path::new("x.d")));
        assert!(output_for(Path::new("a.xlsx"), Some(Path::new("o.xlsx")), true).is_err());
        assert!(output_for(Path::new("a.xlsm"), Some(Path::new("o.xlsx")), false).is_err());
        let audited = output_for(Path::new("a.audited.xlsx"), Some(Path::new("d")), false).unwrap();
        assert_eq!(audited, Output::File(PathBuf::from("d/a.audited.xlsx")));
    }

    #[test]
    fn two_inputs_never_share_an_output() {
        let two = |a: &str, b: &str, out| outputs_for(&[a.into(), b.into()], out);
        assert!(two("a/p.xlsx", "b/p.xlsx", None).is_ok());
        assert!(two("a/p.xlsx", "b/p.xlsx", Some(Path::new("o"))).is_err());
        assert!(two("p.xlsx", "./p.xlsx", None).is_err());
    }
}
