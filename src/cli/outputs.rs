//! Where outputs go: beside the input, into a folder, or to the file that was named.

use std::path::{Path, PathBuf};

use crate::Failure;

/// `NAME.audited.xlsx` beside the input, or in the folder.
pub fn audited_name(input: &Path) -> Result<PathBuf, Failure> {
    let stem = input.file_stem().unwrap_or_default().to_string_lossy();
    let extension = input.extension().unwrap_or_default().to_string_lossy();
    if stem.ends_with(".audited") {
        return Err(Failure::Message(format!(
            "{}: this is an audited copy, and the input is never written\nTry: --out with another name, or fill \
             the workbook it was made from",
            input.display()
        )));
    }
    Ok(input.with_file_name(format!("{stem}.audited.{extension}")))
}

/// True where `--out` names a file rather than a folder.
pub fn names_a_file(out: &Path) -> bool {
    out.extension().is_some_and(|e| e.eq_ignore_ascii_case("xlsx") || e.eq_ignore_ascii_case("xlsm"))
}

/// The output of one input; folders are made when missing.
pub fn output_for(input: &Path, out: Option<&Path>, several: bool) -> Result<PathBuf, Failure> {
    let Some(out) = out else { return audited_name(input) };
    if names_a_file(out) {
        if several {
            return Err(Failure::Message(format!(
                "--out {}: a file, but several workbooks are to be filled\nTry: --out with a folder",
                out.display()
            )));
        }
        let (have, want) = (out.extension(), input.extension());
        if have.map(|e| e.to_ascii_lowercase()) != want.map(|e| e.to_ascii_lowercase()) {
            return Err(Failure::Message(format!(
                "--out {}: {} stays {}, since the extension follows the content",
                out.display(),
                input.display(),
                want.unwrap_or_default().to_string_lossy()
            )));
        }
        return Ok(out.to_owned());
    }
    std::fs::create_dir_all(out).map_err(|e| Failure::Message(format!("--out {}: {e}", out.display())))?;
    let name = match audited_name(input) {
        Ok(path) => path.file_name().unwrap_or_default().to_owned(),
        // An audited copy keeps its name in another folder.
        Err(_) => input.file_name().unwrap_or_default().to_owned(),
    };
    Ok(out.join(name))
}

#[cfg(test)]
mod tests {
    use super::{audited_name, names_a_file, output_for};
    use std::path::Path;

    #[test]
    fn names_follow_the_input() {
        assert_eq!(audited_name(Path::new("a/plan.xlsx")).unwrap(), Path::new("a/plan.audited.xlsx"));
        assert_eq!(audited_name(Path::new("v1.2.xlsm")).unwrap(), Path::new("v1.2.audited.xlsm"));
        assert!(audited_name(Path::new("plan.audited.xlsx")).is_err());
        assert!(names_a_file(Path::new("x.XLSX")) && !names_a_file(Path::new("x.d")));
        assert!(output_for(Path::new("a.xlsx"), Some(Path::new("o.xlsx")), true).is_err());
        assert!(output_for(Path::new("a.xlsm"), Some(Path::new("o.xlsx")), false).is_err());
    }
}
