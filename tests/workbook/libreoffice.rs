//! The whole job against a real LibreOffice, which recalculates every filled workbook.
//!
//! Workbooks are the samples and small ones made here. Without LibreOffice each test says that it did not run, and
//! fails where HENCE_REQUIRE_TOOLS is set.

pub mod books;
pub mod cells;
pub mod office;

use std::path::Path;
use std::sync::OnceLock;

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::package::Package;
use hence_workbook::patch::{Cached, CellWrite};
use hence_workbook::references::Cell;
use hence_workbook::sheets::VERDICT_AGREES;

use books::{CASES, Labels, Said, catalogue};
use cells::{Cells, FileCell, Stored, cells, changed, package, stored_verdict, verdict};
use office::{Recalculate, saved, soffice};

/// The samples: as it was made, and as LibreOffice saved it.
const SAMPLES: [&str; 2] = ["mine-drainage.xlsx", "mine-drainage-libreoffice.xlsx"];

/// Two options over a baseline.
const OPTIONS: &str = "options.xlsx";

fn sample(name: &str) -> Vec<u8> {
    std::fs::read(Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(name)).expect("the sample")
}

/// The workbook filled, its verdict agreeing; or what is wrong.
fn filled(name: &str, bytes: &[u8], request: &FillRequest, catalogue: &Catalogue) -> Result<Vec<u8>, String> {
    let package = Package::from_bytes(name, bytes.to_vec()).map_err(|error| format!("{name}: {error}"))?;
    let filled = fill(&package, request, catalogue).map_err(|error| format!("{name}: {error}"))?;
    let cell = verdict(&filled.bytes);
    if filled.report.verdict != VERDICT_AGREES || cell != VERDICT_AGREES {
        return Err(format!("{name}: the verdict is {:?}, in the cell {cell:?}", filled.report.verdict));
    }
    Ok(filled.bytes)
}

/// Whether a column of differences stands there: tiny numbers, compared with what is allowed beside them.
fn is_difference(sheet: &str, cell: Cell) -> bool {
    matches!((sheet, cell.col), ("Audit checks", 6) | ("Audit coverage", 5) | ("Audit sensitivity", 4))
}

/// How far two stored values lie apart, in words; nothing where they agree within 1e-9 of their size.
fn apart(before: &Stored, after: &Stored) -> Option<String> {
    match (before, after) {
        (Stored::Number(a), Stored::Number(b)) if (a - b).abs() <= 1e-9 * a.abs().max(b.abs()) => None,
        (a, b) if a == b => None,
        (a, b) => Some(format!("{a:?} became {b:?}")),
    }
}

/// Every formula's result in `before` against the one in `after`; how many were compared, and what differs.
pub fn compare(before: &Cells, after: &Cells) -> (usize, Vec<String>) {
    let mut compared = 0;
    let mut wrong = Vec::new();
    for ((sheet, cell), old) in before.iter().filter(|(_, c)| c.formula && c.value != Stored::Nothing) {
        let stands = |cell| after.get(&(sheet.clone(), cell)).map(|c| &c.value);
        let difference = match stands(*cell) {
            None => Some("is gone".to_owned()),
            Some(new) if is_difference(sheet, *cell) && apart(&old.value, new).is_some() => {
                match (new, stands(Cell { col: cell.col + 1, ..*cell })) {
                    (Stored::Number(x), Some(Stored::Number(most))) if x <= most => None,
                    (value, most) => Some(format!("{value:?}, allowed {most:?}")),
                }
            }
            Some(new) => apart(&old.value, new),
        };
        compared += 1;
        wrong.extend(difference.map(|words| format!("{sheet}!{cell}: {words}")));
    }
    (compared, wrong)
}

/// An appraisal of this file: its name, the workbook, and the filled workbook or what was wrong with it.
struct Appraisal {
    name: String,
    filled: Result<Vec<u8>, String>,
}

