//! Plan files: the same numbers as by names, several appraisals in one workbook, a shelf with one plan, wrong plans.
//!
//! The workbooks are made up for these tests.

mod proposed;
mod several;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::package::Package;
use hence_workbook::planfile::PlanFile;
use hence_workbook::problem::{Problem, WorkbookError};
use hence_workbook::resolve::Options;
use hence_workbook::sheets::VERDICT_AGREES;

use crate::libreoffice::cells::{Cells, Stored, cells};
use crate::small::{Small, lines};

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
