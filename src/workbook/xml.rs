//! Reading XML parts by position: events with the bytes they came from, attributes, escapes.
//!
//! A part is never rebuilt from a tree. What changes is spliced into its text, so every reader here says
//! where a thing begins and ends. Document type declarations and entities of one's own are refused.

use std::borrow::Cow;
use std::ops::Range;

use memchr::memmem;
use quick_xml::events::{BytesStart, Event};
use quick_xml::{Reader, XmlVersion};

use crate::problem::{Place, Problem, Result};

/// What every formula element of a sheet part holds, and hardly anything else does.
pub(crate) const FORMULA_MARKS: &[&str] = &["<f", ":f"];

/// Elements inside elements, at most. Parts that spreadsheet programs write stay below 50.
pub const MAX_DEPTH: usize = 256;

/// The events of a part held in memory, each with its place in the bytes.
pub struct Scanner<'a> {
    reader: Reader<&'a [u8]>,
    part: String,
    text: &'a str,
    /// Bytes that the reader did not see: a byte-order mark, and what was passed over.
    unseen: usize,
    /// There are no comments, character data or instructions, in which an end tag would be none.
    plain: bool,
    shape: Shape,
}

/// One event and the bytes it came from.
pub struct Token<'a> {
    /// What it is.
    pub event: Event<'a>,
    /// Where it stands, from its `<` to after its `>`; for texts the text.
    pub span: Range<usize>,
}

impl<'a> Scanner<'a> {
    /// A scanner over the bytes of the part of that name, which messages give.
    ///
    /// A byte-order mark of UTF-8 is stepped over; spans count it.
    ///
    /// **Errors**: `bad-utf8`, `encoding`.
    pub fn new(part: &str, xml: &'a [u8]) -> Result<Self> {
        check_encoding(part, xml)?;
        let text = std::str::from_utf8(xml).map_err(|at| bad_utf8(part, at.valid_up_to() as u64))?;
        let unseen = if xml.starts_with(BOM) { BOM.len() } else { 0 };
        let head = memmem::find(xml, b"?>").map_or(0, |end| end + 2);
        let plain = [b"<!", b"<?"].iter().all(|mark| memmem::find(&xml[head..], *mark).is_none());
        let mut reader = Reader::from_reader(&xml[unseen..]);
        configure(&mut reader);
        Ok(Scanner { reader, part: part.to_owned(), text, unseen, plain, shape: Shape::default() })
    }

    /// The whole part.
    pub fn text(&self) -> &'a str {
        self.text
    }

    /// What stands between the tag just read and the next end tag of that qualified name, where that can be told
    /// without reading it. It is the element's content if no element of that name lies inside, as with rows.
    pub fn content(&self, name: &[u8]) -> Option<&'a str> {
        let rest = &self.text[self.position()..];
        let mark = [b"</", name].concat();
        let mut ends = memmem::find_iter(rest.as_bytes(), &mark).filter(|end| {
            let after = rest.as_bytes().get(end + mark.len());
            after.is_some_and(|c| *c == b'>' || c.is_ascii_whitespace())
        });
        if !self.plain {
            return None;
        }
        ends.next().map(|end| &rest[..end])
    }

    /// Goes to the end tag of the element just opened, unless its content holds one of some texts, or its end cannot
    /// be told without reading it. What is passed over is not checked: the preflight has done that.
    pub fn pass_over(&mut self, name: &[u8], unless: &[&str]) {
        let Some(content) = self.content(name) else { return };
        if unless.iter().all(|text| memmem::find(content.as_bytes(), text.as_bytes()).is_none()) {
            self.pass(content.len());
        }
    }

    /// Goes on after so many bytes of content.
    pub(crate) fn pass(&mut self, bytes: usize) {
        self.unseen += bytes;
        let next = self.position();
        *self.reader.get_mut() = &self.text.as_bytes()[next..];
    }

    /// The next event, or none at the end of a well-formed part.
    ///
    /// **Errors**: `bad-xml`, `doctype`, `xml-depth`.
    #[allow(clippy::should_implement_trait)] // it borrows nothing from self, but errors end it
    pub fn next(&mut self) -> Result<Option<Token<'a>>> {
        let from = self.position();
        let event = self.reader.read_event().map_err(|e| {
            bad_xml(&self.part, self.unseen as u64 + self.reader.error_position(), &e.to_string())
        })?;
        self.shape.see(&self.part, from as u64, &event)?;
        let span = from..self.position();
        Ok((!matches!(event, Event::Eof)).then_some(Token { event, span }))
    }

    /// How many elements are open after the last event.
    pub fn depth(&self) -> usize {
        self.shape.depth
    }

    /// The byte after the last event.
    pub fn position(&self) -> usize {
        self.unseen + self.reader.buffer_position() as usize
    }

    /// The part's name.
    pub fn part(&self) -> &str {
        &self.part
    }
}

