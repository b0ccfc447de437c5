//! hence's sheets over hand-made appraisals: the second route against the library, the live formulas
//! against LibreOffice, and the verdict when a cell is changed there.

use std::collections::BTreeMap;
use std::path::Path;
use std::process::Command;

use calamine::{Data, Reader, Xlsx, open_workbook};
use hence_core::{Basis, Catalogue, Position, Timing, Where};
use hence_workbook::appraisal::{Appraisal, Direction, Held, TargetRole};
use hence_workbook::formulas::target_writes;
use hence_workbook::graft::Graft;
use hence_workbook::layout::{LabelValue, Layout, label_value};
use hence_workbook::outcome::ChoiceOutcome;
use hence_workbook::package::Package;
use hence_workbook::patch::{Cached, CellWrite};
use hence_workbook::references::{Cell, Range, SheetRange};
use hence_workbook::sheets::*;
use hence_workbook::writer::{Content, Sheet, Style, package};

use crate::scenario::{Case, Labels, appraisal, outcomes};

const MIDDLE: Timing = Timing { flows: Position::Middle, base: Position::Start };
const AVERAGED: Timing = Timing { flows: Position::Averaged, base: Position::Start };
const END: Timing = Timing { flows: Position::End, base: Position::End };

fn case(basis: &'static str, timing: Timing, labels: Labels, direction: Direction, factors: bool) -> Case {
    Case { basis, timing, labels, direction, years: 60, factors }
}

/// Every kind of basis, label, direction and timing at least once.
fn cases() -> Vec<Case> {
    use Direction::{Across, Down};
    let bands = "3.5% to 30, 3% to 75, 2.5% after";
    vec![
        case("3.5%", END, Labels::Years, Across, true),
        case("3.5% continuous", MIDDLE, Labels::Years, Down, false),
        case(bands, MIDDLE, Labels::Years, Across, false),
        case(bands, AVERAGED, Labels::Financial, Down, true),
        case(bands, END, Labels::Dates, Across, true),
        case(bands, END, Labels::Offsets, Down, false),
        case("2.5% to 2050, 1.5% after", END, Labels::Financial, Across, true),
        case("4% to 10, 3% to 30, 2% after; whole horizon by flow", END, Labels::Numbers, Across, true),
        case("4% to 10, 3% to 30, 2% after; whole horizon by length", MIDDLE, Labels::Years, Down, true),
        case(
            "3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by flow, interpolated",
            END,
            Labels::Years,
            Down,
            true,
        ),
        case(
            "3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated",
            END,
            Labels::Years,
            Across,
            true,
        ),
        case("preference 0.5%, hazard 1%, elasticity 1, growth 2%", END, Labels::Years, Across, true),
        case("preference 1%, elasticity 2, growth 2%; exact", MIDDLE, Labels::Years, Down, true),
        case("preference 1%, elasticity 2, growth 2% to 50, 1% after", MIDDLE, Labels::Years, Across, true),
        case(
            "preference 1%, elasticity 2, growth 2% to 50, 1% after; exact",
            END,
            Labels::Numbers,
            Down,
            true,
        ),
        case("preference 1%, elasticity 2, growth 2% sd 3.6%", END, Labels::Years, Across, true),
        case(
            "preference 1%, elasticity 2, log growth 2% sd 2% persistence 0.5",
            MIDDLE,
            Labels::Years,
            Across,
            true,
        ),
        case(
            "0.5 of (preference 1%, elasticity 2, log growth 2% sd 2% persistence -0.3), 0.5 of (3% to 9, 2% after)",
            END,
            Labels::Years,
            Down,
            true,
        ),
        case("ostrey-states", AVERAGED, Labels::Financial, Down, true),
        case("ostrey-low", END, Labels::Numbers, Across, false),
        case("gamma mean 4% sd 3%", MIDDLE, Labels::Years, Across, true),
        case("0.5 of (1%), 0.5 of (7% continuous)", END, Labels::Years, Down, false),
        case(
            "0.25 of (3.5% to 30, 3% after), 0.75 of (gamma mean 4% sd 3%)",
            AVERAGED,
            Labels::Years,
            Across,
            true,
        ),
    ]
}

