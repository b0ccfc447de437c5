//! The boxes of notes, in a drawing of the old kind (VML), of which only whole shapes are put in or taken out.

use std::collections::BTreeSet;

use crate::problem::Result;
use crate::references::Cell;
use crate::splice::{Edits, Element, bad_xml};

/// Shapes of one drawing are numbered in blocks of so many.
const BLOCK: u32 = 1024;

/// The drawing without the boxes of some cells and with those of others; a new one where there is none.
pub(super) fn with_boxes(xml: Option<&[u8]>, remove: &BTreeSet<Cell>, add: &[Cell]) -> Result<Vec<u8>> {
    let empty = "<xml xmlns:v=\"urn:schemas-microsoft-com:vml\" xmlns:o=\"urn:schemas-microsoft-com:office:office\" \
         xmlns:x=\"urn:schemas-microsoft-com:office:excel\">\n<o:shapelayout v:ext=\"edit\"><o:idmap v:ext=\"edit\" \
         data=\"1\"/></o:shapelayout>\n</xml>";
    let xml = xml.unwrap_or(empty.as_bytes());
    let root = Element::root(xml)
        .map_err(|_| bad_xml("the drawing that holds the sheet's notes is no well-formed XML"))?;
    let text = |element: &Element| String::from_utf8_lossy(&xml[element.inner.clone()]).trim().to_owned();
    let mut edits = Edits::default();
    let mut kept = Vec::new();
    for shape in root.children.iter().filter(|child| child.local() == "shape") {
        let Some(data) = shape.child("ClientData") else {
            kept.push(shape);
            continue;
        };
        let number = |name: &str| data.child(name).and_then(|element| text(element).parse::<u32>().ok());
        let is_note = data.attribute("ObjectType")?.as_deref() == Some("Note");
        if let (true, Some(row), Some(col)) = (is_note, number("Row"), number("Column"))
            && remove.contains(&Cell::new(row, col))
        {
            edits.replace(shape.span.clone(), "");
        } else {
            kept.push(shape);
        }
    }
    let mut new = String::new();
    let has_type = |child: &Element| -> Result<bool> {
        Ok(child.local() == "shapetype" && child.attribute("id")?.as_deref() == Some("_x0000_t202"))
    };
    let mut typed = false;
    for child in &root.children {
        typed |= has_type(child)?;
    }
    if !typed && !add.is_empty() {
        new.push_str(
            "<v:shapetype id=\"_x0000_t202\" coordsize=\"21600,21600\" o:spt=\"202\" path=\"m,l,21600r21600,l21600,xe\">\
             <v:stroke joinstyle=\"miter\"/><v:path gradientshapeok=\"t\" o:connecttype=\"rect\"/></v:shapetype>\n",
        );
    }
    let first = next_number(&root, &kept)?;
    for (number, cell) in (first..).zip(add) {
        new.push_str(&shape(number, *cell));
    }
    root.append(&mut edits, None, &new);
    edits.apply(xml)
}

/// The first shape number after those in use.
fn next_number(root: &Element, shapes: &[&Element]) -> Result<u32> {
    let mut largest = None;
    for shape in shapes {
        let id = shape.attribute("id")?;
        let number = id.as_deref().and_then(|id| id.strip_prefix("_x0000_s")?.parse::<u32>().ok());
        largest = largest.max(number);
    }
    let map = root.at(&["shapelayout", "idmap"]);
    let block = match map {
        Some(map) => map
            .attribute("data")?
            .and_then(|d| d.split(',').next().and_then(|n| n.trim().parse::<u32>().ok())),
        None => None,
    };
    Ok(largest.map_or(block.unwrap_or(1) * BLOCK + 1, |n| n + 1))
}

fn shape(number: u32, cell: Cell) -> String {
    let (row, col) = (cell.row, cell.col);
    let top = row.saturating_sub(1);
    format!(
        "<v:shape xmlns:v=\"urn:schemas-microsoft-com:vml\" xmlns:o=\"urn:schemas-microsoft-com:office:office\" \
         xmlns:x=\"urn:schemas-microsoft-com:office:excel\" id=\"_x0000_s{number}\" type=\"#_x0000_t202\" \
         style=\"position:absolute;margin-left:60pt;margin-top:2pt;width:260pt;height:120pt;z-index:{number};\
         visibility:hidden\" fillcolor=\"#ffffe1\" o:insetmode=\"auto\"><v:fill color2=\"#ffffe1\"/><v:shadow on=\"t\" \
         color=\"black\" obscured=\"t\"/><v:path o:connecttype=\"none\"/><v:textbox style=\"mso-direction-alt:auto\"><div \
         style=\"text-align:left\"></div></v:textbox><x:ClientData ObjectType=\"Note\"><x:MoveWithCells/><x:SizeWithCells/>\
         <x:Anchor>{}, 15, {top}, 2, {}, 15, {}, 4</x:Anchor><x:AutoFill>False</x:AutoFill><x:Row>{row}</x:Row>\
         <x:Column>{col}</x:Column></x:ClientData></v:shape>",
        col + 1,
        col + 5,
        top + 8,
    )
}
