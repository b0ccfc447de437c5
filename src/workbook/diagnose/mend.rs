//! Mistakes that keep a workbook from being valued: told as findings, and set right in a copy in memory, so that the rest of
//! the workbook can be looked at all the same.

use std::collections::{BTreeMap, BTreeSet};

use hence_core::parse_financial_year;

use super::effect::Effect;
use super::{Seen, years};
use crate::appraisal::StreamKind;
use crate::findings::{Finding, Kind};
use crate::model::Workbook;
use crate::names_edit::{BookEdit, OldName, edit_workbook};
use crate::package::{Changes, Package};
use crate::patch::{CellWrite, patch_sheet};
use crate::problem::{Place, Problem, Result, Severity};
use crate::reading::{ReadCell, Sheets, Value};
use crate::references::{Cell, NameTarget, Range, SheetRange};
use crate::resolve::text_as_number;
use crate::roles::{Role, parse_name, parse_role};

/// A mistake that was set right.
#[derive(Debug)]
enum Slip {
    /// Years as they stand (none for what is no year) and as they should.
    Years {
        at: SheetRange,
        wrong: Vec<usize>,
        held: Vec<Option<i32>>,
        right: Vec<i32>,
        texts: bool,
        blanks: bool,
    },
    /// A stream of costs entered negative, with no word on signs.
    Costs { at: SheetRange, from: String },
    /// A stream that is the total of others, or shares cells with another.
    Total { at: SheetRange, from: String, why: String, kind: StreamKind, flows: Vec<f64> },
}

/// A workbook with such mistakes set right, and what they were.
pub(crate) struct Mended {
    /// The copy; the file itself is as it was.
    pub package: Package,
    slips: Vec<Slip>,
}

/// Sets right what can be set right of what ended a reading.
///
/// **Returns** nothing where some error is of another kind, or is not understood well enough to be set right.
/// **Errors**: those of reading cells.
pub(crate) fn mend(
    package: &Package,
    book: &Workbook,
    roles: &[(String, String)],
    problems: &[Problem],
) -> Result<Option<Mended>> {
    // Before a file has passed every other check, no cell of it may be read.
    let errors = problems.iter().filter(|problem| problem.severity == Severity::Error);
    if unvalued(problems).len() != errors.clone().count() {
        return Ok(None);
    }
    let mut sheets = Sheets::open(package, book)?;
    let (mut slips, mut done) = (Vec::new(), BTreeSet::new());
    for problem in errors {
        let from = problem.place.name.clone().unwrap_or_default();
        let Some(name) = role_of(&from) else { return Ok(None) };
        let Some(at) = cells_of(book, roles, &from) else { return Ok(None) };
        let slip = match problem.code {
            code if name == Role::Years && (code.starts_with("years-") || code == "text-number") => {
                if !done.insert(from) {
                    continue;
                }
                let grid = sheets.range(&at)?;
                years_slip(at, grid.iter().map(|(_, cell)| cell))
            }
            "cost-sign" => Some(Slip::Costs { at, from }),
            "double-count" | "overlap"
                if name.is_stream() && !matches!(name, Role::Costs | Role::Benefits) =>
            {
                if !done.insert(from.clone()) {
                    continue;
                }
                let kind = match name {
                    Role::Cost => StreamKind::Cost,
                    Role::Damage => StreamKind::Damage,
                    _ => StreamKind::Benefit,
                };
                let grid = sheets.range(&at)?;
                let flows = grid.iter().map(|(_, cell)| number(cell).unwrap_or(0.0)).collect();
                Some(Slip::Total { at, from, why: problem.message.clone(), kind, flows })
            }
            _ => None,
        };
        match slip {
            Some(slip) => slips.push(slip),
            None => return Ok(None),
        }
    }
    if slips.is_empty() {
        return Ok(None);
    }
    let package = copy(package, book, &mut sheets, &slips)?;
    Ok(Some(Mended { package, slips }))
}

/// The role that a defined name, or `--role ROLE`, stands for.
fn role_of(from: &str) -> Option<Role> {
    match from.strip_prefix("--role ") {
        Some(role) => parse_role(role).ok().map(|name| name.role),
        None => parse_name(from)?.ok().map(|name| name.role),
    }
}

fn cells_of(book: &Workbook, roles: &[(String, String)], from: &str) -> Option<SheetRange> {
    if let Some(role) = from.strip_prefix("--role ") {
        let (_, cells) = roles.iter().find(|(given, _)| given == role)?;
        let at: SheetRange = cells.parse().ok()?;
        let sheet = book.sheet_index(&at.sheet)?;
        return Some(SheetRange { sheet: book.sheets[sheet].name.clone(), ..at });
    }
    match book.resolve(book.names.iter().find(|name| name.name == from)?) {
        NameTarget::Cells(at) => Some(at),
        _ => None,
    }
}

fn number(cell: &ReadCell) -> Option<f64> {
    match cell.value {
        Value::Number(number) => Some(number),
        _ => None,
    }
}