const BOM: &[u8] = b"\xEF\xBB\xBF";

pub(crate) fn configure<R>(reader: &mut Reader<R>) {
    let config = reader.config_mut();
    config.check_end_names = true;
    config.allow_dangling_amp = false;
    config.trim_text(false);
}

/// What is checked of every event, however it is read: nesting, one root, no declarations of entities.
#[derive(Default)]
pub(crate) struct Shape {
    pub(crate) depth: usize,
    root: bool,
}

impl Shape {
    pub(crate) fn see(&mut self, part: &str, at: u64, event: &Event) -> Result<()> {
        match event {
            Event::Start(_) | Event::Empty(_) => {
                if self.depth == 0 && self.root {
                    return Err(bad_xml(part, at, "a second root element").into());
                }
                self.root = true;
                if matches!(event, Event::Start(_)) {
                    self.depth += 1;
                }
                if self.depth > MAX_DEPTH {
                    return Err(Problem::error(
                        "xml-depth",
                        Place::default(),
                        format!("{part} nests more than {MAX_DEPTH} elements at byte {at}"),
                    )
                    .hint("open the file in a spreadsheet program and save it again")
                    .into());
                }
            }
            Event::Decl(declaration) => {
                // Some readers go by what is declared, so it has to be true.
                let declared = declaration.encoding().transpose().ok().flatten();
                let utf8 = |name: &[u8]| {
                    name.eq_ignore_ascii_case(b"utf-8") || name.eq_ignore_ascii_case(b"us-ascii")
                };
                if let Some(name) = declared.filter(|name| !utf8(name)) {
                    let name: String = String::from_utf8_lossy(&name).chars().take(40).collect();
                    return Err(wrong_encoding(part, &name).into());
                }
            }
            Event::End(_) => self.depth -= 1,
            Event::DocType(_) => {
                return Err(Problem::error(
                    "doctype",
                    Place::default(),
                    format!("{part} declares a document type at byte {at}, which workbooks may not hold"),
                )
                .hint("open the file in a spreadsheet program and save it again")
                .into());
            }
            Event::GeneralRef(name) => {
                let named: &[u8] = name;
                let known = matches!(named, b"lt" | b"gt" | b"amp" | b"apos" | b"quot")
                    || matches!(name.resolve_char_ref(), Ok(Some(_)));
                if !known {
                    let named = String::from_utf8_lossy(&named[..named.len().min(40)]).into_owned();
                    return Err(bad_xml(part, at, &format!("unknown entity &{named};")).into());
                }
                if self.depth == 0 {
                    return Err(bad_xml(part, at, "text outside the root element").into());
                }
            }
            Event::Text(text) if self.depth == 0 && !text.iter().all(u8::is_ascii_whitespace) => {
                return Err(bad_xml(part, at, "text outside the root element").into());
            }
            Event::CData(_) if self.depth == 0 => {
                return Err(bad_xml(part, at, "text outside the root element").into());
            }
            Event::Eof if self.depth > 0 => {
                return Err(bad_xml(part, at, "the part ends inside an element").into());
            }
            Event::Eof if !self.root => {
                return Err(bad_xml(part, at, "the part holds no element").into());
            }
            _ => {}
        }
        Ok(())
    }
}

