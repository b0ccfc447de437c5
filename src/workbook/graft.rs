//! Putting the sheets of a package made by xlsxwriter into the analyst's package.

mod chart;
mod copy;
mod sheet;

use std::collections::BTreeSet;

use crate::model::{Sheet, Workbook};
use crate::names_edit::{BookEdit, NewName, NewSheet, OldName, edit_workbook};
use crate::package::{
    Changes, NewRelationship, Package, Relationship, edit_content_types, edit_relationships,
    relationships_part,
};
use crate::problem::{Place, Problem, Result};
use crate::styles::{StyleMap, merge_styles};

use copy::Copier;

pub use chart::{ChartFinish, Legend, finish_chart};

const WORKSHEET: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/worksheet";
const STYLES: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/styles";
const STYLES_TYPE: &str = "application/vnd.openxmlformats-officedocument.spreadsheetml.styles+xml";
/// The styles of a workbook without a styles part, as spreadsheet programs suppose them.
const PLAIN_STYLES: &str = "<?xml version=\"1.0\" encoding=\"UTF-8\" standalone=\"yes\"?>\n\
    <styleSheet xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\">\
    <fonts count=\"1\"><font><sz val=\"11\"/><name val=\"Calibri\"/><family val=\"2\"/></font></fonts>\
    <fills count=\"2\"><fill><patternFill patternType=\"none\"/></fill>\
    <fill><patternFill patternType=\"gray125\"/></fill></fills>\
    <borders count=\"1\"><border><left/><right/><top/><bottom/><diagonal/></border></borders>\
    <cellStyleXfs count=\"1\"><xf numFmtId=\"0\" fontId=\"0\" fillId=\"0\" borderId=\"0\"/></cellStyleXfs>\
    <cellXfs count=\"1\"><xf numFmtId=\"0\" fontId=\"0\" fillId=\"0\" borderId=\"0\" xfId=\"0\"/></cellXfs>\
    <cellStyles count=\"1\"><cellStyle name=\"Normal\" xfId=\"0\" builtinId=\"0\"/></cellStyles></styleSheet>";

/// What is to be put into a workbook.
#[derive(Clone, Copy)]
pub struct Graft<'a> {
    /// The package that holds hence's sheets, made by xlsxwriter. Its defined names come along.
    pub ours: &'a Package,
    /// Names of sheets to take out first: hence's own of an earlier fill. Absent ones are no error.
    pub previous: &'a [String],
    /// Further names to set; their scopes may be new sheets.
    pub set_names: &'a [NewName],
    /// Names to take out.
    pub remove_names: &'a [OldName],
    /// How to finish the charts, in their order by sheet and insertion: one each, or none at all.
    pub charts: &'a [ChartFinish],
}

/// One sheet that was put in.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct GraftedSheet {
    /// Its visible name.
    pub name: String,
    /// The id of its relationship in the workbook.
    pub rel_id: String,
    /// Its part.
    pub part: String,
}

/// What has to change in the analyst's package, and what went where.
#[derive(Clone, Debug, Default)]
pub struct Grafted {
    /// The changes; those of filled sheets may be added to them.
    pub changes: Changes,
    /// The new sheets, in their order.
    pub sheets: Vec<GraftedSheet>,
    /// Where the cell formats went.
    pub styles: StyleMap,
}

