//! Appending the cell formats of hence's sheets to the analyst's styles part.

use std::collections::BTreeMap;

use crate::problem::{Place, Problem, Result};
use crate::splice::{Edits, Element, all_attributes, bad_xml, prefix, with_attribute};

/// The most cell formats that spreadsheet programs read.
const MAX_FORMATS: usize = 64_000;
/// The first number format id that is not built in.
const FIRST_OWN_FORMAT: u32 = 164;
/// The containers of a styles part, in the order of the schema.
const ORDER: [&str; 11] = [
    "numFmts",
    "fonts",
    "fills",
    "borders",
    "cellStyleXfs",
    "cellXfs",
    "cellStyles",
    "dxfs",
    "tableStyles",
    "colors",
    "extLst",
];

/// Where the formats of hence's sheets went: new index by old index.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct StyleMap {
    xf: Vec<u32>,
    dxf: Vec<u32>,
}

impl StyleMap {
    /// The cell format that stands for hence's format `index`.
    pub fn xf(&self, index: usize) -> Option<u32> {
        self.xf.get(index).copied()
    }

    /// The differential format (of conditional formats) that stands for hence's format `index`.
    pub fn dxf(&self, index: usize) -> Option<u32> {
        self.dxf.get(index).copied()
    }
}

/// The analyst's styles part with hence's cell formats added, and where they went.
///
/// Fonts, fills, borders, number formats, cell formats and differential formats are appended to
/// their lists; entries that say the same and are there already are used again, so that merging the same
/// styles twice adds nothing. Missing lists are put in where the schema wants them. Every entry of
/// the analyst stays byte for byte; cell styles, tables, colours and theme are not touched.
///
/// **Arguments**: `host` and `ours`, the styles parts of the analyst and of hence's sheets.
///
/// **Errors**: `bad-xml`; `too-many-styles` where the list of cell formats is full;
/// `alternate-styles` where alternatives of unequal number make indices ambiguous.
pub fn merge_styles(host: &[u8], ours: &[u8]) -> Result<(Vec<u8>, StyleMap)> {
    let host_root = Element::root(host)?;
    let our_root = Element::root(ours)?;
    if host_root.local() != "styleSheet" || our_root.local() != "styleSheet" {
        return Err(bad_xml("the styles part has no styleSheet element"));
    }
    let pool = |name| Pool::read(&host_root, name);
    let mut codes = BTreeMap::new();
    for format in host_root.child("numFmts").iter().flat_map(|list| &list.children) {
        if let Some(code) = format.attribute("formatCode")? {
            codes.entry(code.into_owned()).or_insert(number(format, "numFmtId")?);
        }
    }
    let mut pools = Pools {
        formats: pool("numFmts")?,
        codes,
        free_id: FIRST_OWN_FORMAT.max(last_format_id(&host_root)?.saturating_add(1)),
        fonts: pool("fonts")?,
        fills: pool("fills")?,
        borders: pool("borders")?,
        xfs: pool("cellXfs")?,
        dxfs: pool("dxfs")?,
        styled: host_root.child("cellStyleXfs").is_some_and(|c| !c.children.is_empty()),
        prefix: prefix(host_root.name()),
        own: prefix(our_root.name()),
    };
    let map = pools.take_over(&our_root)?;
    if pools.xfs.count() > MAX_FORMATS {
        let what = format!("the workbook has {} cell formats; {MAX_FORMATS} are allowed", pools.xfs.count());
        return Err(Problem::error("too-many-styles", Place::default(), what)
            .hint("delete cell formats that are not used")
            .into());
    }
    Ok((pools.written(host, &host_root)?, map))
}

/// One list of the host: what is in it, and what is added.
struct Pool {
    name: &'static str,
    /// The first index of each entry, by what it says.
    known: BTreeMap<String, u32>,
    present: usize,
    added: Vec<String>,
}

