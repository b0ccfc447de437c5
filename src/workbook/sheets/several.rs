//! Several appraisals in one workbook: a verdict each, and one for all of them on the first one's summary.

use super::lines::DIFFERS;
use super::summary::{Page, VERDICT_AGREES, VERDICT_CELL};
use super::{AuditInput, Composed, SheetNames, VERDICT};
use crate::formulas::refer_cell;
use crate::patch::Cached;
use crate::problem::Result;
use crate::references::{Cell, column_letters};
use crate::roles::key;
use crate::writer::{self, Style};

/// Another appraisal, for the summary that gathers the verdicts.
#[derive(Clone, Debug)]
pub struct Sibling {
    name: String,
    summary: String,
    /// None where it awaits recalculation.
    verdict: Option<String>,
}

impl Sibling {
    /// The appraisal whose sheets were composed.
    pub fn of(names: &SheetNames, name: Option<&str>, composed: &Composed) -> Self {
        let known = !composed.awaits;
        Sibling {
            name: name.unwrap_or_default().to_owned(),
            summary: names.summary.clone(),
            verdict: known.then(|| composed.built.verdict.clone()),
        }
    }
}

/// The verdict on all appraisals: agreement where all agree, else the first that does not.
pub fn overall(verdicts: &[(&str, String)]) -> String {
    let differing: Vec<&str> =
        verdicts.iter().filter(|(_, verdict)| verdict.starts_with(DIFFERS)).map(|(name, _)| *name).collect();
    match (verdicts, differing.first()) {
        ([(_, only)], _) => only.clone(),
        (_, Some(first)) => words(differing.len(), verdicts.len(), first),
        _ => {
            let open = verdicts.iter().find(|(_, verdict)| verdict != VERDICT_AGREES);
            open.map_or(VERDICT_AGREES, |(_, verdict)| verdict).to_owned()
        }
    }
}

fn words(differing: usize, all: usize, first: &str) -> String {
    format!("{DIFFERS}: {differing} of {all} appraisals, first {first}")
}

/// Where an appraisal's verdict and the count of those that differ stand: name, 0 or 1, verdict.
const COUNT: u32 = 1;
const TEXT: u32 = 2;

/// Writes the list of appraisals with the verdict on all of them, whose cell is given back.
pub(super) fn section(page: &mut Page, input: &AuditInput<'_>, own: Option<&str>) -> Cell {
    page.section("Appraisals of this workbook");
    for (col, heading) in ["Appraisal", "Differs", "Verdict"].into_iter().enumerate() {
        page.sheet.text(page.row, col as u32, Style::Heading, heading);
    }
    page.row += 1;
    let home = page.sheet.name.clone();
    let first = page.row;
    let this = Sibling {
        name: input.meta.appraisal.clone().unwrap_or_default(),
        summary: home.clone(),
        verdict: own.map(str::to_owned),
    };
    let all: Vec<&Sibling> = std::iter::once(&this).chain(input.siblings).collect();
    let cached = |sibling: &Sibling, result: fn(&str) -> Cached| {
        sibling.verdict.as_deref().map_or(Cached::None, result)
    };
    for sibling in &all {
        let text = refer_cell(&home, &sibling.summary, VERDICT_CELL);
        let differs = format!("IF({}=\"{VERDICT_AGREES}\",0,1)", at(TEXT, page.row));
        let count = |verdict: &str| Cached::Number(f64::from(u8::from(verdict != VERDICT_AGREES)));
        page.sheet.text(page.row, 0, Style::Wrapped, &sibling.name);
        page.sheet.formula(page.row, COUNT, Style::Result, differs, cached(sibling, count));
        page.sheet.formula(
            page.row,
            TEXT,
            Style::Text,
            text,
            cached(sibling, |v| Cached::Text(v.to_owned())),
        );
        page.row += 1;
    }
    let column = |col: u32| format!("{}:{}", at(col, first), at(col, page.row - 1));
    let (names, counts) = (column(0), column(COUNT));
    let formula = format!(
        "IF(SUM({counts})=0,\"{VERDICT_AGREES}\",\"{DIFFERS}: \"&SUM({counts})&\" of {n} appraisals, first \"\
         &INDEX({names},MATCH(1,{counts},0)))",
        n = all.len()
    );
    let known: Option<Vec<(&str, String)>> =
        all.iter().map(|sibling| Some((sibling.name.as_str(), sibling.verdict.clone()?))).collect();
    let result = known.map_or(Cached::None, |verdicts| Cached::Text(overall(&verdicts)));
    page.sheet.text(page.row, 0, Style::Verdict, "All appraisals");
    page.sheet.formula(page.row, COUNT, Style::Verdict, formula, result);
    page.row += 2;
    Cell { row: page.row - 2, col: COUNT }
}

fn at(col: u32, row: u32) -> String {
    format!("${}${}", column_letters(col), row + 1)
}

/// hence's sheets of every appraisal as one package, with the names of the verdicts.
///
/// **Errors**: as of the writer.
pub fn package(all: &[Composed]) -> Result<Vec<u8>> {
    let sheets: Vec<writer::Sheet> =
        all.iter().flat_map(|composed| composed.sheets.iter().cloned()).collect();
    let mut names: Vec<(String, &str)> = Vec::new();
    for composed in all {
        match &composed.appraisal {
            None => names.push((VERDICT.to_owned(), &composed.verdict_at)),
            Some(name) => {
                let own = format!("{VERDICT}_{}", key(name).replace(' ', "_"));
                names.push((own, &composed.verdict_at));
                let alone = (all.len() == 1).then_some(&composed.verdict_at);
                names.extend(
                    composed.overall_at.as_ref().or(alone).map(|at| (VERDICT.to_owned(), at.as_str())),
                );
            }
        }
    }
    let names: Vec<(&str, &str)> = names.iter().map(|(name, at)| (name.as_str(), *at)).collect();
    writer::package(&sheets, &names)
}

#[cfg(test)]
mod tests {
    use super::{VERDICT_AGREES, overall};

    #[test]
    fn one_verdict_for_all() {
        let of = |verdicts: &[(&'static str, &str)]| {
            overall(&verdicts.iter().map(|(name, text)| (*name, (*text).to_owned())).collect::<Vec<_>>())
        };
        let (agrees, differs, open) = (VERDICT_AGREES, "differs: 1 of 9 checks", "awaits recalculation");
        assert_eq!(of(&[("", differs)]), differs);
        assert_eq!(of(&[("a", agrees), ("b", agrees)]), agrees);
        assert_eq!(of(&[("a", open), ("b", differs), ("c", differs)]), "differs: 2 of 3 appraisals, first b");
        assert_eq!(of(&[("a", agrees), ("b", open)]), open);
    }
}
