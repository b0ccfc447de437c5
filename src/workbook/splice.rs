//! Byte-exact editing of XML parts: tokens and elements with their places, and edits between them.
//!
//! A part is never parsed and written again as a whole. What is to change is found by its place in
//! the text and replaced there, so that everything else stays byte for byte.

use std::borrow::Cow;
use std::ops::Range;

use quick_xml::events::Event;

use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::xml::Scanner;

/// A part that is no XML as the format wants it.
pub(crate) fn bad_xml(what: impl Into<String>) -> WorkbookError {
    Problem::error("bad-xml", Place::default(), what)
        .hint("open the workbook in a spreadsheet program and save it again")
        .into()
}

/// What a token is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Kind {
    /// A start tag.
    Open,
    /// An element without content, `<a/>`.
    Empty,
    /// An end tag.
    Close,
    /// Characters, a CDATA section or a character reference.
    Text,
    /// A comment, a processing instruction or the declaration.
    Other,
}

/// One token and where it stands.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Token<'a> {
    pub(crate) kind: Kind,
    /// Offset of its first byte in the part.
    pub(crate) start: usize,
    /// Its text as it stands.
    pub(crate) raw: &'a str,
}

impl<'a> Token<'a> {
    /// Where it stands.
    pub(crate) fn span(&self) -> Range<usize> {
        self.start..self.start + self.raw.len()
    }

    /// The qualified name of a tag.
    pub(crate) fn name(&self) -> &'a str {
        tag_name(self.raw)
    }

    /// The characters it stands for: references resolved, CDATA unwrapped, line ends as XML reads them.
    pub(crate) fn characters(&self) -> Result<Cow<'a, str>> {
        if let Some(cdata) = self.raw.strip_prefix("<![CDATA[").and_then(|s| s.strip_suffix("]]>")) {
            return Ok(line_ends(cdata));
        }
        unescape(self.raw)
    }
}

fn line_ends(text: &str) -> Cow<'_, str> {
    if text.contains('\r') {
        Cow::Owned(text.replace("\r\n", "\n").replace('\r', "\n"))
    } else {
        Cow::Borrowed(text)
    }
}

/// Resolves the references of a text or an attribute's value.
pub(crate) fn unescape(raw: &str) -> Result<Cow<'_, str>> {
    match quick_xml::escape::unescape(raw) {
        Ok(Cow::Borrowed(text)) => Ok(line_ends(text)),
        Ok(text) => Ok(text),
        Err(error) => Err(bad_xml(format!("a character reference cannot be read: {error}"))),
    }
}

/// The characters of an element's text as XML allows them, escaped; `None` if one is not allowed at all.
pub(crate) fn escape(text: &str) -> Option<String> {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\r' => out.push_str("&#13;"),
            '\t' | '\n' => out.push(c),
            '\0'..='\u{1f}' | '\u{fffe}' | '\u{ffff}' => return None,
            _ => out.push(c),
        }
    }
    Some(out)
}

/// The tokens of a part, in order. Refuses what the scanner refuses.
pub(crate) struct Tokens<'a> {
    scanner: Scanner<'a>,
}

impl<'a> Tokens<'a> {
    pub(crate) fn new(xml: &'a [u8]) -> Result<Self> {
        Ok(Tokens { scanner: Scanner::new("the part", xml)? })
    }