/// Every appraisal of this file, filled once for all tests.
fn appraisals() -> &'static [Appraisal] {
    static ALL: OnceLock<Vec<Appraisal>> = OnceLock::new();
    ALL.get_or_init(|| {
        let mut books: Vec<(String, Vec<u8>)> =
            SAMPLES.iter().map(|name| ((*name).to_owned(), sample(name))).collect();
        books.push((OPTIONS.into(), books::options().bytes()));
        books.extend(CASES.iter().enumerate().map(|(i, case)| (case_name(i), case.book().bytes())));
        let catalogue = catalogue();
        let plain = FillRequest::default();
        let make = |name: &str, input: &[u8], request: &FillRequest| {
            let filled = filled(name, input, request, &catalogue);
            Appraisal { name: name.to_owned(), filled }
        };
        let mut all: Vec<Appraisal> = books.iter().map(|(name, input)| make(name, input, &plain)).collect();
        // Plain numbers instead of formulas; and a filled workbook filled again on another basis.
        let values = FillRequest { formulas: false, ..plain.clone() };
        all.push(make("values.xlsx", &CASES[8].book().bytes(), &values));
        let other = FillRequest { basis: Some("gamma mean 3% sd 2%".into()), ..plain.clone() };
        if let Some(Ok(first)) = all.iter().find(|a| a.name == case_name(6)).map(|a| a.filled.clone()) {
            all.push(make("again.xlsx", &first, &other));
        }
        all
    })
}

fn case_name(i: usize) -> String {
    format!("case{i:02}.xlsx")
}

/// The filled workbook of that name.
fn output(name: &str) -> &'static [u8] {
    let found = appraisals().iter().find(|appraisal| appraisal.name == name).expect("an appraisal");
    found.filled.as_ref().unwrap_or_else(|wrong| panic!("{wrong}"))
}

/// What `hence check` says: differences and findings, or the problems that keep it from valuing; nothing where all agrees.
pub fn found(bytes: &[u8]) -> Vec<String> {
    match check(&package(bytes), &CheckRequest::default(), &catalogue()) {
        Ok(report) if report.agrees() => Vec::new(),
        Ok(report) => {
            let differences = report.differences.iter().map(|d| format!("{} {}", d.place, d.role));
            let findings = report.findings.iter().map(|f| format!("{} {}", f.place, f.kind.code()));
            differences.chain(findings).collect()
        }
        Err(error) => error.problems().iter().map(ToString::to_string).collect(),
    }
}

#[test]
fn every_result_is_recalculated_to_the_same() {
    let Some(soffice) = soffice() else { return };
    let mut wrong: Vec<String> = appraisals().iter().filter_map(|a| a.filled.clone().err()).collect();
    let mut books: Vec<(String, Vec<u8>)> =
        appraisals().iter().filter_map(|a| Some((a.name.clone(), a.filled.clone().ok()?))).collect();
    // A stored result that is wrong shows that LibreOffice did compute everything.
    let control = changed(&books[0].1, CONTROL.0, &[(CONTROL.1, formula(CONTROL.2, 4711.0))]);
    books.push(("control.xlsx".into(), control));
    let back = saved(&soffice, &books, Recalculate::All);
    let mut compared = 0;
    for (name, bytes) in &books {
        let after = &back[name];
        let (count, differ) = compare(&cells(bytes), &cells(after));
        if name == "control.xlsx" {
            assert_eq!(differ.len(), 1, "the wrong result is found: {differ:?}");
            continue;
        }
        compared += count;
        if !differ.is_empty() {
            let shown = differ[..differ.len().min(6)].join("\n  ");
            wrong.push(format!("{name}: {} of {count} results differ\n  {shown}", differ.len()));
        }
        if verdict(after) != VERDICT_AGREES {
            wrong.push(format!("{name}: recalculated, the verdict is {:?}", verdict(after)));
        }
        wrong.extend(found(after).into_iter().map(|found| format!("{name}: check finds {found}")));
    }
    println!("{} workbooks, {compared} results of formulas recalculated", books.len() - 1);
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// A formula of the sample that depends on no filled cell: sheet, cell, text.
const CONTROL: (&str, &str, &str) = ("Do nothing", "B7", "SUM(D7:GU7)");

fn formula(text: &str, result: f64) -> CellWrite {
    CellWrite::Formula(text.to_owned(), Cached::Number(result))
}

/// A change that a person makes in a filled workbook.
struct Turn {
    book: String,
    sheet: &'static str,
    cell: String,
    write: CellWrite,
    check: Check,
}

/// Where `hence check`, which looks at stored results, finds the change too.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Check {
    /// In the workbook as LibreOffice computed it.
    After,
    /// Before only: live formulas follow a changed flow, and then agree with the basis again.
    Before,
    /// Nowhere: no value depends on it, or stored flows follow only when they are computed again.
    Never,
}

