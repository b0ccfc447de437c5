//! The grammar of names, from the table of roles in the specification: `hence_<role>[_<stream>][__<option>]`.

use hence_workbook::roles::{ROLES, Role, Status, Way, key, parse_name, parse_role};

fn read(name: &str) -> (Role, Option<String>, Option<String>) {
    let name = parse_name(name).expect("a name of hence").expect("a role");
    (name.role, name.stream, name.option)
}

fn some(text: &str) -> Option<String> {
    Some(text.to_owned())
}

#[test]
fn role_stream_and_option() {
    assert_eq!(read("hence_cost_works__do_minimum"), (Role::Cost, some("works"), some("do minimum")));
    assert_eq!(read("hence_cost_works.do_minimum"), (Role::Cost, some("works"), some("do minimum")));
    assert_eq!(read("HENCE_COST_Water_Works"), (Role::Cost, some("Water Works"), None));
    assert_eq!(read("hence_base"), (Role::Base, None, None));
    assert_eq!(read("hence_base__b"), (Role::Base, None, some("b")));
    assert_eq!(read("hence_pv"), (Role::Pv, None, None));
    assert_eq!(read("hence_pv_works"), (Role::Pv, some("works"), None));
}

#[test]
fn the_longest_word_wins() {
    assert_eq!(read("hence_pv_costs"), (Role::PvCosts, None, None));
    assert_eq!(read("hence_pv_benefits__a"), (Role::PvBenefits, None, some("a")));
    assert_eq!(read("hence_pv_costs_of_delay").0, Role::Pv);
    assert_eq!(read("hence_price_basis").0, Role::PriceBasis);
    assert_eq!(read("hence_costs").0, Role::Costs);
    assert_eq!(read("hence_cost_s").0, Role::Cost);
}

#[test]
fn names_of_others_are_left_alone() {
    for name in ["Discount_Rate", "henceforth", "hence", "Print_Area", "_xlnm.Print_Titles", "h€nce_base"] {
        assert!(parse_name(name).is_none(), "{name}");
    }
}

#[test]
fn slips_name_the_nearest_role() {
    for (name, meant) in [
        ("hence_yaers", "hence_years"),
        ("hence_benifit_access", "hence_benefit_access"),
        ("hence_cots_pumps", "hence_cost_pumps"),
        ("hence_pv_benefit", "pv"),
        ("hence_facter", "hence_factor"),
        ("hence_cost", "hence_cost_works"),
        ("hence_costs_works", "hence_cost_works"),
        ("hence_years_2026", "hence_years"),
    ] {
        match parse_name(name).unwrap() {
            Err(why) => assert!(why.contains(meant), "{name}: {why}"),
            // A stream called "benefit" is a name one may have.
            Ok(role) => assert_eq!((name, role.role.word()), ("hence_pv_benefit", meant)),
        }
    }
    for name in ["hence_", "hence_cost_", "hence_cost_works__", "hence_zzzzzz"] {
        assert!(parse_name(name).unwrap().is_err(), "{name}");
    }
}

#[test]
fn own_names_are_known_as_own() {
    for name in ["hence_verdict", "hence_own"] {
        assert_eq!(read(name).0.info().way, Way::Own);
    }
}

#[test]
fn roles_on_the_command_line_may_leave_the_prefix_out() {
    assert_eq!(parse_role("cost_works__a"), parse_role("hence_cost_works__a"));
    assert!(parse_role("works").is_err());
}

#[test]
fn case_underscores_and_marks_do_not_tell_names_apart() {
    assert_eq!(key("Do_minimum"), key("do minimum"));
    assert_eq!(key("Water works (capex)"), key("water_works_capex"));
    assert_ne!(key("works a"), key("works b"));
}

// Specification, section 6: these words, these directions; welfare waits for a later version.
#[test]
fn the_table_holds_every_role_of_the_specification() {
    let words = |way| -> Vec<&str> { ROLES.iter().filter(|r| r.way == way).map(|r| r.word).collect() };
    for word in [
        "base",
        "basis",
        "timing",
        "years",
        "offsets",
        "cost",
        "benefit",
        "flow",
        "costs",
        "benefits",
        "damage",
        "baseline",
        "budget",
        "effect",
        "price_basis",
        "prices",
        "signs",
        "unit",
        "uplift",
        "residual",
        "tail",
        "growth",
        "consumption",
        "income",
        "shared",
    ] {
        assert!(words(Way::In).contains(&word), "{word}");
    }
    for word in
        ["factor", "pv", "rates", "npv", "pv_costs", "pv_benefits", "ratio", "annual", "irr", "payback"]
    {
        assert!(words(Way::Out).contains(&word), "{word}");
    }
    for info in ROLES {
        let waits = matches!(info.status, Status::Later(_));
        let later = ["consumption", "income"].contains(&info.word);
        assert_eq!(waits, later, "{}", info.word);
        assert!(!info.what.is_empty());
    }
}