impl Pool {
    fn read(root: &Element, name: &'static str) -> Result<Pool> {
        let mut pool = Pool { name, known: BTreeMap::new(), present: 0, added: Vec::new() };
        let own = prefix(root.name());
        for entry in root.child(name).iter().flat_map(|list| &list.children) {
            if entry.local() == "AlternateContent" {
                pool.present += alternatives(entry, name)?;
            } else {
                let index = pool.count_u32();
                pool.known.entry(meaning(entry, own)?).or_insert(index);
                pool.present += 1;
            }
        }
        Ok(pool)
    }

    fn count(&self) -> usize {
        self.present + self.added.len()
    }

    #[allow(
        clippy::cast_possible_truncation,
        reason = "a part is far smaller than 4 thousand million entries"
    )]
    fn count_u32(&self) -> u32 {
        self.count() as u32
    }

    /// The index of an entry that says this, added if there is none.
    fn index(&mut self, text: String, own: &str) -> Result<u32> {
        let next = self.count_u32();
        let wanted = meaning(&Element::root(text.as_bytes())?, own)?;
        let index = *self.known.entry(wanted).or_insert(next);
        if index == next {
            self.added.push(text);
        }
        Ok(index)
    }
}

/// How many entries a set of alternatives stands for, whichever of them a program takes.
fn alternatives(element: &Element, list: &str) -> Result<usize> {
    let mut counts = element.children.iter().map(|branch| branch.children.len());
    match counts.next() {
        Some(first) if counts.all(|count| count == first) => Ok(first),
        _ => Err(Problem::error(
            "alternate-styles",
            Place::default(),
            format!("the list {list} of the workbook's styles has alternatives of unequal number"),
        )
        .hint("save the workbook again in a spreadsheet program")
        .into()),
    }
}

/// What an element says, apart from the order of attributes, white space and its own prefix.
fn meaning(element: &Element, own: &str) -> Result<String> {
    let mut attributes = all_attributes(element.tag)?;
    attributes.sort_unstable();
    let name = element.name();
    let mut text = name.strip_prefix(own).unwrap_or(name).to_owned();
    for (name, value) in attributes {
        text.push_str(&format!(" {name}={value:?}"));
    }
    for child in &element.children {
        text.push_str(&format!(" ({})", meaning(child, own)?));
    }
    Ok(text)
}

struct Pools<'a> {
    formats: Pool,
    /// The host's number formats by code, and the first id that nothing uses.
    codes: BTreeMap<String, u32>,
    free_id: u32,
    fonts: Pool,
    fills: Pool,
    borders: Pool,
    xfs: Pool,
    dxfs: Pool,
    /// The host has formats of cell styles for `xfId` to point at.
    styled: bool,
    prefix: &'a str,
    own: &'a str,
}

