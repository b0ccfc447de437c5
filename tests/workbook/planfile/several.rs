//! Several appraisals in one workbook: each filled and audited by itself, in one run.

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::model::Workbook;
use hence_workbook::package::{Changes, Package};
use hence_workbook::planfile::PlanFile;
use hence_workbook::references::NameTarget;
use hence_workbook::report::{Report, Status};
use hence_workbook::resolve::{Options, resolve};
use hence_workbook::sheets::VERDICT_AGREES;

use super::{filled, number, parsed, try_filled};
use crate::libreoffice::cells::{Stored, cells};
use crate::libreoffice::office::{Recalculate, saved, soffice};
use crate::small::{Small, codes};

/// The value of the cell that a name of the workbook stands for.
fn named(bytes: &[u8], name: &str) -> String {
    let package = Package::from_bytes("book.xlsx", bytes.to_vec()).expect("a package");
    let book = Workbook::read(&package).expect("a workbook");
    let defined = book.find_name(name, None).unwrap_or_else(|| panic!("no name {name}"));
    let NameTarget::Cells(at) = book.resolve(defined) else { panic!("{name}") };
    match cells(bytes).get(&(at.sheet, at.range.first)).map(|cell| cell.value.clone()) {
        Some(Stored::Text(text)) => text,
        other => panic!("{name} holds {other:?}"),
    }
}

/// Two appraisals: sheets of one layout, each with its own base and rate.
fn two() -> (Small, PlanFile) {
    let one = |base: i32, rate: &str, works: i32| {
        format!(
            "A1: 'Base | {base}\nA2: 'Rate | {rate}\nA4: 'Year | {base} | {} | {}\nA5: 'Works | {works} | 50 | 25\n\
             A6: 'Access | 10 | 60 | 90\nA8: 'Factor | | |\nA9: 'NPV |\nG1: 'Twice | =2*B9>0",
            base + 1,
            base + 2
        )
    };
    let book = Small::default()
        .sheet("North", &one(2025, "0.035", 100))
        .sheet("South", &one(2030, "0.05", 40))
        .sheet("Remarks", "A1: 'both sites");
    let plan = parsed(
        "[settings]\ntiming = \"flows end, base end\"\n\
         [[appraisal]]\nsheets = [\"North\", \"South\"]\n\
         [appraisal.roles]\nbase = \"B1\"\nbasis = \"B2\"\nyears = \"B4:D4\"\ncost_works = \"B5:D5\"\n\
         benefit_access = \"B6:D6\"\nfactor = \"B8:D8\"\nnpv = \"B9\"\n",
    );
    (book, plan)
}

fn sheets(bytes: &[u8]) -> Vec<String> {
    let package = Package::from_bytes("book.xlsx", bytes.to_vec()).expect("a package");
    Workbook::read(&package).expect("a workbook").sheets.into_iter().map(|sheet| sheet.name).collect()
}

#[test]
fn two_appraisals_are_filled_in_one_run_each_with_its_own_audit() {
    let (book, plan) = two();
    let made = filled(&book.bytes(), Some(&plan));
    let read = cells(&made.bytes);
    for (sheet, works, rate) in [("North", 100.0, 0.035), ("South", 40.0, 0.05f64)] {
        let d = |t: i32| (1.0 + rate).powi(-t);
        let npv = (10.0 - works) + 10.0 * d(1) + 65.0 * d(2);
        assert!((number(&read, sheet, "B9") - npv).abs() < 1e-9, "{sheet}");
        let name = format!("hence_verdict_{}", sheet.to_lowercase());
        assert_eq!(named(&made.bytes, &name), VERDICT_AGREES);
    }
    assert_eq!(named(&made.bytes, "hence_verdict"), VERDICT_AGREES);
    assert_eq!(made.report.verdict, VERDICT_AGREES);
    let names: Vec<&str> = made.report.appraisals.iter().map(|part| part.name.as_str()).collect();
    assert_eq!(names, ["North", "South"]);
    let second = &made.report.options[1];
    assert_eq!((second.name.as_str(), second.appraisal.as_deref()), ("South", Some("South")));
    let own: Vec<String> = sheets(&made.bytes).split_off(3);
    assert_eq!(
        (own.len(), own[0].as_str(), own[8].as_str()),
        (14, "Discounting North", "Audit summary South")
    );
    let report = check(
        &Package::from_bytes("book.xlsx", made.bytes).unwrap(),
        &CheckRequest { plan: Some(plan), ..CheckRequest::default() },
        &Catalogue::builtin(),
    );
    let report = report.expect("a check");
    assert_eq!((report.status(), report.agree), (Status::Done, 8));
}