struct Audit {
    appraisal: Appraisal,
    outcomes: Vec<ChoiceOutcome>,
    layout: Layout,
    composed: Composed,
}

fn audit(case: &Case) -> Audit {
    let appraisal = appraisal(case);
    let outcomes = outcomes(case, &appraisal);
    audit_of(appraisal, outcomes, &[])
}

fn audit_of(appraisal: Appraisal, outcomes: Vec<ChoiceOutcome>, carried: &[Carried]) -> Audit {
    let names = SheetNames::choose(&appraisal.choices.iter().map(|c| c.name.clone()).collect::<Vec<_>>());
    let layout = Layout::new(&appraisal, &outcomes, &names);
    let mut cells = Vec::new();
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for (t, target) in choice.targets.iter().enumerate() {
            let writes = target_writes(&appraisal, &outcomes, &layout, c, target, true);
            for (index, write) in writes.iter().enumerate() {
                let at = target.at.nth(index);
                let expected = match write {
                    CellWrite::Formula(_, Cached::Number(x)) | CellWrite::Number(x) => Some(*x),
                    _ => None,
                };
                cells.push(TargetCell {
                    choice: c,
                    target: t,
                    index,
                    at: SheetRange { sheet: target.at.sheet.clone(), range: Range { first: at, last: at } },
                    expected,
                    filled: matches!(target.held[index], Held::Blank),
                    tolerance: expected.map_or(0.0, |x| 1e-9 * x.abs().max(1.0)),
                    awaits: false,
                });
            }
        }
    }
    let meta = Meta {
        input_name: "mine.xlsx".into(),
        input_sha256: "0".repeat(64),
        basis_sha256: "1".repeat(64),
        plan: None,
        appraisal: None,
        request_sha256: "2".repeat(64),
        version: "0.1.0".into(),
        as_of: Some("1 April 2026".into()),
        by: None,
        formulas: true,
    };
    let changes = vec![Change {
        at: cells[0].at.clone(),
        role: "factor".into(),
        before: String::new(),
        after: "=INDEX(Discounting!$D$8:$D$67,MATCH(C$4,Discounting!$A$8:$A$67,0))".into(),
    }];
    let differs = vec!["The sheet list names the sheets that were added.".to_owned()];
    let sensitivity =
        hence_workbook::compare::sensitivity(&appraisal, &outcomes, &[], &Catalogue::builtin()).unwrap();
    let input = AuditInput {
        sensitivity: &sensitivity,
        companions: &[],
        appraisal: &appraisal,
        outcomes: &outcomes,
        names: &names,
        meta: &meta,
        cells: &cells,
        changes: &changes,
        problems: &appraisal.problems,
        carried,
        differs: &differs,
        siblings: &[],
    };
    let composed = compose(&input, &layout);
    Audit { appraisal, outcomes, layout, composed }
}

