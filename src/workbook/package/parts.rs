//! How parts belong together: content types and relationships.

use std::collections::BTreeMap;

use quick_xml::events::Event;

use crate::problem::Result;
use crate::xml::{Scanner, attribute};

/// One relationship of a part.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Relationship {
    /// Its id in the source part.
    pub id: String,
    /// What it is, an address that ends in `/worksheet`, `/styles` and so on.
    pub kind: String,
    /// The part it leads to, as stored in the package if it is there; for external ones the address as it stands.
    pub target: String,
    /// It leads out of the package. It is never followed.
    pub external: bool,
}

/// The content types of a package.
#[derive(Default)]
pub(super) struct ContentTypes {
    defaults: BTreeMap<String, String>,
    overrides: BTreeMap<String, String>,
}

impl ContentTypes {
    pub(super) fn read(xml: &[u8]) -> Result<Self> {
        const PART: &str = "[Content_Types].xml";
        let mut types = ContentTypes::default();
        let mut scanner = Scanner::new(PART, xml)?;
        while let Some(token) = scanner.next()? {
            let (Event::Start(tag) | Event::Empty(tag)) = token.event else { continue };
            let Some(kind) = attribute(PART, &tag, "ContentType")? else { continue };
            match tag.local_name().as_ref() {
                b"Default" => {
                    if let Some(extension) = attribute(PART, &tag, "Extension")? {
                        types.defaults.insert(extension.to_lowercase(), kind);
                    }
                }
                b"Override" => {
                    if let Some(name) = attribute(PART, &tag, "PartName")? {
                        types.overrides.insert(super::key(&percent_decoded(&name)), kind);
                    }
                }
                _ => {}
            }
        }
        Ok(types)
    }

    pub(super) fn of(&self, name: &str) -> Option<String> {
        let name = super::key(name);
        let extension = || self.defaults.get(name.rsplit_once('.')?.1);
        self.overrides.get(&name).or_else(extension).cloned()
    }
}

/// The name of the part that holds a part's relationships; "" stands for the package.
pub fn relationships_part(part: &str) -> String {
    let (folder, name) = part.rsplit_once('/').map_or(("", part), |(folder, name)| (folder, name));
    let slash = if folder.is_empty() { "" } else { "/" };
    format!("{folder}{slash}_rels/{name}.rels")
}

/// The part name that a target means in the relationships of a part.
///
/// Absolute and relative targets, `..` (which does not lead out of the package), percent escapes and
/// backslashes are understood; a fragment is dropped, and a target that is nothing else is the part itself.
pub fn resolve_target(part: &str, target: &str) -> String {
    let target = target.split_once('#').map_or(target, |(path, _)| path);
    if target.is_empty() {
        return part.to_owned();
    }
    let target = percent_decoded(target).replace('\\', "/");
    let mut path: Vec<&str> = Vec::new();
    if !target.starts_with('/') {
        path.extend(part.split('/'));
        path.pop();
    }
    for step in target.split('/') {
        match step {
            "" | "." => {}
            ".." => {
                path.pop();
            }
            step => path.push(step),
        }
    }
    path.join("/")
}

fn percent_decoded(text: &str) -> String {
    let bytes = text.as_bytes();
    let mut out = Vec::with_capacity(bytes.len());
    let mut at = 0;
    while at < bytes.len() {
        let escaped = (bytes[at] == b'%')
            .then(|| bytes.get(at + 1..at + 3))
            .flatten()
            .filter(|hex| hex.iter().all(u8::is_ascii_hexdigit))
            .and_then(|hex| u8::from_str_radix(std::str::from_utf8(hex).ok()?, 16).ok());
        out.push(escaped.unwrap_or(bytes[at]));
        at += if escaped.is_some() { 3 } else { 1 };
    }
    String::from_utf8(out).unwrap_or_else(|_| text.to_owned())
}

pub(super) fn read_relationships(name: &str, part: &str, xml: &[u8]) -> Result<Vec<Relationship>> {
    let mut found = Vec::new();
    let mut scanner = Scanner::new(name, xml)?;
    while let Some(token) = scanner.next()? {
        let (Event::Start(tag) | Event::Empty(tag)) = token.event else { continue };
        if tag.local_name().as_ref() != b"Relationship" {
            continue;
        }
        let get =
            |local| Ok::<_, crate::problem::WorkbookError>(attribute(name, &tag, local)?.unwrap_or_default());
        let external = get("TargetMode")?.eq_ignore_ascii_case("external");
        let target = get("Target")?;
        let target = if external { target } else { resolve_target(part, &target) };
        found.push(Relationship { id: get("Id")?, kind: get("Type")?, target, external });
    }
    Ok(found)
}

/// Relationship types of the strict variant of the format have another root.
pub(super) fn is_strict_kind(kind: &str) -> bool {
    kind.starts_with("http://purl.oclc.org/ooxml/")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn targets_resolve_to_part_names() {
        let sheet = "xl/worksheets/sheet1.xml";
        let cases = [
            ("../styles.xml", "xl/styles.xml"),
            ("/xl/styles.xml", "xl/styles.xml"),
            ("a%20b.xml", "xl/worksheets/a b.xml"),
            ("..\\media\\a.png", "xl/media/a.png"),
            ("../../../../etc/passwd", "etc/passwd"),
            ("./x.xml#frag", "xl/worksheets/x.xml"),
            ("#Sheet1!A1", sheet),
            ("50%.xml", "xl/worksheets/50%.xml"),
        ];
        for (target, expected) in cases {
            assert_eq!(resolve_target(sheet, target), expected, "{target}");
        }
        assert_eq!(resolve_target("", "xl/workbook.xml"), "xl/workbook.xml");
        assert_eq!(relationships_part(""), "_rels/.rels");
        assert_eq!(relationships_part("xl/workbook.xml"), "xl/_rels/workbook.xml.rels");
    }
}
