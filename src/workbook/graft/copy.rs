//! Copying hence's parts into the analyst's package under free names.

use std::collections::BTreeSet;

use super::chart::{ChartFinish, finish_chart, finish_drawing};
use super::{folder, sheet};
use crate::model::Sheet;
use crate::package::{Package, Relationship, relationships_part};
use crate::problem::{Place, Problem, Result};
use crate::splice::{Edits, Element, with_attribute};
use crate::styles::StyleMap;

/// Parts on their way from one package to the other.
pub(super) struct Copier<'a> {
    host: &'a Package,
    ours: &'a Package,
    removed: BTreeSet<String>,
    styles: &'a StyleMap,
    strings: Vec<String>,
    charts: &'a [ChartFinish],
    charts_done: usize,
    /// The new parts.
    pub(super) parts: Vec<(String, Vec<u8>)>,
    /// Their content types.
    pub(super) types: Vec<(String, String)>,
    /// Content types by extension.
    pub(super) defaults: Vec<(String, String)>,
}

impl<'a> Copier<'a> {
    pub(super) fn new(
        host: &'a Package,
        ours: &'a Package,
        removed: &BTreeSet<String>,
        styles: &'a StyleMap,
        charts: &'a [ChartFinish],
    ) -> Result<Self> {
        let links = ours.relationships(ours.workbook_part())?;
        let strings = links.iter().find(|r| r.kind.ends_with("/sharedStrings"));
        let strings = strings.map(|r| ours.part(&r.target)).transpose()?.flatten();
        Ok(Copier {
            host,
            ours,
            removed: removed.iter().map(|name| name.to_lowercase()).collect(),
            styles,
            strings: strings.map_or(Ok(Vec::new()), |xml| sheet::strings(&xml))?,
            charts,
            charts_done: 0,
            parts: Vec::new(),
            types: Vec::new(),
            defaults: vec![(
                "rels".to_owned(),
                "application/vnd.openxmlformats-package.relationships+xml".to_owned(),
            )],
        })
    }

    /// Copies a worksheet with all that it leads to; gives its new name.
    pub(super) fn worksheet(&mut self, sheet: &Sheet) -> Result<String> {
        let xml = self.ours.part(&sheet.part)?.unwrap_or_default();
        let xml = sheet::adapted(&xml, &self.strings, self.styles)?;
        let name = self.place(&sheet.part, xml);
        self.follow(&sheet.part, &name)?;
        Ok(name)
    }

    /// Were there as many charts as finishes?
    pub(super) fn check_count(&self) -> Result<()> {
        if self.charts.is_empty() || self.charts.len() == self.charts_done {
            return Ok(());
        }
        let what = format!("{} charts were made and {} described", self.charts_done, self.charts.len());
        Err(Problem::error("chart-count", Place::default(), what).into())
    }

    /// Puts a part under the first free number of its kind.
    fn place(&mut self, old: &str, bytes: Vec<u8>) -> String {
        let inner = old.strip_prefix(folder(self.ours)).unwrap_or(old);
        let (stem, extension) = inner.rsplit_once('.').unwrap_or((inner, "xml"));
        let stem = format!("{}{}", folder(self.host), stem.trim_end_matches(|c: char| c.is_ascii_digit()));
        let is_free = |name: &String| {
            let left = |name: &str| !self.host.has(name) || self.removed.contains(&name.to_lowercase());
            left(name)
                && left(&relationships_part(name))
                && self.parts.iter().all(|(other, _)| !other.eq_ignore_ascii_case(name))
        };
        let names = (1_u32..).map(|n| format!("{stem}{n}.{extension}"));
        let name = names.into_iter().find(is_free).unwrap_or_default();
        let kind = self.ours.content_type(old).unwrap_or_default();
        if extension == "xml" {
            self.types.push((name.clone(), kind));
        } else if !self.defaults.iter().any(|(other, _)| other == extension) {
            self.defaults.push((extension.to_owned(), kind));
        }
        self.parts.push((name.clone(), bytes));
        name
    }

    /// Copies what a part leads to, and its relationships with the new names.
    fn follow(&mut self, old: &str, new: &str) -> Result<()> {
        let links = self.ours.relationships(old)?;
        let Some(xml) = self.ours.part(&relationships_part(old))? else { return Ok(()) };
        let root = Element::root(&xml)?;
        let mut edits = Edits::default();
        for (link, element) in links.iter().zip(&root.children) {
            if link.external {
                continue;
            }
            let target = self.target(link)?;
            // Both packages keep charts beside drawings beside worksheets: only the file's name changes.
            let written = element.attribute("Target")?.unwrap_or_default();
            let file = target.rsplit('/').next().unwrap_or_default();
            let written = written.rfind('/').map_or(file.to_owned(), |i| format!("{}{file}", &written[..=i]));
            let tag = with_attribute(element.tag, "Target", Some(&written))?;
            edits.replace(element.span.start..element.span.start + element.tag.len(), tag);
        }
        self.parts.push((relationships_part(new), edits.apply(&xml)?));
        Ok(())
    }

    fn target(&mut self, link: &Relationship) -> Result<String> {
        let mut bytes = self.ours.part(&link.target)?.unwrap_or_default();
        match link.kind.rsplit('/').next().unwrap_or_default() {
            "drawing" => {
                bytes = finish_drawing(&bytes, &self.charts[self.charts_done.min(self.charts.len())..])?
            }
            "chart" => {
                if let Some(finish) = self.charts.get(self.charts_done) {
                    bytes = finish_chart(&bytes, finish)?;
                }
                self.charts_done += 1;
            }
            "image" => {}
            kind => {
                let what = format!("hence's own sheets hold a {kind}, which cannot be put into a workbook");
                return Err(Problem::error("cannot-graft", Place::default(), what).into());
            }
        }
        let name = self.place(&link.target, bytes);
        self.follow(&link.target, &name)?;
        Ok(name)
    }
}
