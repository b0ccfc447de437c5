//! Guesses for workbooks without names: what a person would name, and nothing more.

use hence_workbook::suggest::{Guess, suggest};

use crate::small::Small;

fn guesses(small: &Small) -> Vec<Guess> {
    let (package, book) = small.open();
    suggest(&package, &book).expect("guesses")
}

fn listed(small: &Small) -> Vec<String> {
    guesses(small).iter().map(|guess| format!("{} {}", guess.name, guess.at)).collect()
}

const PLAN: &str = "
    A1: 'Flood wall
    A2: 'Base year | 2025
    A3: 'Discount rate | 0.035
    A5: 'Year | 2025 | 2026 | 2027 | 2028
    A6: 'Construction | 100 | 50 | |
    A7: 'Maintenance cost | | 5 | 5 | 5
    A8: 'Total costs | =B6+B7>100 | =C6+C7>55 | =D6+D7>5 | =E6+E7>5
    A9: 'Avoided damage | 0 | 40 | 40 | 40
    A10: 'Population | 900 | 905 | 910 | 915
    A11: 'Discount factor
    A12: 'PV Construction
    A14: 'Net present value (NPV)
    A15: 'Benefit-cost ratio";

#[test]
fn headings_and_shapes_give_the_names() {
    assert_eq!(
        listed(&Small::default().sheet("Wall", PLAN)),
        [
            "hence_years Wall!B5:E5",
            "hence_base Wall!B2",
            "hence_basis Wall!B3",
            "hence_cost_construction Wall!B6:E6",
            "hence_cost_maintenance_cost Wall!B7:E7",
            "hence_benefit_avoided_damage Wall!B9:E9",
            "hence_factor Wall!B11:E11",
            "hence_pv_construction Wall!B12:E12",
            "hence_npv Wall!B14",
            "hence_ratio Wall!B15",
        ]
    );
}

#[test]
fn the_guesses_resolve() {
    let small = Small::default().sheet("Wall", PLAN);
    let named = guesses(&small)
        .iter()
        .fold(small, |small, guess| small.names(&format!("{} {}", guess.name, guess.at.range)));
    let read = named.resolved();
    assert_eq!(read.choices[0].streams.len(), 3);
    assert_eq!(read.choices[0].targets.len(), 4);
    assert_eq!(guesses(&named), [], "what is named is not guessed again");
}

#[test]
fn every_guess_says_why() {
    let all = guesses(&Small::default().sheet("Wall", PLAN));
    assert!(all[0].why.contains("calendar years, 2025 to 2028"), "{}", all[0].why);
    assert!(all[3].why.contains("`construction`") && all[3].why.contains("2 numbers"), "{}", all[3].why);
}

#[test]
fn signs_and_sections_speak_where_headings_do_not() {
    let small = Small::default().sheet(
        "Plan",
        "A1: 'Year | '2025/26 | '2026/27 | '2027/28 | '2028/29
         A2: 'Alpha | -1 | -2 | -3 | -4
         A3: 'Beta | -1 | 2 | 3 | 4
         A4: 'Gamma | 1 | 2 | 3 | 4
         A5: 'Benefits
         A6: 'Delta | 1 | 2 | 3 | 4",
    );
    assert_eq!(
        listed(&small),
        [
            "hence_years Plan!B1:E1",
            "hence_cost_alpha Plan!B2:E2",
            "hence_flow_beta Plan!B3:E3",
            "hence_benefit_delta Plan!B6:E6"
        ]
    );
}

#[test]
fn units_are_no_headings_and_totals_tell_the_side() {
    let small = Small::default().sheet(
        "Plan",
        "A1: 'Crowns | 'Unit | 2025 | 2026 | 2027 | 2028
         A2: 'Watching the outflow | 'crowns | 1 | 1 | 1 | 1
         A3: 'Renewals | 'crowns | 0 | 0 | 0 | 9
         A4: 'All costs | 'crowns | =SUM(C2:C3)>1 | =SUM(D2:D3)>1 | =SUM(E2:E3)>1 | =SUM(F2:F3)>10
         A5: 'Clean water sold | 'crowns | 0 | 3 | 3 | 3
         A6: 'Net | 'crowns | =C5-C4>-1 | =D5-D4>2 | =E5-E4>2 | =F5-F4>-7",
    );
    assert_eq!(
        listed(&small),
        [
            "hence_years Plan!C1:F1",
            "hence_cost_watching_the_outflow Plan!C2:F2",
            "hence_cost_renewals Plan!C3:F3",
            "hence_benefit_clean_water_sold Plan!C5:F5"
        ]
    );
    assert!(guesses(&small)[1].why.contains("added up in `All costs`"), "{}", guesses(&small)[1].why);
}