/// The year that a cell shows, whether or not it may be read as one.
fn year_in(cell: &ReadCell) -> Option<i32> {
    let whole = |x: f64| (x.fract() == 0.0 && x.abs() < 1e4).then_some(x as i32);
    match &cell.value {
        Value::Number(x) => whole(*x),
        Value::Text(text) => {
            parse_financial_year(text.trim()).ok().or_else(|| text_as_number(text).and_then(whole))
        }
        _ => None,
    }
}

fn years_slip<'a>(at: SheetRange, cells: impl Iterator<Item = &'a ReadCell>) -> Option<Slip> {
    let cells: Vec<&ReadCell> = cells.collect();
    let held: Vec<Option<i32>> = cells.iter().map(|cell| year_in(cell)).collect();
    let right = years::meant(&held)?;
    // A year that stands as a text looks right and is none.
    let financial = |cell: &ReadCell| matches!(&cell.value, Value::Text(text) if parse_financial_year(text.trim()).is_ok());
    let most = cells.iter().filter(|cell| financial(cell)).count() * 2 > cells.len();
    let is_text = |cell: &ReadCell| matches!(cell.value, Value::Text(_)) && !financial(cell);
    let wrong: Vec<usize> = (0..cells.len())
        .filter(|i| held[*i] != Some(right[*i]) || is_text(cells[*i]) || financial(cells[*i]) != most)
        .collect();
    let texts = wrong.iter().any(|i| is_text(cells[*i]));
    let blanks = wrong.iter().any(|i| cells[*i].value == Value::Blank);
    (!wrong.is_empty()).then_some(Slip::Years { at, wrong, held, right, texts, blanks })
}

/// The workbook with everything set right.
fn copy(package: &Package, book: &Workbook, sheets: &mut Sheets, slips: &[Slip]) -> Result<Package> {
    let mut writes: BTreeMap<String, BTreeMap<Cell, CellWrite>> = BTreeMap::new();
    let mut names = Vec::new();
    for slip in slips {
        match slip {
            Slip::Years { at, wrong, right, .. } => {
                let grid = sheets.range(at)?;
                let texts = grid.iter().filter(|(_, cell)| matches!(&cell.value, Value::Text(text) if parse_financial_year(text.trim()).is_ok()));
                let financial = texts.count() * 2 > right.len();
                let writes = writes.entry(at.sheet.clone()).or_default();
                for &i in wrong {
                    let year = right[i];
                    let text = format!("{year}/{:02}", (year + 1) % 100);
                    let write =
                        if financial { CellWrite::Text(text) } else { CellWrite::Number(f64::from(year)) };
                    writes.insert(crate::formulas::nth(at.range, i), write);
                }
            }
            Slip::Costs { at, .. } => {
                let grid = sheets.range(at)?;
                let writes = writes.entry(at.sheet.clone()).or_default();
                let turned = grid.iter().filter_map(|(cell, read)| Some((cell, number(read)?)));
                writes.extend(turned.map(|(cell, x)| (cell, CellWrite::Number(0.0 - x))));
            }
            Slip::Total { from, .. } => {
                let scope = book.names.iter().find(|name| name.name == *from).and_then(|name| name.scope);
                names.push(OldName { name: from.clone(), scope: scope.map(|i| book.sheets[i].name.clone()) });
            }
        }
    }
    let mut changes = Changes::default();
    for (name, writes) in writes {
        let Some(index) = book.sheet_index(&name) else { continue };
        let part = &book.sheets[index].part;
        let xml = package.part(part)?.unwrap_or_default();
        changes.replace.insert(part.clone(), patch_sheet(&xml, &writes)?);
    }
    if !names.is_empty() {
        let part = package.workbook_part().to_owned();
        let xml = package.part(&part)?.unwrap_or_default();
        let edit = BookEdit { remove_names: names, ..BookEdit::default() };
        changes.replace.insert(part, edit_workbook(&xml, &edit)?);
    }
    Package::from_bytes(package.file_name(), package.write(&changes)?)
}

impl Mended {
    /// What was set right, with its effects, the copy having been valued.
    pub(crate) fn findings(&self, seen: &Seen) -> Vec<Finding> {
        self.slips.iter().map(|slip| finding(slip, seen)).collect()
    }

    /// Whether a finding of the copy only repeats what was set right.
    pub(crate) fn repeats(&self, finding: &Finding) -> bool {
        finding.kind == Kind::NegativeCost && self.slips.iter().any(|slip| matches!(slip, Slip::Costs { .. }))
    }
}

