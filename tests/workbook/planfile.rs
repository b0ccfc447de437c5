//! Plan files: the same numbers as by names, several appraisals in one workbook, a shelf with one plan, wrong plans.
//!
//! The workbooks are made up for these tests.

mod proposed;

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::model::Workbook;
use hence_workbook::package::Package;
use hence_workbook::planfile::PlanFile;
use hence_workbook::problem::{Problem, WorkbookError};
use hence_workbook::report::Status;
use hence_workbook::resolve::Options;
use hence_workbook::sheets::VERDICT_AGREES;

use crate::libreoffice::cells::{Cells, Stored, cells};
use crate::libreoffice::office::{Recalculate, saved, soffice};
use crate::small::{Small, codes, lines};

const FLOWS: &str = "A1: 'Base | 2025
    A2: 'Rate | 0.035
    A4: 'Year | 2025 | 2026 | 2027 | 2028
    A5: 'Works | 100 | 50 | 25 | 5
    A6: 'Access | 0 | 80 | 80 | 80
    A8: 'Factor | | | |
    A9: 'NPV |
    A10: 'Ratio |";

const NAMES: &str = "hence_base B1, hence_basis B2, hence_years B4:E4, hence_cost_works B5:E5, \
    hence_benefit_access B6:E6, hence_factor B8:E8, hence_npv B9, hence_ratio B10";

const PLAN: &str = "sheet = \"Flows\"
[roles]
base = \"B1\"
basis = \"B2\"
years = \"B4:E4\"
cost_works = \"B5:E5\"
benefit_access = \"B6:E6\"
factor = \"B8:E8\"
npv = \"Flows!B9\"
ratio = \"$B$10\"
";

fn parsed(text: &str) -> PlanFile {
    PlanFile::parse("shelf.toml", text).unwrap_or_else(|error| panic!("{error}"))
}

fn try_filled(bytes: &[u8], plan: Option<&PlanFile>) -> Result<Filled, WorkbookError> {
    let package = Package::from_bytes("book.xlsx", bytes.to_vec()).expect("a package");
    let request = FillRequest { plan: plan.cloned(), ..FillRequest::default() };
    fill(&package, &request, &Catalogue::builtin())
}

fn filled(bytes: &[u8], plan: Option<&PlanFile>) -> Filled {
    try_filled(bytes, plan).unwrap_or_else(|error| panic!("{}", lines(error.problems()).join("\n")))
}

/// The number of a cell.
fn number(cells: &Cells, sheet: &str, at: &str) -> f64 {
    match cells.get(&(sheet.to_owned(), at.parse().expect("a cell"))).map(|cell| &cell.value) {
        Some(Stored::Number(x)) => *x,
        other => panic!("{sheet}!{at} holds {other:?}"),
    }
}

/// The value of the cell that a name of the workbook stands for.
fn named(bytes: &[u8], name: &str) -> String {
    let package = Package::from_bytes("book.xlsx", bytes.to_vec()).expect("a package");
    let book = Workbook::read(&package).expect("a workbook");
    let defined = book.find_name(name, None).unwrap_or_else(|| panic!("no name {name}"));
    let hence_workbook::references::NameTarget::Cells(at) = book.resolve(defined) else { panic!("{name}") };
    match cells(bytes).get(&(at.sheet, at.range.first)).map(|cell| cell.value.clone()) {
        Some(Stored::Text(text)) => text,
        other => panic!("{name} holds {other:?}"),
    }
}

#[test]
fn a_plan_gives_the_numbers_that_names_give() {
    let plain = Small::default().sheet("Flows", FLOWS);
    let by_names = filled(&plain.clone().names(NAMES).bytes(), None);
    let by_plan = filled(&plain.bytes(), Some(&parsed(PLAN)));
    assert_eq!(by_plan.report.options, by_names.report.options);
    assert_eq!((by_plan.report.filled, by_plan.report.verdict.as_str()), (6, VERDICT_AGREES));
    let (a, b) = (cells(&by_names.bytes), cells(&by_plan.bytes));
    let on = |cells: &Cells, sheet: &str| -> Cells {
        cells.iter().filter(|((name, _), _)| name == sheet).map(|(k, v)| (k.clone(), v.clone())).collect()
    };
    for sheet in ["Flows", "Discounting"] {
        assert_eq!(on(&a, sheet), on(&b, sheet), "{sheet}");
    }
    // By hand: 100 now, 50, 25 and 5 a year later each, against 80 three times, at 3.5%.
    let d = |t: i32| 1.035f64.powi(-t);
    let npv = -100.0 + 30.0 * d(1) + 55.0 * d(2) + 75.0 * d(3);
    assert!((number(&b, "Flows", "B9") - npv).abs() < 1e-9);
}