#[test]
fn years_down_a_column() {
    let small = Small::default().sheet(
        "Plan",
        "A1: 'Year | 'Capital costs | 'Fare revenue | 'Discount factor
         A2: 2025 | 10 | 0
         A3: 2026 | 1 | 4
         A4: 2027 | 1 | 4
         A5: 2028 | 1 | 4",
    );
    assert_eq!(
        listed(&small),
        [
            "hence_years Plan!A2:A5",
            "hence_cost_capital_costs Plan!B2:B5",
            "hence_benefit_fare_revenue Plan!C2:C5",
            "hence_factor Plan!D2:D5"
        ]
    );
}

#[test]
fn several_sheets_of_flows_are_options() {
    let option = "A1: 'Year | 2025 | 2026 | 2027 | 2028\nA2: 'Works cost | 1 | 2 | 3 | 4\nA3: 'NPV";
    let small = Small::default().sheet("Do minimum", option).sheet("Option A", option);
    assert_eq!(
        listed(&small),
        [
            "hence_years__do_minimum 'Do minimum'!B1:E1",
            "hence_cost_works_cost__do_minimum 'Do minimum'!B2:E2",
            "hence_npv__do_minimum 'Do minimum'!B3",
            "hence_years__option_a 'Option A'!B1:E1",
            "hence_cost_works_cost__option_a 'Option A'!B2:E2",
            "hence_npv__option_a 'Option A'!B3"
        ]
    );
}

#[test]
fn nothing_is_guessed_from_a_sheet_without_years() {
    assert_eq!(listed(&Small::default().sheet("Notes", "A1: 'Costs | 1 | 2 | 3 | 4")), [""; 0]);
}

#[test]
fn amounts_that_count_up_are_years_only_where_a_heading_says_so() {
    let cells = |heading: &str| format!("A1: '{heading} | 0 | 1 | 2 | 3\nA2: 'Works | 9 | 9 | 9 | 9");
    let small = Small::default().sheet("Plan", &cells("Period"));
    assert_eq!(listed(&small), ["hence_years Plan!B1:E1", "hence_cost_works Plan!B2:E2"]);
    assert_eq!(listed(&Small::default().sheet("Plan", &cells("Visitors"))), [""; 0]);
}

#[test]
fn years_of_a_table_without_flows_give_way() {
    let small = Small::default()
        .sheet("Prices", "A1: 'Year | 2020 | 2021 | 2022 | 2023\nA2: 'Index | 100 | 102 | 104 | 106")
        .sheet("Plan", "A1: 'Year | 2025 | 2026 | 2027 | 2028\nA2: 'Works | 9 | 9 | 9 | 9");
    assert_eq!(listed(&small), ["hence_years Plan!B1:E1", "hence_cost_works Plan!B2:E2"]);
}

/// Real workbooks, saved by many programs: whatever they hold, the search ends and every guess reads back.
#[test]
fn real_workbooks_are_searched_without_harm() {
    use hence_workbook::model::Workbook;
    use hence_workbook::package::Package;
    let mut searched = 0;
    let paths = crate::package::corpus();
    for path in &paths {
        let Ok(package) = Package::open(path) else { continue };
        let Ok(book) = Workbook::read(&package) else { continue };
        let Ok(guesses) = suggest(&package, &book) else { continue };
        for guess in guesses {
            assert!(matches!(hence_workbook::roles::parse_name(&guess.name), Some(Ok(_))), "{}", guess.name);
            assert!(book.sheet_index(&guess.at.sheet).is_some());
        }
        let _ = hence_workbook::resolve::names(&package, &book).expect("a report");
        searched += 1;
    }
    assert!(searched * 10 >= paths.len() * 9, "{searched} of {} workbooks searched", paths.len());
}
