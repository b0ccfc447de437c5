//! Notes on cells (comments): hence's own put beside those that are there, which stay byte for byte.
//!
//! A note stands in three parts: its text in the comments part, its box in a drawing of the old kind (VML), and both hang on
//! the sheet by relationships; the sheet itself names the drawing.

mod drawing;

use std::collections::BTreeSet;

use crate::package::{
    Changes, NewRelationship, Package, edit_content_types, edit_relationships, relationships_part,
};
use crate::problem::Result;
use crate::references::Cell;
use crate::splice::{Edits, Element, Kind, Tokens, bad_xml, escape, local, prefix};

use drawing::with_boxes;

/// Who wrote hence's notes.
pub const AUTHOR: &str = "hence check";
/// How every one of them begins, by which they are found again: some programs leave authors out when they save.
const BEGINS: &str = "hence check: ";

const MAIN: &str = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
const RELATIONS: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const COMMENTS_TYPE: &str = "application/vnd.openxmlformats-officedocument.spreadsheetml.comments+xml";
const DRAWING_TYPE: &str = "application/vnd.openxmlformats-officedocument.vmlDrawing";
/// What may follow the name of the drawing in a sheet, in the order of the schema.
const AFTER_DRAWING: [&str; 9] = [
    "legacyDrawingHF",
    "drawingHF",
    "picture",
    "oleObjects",
    "controls",
    "webPublishItems",
    "tableParts",
    "extLst",
    "AlternateContent",
];

/// A note for a cell.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Note {
    /// The cell.
    pub at: Cell,
    /// Its text.
    pub text: String,
}

/// Puts notes on cells of a sheet in the place of those that hence put there before; adds to `changes`.
///
/// **Arguments**: the sheet by its part; at most one note a cell.
/// **Returns** the cells that have a note of somebody else, which are left as they are.
/// **Errors**: `bad-xml` where the sheet's comments or their drawing cannot be read.
pub fn put(package: &Package, sheet: &str, notes: &[Note], changes: &mut Changes) -> Result<BTreeSet<Cell>> {
    let links = package.relationships(sheet)?;
    let of_kind = |kind: &str| links.iter().find(|link| !link.external && link.kind.ends_with(kind));
    let comments = of_kind("/comments").map(|link| link.target.clone());
    let xml = current(package, changes, sheet)?;
    let drawing = drawing_of(&xml)?;
    let drawing =
        drawing.and_then(|id| links.iter().find(|link| link.id == id)).map(|link| link.target.clone());
    if notes.is_empty() && comments.is_none() {
        return Ok(BTreeSet::new());
    }

    let old = match &comments {
        Some(part) => current(package, changes, part)?,
        None => format!(
            "<?xml version=\"1.0\" encoding=\"UTF-8\" standalone=\"yes\"?>\n<comments xmlns=\"{MAIN}\"><authors/>\
             <commentList/></comments>"
        )
        .into_bytes(),
    };
    let found = Comments::read(&old)?;
    let new: Vec<&Note> = notes.iter().filter(|note| !found.others.contains(&note.at)).collect();
    let kept = notes.iter().map(|note| note.at).filter(|at| found.others.contains(at)).collect();
    if new.is_empty() && found.own.is_empty() {
        return Ok(kept);
    }
    let written = found.written(&old, &new)?;
    let cells: Vec<Cell> = new.iter().map(|note| note.at).collect();
    let boxes = drawing.as_ref().map(|part| current(package, changes, part)).transpose()?;
    let boxes = with_boxes(boxes.as_deref(), &found.own, &cells)?;

    let mut added = Vec::new();
    match &comments {
        Some(part) => _ = changes.replace.insert(part.clone(), written),
        None => {
            let part = free(package, changes, "comments", "xml");
            types(package, changes, &[(&part, COMMENTS_TYPE)], &[])?;
            changes.add.push((part.clone(), written));
            added.push(("comments", part));
        }
    }
    types(package, changes, &[], &[("vml", DRAWING_TYPE)])?;
    let mut drawing_added = false;
    match &drawing {
        Some(part) => _ = changes.replace.insert(part.clone(), boxes),
        None => {
            let part = free(package, changes, "drawings/vmlDrawing", "vml");
            changes.add.push((part.clone(), boxes));
            added.push(("vmlDrawing", part));
            drawing_added = true;
        }
    }
    let ids = link(package, changes, sheet, &added)?;
    if drawing_added && let Some(id) = ids.last() {
        changes.replace.insert(sheet.to_owned(), with_drawing(&xml, id)?);
    }
    Ok(kept)
}

