//! Where one file stands as seen from another, as a link in a workbook says it.

use std::path::{Component, Path};

/// The longest text that a formula may hold in quotes.
const MAX_QUOTED: usize = 255;

/// The path from the folder of `from` to `to`, with forward slashes; none where the two share no root.
fn relative(from: &Path, to: &Path) -> Option<String> {
    let (from, to) = (std::path::absolute(from).ok()?, std::path::absolute(to).ok()?);
    let (from, to): (Vec<Component>, Vec<Component>) =
        (from.parent()?.components().collect(), to.components().collect());
    let shared = from.iter().zip(&to).take_while(|(a, b)| a == b).count();
    if shared == 0 {
        return None;
    }
    let up = std::iter::repeat_n("..".into(), from.len() - shared);
    let down = to[shared..].iter().map(|part| part.as_os_str().to_string_lossy());
    Some(up.chain(down).collect::<Vec<_>>().join("/"))
}

/// A formula that opens `to` from a workbook at `from`, and shows `text`; none where no formula can hold it.
pub(super) fn formula(from: &Path, to: &Path, text: &str) -> Option<String> {
    let path = relative(from, to)?;
    let fits = |text: &str| text.encode_utf16().count() <= MAX_QUOTED;
    let quoted = |text: &str| text.replace('"', "\"\"");
    (fits(&path) && fits(text)).then(|| format!("HYPERLINK(\"{}\",\"{}\")", quoted(&path), quoted(text)))
}

#[cfg(test)]
mod tests {
    use super::{formula, relative};
    use std::path::Path;

    #[test]
    fn paths_go_up_and_down() {
        let path = |from: &str, to: &str| relative(Path::new(from), Path::new(to)).unwrap();
        assert_eq!(path("/a/summary.xlsx", "/a/out/x.audited.xlsx"), "out/x.audited.xlsx");
        assert_eq!(path("/a/b/summary.xlsx", "/a/out/x.xlsx"), "../out/x.xlsx");
        assert_eq!(path("summary.xlsx", "out/x.xlsx"), "out/x.xlsx");
    }

    #[test]
    fn quotes_are_doubled_and_long_paths_left_out() {
        let (from, to) = (Path::new("/s.xlsx"), Path::new("/a\"b.xlsx"));
        assert_eq!(formula(from, to, "a\"b").unwrap(), "HYPERLINK(\"a\"\"b.xlsx\",\"a\"\"b\")");
        let long = format!("/{}.xlsx", "x".repeat(255));
        assert_eq!(formula(from, Path::new(&long), "x"), None);
    }
}
