//! Where the sheets, names, views and the calculation settings stand in a workbook part.

use std::ops::Range;

use quick_xml::events::{BytesStart, Event};

use super::{RELATIONSHIPS, no_sheets};
use crate::problem::Result;
use crate::xml::{Scanner, attribute, bad_xml};

const PART: &str = "the workbook part";

/// An element: where its tags and its attributes are.
#[derive(Clone, Debug, Default)]
pub(super) struct Tag {
    /// The start tag.
    pub(super) open: Range<usize>,
    /// From the start tag to the end tag.
    pub(super) whole: Range<usize>,
    /// It has no end tag.
    pub(super) empty: bool,
    /// Where the names and the values of its attributes stand.
    pub(super) attributes: Vec<(Range<usize>, Range<usize>)>,
}

/// A `<sheet>`.
pub(super) struct SheetTag {
    pub(super) tag: Tag,
    pub(super) name: String,
    pub(super) rel_id: String,
    pub(super) id: u32,
}

/// A `<definedName>`.
pub(super) struct NameTag {
    pub(super) tag: Tag,
    pub(super) name: String,
    pub(super) scope: Option<usize>,
}

/// Where things stand in a workbook part.
#[derive(Default)]
pub(super) struct Outline {
    /// The prefix of its elements, with the colon.
    pub(super) prefix: String,
    /// The prefix of relationship ids in scope where sheets are listed.
    pub(super) rel_prefix: Option<String>,
    pub(super) sheets_list: Tag,
    pub(super) sheets: Vec<SheetTag>,
    pub(super) names_list: Option<Tag>,
    pub(super) names: Vec<NameTag>,
    /// Where a list of names would go.
    pub(super) names_place: usize,
    pub(super) calculation: Option<Tag>,
    /// The `<workbookView>`s, with their first and active tabs.
    pub(super) views: Vec<(Tag, Option<usize>, Option<usize>)>,
}

impl Outline {
    /// Reads it.
    pub(super) fn read(xml: &[u8]) -> Result<Outline> {
        let mut book = Outline::default();
        let mut scanner = Scanner::new(PART, xml)?;
        let mut section: Vec<u8> = Vec::new();
        let mut open: Option<Tag> = None;
        while let Some(token) = scanner.next()? {
            match &token.event {
                Event::Start(start) | Event::Empty(start) => {
                    let empty = matches!(token.event, Event::Empty(_));
                    let depth = scanner.depth() + usize::from(empty);
                    if depth > 3 {
                        continue;
                    }
                    let tag = Tag::read(xml, start, token.span, empty)?;
                    let local = start.local_name();
                    match depth {
                        1 => {
                            let name = start.name();
                            let prefix = name.as_ref().len() - local.as_ref().len();
                            book.prefix = String::from_utf8_lossy(&name.as_ref()[..prefix]).into_owned();
                            book.see_prefixes(start)?;
                        }
                        2 => {
                            section = local.as_ref().to_vec();
                            if section == b"sheets" {
                                book.see_prefixes(start)?;
                            }
                            if empty {
                                book.close_section(&section, tag);
                            } else {
                                open = Some(tag);
                            }
                        }
                        _ => book.see_item(&section, local.as_ref(), start, tag)?,
                    }
                }
                Event::End(_) if scanner.depth() == 1 => {
                    if let Some(mut tag) = open.take() {
                        tag.whole.end = token.span.end;
                        book.close_section(&section, tag);
                    }
                }
                Event::End(_) if scanner.depth() == 2 && section == b"definedNames" => {
                    if let Some(name) = book.names.last_mut() {
                        name.tag.whole.end = token.span.end;
                    }
                }
                Event::End(_) if scanner.depth() == 2 && section == b"sheets" => {
                    if let Some(sheet) = book.sheets.last_mut() {
                        sheet.tag.whole.end = token.span.end;
                    }
                }
                _ => {}
            }
        }
        if book.sheets.is_empty() {
            return Err(no_sheets());
        }
        Ok(book)
    }

    /// Notes a prefix bound to relationship ids.
    fn see_prefixes(&mut self, start: &BytesStart<'_>) -> Result<()> {
        for found in start.attributes().with_checks(false).flatten() {
            if let Some(prefix) = found.key.as_ref().strip_prefix(b"xmlns:")
                && found.value.as_ref() == RELATIONSHIPS.as_bytes()
            {
                self.rel_prefix = Some(String::from_utf8_lossy(prefix).into_owned());
            }
        }
        Ok(())
    }

    fn close_section(&mut self, section: &[u8], tag: Tag) {
        match section {
            b"sheets" => {
                self.names_place = tag.whole.end;
                self.sheets_list = tag;
            }
            b"functionGroups" | b"externalReferences" => self.names_place = tag.whole.end,
            b"definedNames" => self.names_list = Some(tag),
            b"calcPr" => self.calculation = Some(tag),
            _ => {}
        }
    }

    fn see_item(&mut self, section: &[u8], local: &[u8], start: &BytesStart<'_>, tag: Tag) -> Result<()> {
        let number = |name| -> Result<Option<usize>> {
            Ok(attribute(PART, start, name)?.and_then(|text| text.trim().parse().ok()))
        };
        let text = |name| -> Result<String> { Ok(attribute(PART, start, name)?.unwrap_or_default()) };
        match (section, local) {
            (b"sheets", b"sheet") => {
                let id = number("sheetId")?.and_then(|id| id.try_into().ok()).unwrap_or(0);
                self.sheets.push(SheetTag { tag, name: text("name")?, rel_id: text("id")?, id });
            }
            (b"definedNames", b"definedName") => {
                let scope = number("localSheetId")?;
                self.names.push(NameTag { tag, name: text("name")?, scope });
            }
            (b"bookViews", b"workbookView") => {
                self.views.push((tag, number("firstSheet")?, number("activeTab")?))
            }
            _ => {}
        }
        Ok(())
    }
}

impl Tag {
    fn read(xml: &[u8], start: &BytesStart<'_>, span: Range<usize>, empty: bool) -> Result<Tag> {
        let mut attributes = Vec::new();
        for found in start.attributes().with_checks(false) {
            let found = found.map_err(|e| bad_xml(PART, span.start as u64, &e.to_string()))?;
            let places = (position(xml, &span, found.key.as_ref()), position(xml, &span, &found.value));
            if let (Some(key), Some(value)) = places {
                attributes.push((key, value));
            }
        }
        Ok(Tag { open: span.clone(), whole: span, empty, attributes })
    }
}

/// Where a value that the reader borrowed from the text stands in it.
fn position(xml: &[u8], span: &Range<usize>, value: &[u8]) -> Option<Range<usize>> {
    let start = (value.as_ptr() as usize).checked_sub(xml.as_ptr() as usize)?;
    let end = start + value.len();
    (span.start <= start && end <= span.end).then_some(start..end)
}
