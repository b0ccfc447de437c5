//! Edits of content types and relationships, spliced into their text so that all else stays as it was.

use std::ops::Range;

use quick_xml::events::{BytesStart, Event};

use super::key;
use crate::problem::Result;
use crate::xml::{Scanner, attribute, bad_xml, escape_attribute};

/// A new relationship.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct NewRelationship<'a> {
    /// Its id, unique in the part.
    pub id: &'a str,
    /// What it is, an address.
    pub kind: &'a str,
    /// Where it leads, relative to the source's folder or with a leading slash.
    pub target: &'a str,
}

/// The content types with some overrides taken out and others put in.
///
/// **Arguments**: part names with or without a leading slash; additions are (part name or extension,
/// content type). A default that is there already is left as it is.
/// **Errors**: those of [`Scanner`].
pub fn edit_content_types(
    xml: &[u8],
    remove_overrides: &[&str],
    add_overrides: &[(&str, &str)],
    add_defaults: &[(&str, &str)],
) -> Result<Vec<u8>> {
    const PART: &str = "[Content_Types].xml";
    let removed: Vec<String> = remove_overrides.iter().map(|name| key(name)).collect();
    let mut there = Vec::new();
    let list = read_list(PART, xml, |tag| {
        if tag.local_name().as_ref() == b"Default" {
            there.extend(attribute(PART, tag, "Extension")?.map(|e| e.to_ascii_lowercase()));
        }
        Ok(tag.local_name().as_ref() == b"Override"
            && attribute(PART, tag, "PartName")?.is_some_and(|name| removed.contains(&key(&name))))
    })?;
    let mut new = Vec::new();
    for (extension, kind) in add_defaults {
        if !there.contains(&extension.to_ascii_lowercase()) {
            new.push((
                "Default",
                vec![("Extension", (*extension).to_owned()), ("ContentType", (*kind).to_owned())],
            ));
        }
    }
    for (name, kind) in add_overrides {
        let name = format!("/{}", name.trim_start_matches('/'));
        new.push(("Override", vec![("PartName", name), ("ContentType", (*kind).to_owned())]));
    }
    Ok(list.splice(xml, &new))
}

/// A relationships part with some taken out, by id, and others put in at the end.
///
/// **Errors**: those of [`Scanner`].
pub fn edit_relationships(xml: &[u8], remove_ids: &[&str], add: &[NewRelationship]) -> Result<Vec<u8>> {
    const PART: &str = "the relationships";
    let list = read_list(PART, xml, |tag| {
        Ok(attribute(PART, tag, "Id")?.is_some_and(|id| remove_ids.contains(&id.as_str())))
    })?;
    let new: Vec<_> = add
        .iter()
        .map(|new| {
            let attributes = [("Id", new.id), ("Type", new.kind), ("Target", new.target)];
            ("Relationship", attributes.map(|(name, value)| (name, value.to_owned())).to_vec())
        })
        .collect();
    Ok(list.splice(xml, &new))
}

/// A flat list of elements under one root.
struct List {
    prefix: String,
    removed: Vec<Range<usize>>,
    end: Range<usize>,
    /// The root was `<Root/>`: additions need it opened.
    empty: bool,
    root: String,
}

fn read_list(part: &str, xml: &[u8], mut remove: impl FnMut(&BytesStart) -> Result<bool>) -> Result<List> {
    let mut scanner = Scanner::new(part, xml)?;
    let mut list =
        List { prefix: String::new(), removed: Vec::new(), end: 0..0, empty: false, root: String::new() };
    let mut open: Option<usize> = None;
    while let Some(token) = scanner.next()? {
        match token.event {
            Event::Start(tag) | Event::Empty(tag) if list.root.is_empty() => {
                let name = String::from_utf8_lossy(tag.name().into_inner()).into_owned();
                list.prefix = name.split_once(':').map_or(String::new(), |(prefix, _)| format!("{prefix}:"));
                list.root = name;
                if scanner.depth() == 0 {
                    list.empty = true;
                    list.end = token.span;
                }
            }
            Event::Empty(tag) if scanner.depth() == 1 && remove(&tag)? => list.removed.push(token.span),
            Event::Start(tag) if scanner.depth() == 2 && remove(&tag)? => open = Some(token.span.start),
            Event::End(_) if scanner.depth() == 1 => {
                list.removed.extend(open.take().map(|start| start..token.span.end));
            }
            Event::End(_) if scanner.depth() == 0 => list.end = token.span,
            _ => {}
        }
    }
    if list.end.is_empty() {
        return Err(bad_xml(part, 0, "no root element").into());
    }
    Ok(list)
}