fn turn(book: &str, sheet: &'static str, cell: &str, write: CellWrite) -> Turn {
    Turn { book: book.to_owned(), sheet, cell: cell.to_owned(), write, check: Check::After }
}

/// One change of every kind.
fn turns() -> Vec<Turn> {
    let number = |book, sheet, cell, x| turn(book, sheet, cell, CellWrite::Number(x));
    let text = |book, sheet, cell, text: &str| turn(book, sheet, cell, CellWrite::Text(text.to_owned()));
    let before = |turn| Turn { check: Check::Before, ..turn };
    let (whole, small) = (SAMPLES[0], case_name(0));
    const WALL: &str = "The wall's end";
    let mut turns = vec![
        // The sample: a factor, a total, a flow, the base, a year, the growth that flows are made with.
        number(whole, "Lime plant", "Z15", 0.4567),
        number(whole, "Plug and divert", "B21", 1.0),
        before(number(whole, "Settling ponds", "E6", 9e6)),
        number(whole, "Inputs", "B3", 2027.0),
        number(whole, "Do nothing", "M4", 2100.0),
        number(whole, "Inputs", "B9", 0.02),
        // Filled cells of every other kind.
        text(&small, "Appraisal", "H18", "n/a"),
        number(&small, "Appraisal", "H19", 1.0),
        number(&small, "Appraisal", "H20", 1.0),
        number(&small, "Appraisal", "H21", 0.04),
        number(&small, "Appraisal", "E1", 1e6),
        number(OPTIONS, WALL, "F6", 1.4),
        number(OPTIONS, WALL, "F9", 1.4),
        number(OPTIONS, WALL, "F10", 0.4),
        number(OPTIONS, WALL, "F11", 40.0),
        before(number(OPTIONS, "Do nothing", "C9", 1.0)),
        before(number(&case_name(1), "Appraisal", &CASES[1].flow(1), 1.0)),
        before(number(&case_name(2), "Appraisal", &CASES[2].flow(1), 1.0)),
        // What the workbook states.
        text(OPTIONS, "Inputs", "B2", "3.5%"),
        text(OPTIONS, "Inputs", "B3", WALL),
        before(number(OPTIONS, "Inputs", "B4", 70.0)),
        text(OPTIONS, "Inputs", "B5", "for ever"),
        text(&small, "Appraisal", "B3", "flows middle, base end"),
        // hence's own sheet: a factor, a present value.
        number(&small, "Discounting", "D30", 0.5),
        number(OPTIONS, "Discounting", "K9", 12345.0),
    ];
    // Years and bases of every kind: once for each way they are written and laid out.
    let mut seen = Vec::new();
    for (i, case) in CASES.iter().enumerate() {
        let kind = (case.labels, case.across);
        if seen.contains(&kind) {
            continue;
        }
        seen.push(kind);
        let typed = |cell: &str, text: String| {
            let write = match text.strip_prefix(['\'', '@']) {
                Some(serial) if text.starts_with('@') => CellWrite::Number(serial.parse().expect("a day")),
                Some(text) => CellWrite::Text(text.to_owned()),
                None => CellWrite::Number(text.parse().expect("a number")),
            };
            turn(&case_name(i), "Appraisal", cell, write)
        };
        // The label of a year far beyond stands in the seventh place; the base is the third year.
        turns.push(typed(&case.label(6), case.written(46)));
        turns.push(match case.labels {
            // These count from the base, whatever it is.
            Labels::Numbers | Labels::Offsets if !case.basis.contains("2040") => {
                Turn { check: Check::Never, ..typed("B1", "2028".into()) }
            }
            _ => typed("B1", case.written(2 + case.past)),
        });
    }
    let priced = |by: &str| CASES.iter().position(|case| case.prices.1.contains(by)).expect("a priced case");
    let (inflation, index) = (priced("inflation, growth"), priced("index"));
    let (level, multiplied) = (CASES[index].level(5), case_name(index));
    let priced = case_name(inflation);
    // Prices: what they are, inflation and growth, a level of the index, a multiplier on hence's own sheet.
    turns.extend([
        turn(&priced, "Appraisal", "B10", CellWrite::Text("real 2031".into())),
        turn(&priced, "Appraisal", "B11", CellWrite::Number(0.03)),
        turn(&priced, "Appraisal", "B12", CellWrite::Number(0.02)),
        turn(&multiplied, "Appraisal", &level, CellWrite::Number(70.0)),
        turn(&multiplied, "Discounting", "G20", CellWrite::Number(0.5)),
    ]);
    let owned = CASES.iter().position(|case| case.own.1).expect("a case with factors of a stream");
    turns.extend([
        turn(&case_name(owned), "Appraisal", "E10", CellWrite::Text("1%".into())),
        turn(&case_name(owned), "Appraisal", &CASES[owned].own_factor(7), CellWrite::Number(0.5)),
        turn(&case_name(owned), "Discounting", "I12", CellWrite::Number(0.5)),
    ]);
    let faring = |by: &str| CASES.iter().position(|case| case.welfare.0 == by).expect("a case of welfare");
    let (weighted, consuming) = (faring("income"), faring("consumption"));
    turns.extend([
        turn(&case_name(weighted), "Appraisal", "E11", CellWrite::Number(1.2)),
        turn(&case_name(weighted), "Appraisal", "E12", CellWrite::Number(17_000.0)),
        turn(&case_name(weighted), "Appraisal", "F12", CellWrite::Number(31_000.0)),
        // No value in the workbook rests on consumption: the audit sheets alone tell.
        Turn {
            check: Check::Never,
            ..turn(
                &case_name(consuming),
                "Appraisal",
                &CASES[consuming].consumption(3),
                CellWrite::Number(900.0),
            )
        },
        Turn { check: Check::Never, ..turn(OPTIONS, "Inputs", "B7", CellWrite::Number(3.0)) },
    ]);
    let settings = CASES.iter().position(|case| case.settings).expect("a case with settings");
    for (cell, write, check) in [
        ("B4", CellWrite::Text("costs positive".into()), Check::After),
        ("B5", CellWrite::Text("m".into()), Check::After),
        ("B6", CellWrite::Number(0.2), Check::Before),
        ("B7", CellWrite::Number(0.0), Check::Before),
        ("B8", CellWrite::Text("to 61".into()), Check::After),
    ] {
        turns.push(Turn { check, ..turn(&case_name(settings), "Appraisal", cell, write) });
    }
    turns
}