fn finding(slip: &Slip, seen: &Seen) -> Finding {
    let (kind, place, found, expected, words, confidence) = match slip {
        Slip::Years { at, wrong, held, right, texts, blanks } => {
            let show = |i: usize| held[i].map_or_else(|| "no year".to_owned(), |year| year.to_string());
            let last = wrong[wrong.len() - 1];
            let nth = |i: usize| crate::formulas::nth(at.range, i);
            let what = match (texts, blanks) {
                (true, _) => "years are stored as texts, which formulas pass over or cannot compare",
                (_, true) => "years are blank",
                _ => "years are repeated or out of order",
            };
            let shown = |each: &dyn Fn(usize) -> String| {
                let list: Vec<String> = wrong.iter().take(4).map(|i| each(*i)).collect();
                format!("{}{}", list.join(", "), if wrong.len() > 4 { ", ..." } else { "" })
            };
            let quoted = |i: usize| if *texts { format!("the text `{}`", show(i)) } else { show(i) };
            (
                Kind::YearsBroken,
                Place::cells(&at.sheet, Range::new(nth(wrong[0]), nth(last))),
                shown(&quoted),
                shown(&|i| right[i].to_string()),
                format!(
                    "{} of {} {what}; the others run from {} to {}, one after the other. Everything else was looked at with \
                     the years set right.",
                    wrong.len(),
                    held.len(),
                    right[0],
                    right[right.len() - 1]
                ),
                0.95,
            )
        }
        Slip::Costs { at, from } => (
            Kind::NegativeCost,
            Place::cells(&at.sheet, at.range).called(from),
            "negative in every year".to_owned(),
            "positive, as costs are unless hence_signs says otherwise".to_owned(),
            "A cost below zero counts for the option, and nothing in the workbook declares that costs are entered negative. \
             Everything else was looked at with the signs of the stream turned."
                .to_owned(),
            0.9,
        ),
        Slip::Total { at, from, why, .. } => (
            Kind::DoubleCount,
            Place::cells(&at.sheet, at.range).called(from),
            format!("the stream {why}"),
            "the total or its parts, not both".to_owned(),
            "The flows of the parts count once by themselves and once in the total. Everything else was looked at without \
             the total."
                .to_owned(),
            0.95,
        ),
    };
    let effect = effect(slip, seen).unwrap_or_default();
    Finding {
        kind,
        place,
        found,
        expected,
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence,
        words,
    }
}

/// What the mistake adds to each option, where that can be told.
fn effect(slip: &Slip, seen: &Seen) -> Option<Effect> {
    let mut added = vec![0.0; seen.appraisal.choices.len()];
    for (c, choice) in seen.appraisal.choices.iter().enumerate() {
        let outcome = &seen.outcomes[c];
        match slip {
            Slip::Years { at, wrong, held, right, texts, .. }
                if seen.appraisal.axes[choice.axis].at.hull() == *at =>
            {
                // How a program counts with a text depends on the formula.
                if *texts {
                    return None;
                }
                for &i in wrong {
                    let late = f64::from(held[i]? - right[i]);
                    let factor = outcome.curve.factor(outcome.offsets[i] + late).ok()?;
                    added[c] += outcome.net[i] * (factor - outcome.factors[i]);
                }
            }
            Slip::Costs { at, .. } => {
                let streams = choice.streams.iter().zip(&outcome.streams);
                added[c] += streams
                    .filter(|(s, _)| s.at.hull() == *at)
                    .map(|(_, valued)| 2.0 * valued.pv)
                    .sum::<f64>();
            }
            // A total that is named stands beside one of its parts, in the option of that.
            Slip::Total { at, kind, flows, .. } if seen.appraisal.axes[choice.axis].at.sheet == at.sheet => {
                let pv: f64 = flows.iter().zip(&outcome.factors).map(|(flow, factor)| flow * factor).sum();
                added[c] += crate::formulas::side(*kind) * pv;
            }
            _ => {}
        }
    }
    let baseline = seen.appraisal.baseline.map_or(0.0, |b| added[b]);
    let right = seen.npvs();
    let wrong: Vec<f64> = right.iter().zip(&added).map(|(npv, added)| npv + added - baseline).collect();
    Some(Effect::of(&seen.appraisal, &right, &wrong))
}

/// What ended a reading, as findings without effects: for a workbook that cannot be valued even so.
pub(crate) fn unvalued(problems: &[Problem]) -> Vec<Finding> {
    let kind = |problem: &Problem| match problem.code {
        "cost-sign" => Some(Kind::NegativeCost),
        "double-count" | "overlap" => Some(Kind::DoubleCount),
        code if code.starts_with("years-") => Some(Kind::YearsBroken),
        "text-number" if problem.place.name.as_deref().and_then(role_of) == Some(Role::Years) => {
            Some(Kind::YearsBroken)
        }
        _ => None,
    };
    let errors = problems.iter().filter(|problem| problem.severity == Severity::Error);
    let finding = |problem: &Problem| {
        Some(Finding {
            kind: kind(problem)?,
            place: problem.place.clone(),
            found: problem.message.clone(),
            expected: problem.hint.clone().unwrap_or_default(),
            effect_on_npv: None,
            ranking: None,
            confidence: 0.9,
            words: "The workbook cannot be valued as it stands, so the effect is not known.".to_owned(),
        })
    };
    errors.filter_map(finding).collect()
}