/// The changes that put hence's sheets at the end of a workbook.
///
/// Sheets of an earlier fill leave with everything that only they use, and what they free is used
/// again, so that filling the output a second time gives the same bytes. New parts take the first
/// free numbers; shared strings become inline ones; cell formats are appended to the workbook's; no
/// new sheet is selected; the calculation chain goes (part, relationship and content type
/// together), since it names cells that may no longer hold formulas; everything is calculated when
/// the workbook is opened. Content types, relationships and sheet list are edited by splicing.
///
/// **Errors**: those of [`Package::graftable`], [`merge_styles`] and
/// [`edit_workbook`]; `sheet-name-taken`; `cannot-graft` for parts of hence's sheets that are not
/// provided for; `chart-count` where charts and their finishes do not match.
pub fn graft(host: &Package, graft: &Graft) -> Result<Grafted> {
    host.graftable().map_err(|problem| *problem)?;
    let book = Workbook::read(host)?;
    let own = Workbook::read(graft.ours)?;
    let is_previous = |sheet: &&Sheet| graft.previous.iter().any(|name| same_name(name, &sheet.name));
    let leaving: Vec<&Sheet> = book.sheets.iter().filter(is_previous).collect();
    let staying: Vec<&Sheet> = book.sheets.iter().filter(|sheet| !is_previous(sheet)).collect();
    if let Some(sheet) =
        own.sheets.iter().find(|s| staying.iter().any(|other| same_name(&s.name, &other.name)))
    {
        let what = format!("the workbook has a sheet named {} already", sheet.name);
        return Err(Problem::error("sheet-name-taken", Place::default(), what)
            .hint("rename that sheet")
            .into());
    }

    let mut changes = Changes { remove: departing(host, &leaving)?, ..Changes::default() };
    let mut links = Links::read(host, &leaving)?;
    for chain in links.present.iter().filter(|r| r.kind.ends_with("/calcChain")) {
        links.remove.push(chain.id.clone());
        links.gone.push(chain.target.clone());
        if host.has(&chain.target) {
            changes.remove.insert(chain.target.clone());
        }
    }

    let (styles, new_styles) = styles(host, graft.ours, &mut links, &mut changes)?;
    let mut copier = Copier::new(host, graft.ours, &changes.remove, &styles, graft.charts)?;
    let mut sheets = Vec::new();
    for sheet in &own.sheets {
        let part = copier.worksheet(sheet)?;
        let rel_id = links.add(WORKSHEET, &target(host, &part));
        sheets.push(GraftedSheet { name: sheet.name.clone(), rel_id, part });
    }
    copier.check_count()?;

    let set_names = own.names.iter().map(|name| NewName {
        name: name.name.clone(),
        scope: name.scope.and_then(|i| own.sheets.get(i)).map(|sheet| sheet.name.clone()),
        text: name.text.clone(),
        hidden: name.hidden,
        comment: name.comment.clone(),
    });
    let add_sheets = sheets.iter().map(|sheet| NewSheet {
        name: sheet.name.clone(),
        rel_id: sheet.rel_id.clone(),
        hidden: false,
    });
    let edit = BookEdit {
        add_sheets: add_sheets.collect(),
        remove_sheets: leaving.iter().map(|sheet| sheet.rel_id.clone()).collect(),
        set_names: set_names.chain(graft.set_names.iter().cloned()).collect(),
        remove_names: graft.remove_names.to_vec(),
        full_calc_on_load: true,
    };
    replace(host, &mut changes, host.workbook_part(), |xml| edit_workbook(xml, &edit))?;
    replace(host, &mut changes, &relationships_part(host.workbook_part()), |xml| links.written(xml))?;

    // The styles come first, so that a second fill, which finds them there, gives the same order.
    let styles_type = new_styles.map(|name| (name, STYLES_TYPE.to_owned()));
    let types: Vec<_> = styles_type.into_iter().chain(copier.types).collect();
    let gone = changes.remove.iter().chain(&links.gone).chain(types.iter().map(|(name, _)| name));
    let gone: Vec<String> = gone.cloned().collect();
    let gone: Vec<&str> = gone.iter().map(String::as_str).collect();
    replace(host, &mut changes, "[Content_Types].xml", |xml| {
        edit_content_types(xml, &gone, &pairs(&types), &pairs(&copier.defaults))
    })?;
    changes.add.extend(copier.parts);
    Ok(Grafted { changes, sheets, styles })
}

fn pairs(owned: &[(String, String)]) -> Vec<(&str, &str)> {
    owned.iter().map(|(a, b)| (a.as_str(), b.as_str())).collect()
}

fn same_name(a: &str, b: &str) -> bool {
    a.to_lowercase() == b.to_lowercase()
}

/// Edits a part of the host; a part that comes out the same is left alone.
fn replace(
    host: &Package,
    changes: &mut Changes,
    name: &str,
    edit: impl FnOnce(&[u8]) -> Result<Vec<u8>>,
) -> Result<()> {
    let Some(old) = host.part(name)? else {
        return Err(Problem::error("missing-part", Place::default(), format!("the file lacks {name}")).into());
    };
    let new = edit(&old)?;
    if new != old {
        changes.replace.insert(name.to_owned(), new);
    }
    Ok(())
}

/// The folder of the workbook part, with its slash.
fn folder(host: &Package) -> &str {
    let workbook = host.workbook_part();
    workbook.rfind('/').map_or("", |i| &workbook[..=i])
}

/// A part as the workbook's relationships write it.
fn target(host: &Package, part: &str) -> String {
    part.strip_prefix(folder(host)).unwrap_or(part).to_owned()
}