#[test]
fn a_second_fill_of_two_appraisals_gives_the_same_bytes_but_for_the_hashes() {
    let (book, plan) = two();
    let first = filled(&book.bytes(), Some(&plan)).bytes;
    let second = filled(&first, Some(&plan)).bytes;
    let third = filled(&second, Some(&plan)).bytes;
    assert_eq!(sheets(&first), sheets(&second));
    let open = |bytes: &[u8]| Package::from_bytes("book.xlsx", bytes.to_vec()).unwrap();
    let (a, b, c) = (open(&first), open(&second), open(&third));
    assert!(a.parts().eq(b.parts()));
    let model = Workbook::read(&b).unwrap();
    let part = |sheet: &str| model.sheets[model.sheet_index(sheet).unwrap()].part.clone();
    let differing = |x: &Package, y: &Package| -> Vec<String> {
        x.parts().filter(|p| x.part(p).unwrap() != y.part(p).unwrap()).map(str::to_owned).collect()
    };
    let mut allowed = vec!["hence/record.json".to_owned(), "xl/workbook.xml".to_owned()];
    let summaries = ["Audit summary North", "Audit summary South"].map(part);
    allowed.extend(summaries.clone());
    allowed.extend(["Audit changes North", "Audit changes South"].map(part));
    allowed.sort();
    let mut found = differing(&a, &b);
    found.sort();
    assert_eq!(found, allowed);
    // From the second on only the hash of the input is new.
    let mut allowed = vec!["hence/record.json".to_owned(), "xl/workbook.xml".to_owned()];
    allowed.extend(summaries);
    allowed.sort();
    let mut found = differing(&b, &c);
    found.sort();
    assert_eq!(found, allowed);
}

#[test]
fn libreoffice_computes_what_two_appraisals_hold() {
    let Some(office) = soffice() else { return };
    let (book, plan) = two();
    let made = filled(&book.bytes(), Some(&plan)).bytes;
    // A flow that is changed afterwards turns its own verdict and that on both.
    let package = Package::from_bytes("book.xlsx", made.clone()).unwrap();
    let model = Workbook::read(&package).unwrap();
    let part = model.sheets[1].part.clone();
    let xml = String::from_utf8(package.part(&part).unwrap().unwrap()).unwrap();
    let other = xml.replace("<c r=\"B5\"><v>40</v>", "<c r=\"B5\"><v>41</v>");
    assert_ne!(xml, other);
    let changes = Changes { replace: [(part, other.into_bytes())].into(), ..Default::default() };
    let changed = package.write(&changes).unwrap();
    let books = [("same.xlsx".to_owned(), made.clone()), ("turned.xlsx".to_owned(), changed)];
    let computed = saved(&office, &books, Recalculate::All);
    let (same, turned) = (&computed["same.xlsx"], &computed["turned.xlsx"]);
    let (before, after) = (cells(&made), cells(same));
    for (at, cell) in &before {
        let now = after.get(at).map(|cell| &cell.value);
        match (&cell.value, now) {
            (Stored::Number(x), Some(Stored::Number(y))) => {
                assert!((x - y).abs() <= 1e-9 * x.abs().max(1.0), "{at:?}: {x} {y}");
            }
            (Stored::Text(x), Some(Stored::Text(y))) => assert_eq!(x, y, "{at:?}"),
            _ => {}
        }
    }
    let (twice, once) = (number(&after, "South", "H1"), number(&after, "South", "B9"));
    assert!((twice - 2.0 * once).abs() < 1e-9 && once > 1.0);
    assert_eq!(named(turned, "hence_verdict_north"), VERDICT_AGREES);
    assert!(named(turned, "hence_verdict_south").starts_with("differs: "));
    assert_eq!(named(turned, "hence_verdict"), "differs: 1 of 2 appraisals, first South");
}