pub(crate) fn bad_xml(part: &str, at: u64, why: &str) -> Problem {
    // A message may quote the file, and a name there can be a megabyte long.
    let why: String = why.chars().take(160).collect();
    Problem::error("bad-xml", Place::default(), format!("{part} is not well-formed XML at byte {at}: {why}"))
        .hint("open the file in a spreadsheet program and save it again")
}

pub(crate) fn bad_utf8(part: &str, at: u64) -> Problem {
    Problem::error("bad-utf8", Place::default(), format!("{part} is not UTF-8 text at byte {at}"))
        .hint("open the file in a spreadsheet program and save it again")
}

/// Refuses encodings other than UTF-8 by the first bytes of a part.
pub(crate) fn check_encoding(part: &str, start: &[u8]) -> Result<()> {
    let wide = [b"\xFF\xFE".as_slice(), b"\xFE\xFF", b"<\0", b"\0<"];
    if wide.iter().any(|mark| start.starts_with(mark)) {
        return Err(wrong_encoding(part, "UTF-16").into());
    }
    Ok(())
}

fn wrong_encoding(part: &str, name: &str) -> Problem {
    Problem::error("encoding", Place::default(), format!("{part} is {name} text; only UTF-8 is read"))
        .hint("open the file in a spreadsheet program and save it again")
}

/// The value of the attribute with that local name (`id` finds `r:id`), unescaped; `part` is for messages.
///
/// An attribute without a prefix wins over one with a prefix.
pub fn attribute(part: &str, tag: &BytesStart, local: &str) -> Result<Option<String>> {
    let mut found = None;
    for attribute in tag.attributes().with_checks(false) {
        let attribute = attribute.map_err(|e| bad_xml(part, 0, &e.to_string()))?;
        if attribute.key.local_name().as_ref() == local.as_bytes() {
            let plain = attribute.key.prefix().is_none();
            if plain || found.is_none() {
                found = Some(value(part, &attribute)?.into_owned());
            }
            if plain {
                break;
            }
        }
    }
    Ok(found)
}

fn value<'a>(part: &str, attribute: &quick_xml::events::attributes::Attribute<'a>) -> Result<Cow<'a, str>> {
    attribute.normalized_value(XmlVersion::Implicit1_0).map_err(|e| bad_xml(part, 0, &e.to_string()).into())
}

/// Text with `&`, `<`, `>` and carriage returns escaped, fit for an element's content.
pub fn escape_text(text: &str) -> String {
    escape(text, false)
}

/// Text fit for an attribute's value between double quotes.
pub fn escape_attribute(text: &str) -> String {
    escape(text, true)
}

