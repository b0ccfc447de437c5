//! The shelf of alike workbooks in samples/: what is wrong with them is found, and redone they hold no stale number.
//!
//! `samples/shelf/make.py` made them in plain arithmetic and lists its mistakes in `mistakes.csv`.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::package::Package;
use hence_workbook::references::Range;
use hence_workbook::report::Status;
use hence_workbook::sheets::VERDICT_AGREES;

use crate::libreoffice::cells::{Stored, cells};
use crate::libreoffice::office::{Recalculate, saved, soffice};

/// The column of what is left on the sheet of switching values.
const LEFT: u32 = 4;

fn shelf() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/shelf")
}

/// Every workbook by its name in the list of mistakes.
fn books() -> BTreeMap<String, PathBuf> {
    let mut books = BTreeMap::new();
    for folder in ["north", "south"] {
        for entry in std::fs::read_dir(shelf().join(folder)).expect("the sample") {
            let path = entry.expect("an entry").path();
            let name = path.file_name().expect("a name").to_string_lossy().into_owned();
            books.insert(format!("{folder}/{name}"), path);
        }
    }
    assert_eq!(books.len(), 24);
    books
}

/// Kind and cells by workbook.
fn mistakes() -> BTreeMap<String, (String, String)> {
    let list = std::fs::read_to_string(shelf().join("mistakes.csv")).expect("the list");
    let rows = list.lines().skip(1).map(|line| line.split(',').map(str::to_owned).collect::<Vec<_>>());
    let all: BTreeMap<_, _> = rows.map(|row| (row[0].clone(), (row[1].clone(), row[2].clone()))).collect();
    assert_eq!(all.len(), 7);
    all
}

#[test]
fn every_mistake_is_found_and_nothing_else() {
    let mistakes = mistakes();
    for (name, path) in books() {
        let checked = Package::open(&path)
            .and_then(|package| check(&package, &CheckRequest::default(), &Catalogue::builtin()));
        let found = match &checked {
            Ok(report) => report.findings.clone(),
            Err(error) => {
                assert_eq!(
                    mistakes.get(&name).map(|(kind, _)| kind.as_str()),
                    Some(error.problems()[0].code),
                    "{name}"
                );
                continue;
            }
        };
        let Some((kind, cells)) = mistakes.get(&name) else {
            assert!(found.is_empty(), "{name}: {found:?}");
            continue;
        };
        assert!(
            !found.is_empty() && found.iter().all(|f| f.kind.code() == kind),
            "{name}: {kind}, {found:?}"
        );
        if let Some((sheet, range)) = cells.split_once('!') {
            let range: Range = range.parse().expect("cells");
            let place = &found[0].place;
            assert_eq!((place.sheet.as_deref(), place.range), (Some(sheet), Some(range)), "{name}");
            assert_eq!(found.len(), 1, "{name}: {found:?}");
        }
    }
}

/// Ellerby is right, and its formulas read as those that a fill writes: none is written again. Hazel Ford's total leaves out a
/// year, which such formulas beside it do not hide.
#[test]
fn filled_as_it_is_a_right_workbook_is_left_and_a_wrong_total_differs() {
    let filled = |name: &str| {
        let package = Package::open(&shelf().join(name)).expect("a package");
        fill(&package, &FillRequest::default(), &Catalogue::builtin()).expect("filled").report
    };
    let right = filled("north/05-ellerby.xlsx");
    assert_eq!((right.filled, right.verdict.as_str()), (0, VERDICT_AGREES));
    assert!(right.ticked > 600 && right.awaiting.is_empty(), "{} ticked", right.ticked);
    assert!(right.problems.is_empty(), "{:?}", right.problems);
    let wrong = filled("north/08-hazel-ford.xlsx");
    assert_eq!(wrong.status(), Status::Problems);
    let of = |code: &str| wrong.problems.iter().filter(|p| p.code == code).count();
    // The total, and the net present value and the ratio that rest on it.
    assert_eq!((of("differs"), of("awaits-recalculation")), (3, 0), "{:?}", wrong.problems);
    let first = wrong.problems.iter().find(|p| p.code == "differs").unwrap();
    assert!(first.place.to_string().starts_with("Build!B17"), "{}", first.place);
}

#[test]
fn redone_on_another_basis_no_workbook_holds_a_stale_number() {
    let request = FillRequest {
        replace: Some(("4%".to_owned(), "3% to 30, 2.5% to 75, 2% after".to_owned())),
        replace_formulas: true,
        ..FillRequest::default()
    };
    let mut outputs = Vec::new();
    for (name, path) in books() {
        let filled = Package::open(&path).and_then(|package| fill(&package, &request, &Catalogue::builtin()));
        let Ok(filled) = filled else { continue };
        assert_eq!(filled.report.verdict, VERDICT_AGREES, "{name}");
        outputs.push((name.replace('/', "-"), filled.bytes));
    }
    // All but four: protected, truncated, costs entered negative, a year that stands twice.
    assert_eq!(outputs.len(), 20);
    let Some(soffice) = soffice() else { return };
    // What a person sees who opens the output, and what all formulas give when they are computed anew.
    let shown = saved(&soffice, &outputs, Recalculate::Missing);
    let right = saved(&soffice, &outputs, Recalculate::All);
    let mut compared = 0;
    for (name, bytes) in &shown {
        let right = cells(&right[name]);
        for (place, cell) in cells(bytes) {
            // What is left where a switching value is put back is rounding of sums of any size; the word beside it, which
            // says whether it is nothing, is compared.
            if place.0 == "Audit sensitivity" && place.1.col == LEFT {
                continue;
            }
            match (&cell.value, &right[&place].value) {
                (Stored::Number(a), Stored::Number(b)) => {
                    // A millionth is rounding of sums of crowns; a stale factor would be off by more.
                    let close = (a - b).abs() <= 1e-6_f64.max(1e-9 * a.abs().max(b.abs()));
                    assert!(close, "{name} {place:?}: shows {a}, is {b}");
                    compared += usize::from(cell.formula);
                }
                (a, b) => assert_eq!(a, b, "{name} {place:?}"),
            }
        }
    }
    assert!(compared > 20_000, "{compared} formulas were compared");
}