    /// The whole part.
    pub(crate) fn text(&self) -> &'a str {
        self.scanner.text()
    }

    /// See [`Scanner::content`].
    pub(crate) fn content(&self, name: &str) -> Option<&'a str> {
        self.scanner.content(name.as_bytes())
    }

    /// See [`Scanner::pass_over`].
    pub(crate) fn pass_over(&mut self, name: &str, unless: &[&str]) {
        self.scanner.pass_over(name.as_bytes(), unless);
    }

    /// Goes on after so many bytes of content.
    pub(crate) fn pass(&mut self, bytes: usize) {
        self.scanner.pass(bytes);
    }

    /// How many elements are open after the token last given.
    pub(crate) fn depth(&self) -> usize {
        self.scanner.depth()
    }

    /// The next token; `None` at the end.
    pub(crate) fn next(&mut self) -> Result<Option<Token<'a>>> {
        let Some(token) = self.scanner.next()? else { return Ok(None) };
        let kind = match token.event {
            Event::Start(_) => Kind::Open,
            Event::Empty(_) => Kind::Empty,
            Event::End(_) => Kind::Close,
            Event::Text(_) | Event::CData(_) | Event::GeneralRef(_) => Kind::Text,
            Event::Decl(ref decl) => {
                if let Some(Ok(encoding)) = decl.encoding()
                    && !encoding.eq_ignore_ascii_case(b"utf-8")
                    && !encoding.eq_ignore_ascii_case(b"us-ascii")
                {
                    let name = String::from_utf8_lossy(&encoding).into_owned();
                    return Err(bad_xml(format!("a part is encoded as {name}; only UTF-8 is edited")));
                }
                Kind::Other
            }
            Event::DocType(_) | Event::Comment(_) | Event::PI(_) | Event::Eof => Kind::Other,
        };
        Ok(Some(Token { kind, start: token.span.start, raw: &self.text()[token.span] }))
    }
}

fn tag_name(raw: &str) -> &str {
    let rest = raw.trim_start_matches(['<', '/']);
    &rest[..rest.find(|c: char| c.is_ascii_whitespace() || c == '/' || c == '>').unwrap_or(rest.len())]
}

/// The name without its prefix.
pub(crate) fn local(name: &str) -> &str {
    name.rsplit_once(':').map_or(name, |(_, local)| local)
}

/// The prefix of a name with its colon, empty without one.
pub(crate) fn prefix(name: &str) -> &str {
    name.rfind(':').map_or("", |i| &name[..=i])
}

/// One attribute of a tag, by places within the tag's text.
struct Attribute {
    /// With the white space before it.
    whole: Range<usize>,
    name: Range<usize>,
    value: Range<usize>,
}

fn attributes(raw: &str) -> Result<Vec<Attribute>> {
    let bytes = raw.as_bytes();
    let skip = |mut i: usize, stop: &dyn Fn(u8) -> bool| {
        while i < bytes.len() && !stop(bytes[i]) {
            i += 1;
        }
        i
    };
    let not_space = |c: u8| !c.is_ascii_whitespace();
    let mut found = Vec::new();
    let mut at = 1 + tag_name(raw).len();
    loop {
        let name = skip(at, &not_space);
        if name >= bytes.len() || matches!(bytes[name], b'/' | b'>') {
            return Ok(found);
        }
        let name_end = skip(name, &|c| c == b'=' || c.is_ascii_whitespace());
        let equals = skip(name_end, &not_space);
        let quote = skip(equals + 1, &not_space);
        let sound =
            bytes.get(equals) == Some(&b'=') && matches!(bytes.get(quote), Some(b'"' | b'\'')) && name > at;
        let end = if sound { skip(quote + 1, &|c| c == bytes[quote]) } else { bytes.len() };
        if end >= bytes.len() {
            let shown: String = raw.chars().take(80).collect();
            return Err(bad_xml(format!("an attribute of {shown} cannot be read")));
        }
        found.push(Attribute { whole: at..end + 1, name: name..name_end, value: quote + 1..end });
        at = end + 1;
    }
}

/// The value of a tag's attribute (by its qualified name), references resolved.
pub(crate) fn attribute<'a>(raw: &'a str, name: &str) -> Result<Option<Cow<'a, str>>> {
    if !raw.contains(name) {
        return Ok(None);
    }
    for found in attributes(raw)? {
        if &raw[found.name] == name {
            return unescape(&raw[found.value]).map(Some);
        }
    }
    Ok(None)
}

/// All attributes of a tag, in order.
pub(crate) fn all_attributes(raw: &str) -> Result<Vec<(&str, Cow<'_, str>)>> {
    attributes(raw)?.into_iter().map(|a| Ok((&raw[a.name], unescape(&raw[a.value])?))).collect()
}

