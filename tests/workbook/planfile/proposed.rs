//! Proposed plans: what is found stands in them, what is not is to be filled in, and they give what names would give.

use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::appraisal::{Appraisal, Given};
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::model::Workbook;
use hence_workbook::naming::with_suggestions;
use hence_workbook::package::{Changes, Package};
use hence_workbook::planfile::{PlanFile, propose};
use hence_workbook::problem::Problem;
use hence_workbook::resolve::{Options, resolve};
use hence_workbook::roles::PREFIX;

use crate::small::Small;

const WALL: &str = "
    A1: 'Flood wall
    A3: 'Discount rate | 0.035
    A5: 'Year | 2025 | 2026 | 2027 | 2028
    A6: 'Construction | 100 | 50 | |
    A7: 'Maintenance cost | | 5 | 5 | 5
    A9: 'Avoided damage | 0 | 40 | 40 | 40
    A10: 'Population | 900 | 905 | 910 | 915
    A11: 'Discount factor
    A14: 'Net present value (NPV)";

fn package(bytes: Vec<u8>) -> Package {
    Package::from_bytes("book.xlsx", bytes).expect("a package")
}

/// The lines of a plan that say something, and those that wait for someone to.
fn lines(text: &str) -> (Vec<&str>, Vec<&str>) {
    let open = |line: &&str| line.starts_with("# ") && line.contains(" = ");
    let said = text.lines().filter(|line| !line.starts_with('#') && !line.is_empty());
    let said = said.map(|line| line.split("  # ").next().unwrap_or_default());
    (said.collect(), text.lines().filter(open).collect())
}

#[test]
fn what_was_found_is_stated_and_what_was_not_is_to_be_filled_in() {
    let proposal = propose(&package(Small::default().sheet("Wall", WALL).bytes())).expect("a plan");
    let (said, open) = lines(&proposal.text);
    let due = [
        "sheet = \"Wall\"",
        "[settings]",
        "[roles]",
        "years = \"B5:E5\"",
        "basis = \"B3\"",
        "cost_construction = \"B6:E6\"",
        "cost_maintenance_cost = \"B7:E7\"",
        "benefit_avoided_damage = \"B9:E9\"",
        "factor = \"B11:E11\"",
        "npv = \"B14\"",
    ];
    assert_eq!(said, due, "{}", proposal.text);
    assert_eq!(proposal.found, 7);
    let open: Vec<&str> =
        open.into_iter().map(|line| line.split("  # ").next().unwrap_or_default()).collect();
    let due = [
        "# base = 2026",
        "# timing = \"flows end, base end\"",
        "# price_basis = \"real 2026\"",
        "# flow_population = \"B10:E10\"",
    ];
    assert_eq!(open, due);
    // The lines to be filled in are lines of a plan, once the mark is taken away.
    let filled_in: String = proposal
        .text
        .lines()
        .map(|line| match line.strip_prefix("# ") {
            Some(rest) if rest.contains(" = ") => format!("{rest}\n"),
            _ => format!("{line}\n"),
        })
        .collect();
    PlanFile::parse("all.toml", &filled_in).expect("a plan");
    assert!(proposal.problems.is_empty(), "{:?}", proposal.problems);
}

#[test]
fn nothing_found_is_a_plan_to_be_filled_in() {
    let proposal =
        propose(&package(Small::default().sheet("Notes", "A1: 'nothing").bytes())).expect("a plan");
    let (said, open) = lines(&proposal.text);
    assert_eq!(said, ["[settings]", "[roles]"]);
    assert_eq!(open.len(), 9, "{}", proposal.text);
    let codes: Vec<&str> = proposal.problems.iter().map(|p| p.code).collect();
    assert_eq!(codes, ["nothing-to-suggest"]);
}

#[test]
fn options_of_one_layout_stand_in_the_plan_once() {
    let sheet = |works: u32| WALL.replace("100 | 50", &format!("{works} | 50"));
    let book = Small::default()
        .sheet("Wall", &sheet(100))
        .sheet("Bank \"B\"", &sheet(60))
        .sheet("Other", WALL.trim_end_matches("(NPV)"));
    let proposal = propose(&package(book.bytes())).expect("a plan");
    let text = &proposal.text;
    assert!(text.contains("sheets = [\"Wall\", \"Bank \\\"B\\\"\", \"Other\"]  # laid out alike"), "{text}");
    assert_eq!(text.matches("[[option]]").count(), 1);
}

/// An appraisal without the words for where its parts were found.
fn bare(mut appraisal: Appraisal) -> Appraisal {
    fn clear<T>(given: &mut Given<T>) {
        given.from.clear();
    }
    appraisal.problems.clear();
    for setting in &mut appraisal.settings {
        setting.from.clear();
    }
    for choice in &mut appraisal.choices {
        clear(&mut choice.base);
        clear(&mut choice.basis);
        choice.timing.as_mut().map(clear);
        choice.prices.declared.as_mut().map(clear);
        choice.prices.levels.as_mut().map(clear);
        choice.targets.iter_mut().for_each(|target| target.from.clear());
        for stream in &mut choice.streams {
            stream.from.clear();
            clear(&mut stream.uplift);
            stream.residual.as_mut().map(clear);
        }
    }
    appraisal
}