/// A part as it will be, the changes so far made.
fn current(package: &Package, changes: &Changes, part: &str) -> Result<Vec<u8>> {
    let added = changes.add.iter().find(|(name, _)| name == part).map(|(_, bytes)| bytes);
    match changes.replace.get(part).or(added) {
        Some(bytes) => Ok(bytes.clone()),
        None => Ok(package.part(part)?.unwrap_or_default()),
    }
}

/// The first name of a kind of part that is free.
fn free(package: &Package, changes: &Changes, stem: &str, extension: &str) -> String {
    let workbook = package.workbook_part();
    let folder = workbook.rfind('/').map_or("", |i| &workbook[..=i]);
    let names = (1_u32..).map(|n| format!("{folder}{stem}{n}.{extension}"));
    let is_free = |name: &String| {
        !package.has(name) && changes.add.iter().all(|(other, _)| !other.eq_ignore_ascii_case(name))
    };
    names.into_iter().find(is_free).unwrap_or_default()
}

fn types(
    package: &Package,
    changes: &mut Changes,
    overrides: &[(&str, &str)],
    defaults: &[(&str, &str)],
) -> Result<()> {
    const PART: &str = "[Content_Types].xml";
    let xml = current(package, changes, PART)?;
    let new = edit_content_types(&xml, &[], overrides, defaults)?;
    if new != xml {
        changes.replace.insert(PART.to_owned(), new);
    }
    Ok(())
}

/// Relates new parts to a sheet; their ids.
fn link(
    package: &Package,
    changes: &mut Changes,
    sheet: &str,
    parts: &[(&str, String)],
) -> Result<Vec<String>> {
    if parts.is_empty() {
        return Ok(Vec::new());
    }
    let name = relationships_part(sheet);
    let there = package.relationships(sheet)?;
    let free = (1_u32..).map(|n| format!("rId{n}")).filter(|id| there.iter().all(|link| link.id != *id));
    let ids: Vec<String> = free.take(parts.len()).collect();
    let new: Vec<(String, String, String)> = parts
        .iter()
        .zip(&ids)
        .map(|((kind, part), id)| (id.clone(), format!("{RELATIONS}/{kind}"), format!("/{part}")))
        .collect();
    let new: Vec<NewRelationship> =
        new.iter().map(|(id, kind, target)| NewRelationship { id, kind, target }).collect();
    if package.has(&name) {
        let xml = current(package, changes, &name)?;
        changes.replace.insert(name, edit_relationships(&xml, &[], &new)?);
    } else {
        let empty = b"<?xml version=\"1.0\" encoding=\"UTF-8\" standalone=\"yes\"?>\n<Relationships \
            xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\"/>";
        changes.add.push((name, edit_relationships(empty, &[], &new)?));
    }
    Ok(ids)
}

/// The id of the drawing of the old kind that a sheet names.
fn drawing_of(xml: &[u8]) -> Result<Option<String>> {
    let mut tokens = Tokens::new(xml)?;
    while let Some(token) = tokens.next()? {
        if matches!(token.kind, Kind::Open | Kind::Empty) && local(token.name()) == "legacyDrawing" {
            let attributes = crate::splice::all_attributes(token.raw)?;
            return Ok(attributes
                .into_iter()
                .find(|(name, _)| local(name) == "id")
                .map(|(_, id)| id.into_owned()));
        }
    }
    Ok(None)
}