#[test]
fn the_audit_says_which_plan_it_was() {
    let bytes = filled(&Small::default().sheet("Flows", FLOWS).bytes(), Some(&parsed(PLAN))).bytes;
    let texts: Vec<String> = cells(&bytes)
        .into_iter()
        .filter(|((sheet, _), _)| sheet == "Audit summary")
        .filter_map(|(_, cell)| if let Stored::Text(text) = cell.value { Some(text) } else { None })
        .collect();
    let plan = parsed(PLAN);
    for due in ["shelf.toml", &plan.sha256(), "3.5% (from shelf.toml line 4, basis)"] {
        assert!(texts.iter().any(|text| text == due), "{due}: {texts:#?}");
    }
    assert_eq!(plan.sha256().len(), 64);
    assert_ne!(plan.sha256(), parsed(&format!("{PLAN}\n")).sha256());
}

#[test]
fn what_the_workbook_states_in_no_cell_stands_in_the_plan() {
    let plain = Small::default().sheet("Flows", FLOWS);
    let by_cells = "A1: 'Base | 2025 | 'k | 0.2 | 10 | 'flows middle | 'growing 1%, to 2040";
    let names = "hence_timing F1, hence_unit_works C1, hence_uplift_works D1, hence_residual_works E1, hence_tail_access G1";
    let flows: String = FLOWS.lines().skip(1).map(|line| format!("{line}\n")).collect();
    let with_cells =
        Small::default().sheet("Flows", &format!("{by_cells}\n{flows}")).names(NAMES).names(names);
    let plan = PLAN.replace("base = \"B1\"\nbasis = \"B2\"\n", "")
        + "[settings]\nbase = 2025\nbasis = 0.035\ntiming = \"flows middle\"\nunit_works = \"k\"\n\
           uplift_works = \"20%\"\nresidual_works = 10\ntail_access = \"growing 1%, to 2040\"\n";
    let by_names = filled(&with_cells.bytes(), None).report;
    let by_plan = filled(&plain.bytes(), Some(&parsed(&plan))).report;
    assert_eq!(by_plan.options, by_names.options);
    assert_eq!(by_plan.verdict, VERDICT_AGREES);
}