fn escape(text: &str, attribute: bool) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '\r' => out.push_str("&#13;"),
            '"' if attribute => out.push_str("&quot;"),
            '\n' if attribute => out.push_str("&#10;"),
            '\t' if attribute => out.push_str("&#9;"),
            c => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    fn codes(xml: &[u8]) -> std::result::Result<usize, &'static str> {
        let run = || -> Result<usize> {
            let mut scanner = Scanner::new("a.xml", xml)?;
            let mut n = 0;
            while scanner.next()?.is_some() {
                n += 1;
            }
            Ok(n)
        };
        run().map_err(|e| e.problems()[0].code)
    }

    #[test]
    fn spans_are_the_bytes_of_each_event() {
        let xml = "\u{FEFF}<?xml version=\"1.0\"?>\n<a x='1'>t&amp;u<b/><!-- c --></a>\n".as_bytes();
        let mut scanner = Scanner::new("a.xml", xml).unwrap();
        let mut spans = Vec::new();
        while let Some(token) = scanner.next().unwrap() {
            spans.push(std::str::from_utf8(&xml[token.span]).unwrap().to_owned());
        }
        let expected = [
            "<?xml version=\"1.0\"?>",
            "\n",
            "<a x='1'>",
            "t",
            "&amp;",
            "u",
            "<b/>",
            "<!-- c -->",
            "</a>",
            "\n",
        ];
        assert_eq!(spans, expected);
    }

    #[test]
    fn elements_can_be_passed_over() {
        let after = |xml: &str, unless: &[&str]| -> usize {
            let mut scanner = Scanner::new("a.xml", xml.as_bytes()).unwrap();
            let mut tags = 0;
            while let Some(token) = scanner.next().unwrap() {
                assert_eq!(&xml[token.span.clone()], &scanner.text()[token.span.clone()]);
                tags += usize::from(matches!(token.event, Event::Start(_) | Event::Empty(_)));
                if let Event::Start(tag) = &token.event
                    && tag.local_name().as_ref() == b"row"
                {
                    scanner.pass_over(tag.name().as_ref(), unless);
                }
            }
            tags
        };
        let xml =
            "\u{FEFF}<?xml version='1.0'?><x:d><x:row><c/><f/></x:row ><x:row><c/></x:row><x:rows/></x:d>";
        assert_eq!(after(xml, &[]), 4);
        assert_eq!(after(xml, &["<f"]), 6);
        assert_eq!(after("<d><row><c/><!-- </row> --></row></d>", &[]), 3);
        assert_eq!(after("<d><row><c/><rows></rows></row></d>", &[]), 2);
    }

    #[test]
    fn refuses_what_is_not_well_formed() {
        assert_eq!(codes(b"<a></a>"), Ok(2));
        assert_eq!(codes(b"<a><b></a>"), Err("bad-xml"));
        assert_eq!(codes(b"<a>"), Err("bad-xml"));
        assert_eq!(codes(b"<a"), Err("bad-xml"));
        assert_eq!(codes(b"</a>"), Err("bad-xml"));
        assert_eq!(codes(b""), Err("bad-xml"));
        assert_eq!(codes(b"<a/><b/>"), Err("bad-xml"));
        assert_eq!(codes(b"x<a/>"), Err("bad-xml"));
        assert_eq!(codes(b"<a>&who;</a>"), Err("bad-xml"));
        assert_eq!(codes(b"<a>&#0;</a>"), Err("bad-xml"));
        assert_eq!(codes(b"<?xml version='1.0' encoding='utf-8'?><a/>"), Ok(2));
        assert_eq!(codes(b"<?xml version='1.0' encoding='ISO-8859-1'?><a/>"), Err("encoding"));
        assert_eq!(codes(b"<!DOCTYPE a><a/>"), Err("doctype"));
        assert_eq!(codes(b"<a>\xFF</a>"), Err("bad-utf8"));
        assert_eq!(codes(b"\xFF\xFE<\0a\0/\0>\0"), Err("encoding"));
    }

    #[test]
    fn nesting_is_limited() {
        let nest = |n: usize| format!("{}{}", "<a>".repeat(n), "</a>".repeat(n));
        assert!(codes(nest(MAX_DEPTH).as_bytes()).is_ok());
        assert_eq!(codes(nest(MAX_DEPTH + 1).as_bytes()), Err("xml-depth"));
    }

    #[test]
    fn attributes_by_local_name() {
        let xml = b"<s r:id='rId1' name='a &amp; b' x:name='no'/>";
        let mut scanner = Scanner::new("a.xml", xml).unwrap();
        let Some(Token { event: Event::Empty(tag), .. }) = scanner.next().unwrap() else { panic!("no tag") };
        assert_eq!(attribute("a.xml", &tag, "id").unwrap().as_deref(), Some("rId1"));
        assert_eq!(attribute("a.xml", &tag, "name").unwrap().as_deref(), Some("a & b"));
        assert_eq!(attribute("a.xml", &tag, "none").unwrap(), None);
    }
}