/// The sheet with the drawing named at the place that the schema gives it.
fn with_drawing(xml: &[u8], id: &str) -> Result<Vec<u8>> {
    let mut tokens = Tokens::new(xml)?;
    let (mut place, mut own, mut past) = (None, "", false);
    while let Some(token) = tokens.next()? {
        let depth = tokens.depth() + usize::from(token.kind == Kind::Empty);
        match (token.kind, depth) {
            (Kind::Open, 1) => own = prefix(token.name()),
            (Kind::Open | Kind::Empty, 2) => {
                past |= local(token.name()) == "sheetData";
                if past && AFTER_DRAWING.contains(&local(token.name())) {
                    place = Some(token.start);
                    break;
                }
            }
            (Kind::Close, 0) => place = Some(token.start),
            _ => {}
        }
    }
    let place = place.ok_or_else(|| bad_xml("the sheet has no end"))?;
    let mut edits = Edits::default();
    edits.insert(place, format!("<{own}legacyDrawing xmlns:r=\"{RELATIONS}\" r:id=\"{id}\"/>"));
    edits.apply(xml)
}

/// What stands in a comments part.
struct Comments {
    /// The number of hence among the authors, if it is one; else how many there are.
    author: Option<usize>,
    authors: usize,
    own: BTreeSet<Cell>,
    others: BTreeSet<Cell>,
}

impl Comments {
    fn read(xml: &[u8]) -> Result<Comments> {
        let root = Element::root(xml)?;
        let authors = root.child("authors").ok_or_else(|| bad_xml("the comments have no authors"))?;
        let text = |element: &Element| String::from_utf8_lossy(&xml[element.inner.clone()]).into_owned();
        let author = authors.children.iter().position(|author| text(author) == AUTHOR);
        let mut found = Comments {
            author,
            authors: authors.children.len(),
            own: BTreeSet::new(),
            others: BTreeSet::new(),
        };
        for comment in root.child("commentList").iter().flat_map(|list| &list.children) {
            let Some(at) = cell(comment)? else { continue };
            if is_own(xml, comment)? {
                found.own.insert(at)
            } else {
                found.others.insert(at)
            };
        }
        Ok(found)
    }

    /// The part without hence's earlier notes and with the new ones.
    fn written(&self, xml: &[u8], notes: &[&Note]) -> Result<Vec<u8>> {
        let root = Element::root(xml)?;
        let own = prefix(root.name());
        let mut edits = Edits::default();
        let author = self.author.unwrap_or(self.authors);
        if let (None, Some(authors)) = (self.author, root.child("authors")) {
            authors.append(&mut edits, None, &format!("<{own}author>{AUTHOR}</{own}author>"));
        }
        let list = root.child("commentList").ok_or_else(|| bad_xml("the comments have no list"))?;
        for comment in &list.children {
            if is_own(xml, comment)? {
                edits.replace(comment.span.clone(), "");
            }
        }
        let mut new = String::new();
        for note in notes {
            let text = escape(&format!("{BEGINS}{}", note.text))
                .ok_or_else(|| bad_xml("a note holds a character that XML does not allow"))?;
            new.push_str(&format!(
                "<{own}comment ref=\"{}\" authorId=\"{author}\"><{own}text><{own}t xml:space=\"preserve\">{text}</{own}t>\
                 </{own}text></{own}comment>",
                note.at
            ));
        }
        list.append(&mut edits, None, &new);
        edits.apply(xml)
    }
}

/// Whether hence wrote a note.
fn is_own(xml: &[u8], comment: &Element) -> Result<bool> {
    let mut tokens = Tokens::new(&xml[comment.span.clone()])?;
    let mut text = String::new();
    while let Some(token) = tokens.next()? {
        if token.kind == Kind::Text {
            text.push_str(&token.characters()?);
        }
        if text.len() > BEGINS.len() {
            break;
        }
    }
    Ok(text.trim_start().starts_with(BEGINS))
}

fn cell(comment: &Element) -> Result<Option<Cell>> {
    Ok(comment.attribute("ref")?.and_then(|at| at.trim().parse().ok()))
}