/// The analyst's sheets as the fill leaves them.
fn analyst(audit: &Audit) -> Vec<Sheet> {
    let mut sheets = Vec::new();
    for (c, choice) in audit.appraisal.choices.iter().enumerate() {
        let mut sheet = Sheet::new(&choice.name);
        if let Some(at) = &choice.base.at {
            let cell = at.range.first;
            match &choice.base.value {
                hence_workbook::appraisal::Base::Year(y) => {
                    sheet.number(cell.row, cell.col, Style::Year, f64::from(*y));
                }
                hence_workbook::appraisal::Base::Date(d) => {
                    let serial = hence_workbook::layout::serial(*d, false);
                    sheet.number(cell.row, cell.col, Style::Date, serial);
                }
                _ => sheet.text(cell.row, cell.col, Style::Text, "2026/27"),
            }
        }
        sheet.number(0, 5, Style::Rate, 0.2);
        sheet.number(0, 6, Style::Money, 12.0);
        let axis = &audit.appraisal.axes[choice.axis];
        for (i, label) in axis.labels.iter().enumerate() {
            let cell = axis.at.nth(i);
            match label_value(label, false) {
                LabelValue::Number(x, date) => {
                    sheet.number(cell.row, cell.col, if date { Style::Date } else { Style::Exact }, x);
                }
                LabelValue::Text(text) => sheet.text(cell.row, cell.col, Style::Text, text),
            }
        }
        for stream in &choice.streams {
            for (i, x) in stream.raw.iter().enumerate() {
                let cell = stream.at.nth(i);
                sheet.number(cell.row, cell.col, Style::Money, *x);
            }
        }
        for target in &choice.targets {
            let writes = target_writes(&audit.appraisal, &audit.outcomes, &audit.layout, c, target, true);
            for (i, write) in writes.into_iter().enumerate() {
                let Cell { row, col } = target.at.nth(i);
                match write {
                    CellWrite::Formula(text, result) => sheet.formula(row, col, Style::Exact, text, result),
                    CellWrite::Number(x) => sheet.number(row, col, Style::Exact, x),
                    CellWrite::Text(text) => sheet.text(row, col, Style::Text, text),
                    CellWrite::DropValue | CellWrite::Result(_) => {}
                }
            }
        }
        sheets.push(sheet);
    }
    sheets
}

fn workbook(audit: &Audit) -> Vec<Sheet> {
    let mut sheets = analyst(audit);
    sheets.extend(audit.composed.sheets.iter().cloned());
    sheets
}

/// The same cells with every result taken out, so that a program has to compute them.
fn unevaluated(sheets: &[Sheet]) -> Vec<Sheet> {
    let bare = |sheet: &Sheet| {
        let mut out = Sheet::new(&sheet.name);
        for (Cell { row, col }, content) in sheet.cells() {
            match content {
                Content::Text(text) => out.text(row, col, Style::Text, text),
                Content::Number(x) => out.number(row, col, Style::Exact, *x),
                Content::Formula(text, _) => out.formula(row, col, Style::Exact, text, Cached::None),
                Content::Logical(truth) => out.logical(row, col, Style::Exact, *truth),
            }
        }
        out
    };
    sheets.iter().map(bare).collect()
}

/// Has LibreOffice compute workbooks; none (and a plain word) where it is not installed.
fn recalculated(books: &[Vec<Sheet>]) -> Option<Vec<BTreeMap<(String, Cell), Data>>> {
    let folder = tempfile::tempdir().unwrap();
    let from = folder.path().join("from");
    let to = folder.path().join("to");
    std::fs::create_dir_all(&from).unwrap();
    let mut command = Command::new("soffice");
    let profile = folder.path().join("profile");
    command.arg(format!("-env:UserInstallation=file://{}", profile.display()));
    command.args(["--headless", "--convert-to", "xlsx", "--outdir"]).arg(&to);
    for (i, sheets) in books.iter().enumerate() {
        let path = from.join(format!("book{i}.xlsx"));
        std::fs::write(&path, package(&unevaluated(sheets), &[]).unwrap()).unwrap();
        command.arg(path);
    }
    match command.output() {
        Ok(output) => assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr)),
        Err(_) => {
            eprintln!("LibreOffice (soffice) is not installed: its recalculation was not compared");
            return None;
        }
    }
    Some((0..books.len()).map(|i| read(&to.join(format!("book{i}.xlsx")))).collect())
}

fn read(path: &Path) -> BTreeMap<(String, Cell), Data> {
    let mut book: Xlsx<_> = open_workbook(path).unwrap();
    let mut values = BTreeMap::new();
    for name in book.sheet_names() {
        let range = book.worksheet_range(&name).unwrap();
        let (r0, c0) = range.start().unwrap_or((0, 0));
        for (row, col, data) in range.used_cells() {
            let cell = Cell { row: r0 + row as u32, col: c0 + col as u32 };
            values.insert((name.clone(), cell), data.clone());
        }
    }
    values
}

fn verdict_of(audit: &Audit, values: &BTreeMap<(String, Cell), Data>) -> String {
    let cell = Cell { row: 2, col: 1 };
    match values.get(&(audit.layout.names.summary.clone(), cell)) {
        Some(Data::String(text)) => text.clone(),
        other => panic!("the verdict is {other:?}"),
    }
}