/// Codes and cells, whatever the names are.
fn places(problems: &[Problem]) -> Vec<String> {
    let place = |p: &Problem| (p.place.sheet.clone(), p.place.range.map(|range| range.to_string()));
    let mut all: Vec<String> = problems.iter().map(|p| format!("{} {:?}", p.code, place(p))).collect();
    all.sort();
    all
}

/// What hence reads by the names that would be suggested, and by the plan that is proposed: the same.
fn agree(file: &str, input: &Package, base: Option<&str>) -> bool {
    let Ok((_, named)) = with_suggestions(input) else { return false };
    let named = Package::from_bytes(file, named).expect("the copy is a package");
    let proposal = propose(input).unwrap_or_else(|error| panic!("{file}: {error}"));
    let plan = PlanFile::parse("plan.toml", &proposal.text).unwrap_or_else(|error| panic!("{file}: {error}"));
    let (a, b) = (Workbook::read(&named).unwrap(), Workbook::read(input).unwrap());
    let part = plan.part(&b).unwrap_or_else(|error| panic!("{file}: {error}"));
    let by_names = resolve(&named, &a, &Options { basis: base, ..Options::default() });
    let by_plan = resolve(input, &b, &Options { basis: base, plan: Some(&part), ..Options::default() });
    match (by_names, by_plan) {
        (Ok(x), Ok(y)) => {
            assert_eq!(bare(x), bare(y), "{file}");
            true
        }
        (Err(x), Err(y)) => {
            assert_eq!(places(x.problems()), places(y.problems()), "{file}");
            false
        }
        (x, y) => panic!("{file}: by names {:?}, by the plan {:?}", x.err(), y.err()),
    }
}

#[test]
fn a_proposed_plan_gives_what_suggested_names_give() {
    let sample = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/mine-drainage.xlsx");
    let sample = Package::open(&sample).expect("the sample");
    // Without its names, but with its base and basis in cells that are headed.
    let part = sample.workbook_part().to_owned();
    let xml = String::from_utf8(sample.part(&part).unwrap().unwrap()).unwrap();
    let names =
        xml.find("<definedNames>").unwrap()..xml.find("</definedNames>").unwrap() + "</definedNames>".len();
    let without = xml[..names.start].to_owned() + &xml[names.end..];
    let changes = Changes { replace: [(part, without.into_bytes())].into(), ..Changes::default() };
    let bare = package(sample.write(&changes).unwrap());
    assert!(agree("sample", &bare, None));
    let small = Small::default().sheet("Wall", &WALL.replace("A3:", "A2: 'Base year | 2025\nA3:"));
    let input = package(small.bytes());
    assert!(agree("wall", &input, None));
    // And filled, the same numbers.
    let (_, named) = with_suggestions(&input).unwrap();
    let by_names = fill(&package(named), &FillRequest::default(), &Catalogue::builtin()).unwrap();
    let plan = PlanFile::parse("plan.toml", &propose(&input).unwrap().text).unwrap();
    let request = FillRequest { plan: Some(plan), ..FillRequest::default() };
    let by_plan = fill(&input, &request, &Catalogue::builtin()).unwrap();
    assert_eq!(by_names.report.options, by_plan.report.options);
}

#[test]
fn a_plan_of_a_workbook_with_names_says_what_they_say() {
    let sample = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/mine-drainage.xlsx");
    let sample = Package::open(&sample).expect("the sample");
    let book = Workbook::read(&sample).unwrap();
    let by_names = resolve(&sample, &book, &Options::default()).expect("an appraisal");
    let text = propose(&sample).expect("a plan").text;
    assert!(
        !text.contains(PREFIX)
            || text.lines().all(|line| !line.split("  # ").next().unwrap().contains(PREFIX))
    );
    let part = PlanFile::parse("plan.toml", &text).unwrap().part(&book).unwrap();
    let by_plan = resolve(&sample, &book, &Options { plan: Some(&part), ..Options::default() });
    assert_eq!(bare(by_plan.expect("an appraisal")), bare(by_names));
}

#[test]
fn plans_are_proposed_for_real_workbooks() {
    let Some(corpus) = std::env::var_os("HENCE_CORPUS") else {
        println!("HENCE_CORPUS is not set: no plan was proposed for real workbooks");
        return;
    };
    let mut files: Vec<PathBuf> =
        std::fs::read_dir(corpus).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.retain(|path| path.extension().is_some_and(|e| e == "xlsx" || e == "xlsm"));
    files.sort();
    let (mut proposed, mut resolved) = (0, 0);
    for file in &files {
        let name = file.file_name().unwrap_or_default().to_string_lossy().into_owned();
        let Ok(input) = Package::open(file) else { continue };
        let Ok(proposal) = propose(&input) else { continue };
        PlanFile::parse("plan.toml", &proposal.text).unwrap_or_else(|error| panic!("{name}: {error}"));
        proposed += 1;
        resolved += usize::from(agree(&name, &input, Some("3%")));
    }
    println!("{proposed} plans for {} workbooks, {resolved} of which resolve as they stand", files.len());
    assert!(proposed * 10 >= files.len() * 9, "{proposed} of {}", files.len());
}