impl Pools<'_> {
    fn take_over(&mut self, ours: &Element) -> Result<StyleMap> {
        let entries = |name: &str| ours.child(name).map_or(&[][..], |list| &list.children[..]);
        let mut formats = BTreeMap::new();
        for entry in entries("numFmts") {
            formats.insert(number(entry, "numFmtId")?, self.format_id(entry)?);
        }
        let (mut fonts, mut fills, mut borders) = (Vec::new(), Vec::new(), Vec::new());
        for entry in entries("fonts") {
            fonts.push(self.fonts.index(render(entry, self.own, self.prefix), self.prefix)?);
        }
        for (i, entry) in entries("fills").iter().enumerate() {
            let text = render(entry, self.own, self.prefix);
            // Fills 0 and 1 are none and grey in every workbook, whatever the list says there.
            if i < 2 {
                if self.fills.count() <= i {
                    self.fills.index(text, self.prefix)?;
                }
                fills.push(u32::from(i == 1));
            } else {
                fills.push(self.fills.index(text, self.prefix)?);
            }
        }
        for entry in entries("borders") {
            borders.push(self.borders.index(render(entry, self.own, self.prefix), self.prefix)?);
        }
        if self.xfs.count() == 0 && !entries("cellXfs").is_empty() {
            // Cells without a format use number 0, which has to stay the plain one.
            let plain = "xf numFmtId=\"0\" fontId=\"0\" fillId=\"0\" borderId=\"0\"";
            self.xfs.index(format!("<{}{plain}/>", self.prefix), self.prefix)?;
        }
        let mut map = StyleMap::default();
        for entry in entries("cellXfs") {
            let mut tag = entry.tag.to_owned();
            for (name, known) in [("fontId", &fonts), ("fillId", &fills), ("borderId", &borders)] {
                let old = number(entry, name)? as usize;
                let new = known.get(old).ok_or_else(|| bad_xml(format!("{name} {old} is missing")))?;
                tag = with_attribute(&tag, name, Some(&new.to_string()))?;
            }
            let id = number(entry, "numFmtId")?;
            let id = formats.get(&id).copied().unwrap_or(id);
            tag = with_attribute(&tag, "numFmtId", Some(&id.to_string()))?;
            // All of it applies, also where it is the default of hence's part but not of the host's.
            for name in ["applyNumberFormat", "applyFont", "applyFill", "applyBorder"] {
                tag = with_attribute(&tag, name, Some("1"))?;
            }
            tag = with_attribute(&tag, "xfId", self.styled.then_some("0"))?;
            let text = render_with(&tag, entry, self.own, self.prefix);
            map.xf.push(self.xfs.index(text, self.prefix)?);
        }
        for entry in entries("dxfs") {
            let mut text = render(entry, self.own, self.prefix);
            if let Some(format) = entry.child("numFmt") {
                let id = self.format_id(format)?;
                let new = with_attribute(format.tag, "numFmtId", Some(&id.to_string()))?;
                let (old, new) =
                    (renamed(format.tag, self.own, self.prefix), renamed(&new, self.own, self.prefix));
                text = text.replace(&old, &new);
            }
            map.dxf.push(self.dxfs.index(text, self.prefix)?);
        }
        Ok(map)
    }

    /// The host's id for a number format, by its code.
    fn format_id(&mut self, entry: &Element) -> Result<u32> {
        let code = entry.attribute("formatCode")?.unwrap_or_default();
        if let Some(id) = self.codes.get(code.as_ref()) {
            return Ok(*id);
        }
        let id = self.free_id;
        self.free_id += 1;
        self.codes.insert(code.into_owned(), id);
        let tag = with_attribute(entry.tag, "numFmtId", Some(&id.to_string()))?;
        self.formats.index(render_with(&tag, entry, self.own, self.prefix), self.prefix)?;
        Ok(id)
    }

    fn written(self, host: &[u8], root: &Element) -> Result<Vec<u8>> {
        let mut edits = Edits::default();
        let mut fresh = String::new();
        for pool in [&self.formats, &self.fonts, &self.fills, &self.borders, &self.xfs, &self.dxfs] {
            if pool.added.is_empty() {
                continue;
            }
            let count = pool.count().to_string();
            let content = pool.added.concat();
            if let Some(list) = root.child(pool.name) {
                let counted = list.attribute("count")?.is_some();
                let tag = counted.then(|| with_attribute(list.tag, "count", Some(&count))).transpose()?;
                list.append(&mut edits, tag, &content);
                continue;
            }
            let p = self.prefix;
            let list = format!("<{p}{0} count=\"{count}\">{content}</{p}{0}>", pool.name);
            let rank = |name: &str| ORDER.iter().position(|n| *n == name).unwrap_or(ORDER.len());
            let next = root.children.iter().find(|c| rank(c.local()) > rank(pool.name));
            match next {
                Some(next) => edits.insert(next.span.start, list),
                None => fresh.push_str(&list),
            }
        }
        if !fresh.is_empty() {
            root.append(&mut edits, None, &fresh);
        }
        edits.apply(host)
    }
}

