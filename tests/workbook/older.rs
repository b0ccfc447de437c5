//! Workbooks of other formats: .xls and .ods as LibreOffice saves them, .xlsb written out by hand.

mod xlsb;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::older::{OldFormat, convert};
use hence_workbook::package::Package;
use hence_workbook::sheets::VERDICT_AGREES;
use sha2::Digest;

use crate::libreoffice::cells::{Stored, cells};
use crate::libreoffice::office::{Recalculate, saved_as, soffice};
use crate::small::Small;

const SAMPLE: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/../../samples/mine-drainage.xlsx");

/// The values of a file of another format, as a package that is filled.
fn opened(name: &str, bytes: &[u8]) -> Package {
    let values = convert(name, bytes).unwrap_or_else(|error| panic!("{error}"));
    Package::converted(name, bytes, values).expect("a package")
}

fn npvs(package: &Package) -> Vec<f64> {
    let filled = fill(package, &FillRequest::default(), &Catalogue::builtin());
    let report = filled.unwrap_or_else(|error| panic!("{error}")).report;
    assert_eq!(report.verdict, VERDICT_AGREES);
    report.options.iter().map(|option| option.totals().npv).collect()
}

/// The workbook as LibreOffice saves it in a format.
fn in_format(bytes: &[u8], format: &str) -> Option<Vec<u8>> {
    let soffice = soffice()?;
    let books = [("plan.xlsx".to_owned(), bytes.to_vec())];
    saved_as(&soffice, &books, Recalculate::Missing, format).remove("plan.xlsx")
}

#[test]
fn the_sample_in_other_formats_has_its_values_and_names_and_fills_alike() {
    let sample = std::fs::read(SAMPLE).expect("the sample");
    let right = npvs(&Package::from_bytes("mine-drainage.xlsx", sample.clone()).expect("a package"));
    assert!(right.len() > 3 && right[1] != 0.0);
    for (format, kind) in [("xls", OldFormat::Xls), ("ods", OldFormat::Ods)] {
        let Some(bytes) = in_format(&sample, format) else { return };
        assert_eq!(OldFormat::of(&bytes), Some(kind));
        let package = opened(&format!("mine-drainage.{format}"), &bytes);
        let (was, is) = (cells(&sample), cells(package.bytes()));
        let mut compared = 0;
        for (place, cell) in was {
            let found = is.get(&place).map(|cell| &cell.value);
            match (&cell.value, found) {
                (Stored::Nothing, _) => continue,
                (Stored::Number(x), Some(Stored::Number(y))) => {
                    assert!((x - y).abs() <= 1e-12 * x.abs(), "{format} {place:?}: {y}, was {x}");
                }
                (was, found) => assert_eq!(Some(was), found, "{format} {place:?}"),
            }
            compared += 1;
        }
        assert!(compared > 3000, "{compared} cells were compared");
        for (found, right) in npvs(&package).iter().zip(&right) {
            assert!((found - right).abs() <= 1e-9 * right.abs(), "{format}: {found}, was {right}");
        }
        let lost = package.origin().expect("an origin").lost.join("; ");
        assert!(lost.contains("formulas in") && lost.contains(&format!(".{format}")), "{lost}");
    }
}

#[test]
fn the_audit_names_the_file_that_was_read_and_what_was_left_of_it() {
    let bytes = xlsb::book();
    let package = opened("dyke.xlsb", &bytes);
    let filled = fill(&package, &FillRequest::default(), &Catalogue::builtin()).expect("filled");
    let texts: Vec<String> = cells(&filled.bytes)
        .into_values()
        .filter_map(|cell| if let Stored::Text(text) = cell.value { Some(text) } else { None })
        .collect();
    let digest =
        sha2::Sha256::digest(&bytes).iter().fold(String::new(), |text, b| text + &format!("{b:02x}"));
    assert!(texts.contains(&digest), "the hash is of the file that was read");
    assert!(texts.iter().any(|text| text.contains("its values were read")), "{texts:?}");
    let codes: Vec<&str> = filled.report.problems.iter().map(|problem| problem.code).collect();
    assert!(codes.contains(&"values-only"), "{codes:?}");
}

#[test]
fn a_binary_workbook_gives_its_numbers_texts_and_names() {
    // 100 spent in 2026, 60 back in 2027 and in 2028, at 5%: -100 + 60/1.05 + 60/1.05^2.
    let bytes = xlsb::book();
    assert_eq!(OldFormat::of(&bytes), Some(OldFormat::Xlsb));
    let npv = npvs(&opened("dyke.xlsb", &bytes));
    let expected = -100.0 + 60.0 / 1.05 + 60.0 / (1.05 * 1.05);
    assert!((npv[0] - expected).abs() < 1e-12, "{npv:?}");
}

#[test]
fn dates_that_count_from_1904_are_the_same_days() {
    let plan = "B1: 2026\nB2: 5%\nB4: @44561 | @44926\nB5: 100 | 0\nB6: 0 | 120";
    // Serial numbers from 1904: 44561 is 1 January 2026, as 46023 is from 1900.
    let small = Small::default().sheet("Plan", plan).counting_from_1904();
    for format in ["xls", "ods"] {
        let Some(bytes) = in_format(&small.bytes(), format) else { return };
        let package = opened(&format!("plan.{format}"), &bytes);
        let cells = cells(package.bytes());
        let at = |cell: &str| cells[&("Plan".to_owned(), cell.parse().expect("a cell"))].value.clone();
        assert_eq!(at("B4"), Stored::Number(46_023.0), "{format}");
        assert_eq!(at("C4"), Stored::Number(46_388.0), "{format}");
    }
}

#[test]
fn damaged_files_and_other_files_are_refused_in_words() {
    let sample = std::fs::read(SAMPLE).expect("the sample");
    let code = |bytes: &[u8]| convert("x", bytes).expect_err("refused").problems()[0].code;
    assert_eq!(code(b"no workbook"), "other-format");
    assert_eq!(code(&sample), "other-format");
    let Some(xls) = in_format(&sample, "xls") else { return };
    assert_eq!(code(&xls[..xls.len() / 2]), "damaged-file");
    let Some(ods) = in_format(&sample, "ods") else { return };
    // Half a zip file is none.
    assert_eq!(code(&ods[..ods.len() / 2]), "other-format");
}