/// The tag with one attribute set (in its old place, else last) or, with `None`, taken out.
///
/// `value` is plain text of a kind that needs no more than the usual escapes.
pub(crate) fn with_attribute(raw: &str, name: &str, value: Option<&str>) -> Result<String> {
    let value = value.map(|v| escape(v).ok_or_else(|| bad_xml("a character is not allowed in XML")));
    let value = value.transpose()?;
    let found = attributes(raw)?.into_iter().find(|a| &raw[a.name.clone()] == name);
    let mut tag = raw.to_owned();
    match (found, value) {
        // Either kind of quote around the old value suits the new one: both are escaped or absent.
        (Some(a), Some(value)) => tag.replace_range(a.value, &value.replace('\'', "&apos;")),
        (Some(a), None) => tag.replace_range(a.whole, ""),
        (None, Some(value)) => {
            let body = raw.trim_end_matches('>').trim_end_matches('/').trim_end();
            tag.insert_str(body.len(), &format!(" {name}=\"{value}\""));
        }
        (None, None) => {}
    }
    Ok(tag)
}

/// Replacements by place, made all at once.
#[derive(Debug, Default)]
pub(crate) struct Edits(Vec<(Range<usize>, String)>);

impl Edits {
    /// Puts `text` in the place of `span`. Several insertions at one place stand in the order given.
    pub(crate) fn replace(&mut self, span: Range<usize>, text: impl Into<String>) {
        self.0.push((span, text.into()));
    }

    /// Inserts before the byte at `place`.
    pub(crate) fn insert(&mut self, place: usize, text: impl Into<String>) {
        self.replace(place..place, text);
    }

    /// The part with every edit made.
    ///
    /// # Errors
    /// Two edits of the same bytes, which is a mistake of the caller.
    pub(crate) fn apply(mut self, xml: &[u8]) -> Result<Vec<u8>> {
        self.0.sort_by_key(|(span, _)| (span.start, span.end));
        let grown: usize = self.0.iter().map(|(_, text)| text.len()).sum();
        let mut out = Vec::with_capacity(xml.len() + grown);
        let mut done = 0;
        for (span, text) in self.0 {
            if span.start < done {
                return Err(bad_xml("two edits of a part overlap"));
            }
            out.extend_from_slice(&xml[done..span.start]);
            out.extend_from_slice(text.as_bytes());
            done = span.end;
        }
        out.extend_from_slice(&xml[done..]);
        Ok(out)
    }
}

/// An element by its place, with its child elements. For parts of moderate size.
#[derive(Debug)]
pub(crate) struct Element<'a> {
    /// The start tag as it stands.
    pub(crate) tag: &'a str,
    /// From the start tag to the end tag.
    pub(crate) span: Range<usize>,
    /// Between the tags; empty, and behind the tag, for `<a/>`.
    pub(crate) inner: Range<usize>,
    pub(crate) children: Vec<Element<'a>>,
}

impl<'a> Element<'a> {
    /// The root element of a part.
    pub(crate) fn root(xml: &'a [u8]) -> Result<Element<'a>> {
        let mut tokens = Tokens::new(xml)?;
        let mut open: Vec<Element<'a>> = Vec::new();
        let mut root = None;
        while let Some(token) = tokens.next()? {
            let span = token.span();
            let done = match token.kind {
                Kind::Open | Kind::Empty => {
                    let element = Element {
                        tag: token.raw,
                        inner: span.end..span.end,
                        span: span.clone(),
                        children: Vec::new(),
                    };
                    if token.kind == Kind::Open {
                        open.push(element);
                        continue;
                    }
                    element
                }
                Kind::Close => {
                    let Some(mut element) = open.pop() else { continue };
                    element.inner.end = span.start;
                    element.span.end = span.end;
                    element
                }
                Kind::Text | Kind::Other => continue,
            };
            match open.last_mut() {
                Some(parent) => parent.children.push(done),
                None => root = Some(done),
            }
        }
        root.ok_or_else(|| bad_xml("a part is empty"))
    }

    /// The qualified name.
    pub(crate) fn name(&self) -> &'a str {
        tag_name(self.tag)
    }