/// The highest number format id that is defined or used anywhere in the part.
fn last_format_id(element: &Element) -> Result<u32> {
    let mut last = number(element, "numFmtId")?;
    for child in &element.children {
        last = last.max(last_format_id(child)?);
    }
    Ok(last)
}

fn number(element: &Element, name: &str) -> Result<u32> {
    let value = element.attribute(name)?.unwrap_or_default();
    value
        .parse()
        .or_else(|_| if value.is_empty() { Ok(0) } else { Err(bad_xml(format!("{name} is {value}"))) })
}

/// An element of hence's part in the words of the host's: with its prefix.
fn render(element: &Element, own: &str, host: &str) -> String {
    render_with(element.tag, element, own, host)
}

fn render_with(tag: &str, element: &Element, own: &str, host: &str) -> String {
    let tag = renamed(tag, own, host);
    if element.children.is_empty() {
        return format!("{}/>", tag.trim_end_matches('>').trim_end_matches('/').trim_end());
    }
    let children: String = element.children.iter().map(|child| render(child, own, host)).collect();
    let name = element.name();
    format!("{tag}{children}</{host}{}>", name.strip_prefix(own).unwrap_or(name))
}

fn renamed(tag: &str, own: &str, host: &str) -> String {
    let name = tag.trim_start_matches('<');
    format!("<{host}{}", name.strip_prefix(own).unwrap_or(name))
}

#[cfg(test)]
mod tests {
    use super::*;

    const OURS: &str = "<?xml version=\"1.0\"?>\n<styleSheet xmlns=\"m\">\
        <numFmts count=\"1\"><numFmt numFmtId=\"164\" formatCode=\"0.0000\"/></numFmts>\
        <fonts count=\"2\"><font><sz val=\"11\"/><name val=\"Calibri\"/></font>\
        <font><b/><sz val=\"11\"/><name val=\"Calibri\"/></font></fonts>\
        <fills count=\"3\"><fill><patternFill patternType=\"none\"/></fill>\
        <fill><patternFill patternType=\"gray125\"/></fill>\
        <fill><patternFill patternType=\"solid\"><fgColor rgb=\"FFDDEEFF\"/></patternFill></fill></fills>\
        <borders count=\"1\"><border><left/></border></borders>\
        <cellStyleXfs count=\"1\"><xf numFmtId=\"0\"/></cellStyleXfs>\
        <cellXfs count=\"2\"><xf numFmtId=\"0\" fontId=\"0\" fillId=\"0\" borderId=\"0\" xfId=\"0\"/>\
        <xf numFmtId=\"164\" fontId=\"1\" fillId=\"2\" borderId=\"0\" xfId=\"0\"><alignment wrapText=\"1\"/></xf></cellXfs>\
        <dxfs count=\"1\"><dxf><numFmt numFmtId=\"165\" formatCode=\"0.0%\"/></dxf></dxfs></styleSheet>";

    fn merged(host: &str) -> (String, StyleMap) {
        let (bytes, map) = merge_styles(host.as_bytes(), OURS.as_bytes()).unwrap();
        let (again, same) = merge_styles(&bytes, OURS.as_bytes()).unwrap();
        let text = String::from_utf8(bytes).unwrap();
        assert_eq!(String::from_utf8(again).unwrap(), text, "a second merge adds nothing");
        assert_eq!(same, map);
        (text, map)
    }