#[test]
fn the_second_route_agrees_with_the_library_on_every_kind_of_basis() {
    for case in cases() {
        let audit = audit(&case);
        assert_eq!(audit.composed.built.verdict, VERDICT_AGREES, "{}", case.basis);
        assert_eq!(audit.composed.built.checks.1, 0, "{}", case.basis);
        let checks = &audit.composed.sheets[3];
        let unchecked = checks
            .cells()
            .filter(|(_, c)| matches!(c, Content::Text(t) if t == "not independently checked"))
            .count();
        // The baseline's rate of return and ratio (texts), two paybacks, a rate of return where flows follow the
        // last year, and rates of years without one.
        let rates: usize =
            audit.outcomes.iter().map(|o| o.offsets.iter().filter(|&&t| t <= 0.0).count()).sum();
        let tails = audit.appraisal.choices[1].streams.iter().filter(|s| s.tail.is_some()).count();
        assert_eq!(unchecked, 4 + rates + tails, "{}", case.basis);
    }
}

#[test]
fn libreoffice_computes_what_the_cells_hold() {
    let audits: Vec<Audit> = cases().iter().map(audit).collect();
    let books: Vec<Vec<Sheet>> = audits.iter().map(workbook).collect();
    let Some(results) = recalculated(&books) else { return };
    for ((case, sheets), (values, audit)) in cases().iter().zip(&books).zip(results.iter().zip(&audits)) {
        let mut compared = 0;
        for sheet in sheets {
            for (cell, content) in sheet.cells() {
                let Content::Formula(text, cached) = content else { continue };
                let place = format!("{} in {}!{cell}: {text}", case.basis, sheet.name);
                let found = values.get(&(sheet.name.clone(), cell)).unwrap_or(&Data::Empty);
                match (cached, found) {
                    (Cached::Number(x), found) => {
                        let y = match found {
                            Data::Float(y) => *y,
                            Data::DateTime(d) => d.as_f64(),
                            other => panic!("{place} is {other:?}, not {x}"),
                        };
                        // Differences near 0 are rounding; all else agrees to 1e-9.
                        let small = text.contains("ABS(") && x.abs() < 1e-3 && y.abs() < 1e-3;
                        assert!(
                            small || (x - y).abs() <= 1e-9 * x.abs().max(1e-3),
                            "{place} is {y}, not {x}"
                        );
                    }
                    (Cached::Text(x), Data::String(y)) => assert_eq!(x, y, "{place}"),
                    (Cached::Text(_), other) => panic!("{place} is {other:?}"),
                    (Cached::None, _) => panic!("{place} has no result"),
                }
                compared += 1;
            }
        }
        assert!(compared > 1_000, "{}: only {compared} formulas", case.basis);
        assert_eq!(verdict_of(audit, values), VERDICT_AGREES);
    }
}

#[test]
fn the_verdict_turns_when_a_cell_is_changed() {
    let case = case("3.5% to 30, 3% after", END, Labels::Years, Direction::Across, true);
    let audit = audit(&case);
    let choice = &audit.appraisal.choices[1];
    let role = |role: TargetRole| choice.targets.iter().find(|t| t.role == role).unwrap().at.nth(0);
    let flow = choice.streams[1].at.nth(20);
    let factor = choice.targets[0].at.nth(5);
    let year = audit.appraisal.axes[1].at.nth(30);
    let changes: Vec<(&str, Cell, f64)> = vec![
        ("a flow", flow, 1.0),
        ("a factor", factor, 0.8),
        ("a year", year, 2_070.0),
        ("the uplift", Cell { row: 0, col: 5 }, 0.25),
        ("the residual", Cell { row: 0, col: 6 }, 13.0),
        ("the net present value", role(TargetRole::Npv), 1.0),
        ("the rate of return", role(TargetRole::Irr), 0.06),
        ("the payback", role(TargetRole::Payback), 7.0),
        ("a ratio", role(TargetRole::Ratio), 2.0),
    ];
    let mut books = Vec::new();
    for (_, cell, value) in &changes {
        let mut sheets = workbook(&audit);
        sheets[1].number(cell.row, cell.col, Style::Exact, *value);
        books.push(sheets);
    }
    let mut sheets = workbook(&audit);
    let discounting = sheets.iter_mut().find(|s| s.name == "Discounting").unwrap();
    discounting.number(12, 3, Style::Exact, 0.5);
    books.push(sheets);
    let Some(results) = recalculated(&books) else { return };
    for (i, values) in results.iter().enumerate() {
        let what = changes.get(i).map_or("Discounting", |c| c.0);
        let verdict = verdict_of(&audit, values);
        assert!(verdict.starts_with("differs: "), "{what}: {verdict}");
    }
    assert!(
        verdict_of(&audit, &results[1]).ends_with("first at 'It''s a liner'!H5"),
        "the factor's cell is named"
    );
}