#[test]
fn the_verdict_turns_when_a_cell_is_changed() {
    let Some(soffice) = soffice() else { return };
    let turns = turns();
    let edited: Vec<(String, Vec<u8>)> = turns
        .iter()
        .enumerate()
        .map(|(i, turn)| {
            let writes = [(turn.cell.as_str(), turn.write.clone())];
            (format!("turn{i:02}.xlsx"), changed(output(&turn.book), turn.sheet, &writes))
        })
        .collect();
    let back = saved(&soffice, &edited, Recalculate::All);
    let mut wrong = Vec::new();
    for (turn, (name, before)) in turns.iter().zip(&edited) {
        let after = &back[name];
        let what = format!("{} {}!{} {:?}", turn.book, turn.sheet, turn.cell, turn.write);
        if !verdict(after).starts_with("differs: ") {
            wrong.push(format!("{what}: the verdict is still {:?}", verdict(after)));
        }
        let found = found(if turn.check == Check::Before { before } else { after });
        if found.is_empty() != (turn.check == Check::Never) {
            wrong.push(format!("{what}: check finds {found:?}"));
        }
    }
    println!("{} changes", turns.len());
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn nothing_stale_is_left_to_read() {
    let Some(soffice) = soffice() else { return };
    let whole = output(SAMPLES[0]);
    let before = cells(whole);
    // The summary's formulas over filled cells, one step away (B5:D8) and two (the ranks, E5:E8).
    for (row, col) in (4..8).flat_map(|row| (1..5).map(move |col| (row, col))) {
        let cell = &before[&("Summary".to_owned(), Cell { row, col })];
        assert_eq!(*cell, FileCell { formula: true, value: Stored::Nothing });
    }
    let lost: Vec<&(String, Cell)> = before
        .iter()
        .filter(|((sheet, _), cell)| cell.formula && cell.value == Stored::Nothing && sheet != "Summary")
        .map(|(place, _)| place)
        .collect();
    assert_eq!(
        lost,
        Vec::<&(String, Cell)>::new(),
        "formulas that depend on no filled cell keep their results"
    );
    // What is read without computing all anew is what computing all anew gives.
    let names = [SAMPLES[0], OPTIONS, "case00.xlsx", "case02.xlsx"];
    let mut books: Vec<(String, Vec<u8>)> =
        names.iter().map(|name| ((*name).to_owned(), output(name).to_vec())).collect();
    let stale = changed(whole, "Summary", &[("B6", formula("'Settling ponds'!$B$20", 4711.0))]);
    books.push(("stale.xlsx".into(), stale));
    let opened = saved(&soffice, &books, Recalculate::Missing);
    let computed = saved(&soffice, &books, Recalculate::All);
    for (name, _) in &books {
        let (shown, right) = (cells(&opened[name]), cells(&computed[name]));
        let (count, differ) = compare(&shown, &right);
        if name == "stale.xlsx" {
            assert!(!differ.is_empty(), "a stale result that is left would be read");
            continue;
        }
        let formulas = right.values().filter(|cell| cell.formula).count();
        assert_eq!(count, formulas, "{name}: every formula has a result");
        assert_eq!(differ, Vec::<String>::new(), "{name}");
    }
}

#[test]
fn what_rests_on_filled_cells_is_left_to_be_computed() {
    let mut books = Vec::new();
    for (name, book, said) in books::own_formulas() {
        let input = Package::from_bytes(name, book.bytes()).expect("a package");
        let made =
            fill(&input, &FillRequest::default(), &catalogue()).unwrap_or_else(|e| panic!("{name}: {e}"));
        let verdict = &made.report.verdict;
        let codes: Vec<&str> = made.report.problems.iter().map(|p| p.code).collect();
        let stored = stored_verdict(&made.bytes);
        match said {
            Said::Agrees => {
                assert_eq!((verdict.as_str(), &stored), (VERDICT_AGREES, &Stored::Text(verdict.clone())))
            }
            Said::Differs => {
                assert!(
                    verdict.starts_with("differs: ") && codes.contains(&"differs"),
                    "{name}: {verdict} {codes:?}"
                );
                assert_eq!(stored, Stored::Text(verdict.clone()), "{name}");
            }
            Said::Awaits(_) => {
                assert!(verdict.starts_with("awaits recalculation"), "{name}: {verdict}");
                let warned = ["awaits-recalculation", "flow-follows"].iter().any(|code| codes.contains(code));
                assert!(warned && !codes.contains(&"differs"), "{name}: {codes:?}");
                assert_eq!(stored, Stored::Nothing, "{name}: nothing says a verdict that nobody knows");
            }
        }
        books.push((name.to_owned(), made.bytes, said));
    }
    let Some(soffice) = soffice() else { return };
    let files: Vec<(String, Vec<u8>)> =
        books.iter().map(|(n, bytes, _)| (n.clone(), bytes.clone())).collect();
    let opened = saved(&soffice, &files, Recalculate::Missing);
    let computed = saved(&soffice, &files, Recalculate::All);
    for (name, _, said) in &books {
        let agrees = matches!(said, Said::Agrees | Said::Awaits(true));
        for back in [&opened[name], &computed[name]] {
            let verdict = verdict(back);
            assert!(
                if agrees { verdict == VERDICT_AGREES } else { verdict.starts_with("differs: ") },
                "{name}: {verdict}"
            );
            assert_eq!(found(back).is_empty(), agrees, "{name}");
        }
        let (_, differ) = compare(&cells(&opened[name]), &cells(&computed[name]));
        assert_eq!(differ, Vec::<String>::new(), "{name}: nothing stale");
    }
}
