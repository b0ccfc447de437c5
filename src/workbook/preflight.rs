//! Checks of everything that has to hold before a spreadsheet library may see the file.
//!
//! Parts are read as they are inflated, so that memory stays small however large they claim to be.
//! Nothing outside the file is ever looked at: external addresses are reported, never followed.

use std::collections::BTreeSet;

use crate::package::Package;
use crate::problem::{Place, Problem, Result, Severity, WorkbookError};

mod sheet;
mod stream;
mod strings;
mod value;
mod workbook;

pub use sheet::{MAX_EXPANSION, MAX_SHARED};
pub use stream::MAX_TOKEN;
pub use strings::{MAX_CLAIM, MAX_FORMATS, MAX_STRINGS, MAX_STYLE_TEXT, STRING_COST};
pub(crate) use value::ERRORS;
pub use workbook::{MAX_NAMES, MAX_SHEETS};

use stream::Stream;

/// Checks a package before anything is read from it.
///
/// Every part is inflated to its end against its stated size and checksum. XML parts are UTF-8, well-formed,
/// without document types or entities of their own, nested and worded within limits. The main part names its
/// sheets once each, and each sheet's cells are in range, in order and once, with values that can be read in
/// one way only. Tables that a reader would allocate by what the file claims are held to what it holds.
///
/// **Returns**: warnings, in the order of the file.
/// **Errors**: all that was found, warnings too, in the order of the sheets. Codes: `damaged-zip`,
/// `bad-utf8`, `encoding`, `bad-xml`, `doctype`, `xml-depth`, `long-token`; `no-sheets`, `too-many-sheets`,
/// `bad-sheet`, `duplicate-sheet`, `macro-sheet`, `bad-name`, `duplicate-name`, `name-scope`,
/// `too-many-names`, `odd-layout`; `string-count`, `too-many-strings`, `too-many-formats`;
/// `two-sheet-data`, `out-of-range`, `duplicate-row`, `row-order`, `cell-row`, `duplicate-cell`,
/// `cell-order`, `odd-cell`, `odd-value`, `bad-value`, `bad-range`, `shared-formula`, `formula-size`.
pub fn preflight(package: &Package) -> Result<Vec<Problem>> {
    let mut problems = Vec::new();
    if let Some(origin) = package.origin() {
        problems.push(Problem::warning("values-only", Place::default(), origin.lost.join("; ")));
    }
    unsafe_names(package, &mut problems);
    let mut done = BTreeSet::new();
    let keep = |result: Result<()>, problems: &mut Vec<Problem>| {
        if let Err(error) = result {
            problems.extend_from_slice(error.problems());
        }
    };

    let main = package.workbook_part();
    let mut sheets = Vec::new();
    let read = workbook::check_workbook(package, &mut problems).map(|found| sheets = found);
    keep(read, &mut problems);
    done.insert(main.to_owned());

    let texts = workbook::in_folder(package, "sharedStrings.xml");
    let mut count = 0;
    let read = strings::check_strings(package, &texts).map(|found| count = found);
    keep(read, &mut problems);
    let styles = workbook::in_folder(package, "styles.xml");
    keep(strings::check_styles(package, &styles), &mut problems);
    done.extend([texts.to_lowercase(), styles.to_lowercase(), main.to_lowercase()]);

    for sheet in &sheets {
        let read = sheet::check_sheet(package, &sheet.part, &sheet.name, count, &mut problems);
        keep(read, &mut problems);
        done.insert(sheet.part.to_lowercase());
    }
    for part in package.parts().filter(|part| !done.contains(&part.to_lowercase())) {
        keep(check_part(package, part), &mut problems);
    }
    external_links(package, &mut problems);

    if problems.iter().any(|problem| problem.severity == Severity::Error) {
        return Err(WorkbookError::from(problems));
    }
    Ok(problems)
}

/// Whether a part is XML that a workbook's reader may look at. Other XML (custom data, pictures) is kept as
/// it is and only measured: it may lawfully be in another encoding.
fn is_xml(package: &Package, part: &str) -> bool {
    let name = part.to_lowercase();
    let folder = workbook::in_folder(package, "").to_lowercase();
    let kind = package.content_type(part).unwrap_or_default();
    name.ends_with(".rels")
        || name == "[content_types].xml"
        || (name.ends_with(".xml") && name.starts_with(&folder) && !name.starts_with("customxml/"))
        || (kind.ends_with("+xml") && !kind.starts_with("image/"))
}

fn check_part(package: &Package, part: &str) -> Result<()> {
    if is_xml(package, part) {
        return Stream::open(package, part)?.map_or(Ok(()), Stream::finish);
    }
    let Some(mut bytes) = package.part_reader(part)? else { return Ok(()) };
    std::io::copy(&mut bytes, &mut std::io::sink()).map_err(|e| stream::unreadable(part, &e))?;
    Ok(())
}

/// Entry names that would leave a folder if a program unpacked them there. Nothing is unpacked here.
fn unsafe_names(package: &Package, problems: &mut Vec<Problem>) {
    let unsafe_name = |name: &&str| {
        name.starts_with('/')
            || name.contains('\\')
            || name.contains(':')
            || name.split('/').any(|step| step == "..")
    };
    let names: Vec<&str> = package.entry_names().filter(unsafe_name).collect();
    if let Some(first) = names.first() {
        let message = format!(
            "{} of the file's entries have names that lead elsewhere when unpacked ({first}); they are copied as they are",
            names.len()
        );
        problems.push(Problem::warning("unsafe-name", Place::default(), message));
    }
}

/// Links to other files, apart from hyperlinks, which load nothing by themselves.
fn external_links(package: &Package, problems: &mut Vec<Problem>) {
    let mut found: Vec<String> = Vec::new();
    let sources = package.parts().filter_map(|part| {
        let (folder, name) = part.rsplit_once("_rels/")?;
        Some(format!("{folder}{}", name.strip_suffix(".rels")?))
    });
    for source in sources {
        let Ok(links) = package.relationships(&source) else { continue };
        let links = links.into_iter().filter(|link| link.external && !link.kind.ends_with("/hyperlink"));
        found.extend(links.map(|link| link.target));
    }
    if let Some(first) = found.first() {
        let first: String = first.chars().take(120).collect();
        let message =
            format!("the workbook refers to {} other files ({first}); they are not opened", found.len());
        problems.push(Problem::warning("external-link", Place::default(), message));
    }
}