/// The relationships of the host's workbook part, and what becomes of them.
struct Links {
    present: Vec<Relationship>,
    remove: Vec<String>,
    /// Parts that the content types need no longer name, whether or not they are there.
    gone: Vec<String>,
    added: Vec<(String, &'static str, String)>,
}

impl Links {
    fn read(host: &Package, leaving: &[&Sheet]) -> Result<Links> {
        Ok(Links {
            present: host.relationships(host.workbook_part())?,
            remove: leaving.iter().map(|sheet| sheet.rel_id.clone()).collect(),
            gone: Vec::new(),
            added: Vec::new(),
        })
    }

    /// Adds one under the first free id.
    fn add(&mut self, kind: &'static str, target: &str) -> String {
        let is_free = |id: &String| {
            let kept = self.present.iter().any(|r| r.id == *id) && !self.remove.contains(id);
            !kept && self.added.iter().all(|(other, ..)| other != id)
        };
        let id = (1_u32..).map(|n| format!("rId{n}")).find(is_free).unwrap_or_default();
        self.added.push((id.clone(), kind, target.to_owned()));
        id
    }

    fn written(&self, xml: &[u8]) -> Result<Vec<u8>> {
        let remove: Vec<&str> = self.remove.iter().map(String::as_str).collect();
        let new = |(id, kind, target)| NewRelationship { id, kind, target };
        let added: Vec<_> = self.added.iter().map(|(id, kind, target)| new((id, kind, target))).collect();
        edit_relationships(xml, &remove, &added)
    }
}

/// The parts that leave with some sheets: what they lead to and nothing else does.
fn departing(host: &Package, sheets: &[&Sheet]) -> Result<BTreeSet<String>> {
    let mut reached = BTreeSet::new();
    if sheets.is_empty() {
        return Ok(reached);
    }
    let mut open: Vec<String> = sheets.iter().map(|sheet| sheet.part.clone()).collect();
    let follow = |from: &mut Vec<String>, part: &str| -> Result<()> {
        let targets = host.relationships(part)?.into_iter().filter(|r| !r.external);
        from.extend(targets.map(|r| r.target).filter(|target| host.has(target)));
        Ok(())
    };
    while let Some(part) = open.pop() {
        if reached.insert(part.clone()) {
            follow(&mut open, &part)?;
        }
    }
    // Whatever something else leads to stays, with all that it leads to in turn.
    let roots: Vec<&str> = sheets.iter().map(|sheet| sheet.part.as_str()).collect();
    let mut kept = Vec::new();
    for part in host.parts().chain([""]).filter(|part| !reached.contains(*part)) {
        let mut targets = Vec::new();
        follow(&mut targets, part)?;
        kept.extend(targets.into_iter().filter(|t| reached.contains(t) && !roots.contains(&t.as_str())));
    }
    while let Some(part) = kept.pop() {
        if !roots.contains(&part.as_str()) && reached.remove(&part) {
            follow(&mut kept, &part)?;
        }
    }
    let with_links: Vec<String> =
        reached.iter().map(|part| relationships_part(part)).filter(|name| host.has(name)).collect();
    reached.extend(with_links);
    Ok(reached)
}

/// Merges the cell formats; gives the name of the styles part if it is a new one.
fn styles(
    host: &Package,
    ours: &Package,
    links: &mut Links,
    changes: &mut Changes,
) -> Result<(StyleMap, Option<String>)> {
    let own = ours.relationships(ours.workbook_part())?.into_iter().find(|r| r.kind == STYLES);
    let own = own.map(|r| ours.part(&r.target)).transpose()?.flatten().unwrap_or_default();
    let there = links.present.iter().find(|r| r.kind.ends_with("/styles"));
    if let Some(part) = there.map(|r| r.target.clone()).filter(|part| host.has(part)) {
        let mut map = StyleMap::default();
        replace(host, changes, &part, |xml| {
            let (merged, made) = merge_styles(xml, &own)?;
            map = made;
            Ok(merged)
        })?;
        return Ok((map, None));
    }
    if let Some(dangling) = there {
        links.remove.push(dangling.id.clone());
    }
    let (part, map) = merge_styles(PLAIN_STYLES.as_bytes(), &own)?;
    let names = (0..).map(|n| if n == 0 { "styles.xml".to_owned() } else { format!("styles{n}.xml") });
    let name = names.map(|name| format!("{}{name}", folder(host))).find(|name| !host.has(name));
    let name = name.unwrap_or_default();
    links.add(STYLES, &target(host, &name));
    changes.add.push((name.clone(), part));
    Ok((map, Some(name)))
}