    /// The name without its prefix.
    pub(crate) fn local(&self) -> &'a str {
        local(self.name())
    }

    /// The first child of this local name.
    pub(crate) fn child(&self, local: &str) -> Option<&Element<'a>> {
        self.children.iter().find(|c| c.local() == local)
    }

    /// The element at the end of a path of local names.
    pub(crate) fn at(&self, path: &[&str]) -> Option<&Element<'a>> {
        path.iter().try_fold(self, |element, local| element.child(local))
    }

    /// An attribute's value, by qualified name.
    pub(crate) fn attribute(&self, name: &str) -> Result<Option<Cow<'a, str>>> {
        attribute(self.tag, name)
    }

    /// Is it written `<a/>`?
    pub(crate) fn is_empty_tag(&self) -> bool {
        self.tag.ends_with("/>")
    }

    /// Adds `content` behind the last child, opening `<a/>` up where need be. The start tag may be
    /// changed in the same go.
    pub(crate) fn append(&self, edits: &mut Edits, tag: Option<String>, content: &str) {
        let start = self.span.start;
        let tag_span = start..start + self.tag.len();
        if self.is_empty_tag() && !content.is_empty() {
            let tag = tag.unwrap_or_else(|| self.tag.to_owned());
            let body = tag.trim_end_matches("/>").trim_end();
            edits.replace(tag_span, format!("{body}>{content}</{}>", self.name()));
            return;
        }
        if let Some(tag) = tag {
            edits.replace(tag_span, tag);
        }
        edits.insert(self.inner.end, content);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const PART: &str =
        "\u{feff}<?xml version=\"1.0\"?><!-- > --><x:a b = 'c>d' e=\"&lt;\"><f/>t&amp;<![CDATA[<]]></x:a>\n";

    #[test]
    fn tokens_cover_the_part_without_gaps() {
        let mut tokens = Tokens::new(PART.as_bytes()).unwrap();
        let mut joined = String::from("\u{feff}");
        while let Some(token) = tokens.next().unwrap() {
            assert_eq!(token.start, joined.len());
            joined.push_str(token.raw);
        }
        assert_eq!(joined, PART);
    }

    #[test]
    fn attributes_are_read_and_set_in_place() {
        let root = Element::root(PART.as_bytes()).unwrap();
        assert_eq!(root.attribute("b").unwrap().as_deref(), Some("c>d"));
        assert_eq!(root.attribute("e").unwrap().as_deref(), Some("<"));
        assert_eq!(with_attribute(root.tag, "b", None).unwrap(), "<x:a e=\"&lt;\">");
        assert_eq!(with_attribute("<c r=\"A1\" />", "t", Some("n")).unwrap(), "<c r=\"A1\" t=\"n\" />");
        assert_eq!(with_attribute("<c t='n'>", "t", Some("it's")).unwrap(), "<c t='it&apos;s'>");
        assert!(attribute("<c r=A1>", "r").is_err());
    }

    #[test]
    fn broken_parts_are_refused() {
        for bad in ["", "<a>", "<a></b>", "<a/><b/>", "<!DOCTYPE a><a/>", "<a>&x;</a>"] {
            let mut tokens = Tokens::new(bad.as_bytes()).unwrap();
            let mut end = Ok(());
            loop {
                match tokens.next() {
                    Ok(Some(token)) if token.kind == Kind::Text => end = token.characters().map(|_| ()),
                    Ok(Some(_)) => {}
                    Ok(None) => break,
                    Err(error) => {
                        end = Err(error);
                        break;
                    }
                }
                if end.is_err() {
                    break;
                }
            }
            assert!(end.is_err(), "{bad}");
        }
        assert!(Tokens::new(b"<a>\xff</a>").is_err());
        let deep = "<a>".repeat(300) + &"</a>".repeat(300);
        assert!(Element::root(deep.as_bytes()).is_err());
        let latin = Element::root(b"<?xml version=\"1.0\" encoding=\"ISO-8859-1\"?><a/>");
        assert!(latin.unwrap_err().to_string().contains("ISO-8859-1"));
    }

    #[test]
    fn edits_keep_everything_else() {
        let mut edits = Edits::default();
        edits.insert(2, "+");
        edits.replace(3..4, "D");
        edits.insert(2, "-");
        assert_eq!(edits.apply(b"abcdef").unwrap(), b"ab+-cDef");
        let mut edits = Edits::default();
        edits.replace(1..3, "");
        edits.replace(2..4, "");
        assert!(edits.apply(b"abcdef").is_err());
    }
}