impl List {
    fn splice(&self, xml: &[u8], new: &[(&str, Vec<(&str, String)>)]) -> Vec<u8> {
        let mut out = Vec::with_capacity(xml.len() + 160 * new.len());
        let mut from = 0;
        for span in &self.removed {
            out.extend_from_slice(&xml[from..span.start]);
            from = span.end;
        }
        out.extend_from_slice(&xml[from..self.end.start]);
        if self.empty && !new.is_empty() {
            let open = xml[self.end.clone()].strip_suffix(b"/>").unwrap_or_default();
            out.extend_from_slice(open.trim_ascii_end());
            out.push(b'>');
        }
        for (element, attributes) in new {
            out.extend_from_slice(format!("<{}{element}", self.prefix).as_bytes());
            for (name, value) in attributes {
                out.extend_from_slice(format!(" {name}=\"{}\"", escape_attribute(value)).as_bytes());
            }
            out.extend_from_slice(b"/>");
        }
        if self.empty && !new.is_empty() {
            out.extend_from_slice(format!("</{}>", self.root).as_bytes());
            out.extend_from_slice(&xml[self.end.end..]);
        } else {
            out.extend_from_slice(&xml[self.end.start..]);
        }
        out
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn text(bytes: Result<Vec<u8>>) -> String {
        String::from_utf8(bytes.unwrap()).unwrap()
    }

    #[test]
    fn content_types_keep_all_else() {
        let xml = b"<?xml version='1.0'?>\n<ct:Types xmlns:ct='urn:t'> <ct:Default Extension='XML' ContentType='a'/>\
            <ct:Override PartName='/xl/calcChain.xml' ContentType='c'></ct:Override>\n</ct:Types>\n";
        let edited = text(edit_content_types(
            xml,
            &["XL/calcchain.xml"],
            &[("xl/worksheets/sheet9.xml", "s&t")],
            &[("xml", "ignored"), ("rels", "r")],
        ));
        assert_eq!(
            edited,
            "<?xml version='1.0'?>\n<ct:Types xmlns:ct='urn:t'> <ct:Default Extension='XML' ContentType='a'/>\n\
             <ct:Default Extension=\"rels\" ContentType=\"r\"/>\
             <ct:Override PartName=\"/xl/worksheets/sheet9.xml\" ContentType=\"s&amp;t\"/></ct:Types>\n"
        );
        assert_eq!(edit_content_types(xml, &[], &[], &[]).unwrap(), xml);
    }

    #[test]
    fn relationships_by_id() {
        let new = [NewRelationship { id: "rId9", kind: "k", target: "worksheets/a.xml" }];
        let xml =
            b"<Relationships xmlns=\"u\"><Relationship Id=\"rId1\" Type=\"k\" Target=\"a\"/></Relationships>";
        assert_eq!(
            text(edit_relationships(xml, &["rId1"], &new)),
            "<Relationships xmlns=\"u\"><Relationship Id=\"rId9\" Type=\"k\" Target=\"worksheets/a.xml\"/></Relationships>"
        );
        assert_eq!(
            text(edit_relationships(b"<Relationships xmlns=\"u\" />", &[], &new)),
            "<Relationships xmlns=\"u\"><Relationship Id=\"rId9\" Type=\"k\" Target=\"worksheets/a.xml\"/></Relationships>"
        );
    }
}
