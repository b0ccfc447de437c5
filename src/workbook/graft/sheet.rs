//! A worksheet made by xlsxwriter, adapted to another workbook's strings and styles.

use crate::problem::Result;
use crate::splice::{Edits, Element, Kind, Token, Tokens, attribute, bad_xml, with_attribute};
use crate::styles::StyleMap;

/// The content of each shared string, as it stands in the part.
pub(super) fn strings(xml: &[u8]) -> Result<Vec<String>> {
    let root = Element::root(xml)?;
    let text = |element: &Element| String::from_utf8_lossy(&xml[element.inner.clone()]).into_owned();
    Ok(root.children.iter().filter(|child| child.local() == "si").map(text).collect())
}

/// The worksheet with inline strings and the other workbook's formats, and not selected.
pub(super) fn adapted(xml: &[u8], strings: &[String], styles: &StyleMap) -> Result<Vec<u8>> {
    let mut tokens = Tokens::new(xml)?;
    let mut edits = Edits::default();
    let mut shared = false;
    let mut value: Option<(usize, String)> = None;
    while let Some(token) = tokens.next()? {
        match token.kind {
            Kind::Open | Kind::Empty => match token.name() {
                "c" => {
                    shared = attribute(token.raw, "t")?.as_deref() == Some("s");
                    let kind = if shared { Some("inlineStr") } else { None };
                    let tag = format_of(token, "s", true, styles)?;
                    let tag = kind.map_or(Ok(tag.clone()), |kind| with_attribute(&tag, "t", Some(kind)))?;
                    edits.replace(token.span(), tag);
                }
                "v" if shared => value = Some((token.start, String::new())),
                "row" => edits.replace(token.span(), format_of(token, "s", false, styles)?),
                "col" => edits.replace(token.span(), format_of(token, "style", false, styles)?),
                "sheetView" => edits.replace(token.span(), with_attribute(token.raw, "tabSelected", None)?),
                "cfRule" => {
                    if let Some(old) = attribute(token.raw, "dxfId")? {
                        let new = old.parse().ok().and_then(|old| styles.dxf(old));
                        let new = new.ok_or_else(|| bad_xml(format!("format {old} is missing")))?;
                        let tag = with_attribute(token.raw, "dxfId", Some(&new.to_string()))?;
                        edits.replace(token.span(), tag);
                    }
                }
                _ => {}
            },
            Kind::Text => {
                if let Some((_, index)) = &mut value {
                    index.push_str(token.raw);
                }
            }
            Kind::Close if token.name() == "v" => {
                if let Some((start, index)) = value.take() {
                    let text = index.trim().parse::<usize>().ok().and_then(|i| strings.get(i));
                    let text = text.ok_or_else(|| bad_xml(format!("shared string {index} is missing")))?;
                    edits.replace(start..token.span().end, format!("<is>{text}</is>"));
                }
            }
            Kind::Close | Kind::Other => {}
        }
    }
    edits.apply(xml)
}

/// The tag with its cell format translated. A cell without one had the first, which may be another now.
fn format_of(token: Token, name: &str, cell: bool, styles: &StyleMap) -> Result<String> {
    let old = attribute(token.raw, name)?;
    let Some(old) = old.as_deref().or(cell.then_some("0")) else { return Ok(token.raw.to_owned()) };
    let new = old.parse().ok().and_then(|old| styles.xf(old));
    let new = new.ok_or_else(|| bad_xml(format!("cell format {old} is missing")))?;
    with_attribute(token.raw, name, (new != 0).then(|| new.to_string()).as_deref())
}