#[test]
fn an_appraisal_that_is_not_filled_keeps_its_sheets() {
    let (book, plan) = two();
    let both = filled(&book.bytes(), Some(&plan)).bytes;
    let north = filled(&both, Some(&plan.clone().only(Some("north".into()))));
    assert_eq!(north.report.appraisals.len(), 1);
    let mut names = sheets(&north.bytes);
    assert_eq!(names.len(), 17);
    names.sort();
    let mut all = sheets(&both);
    all.sort();
    assert_eq!(names, all);
    assert_eq!(named(&north.bytes, "hence_verdict_south"), VERDICT_AGREES);
}

#[test]
fn two_appraisals_may_not_fill_one_cell() {
    let (book, _) = two();
    let plan = parsed(
        "[roles]\nnpv = \"Remarks!B1\"\n[[appraisal]]\nsheets = [\"North\", \"South\"]\n[appraisal.roles]\nbase = \"B1\"\n\
         basis = \"B2\"\nyears = \"B4:D4\"\ncost_works = \"B5:D5\"\n",
    );
    let error = try_filled(&book.bytes(), Some(&plan)).expect_err("a refusal");
    assert_eq!(codes(error.problems()), ["target-overlap Remarks!B1 [shelf.toml line 2, npv]"]);
}

#[test]
fn beside_appraisals_names_count_for_settings_alone() {
    let (book, _) = two();
    // Flows named for the whole workbook belong to neither appraisal; the timing to both.
    let book = book.names("hence_cost_other B1:D1, hence_timing A2");
    let plan = parsed(
        "[[appraisal]]\nsheets = [\"North\", \"South\"]\n[appraisal.roles]\nbase = \"B1\"\nbasis = \"B2\"\nyears = \"B4:D4\"\n\
         cost_works = \"B5:D5\"\nnpv = \"B9\"\n",
    );
    let (package, model) = book.open();
    let parts = plan.parts(&model).expect("two");
    let options = Options { plan: Some(&parts[0]), ..Options::default() };
    let error = resolve(&package, &model, &options).expect_err("a blank timing");
    assert_eq!(codes(error.problems()), ["blank-setting Remarks!A2 [hence_timing]"]);
    let message = plan.part(&model).expect_err("a choice").to_string();
    assert!(message.contains("2 appraisals: North, South"), "{message}");
    assert!(plan.only(Some("South".into())).part(&model).is_ok());
}

#[test]
fn sheets_of_other_appraisals_are_not_told_of_as_left_out() {
    let (book, plan) = two();
    let alike = |report: &Report| report.problems.iter().any(|p| p.code == "sheet-alike");
    assert!(!alike(&filled(&book.bytes(), Some(&plan)).report));
    let one = plan.only(Some("North".into()));
    assert!(!alike(&filled(&book.bytes(), Some(&one)).report));
}

#[test]
fn a_fill_by_appraisals_takes_the_place_of_one_without_and_the_other_way_round() {
    let (book, plan) = two();
    let one = parsed(
        "[settings]\nbase = 2025\nbasis = 0.035\n[roles]\nyears = \"North!B4:D4\"\ncost_works = \"North!B5:D5\"\n\
         benefit_access = \"North!B6:D6\"\nfactor = \"North!B8:D8\"\nnpv = \"North!B9\"\n",
    );
    let first = filled(&book.bytes(), Some(&one));
    assert_eq!(sheets(&first.bytes).len(), 10);
    // The sheets of a fill without appraisals go, and what it filled is filled again.
    let both = filled(&first.bytes, Some(&plan));
    assert_eq!((both.report.filled, both.report.verdict.as_str()), (8, VERDICT_AGREES));
    assert!(!sheets(&both.bytes).contains(&"Discounting".to_owned()));
    assert_eq!(sheets(&both.bytes).len(), 17);
    // Those of appraisals stay beside those of a fill without: nothing says that they are the same.
    let again = filled(&both.bytes, Some(&one));
    assert_eq!((again.report.filled, again.report.verdict.as_str()), (4, VERDICT_AGREES));
    assert_eq!(sheets(&again.bytes).len(), 24);
    assert_eq!(named(&again.bytes, "hence_verdict_south"), VERDICT_AGREES);
}