    #[test]
    fn entries_are_appended_and_identical_ones_used_again() {
        let host = "<x:styleSheet xmlns:x=\"m\">\
            <x:fonts count=\"1\" k=\"1\"><x:font><x:sz val=\"10\"/></x:font></x:fonts>\
            <x:fills count=\"1\"><x:fill/></x:fills>\n\
            <x:borders count=\"1\"><x:border> <x:left /></x:border></x:borders>\
            <x:cellStyleXfs><x:xf/></x:cellStyleXfs>\
            <x:cellXfs count=\"1\"><x:xf numFmtId=\"170\"/></x:cellXfs>\
            <x:cellStyles/><x:tableStyles/></x:styleSheet>";
        let (text, map) = merged(host);
        let expected = "<x:styleSheet xmlns:x=\"m\">\
            <x:numFmts count=\"2\"><x:numFmt numFmtId=\"171\" formatCode=\"0.0000\"/>\
            <x:numFmt numFmtId=\"172\" formatCode=\"0.0%\"/></x:numFmts>\
            <x:fonts count=\"3\" k=\"1\"><x:font><x:sz val=\"10\"/></x:font>\
            <x:font><x:sz val=\"11\"/><x:name val=\"Calibri\"/></x:font>\
            <x:font><x:b/><x:sz val=\"11\"/><x:name val=\"Calibri\"/></x:font></x:fonts>\
            <x:fills count=\"3\"><x:fill/><x:fill><x:patternFill patternType=\"gray125\"/></x:fill>\
            <x:fill><x:patternFill patternType=\"solid\"><x:fgColor rgb=\"FFDDEEFF\"/></x:patternFill></x:fill></x:fills>\n\
            <x:borders count=\"1\"><x:border> <x:left /></x:border></x:borders>\
            <x:cellStyleXfs><x:xf/></x:cellStyleXfs>\
            <x:cellXfs count=\"3\"><x:xf numFmtId=\"170\"/>\
            <x:xf numFmtId=\"0\" fontId=\"1\" fillId=\"0\" borderId=\"0\" xfId=\"0\" applyNumberFormat=\"1\" \
            applyFont=\"1\" applyFill=\"1\" applyBorder=\"1\"/>\
            <x:xf numFmtId=\"171\" fontId=\"2\" fillId=\"2\" borderId=\"0\" xfId=\"0\" applyNumberFormat=\"1\" \
            applyFont=\"1\" applyFill=\"1\" applyBorder=\"1\"><x:alignment wrapText=\"1\"/></x:xf></x:cellXfs>\
            <x:cellStyles/>\
            <x:dxfs count=\"1\"><x:dxf><x:numFmt numFmtId=\"172\" formatCode=\"0.0%\"/></x:dxf></x:dxfs>\
            <x:tableStyles/></x:styleSheet>";
        assert_eq!(text, expected);
        assert_eq!((map.xf(0), map.xf(1), map.xf(2), map.dxf(0)), (Some(1), Some(2), None, Some(0)));
    }

    #[test]
    fn missing_lists_are_made_in_the_order_of_the_schema() {
        for host in ["<styleSheet xmlns=\"m\"/>", "<styleSheet xmlns=\"m\"><extLst/></styleSheet>"] {
            let (text, map) = merged(host);
            let places: Vec<_> =
                ["<numFmts", "<fonts", "<fills", "<borders", "<cellXfs", "<dxfs", "</styleSheet"]
                    .iter()
                    .map(|name| text.find(name).unwrap())
                    .collect();
            assert!(places.is_sorted(), "{text}");
            // Format 0 stays the plain one, and nothing points at cell styles that are not there.
            assert_eq!(map.xf(0), Some(1));
            assert!(!text.contains("xfId"), "{text}");
        }
    }

    #[test]
    fn alternatives_count_as_what_they_hold() {
        let one = "<fonts><AlternateContent><Choice><font/></Choice><Fallback><font/></Fallback></AlternateContent></fonts>";
        let (text, _) = merged(&format!("<styleSheet>{one}</styleSheet>"));
        assert!(text.contains("fontId=\"1\"") && text.contains("fontId=\"2\""), "{text}");
        let two = one.replace("<Fallback><font/>", "<Fallback>");
        let error = merge_styles(format!("<styleSheet>{two}</styleSheet>").as_bytes(), OURS.as_bytes());
        assert_eq!(error.unwrap_err().problems()[0].code, "alternate-styles");
    }
}