#[test]
fn options_on_sheets_of_one_layout_and_in_blocks() {
    let inputs = "A1: 2025 | '3.5%\nA4: 'Year | 2025 | 2026 | 2027";
    let option = |works: i32| format!("B5: {works} | 50 | 25\nB6: 10 | 60 | 90\nA9: 'NPV |");
    let book = Small::default()
        .sheet("Inputs", inputs)
        .sheet("Option A", &option(100))
        .sheet("Option B", &option(40))
        .sheet("Remarks", "A1: 'nothing here");
    let plan = parsed(
        "[settings]\nbaseline = \"Option B\"\n[roles]\nbase = \"Inputs!A1\"\nbasis = \"Inputs!B1\"\nyears = \"Inputs!B4:D4\"\n\
         [[option]]\nsheets = [\"option *\"]\nroles = { cost_works = \"B5:D5\", benefit_x = \"B6:D6\", npv = \"B9\" }\n",
    );
    let report = filled(&book.bytes(), Some(&plan)).report;
    let names: Vec<&str> = report.options.iter().map(|option| option.name.as_str()).collect();
    assert_eq!(names, ["Option A", "Option B"]);
    assert!(report.options[1].baseline);
    let increment = report.options[0].increment.expect("over the baseline");
    assert!((increment.npv + 60.0).abs() < 1e-9);

    let blocks = Small::default().sheet(
        "All",
        "A1: 2025 | '3.5%\nA4: 'Year | 2025 | 2026 | 2027\nA5: 'Wall | 100 | 50 | 25\nA6: 'Bank | 40 | 50 | 25\nA8: 'NPV | | ",
    );
    let plan = parsed(
        "sheet = \"All\"\n[roles]\nbase = \"A1\"\nbasis = \"B1\"\nyears = \"B4:D4\"\n\
         [[option]]\nname = \"Wall\"\nroles.cost_works = \"B5:D5\"\nroles.npv = \"B8\"\n\
         [[option]]\nname = \"Bank\"\nroles.cost_works = \"B6:D6\"\nroles.npv = \"C8\"\n",
    );
    let report = filled(&blocks.bytes(), Some(&plan)).report;
    let npv: Vec<(&str, f64)> =
        report.options.iter().map(|option| (option.name.as_str(), option.absolute.npv)).collect();
    assert_eq!((npv[0].0, npv[1].0), ("Wall", "Bank"));
    assert!((npv[1].1 - npv[0].1 - 60.0).abs() < 1e-9);
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
    let changes = hence_workbook::package::Changes {
        replace: [(part, other.into_bytes())].into(),
        ..Default::default()
    };
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
fn one_plan_serves_a_shelf_of_alike_workbooks() {
    let plan = parsed(PLAN);
    for works in [100, 75, 130] {
        let flows = FLOWS.replace("'Works | 100", &format!("'Works | {works}"));
        let made = filled(&Small::default().sheet("Flows", &flows).bytes(), Some(&plan));
        let d = |t: i32| 1.035f64.powi(-t);
        let npv = -f64::from(works) + 30.0 * d(1) + 55.0 * d(2) + 75.0 * d(3);
        assert!((made.report.options[0].absolute.npv - npv).abs() < 1e-9);
        assert_eq!(made.report.verdict, VERDICT_AGREES);
    }
}

#[test]
fn the_command_line_comes_before_the_plan_and_the_plan_before_names() {
    let plain = Small::default()
        .sheet("Flows", &format!("{FLOWS}\nG1: 2024 | '5%\nB12: 1 | 1 | 1 | 1\nB13: 2 | 2 | 2 | 2"));
    let book = plain.names("hence_base G1, hence_basis H1, hence_cost_works B12:E12, hence_npv B9");
    let plan = parsed(PLAN);
    let (package, model) = book.open();
    let part = plan.part(&model).expect("one appraisal");
    let roles = [("cost_works".to_owned(), "Flows!B13:E13".to_owned())];
    let options = Options { roles: &roles, plan: Some(&part), ..Options::default() };
    let read = hence_workbook::resolve::resolve(&package, &model, &options).expect("an appraisal");
    let choice = &read.choices[0];
    assert_eq!(choice.streams.len(), 2);
    assert_eq!(choice.streams.iter().find(|s| s.name == "works").unwrap().at.to_string(), "Flows!B13:E13");
    assert_eq!(choice.base.from, "shelf.toml line 3, base");
    // Base and basis differ from what the names say; the cost of the plan is no matter of the kind.
    let warned: Vec<&Problem> = read.problems.iter().filter(|p| p.code == "plan-overrides").collect();
    let told: Vec<String> = warned.iter().map(|p| p.to_string()).collect();
    assert_eq!(
        told,
        [
            "Flows!G1 [hence_base]: the workbook says `2024`, and shelf.toml line 3, base says `2025`: the plan counts \
             (plan-overrides)",
            "Flows!H1 [hence_basis]: the workbook says `5%`, and shelf.toml line 4, basis says `0.035`: the plan counts \
             (plan-overrides)",
        ]
    );
    let over = Options { basis: Some("4%"), plan: Some(&part), ..Options::default() };
    let read = hence_workbook::resolve::resolve(&package, &model, &over).expect("an appraisal");
    assert_eq!(read.choices[0].basis.value, "4%");
    assert!(read.problems.iter().any(|p| p.code == "basis-overridden"));
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
    let error = hence_workbook::resolve::resolve(&package, &model, &options).expect_err("a blank timing");
    assert_eq!(codes(error.problems()), ["blank-setting Remarks!A2 [hence_timing]"]);
    let message = plan.part(&model).expect_err("a choice").to_string();
    assert!(message.contains("2 appraisals: North, South"), "{message}");
    assert!(plan.only(Some("South".into())).part(&model).is_ok());
}

/// The workbook that `wrong.txt` is about.
fn one_for_wrong_plans() -> Package {
    let site = "A4: 'Year | 2025 | 2026 | 2027 | 2028\nA5: 'Works | 1 | 2 | 3 | 4\nA9: 'NPV |";
    let book = Small::default()
        .sheet("Flows", FLOWS)
        .names("Works_row B5:E5")
        .sheet("Notes", "A1: 'nothing")
        .sheet("Site 1", site)
        .sheet("Site 2", site)
        .raw_name("Broken", "Flows!#REF!");
    Package::from_bytes("book.xlsx", book.bytes()).expect("a package")
}

#[test]
fn wrong_plans_are_explained_by_line_and_cell() {
    let text = include_str!("planfile/wrong.txt");
    let package = one_for_wrong_plans();
    let mut cases = 0;
    let mut wrong = String::new();
    for case in text.split("\n== ").skip(1) {
        let (title, rest) = case.split_once('\n').expect("a title");
        let (plan, due) = rest.split_once("\n--\n").expect("a plan and what is said of it");
        let found = match PlanFile::parse("shelf.toml", plan) {
            Ok(plan) => {
                let request = FillRequest { plan: Some(plan), ..FillRequest::default() };
                fill(&package, &request, &Catalogue::builtin()).expect_err(title)
            }
            Err(error) => error,
        };
        let told: String = found
            .problems()
            .iter()
            .map(|p| format!("{p}\n  Try: {}\n", p.hint.as_deref().unwrap_or("-")))
            .collect();
        if told.trim() != due.trim() {
            wrong.push_str(&format!("== {title}\n{plan}\n--\n{told}\n"));
        }
        cases += 1;
    }
    assert!(wrong.is_empty(), "otherwise:\n{wrong}");
    assert!(cases >= 10, "{cases}");
}

#[test]
fn cells_in_pieces_and_columns_of_tables_are_given_like_any_others() {
    let flows =
        "A4: 'Year | 2025 | 2026 | 'Sum | 2027 | 2028\nA5: 'Works | 100 | 50 | 150 | 25 | 5\nA9: 'NPV |";
    let pieces = Small::default().sheet("Flows", flows);
    let plan = parsed(
        "sheet = \"Flows\"\n[settings]\nbase = 2025\nbasis = 0.035\n[roles]\nyears = \"B4:C4,E4:F4\"\n\
         cost_works = \"B5:C5, Flows!E5:F5\"\nnpv = \"B9\"\n",
    );
    let d = |t: i32| 1.035f64.powi(-t);
    let npv = -100.0 - 50.0 * d(1) - 25.0 * d(2) - 5.0 * d(3);
    let report = filled(&pieces.bytes(), Some(&plan)).report;
    assert!((report.options[0].absolute.npv - npv).abs() < 1e-9);
    assert_eq!(report.verdict, VERDICT_AGREES);

    let table = "<table xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\" id=\"1\" name=\"Flows\" \
                 displayName=\"Flows\" ref=\"A1:B5\"><autoFilter ref=\"A1:B5\"/><tableColumns count=\"2\">\
                 <tableColumn id=\"1\" name=\"Year\"/><tableColumn id=\"2\" name=\"Works\"/></tableColumns></table>";
    let down = Small::default()
        .sheet(
            "Site",
            "A1: 'Year | 'Works\nA2: 2025 | 100\nA3: 2026 | 50\nA4: 2027 | 25\nA5: 2028 | 5\nD1: 'NPV |",
        )
        .after_cells("<tableParts count=\"1\"><tablePart r:id=\"rId1\"/></tableParts>")
        .related("table", "tables/table1.xml", table);
    let plan = parsed(
        "[settings]\nbase = 2025\nbasis = 0.035\n[roles]\nyears = \"Flows[Year]\"\ncost_works = \"Flows[Works]\"\n\
         npv = \"Site!E1\"\n",
    );
    let report = filled(&down.bytes(), Some(&plan)).report;
    assert!((report.options[0].absolute.npv - npv).abs() < 1e-9);
}

#[test]
fn sheets_of_other_appraisals_are_not_told_of_as_left_out() {
    let (book, plan) = two();
    let alike =
        |report: &hence_workbook::report::Report| report.problems.iter().any(|p| p.code == "sheet-alike");
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