#[test]
fn a_cell_that_was_left_and_differs_gives_the_verdict() {
    let case = case("3.5%", END, Labels::Years, Direction::Across, true);
    let mut a = appraisal(&case);
    let o = outcomes(&case, &a);
    let npv = a.choices[1].targets.iter_mut().find(|t| t.role == TargetRole::Npv).unwrap();
    npv.held = vec![Held::Formula { text: "SUM(A1:A2)".into(), value: Some(1.0), shown: None }];
    let audit = audit_of(a, o, &[]);
    let total = audit.composed.built.checks.0;
    assert_eq!(
        audit.composed.built.verdict,
        format!("differs: 1 of {total} checks, first at 'It''s a liner'!C2")
    );
}

#[test]
fn a_table_is_said_not_to_be_checked() {
    let case = case("3.5%", END, Labels::Years, Direction::Across, true);
    let a = appraisal(&case);
    let mut o = outcomes(&case, &a);
    let table: Vec<(f64, f64)> = (0..=200).map(|t| (f64::from(t), 1.035_f64.powi(-t))).collect();
    let rows: Vec<String> = table.iter().map(|(t, d)| format!("[{t:.1}, {d:?}]")).collect();
    let text = format!(
        "id = \"house\"\ntitle = \"House table\"\nbody = \"The house\"\nyear = 2026\nplace = \"page 1\"\n\
         address = \"https://example.org/\"\nstatus = \"current\"\ncomplete = true\nchecked = \"made up\"\n\
         prices = \"real\"\ntable = [{}]\n",
        rows.join(", ")
    );
    let catalogue = Catalogue::builtin().with(&[("house.toml".into(), text)]).unwrap();
    let basis = Basis::parse("house", &catalogue).unwrap();
    for outcome in &mut o {
        outcome.curve = basis.curve(&Where::default()).unwrap();
        outcome.basis = basis.clone();
    }
    let audit = audit_of(a, o, &[]);
    assert_eq!(audit.composed.built.verdict, VERDICT_AGREES);
    let text = "Not independently checked: a basis of this kind has no second route here.";
    let said = |c: &Content| matches!(c, Content::Text(t) if t == text);
    assert!(audit.composed.sheets[3].cells().any(|(_, c)| said(c)));
}

#[test]
fn a_wrong_factor_is_found_by_the_second_route() {
    let case = case("3.5% to 30, 3% after", MIDDLE, Labels::Years, Direction::Across, true);
    let a = appraisal(&case);
    let mut o = outcomes(&case, &a);
    // As if the library had let the edge year belong to the later band: year 31 at one rate.
    o[1].factors[40] *= 1.0 + 1e-8;
    let audit = audit_of(a, o, &[]);
    assert!(audit.composed.built.verdict.starts_with("differs: "), "{}", audit.composed.built.verdict);
}

#[test]
fn notes_of_a_person_are_put_back_outside_of_what_is_marked_as_own() {
    let case = case("3.5%", END, Labels::Years, Direction::Across, true);
    let (a, o) = (appraisal(&case), outcomes(&case, &appraisal(&case)));
    let note = |row, col, text: &str| Carried {
        sheet: "Audit summary".into(),
        cell: Cell { row, col },
        content: Content::Text(text.into()),
        style: Style::Text,
    };
    let audit = audit_of(a, o, &[note(500, 0, "seen, JB"), note(4, 3, "in the way")]);
    let summary = &audit.composed.sheets[1];
    assert_eq!(summary.content(Cell { row: 500, col: 0 }), Some(&Content::Text("seen, JB".into())));
    assert_eq!(summary.content(Cell { row: 501, col: 0 }), Some(&Content::Text("in the way".into())));
    let own =
        audit.composed.built.names.iter().find(|n| n.scope.as_deref() == Some("Audit summary")).unwrap();
    assert_eq!(own.name, OWN);
    assert!(own.hidden);
    assert!(!own.text.contains("501"), "{}", own.text);
    // The mark is the same with and without notes.
    let (a, o) = (appraisal(&case), outcomes(&case, &appraisal(&case)));
    let bare = audit_of(a, o, &[]);
    assert_eq!(bare.composed.built.names, audit.composed.built.names);
}

#[test]
fn the_verdict_cell_is_named() {
    let audit = audit(&case("3.5%", END, Labels::Years, Direction::Across, true));
    assert_eq!(audit.composed.verdict_at, "'Audit summary'!$B$3");
    assert_eq!(audit.composed.built.charts.len(), 4);
}
#[test]
fn the_sheets_can_be_grafted_and_a_second_time_gives_the_same_bytes() {
    let case = case("3.5% to 30, 3% after", END, Labels::Years, Direction::Across, true);
    let audit = audit(&case);
    let built = &audit.composed.built;
    let names = [(VERDICT, audit.composed.verdict_at.as_str())];
    let put_in = |host: &Package, previous: &[String]| {
        let ours = Package::from_bytes("own.xlsx", package(&audit.composed.sheets, &names).unwrap()).unwrap();
        let (set_names, charts) = (&built.names, &built.charts);
        let graft = Graft { ours: &ours, previous, set_names, remove_names: &[], charts };
        host.write(&hence_workbook::graft::graft(host, &graft).unwrap().changes).unwrap()
    };
    let host = Package::from_bytes("mine.xlsx", package(&analyst(&audit), &[]).unwrap()).unwrap();
    let once = put_in(&host, &[]);
    let again = Package::from_bytes("mine.xlsx", once.clone()).unwrap();
    let own: Vec<String> = audit.composed.sheets.iter().map(|s| s.name.clone()).collect();
    let twice = Package::from_bytes("mine.xlsx", put_in(&again, &own)).unwrap();
    assert!(again.parts().eq(twice.parts()), "the same parts in the same order");
    for part in again.parts() {
        let (a, b) = (again.part(part).unwrap().unwrap(), twice.part(part).unwrap().unwrap());
        assert!(a == b, "{part} differs");
    }
    assert!(again.bytes() == twice.bytes(), "the packages differ though their parts do not");
    let book = String::from_utf8(again.part("xl/workbook.xml").unwrap().unwrap()).unwrap();
    assert_eq!(book.matches("name=\"hence_own\"").count(), 7);
    assert_eq!(book.matches("name=\"hence_digest\"").count(), 7);
    assert!(book.contains("name=\"hence_verdict\""));
}

#[test]
fn a_wrong_value_of_what_follows_the_last_year_is_found_by_the_second_route() {
    let case = case("3.5%", END, Labels::Years, Direction::Across, true);
    let appraisal = appraisal(&case);
    let mut outcomes = outcomes(&case, &appraisal);
    let flood = &mut outcomes[1].streams[2];
    assert!(flood.pv_tail > 0.0);
    flood.pv += 1e-6 * flood.pv_tail;
    flood.pv_tail *= 1.0 + 1e-6;
    let audit = audit_of(appraisal, outcomes, &[]);
    let verdict = &audit.composed.built.verdict;
    assert!(verdict.starts_with("differs: 1 of "), "{verdict}");
}
