//! Mistakes in how a workbook is put together, each made by hand in a clean plan.

mod clean;
mod plan;

use hence_workbook::findings::Finding;

use plan::{Plan, YEARS, at, factor, fish, pv_benefits, pv_costs, row, running, water, works};

/// The one finding, which has to be of this kind and place.
#[track_caller]
fn only(plan: &Plan, code: &str, place: &str) -> Finding {
    one(plan.findings(), code, place)
}

/// The same of a plan that cannot be valued as it stands.
#[track_caller]
fn checked(plan: &Plan, code: &str, place: &str) -> Finding {
    one(plan.checked(), code, place)
}

#[track_caller]
fn one(found: Vec<Finding>, code: &str, place: &str) -> Finding {
    let shown: Vec<String> =
        found.iter().map(|f| format!("{} {} {}", f.kind.code(), f.place, f.words)).collect();
    assert_eq!(found.len(), 1, "{shown:#?}");
    assert_eq!((found[0].kind.code(), found[0].place.to_string().as_str()), (code, place), "{shown:#?}");
    found.into_iter().next().unwrap()
}

#[track_caller]
fn close(found: Option<f64>, expected: f64) {
    let found = found.expect("an effect");
    assert!((found - expected).abs() <= 1e-6 * expected.abs().max(1e-3), "{found}, expected {expected}");
}

#[test]
fn a_clean_plan_has_no_finding() {
    assert_eq!(Plan::clean().codes(), Vec::<String>::new());
    let mut typed = Plan::clean();
    typed.typed_results(pv_costs(), pv_benefits(), pv_benefits() - pv_costs());
    assert_eq!(typed.codes(), Vec::<String>::new());
}

#[test]
fn a_typed_number_in_a_row_of_formulas() {
    // Present values: the NPV moves by what is typed beyond the formula.
    let mut plan = Plan::clean();
    plan.put(at(16, 7), "900".into());
    let right = (water(7) + fish(7)) * factor(7);
    let finding = only(&plan, "hard-coded", "Plan!I16");
    close(finding.effect_on_npv, 900.0 - right);
    assert!(finding.expected.starts_with("=I12*I14, which gives"), "{}", finding.expected);
    // A flow: what is typed moves the flows after it, too, as they count on from it.
    let mut plan = Plan::clean();
    plan.put(at(7, 5), "170".into());
    let finding = only(&plan, "hard-coded", "Plan!G7 [hence_cost_running]");
    let moved: f64 = (5..YEARS).map(|i| 1.01f64.powi(i as i32 - 5) * factor(i)).sum();
    close(finding.effect_on_npv, -(170.0 - running(5)) * moved);
    // The first and the last of a row of factors.
    for (i, cell) in [(0, "Plan!B14 [hence_factor]"), (YEARS - 1, "Plan!U14 [hence_factor]")] {
        let mut plan = Plan::clean();
        plan.put(at(14, i), (factor(i) + 0.01).to_string());
        only(&plan, "hard-coded", cell);
    }
    // The second of a chain, behind its opening value.
    let mut plan = Plan::clean();
    plan.put(at(14, 0), "1".into()).put(at(14, 1), "0.95".into());
    for i in 2..YEARS {
        plan.put(at(14, i), format!("={}/(1+$B$2)>{}", at(14, i - 1), 0.95 * factor(i - 1)));
    }
    only(&plan, "hard-coded", "Plan!C14 [hence_factor]");
}

#[test]
fn breaks_that_somebody_meant_are_none() {
    // Actuals, then forecasts.
    let mut plan = Plan::clean();
    for i in 0..4 {
        plan.put(at(7, i), running(i).to_string());
    }
    assert_eq!(plan.codes(), Vec::<String>::new());
    // An opening value that the formulas count on from.
    let mut plan = Plan::clean();
    plan.put(at(14, 0), "1".into());
    for i in 1..YEARS {
        plan.put(at(14, i), format!("={}/(1+$B$2)>{}", at(14, i - 1), factor(i)));
    }
    assert_eq!(plan.codes(), Vec::<String>::new());
    // Two formulas one after the other.
    let mut plan = Plan::clean();
    for i in 10..YEARS {
        plan.put(at(7, i), format!("={}*(1+1%)>{}", at(7, i - 1), running(i)));
    }
    assert_eq!(plan.codes(), Vec::<String>::new());
}

#[test]
fn a_total_that_ends_early_or_begins_late() {
    let mut plan = Plan::clean();
    plan.set("B19", "=SUM(B16:R16)>0");
    let finding = only(&plan, "short-total", "Plan!B19 [hence_pv_benefits]");
    close(finding.effect_on_npv, -(17..YEARS).map(|i| (water(i) + fish(i)) * factor(i)).sum::<f64>());
    assert!(finding.found.contains("last 3 years"), "{}", finding.found);

    let mut plan = Plan::clean();
    plan.set("B18", "=SUM(C15:U15)>0");
    let finding = only(&plan, "short-total", "Plan!B18 [hence_pv_costs]");
    close(finding.effect_on_npv, works(0) + running(0));

    // In one formula over the flows themselves; the base year stands outside of NPV, as is usual.
    let npv = |range: &str| format!("=NPV(B2,{range})+B10+B11-NPV(B2,C8:U8)-B8>0");
    let mut plan = Plan::clean();
    plan.set("B20", &npv("C12:U12"));
    assert_eq!(plan.codes(), Vec::<String>::new());
    plan.set("B20", &npv("C12:S12"));
    let finding = only(&plan, "short-total", "Plan!B20 [hence_npv]");
    close(finding.effect_on_npv, -(18..YEARS).map(|i| (water(i) + fish(i)) * factor(i)).sum::<f64>());
    plan.set("B20", "=SUMPRODUCT(B12:T12,B14:T14)-SUMPRODUCT(B8:U8,B14:U14)>0");
    only(&plan, "short-total", "Plan!B20 [hence_npv]");
}

#[test]
fn a_total_that_leaves_out_a_row_of_its_block() {
    let mut plan = Plan::clean();
    for i in 0..YEARS {
        plan.put(at(8, i), format!("=SUM({}:{})>{}", at(6, i), at(6, i), works(i)));
        plan.put(at(15, i), format!("={}*{}>{}", at(8, i), at(14, i), works(i) * factor(i)));
    }
    let finding = only(&plan, "short-total", &format!("Plan!{}", row(8)));
    close(finding.effect_on_npv, (0..YEARS).map(|i| running(i) * factor(i)).sum());
}

#[test]
fn a_total_that_counts_a_stream_twice() {
    // The range of the total holds a total and its parts.
    let mut plan = Plan::clean();
    plan.set("B18", "=SUMPRODUCT(B6:U6,B14:U14)+SUM(B15:U15)>0");
    let finding = only(&plan, "double-count", "Plan!B18 [hence_pv_costs]");
    close(finding.effect_on_npv, -(0..YEARS).map(|i| works(i) * factor(i)).sum::<f64>());
    // In one row of formulas: a part beside the sum that holds it.
    let mut plan = Plan::clean();
    for i in 0..YEARS {
        let benefits = 2.0 * water(i) + fish(i);
        plan.put(at(12, i), format!("=SUM({}:{})+{}>{benefits}", at(10, i), at(11, i), at(10, i)));
        plan.put(at(16, i), format!("={}*{}>{}", at(12, i), at(14, i), benefits * factor(i)));
    }
    let finding = only(&plan, "double-count", &format!("Plan!{}", row(12)));
    close(finding.effect_on_npv, (0..YEARS).map(|i| water(i) * factor(i)).sum());
    // What is taken off again counts once.
    let mut plan = Plan::clean();
    plan.set("B18", &format!("=SUM(B15:U15)+B15-B15>{}", pv_costs()));
    assert_eq!(plan.codes(), Vec::<String>::new());
}

#[test]
fn typed_totals_are_told_by_their_numbers() {
    let late: f64 = (15..YEARS).map(|i| (water(i) + fish(i)) * factor(i)).sum();
    let mut plan = Plan::clean();
    plan.typed_results(pv_costs(), pv_benefits() - late, pv_benefits() - late - pv_costs());
    let finding = only(&plan, "short-total", "Plan!B19 [hence_pv_benefits]");
    close(finding.effect_on_npv, -late);
    assert!(finding.found.contains("the last 5 years"), "{}", finding.found);

    let twice: f64 = (0..YEARS).map(|i| running(i) * factor(i)).sum();
    let mut plan = Plan::clean();
    plan.typed_results(pv_costs() + twice, pv_benefits(), pv_benefits() - pv_costs() - twice);
    let finding = only(&plan, "double-count", "Plan!B18 [hence_pv_costs]");
    close(finding.effect_on_npv, -twice);

    let mut plan = Plan::clean();
    plan.typed_results(pv_costs(), pv_benefits(), (pv_benefits() - pv_costs()) / 1000.0);
    only(&plan, "unit-mismatch", "Plan!B20 [hence_npv]");

    // A number that fits nothing is not for here.
    let mut plan = Plan::clean();
    plan.typed_results(pv_costs(), pv_benefits(), 1234.5);
    assert_eq!(plan.codes(), Vec::<String>::new());
}

#[test]
fn typed_values_by_year_are_told_by_their_numbers() {
    let net = |i: usize| water(i) + fish(i) - works(i) - running(i);
    type Slip = (&'static str, fn(usize) -> f64);
    let slips: [Slip; 3] =
        [("double-count", water), ("short-total", |i| -fish(i)), ("negative-cost", |i| 2.0 * running(i))];
    for (code, added) in slips {
        let mut plan = Plan::clean();
        plan.name("hence_pv", Some(&row(17)));
        for i in 0..YEARS {
            plan.put(at(17, i), ((net(i) + added(i)) * factor(i)).to_string());
        }
        let all: f64 = (0..YEARS).map(|i| added(i) * factor(i)).sum();
        plan.set("B20", &(pv_benefits() - pv_costs() + all).to_string());
        let finding = checked(&plan, code, &format!("Plan!{} [hence_pv]", row(17)));
        close(finding.effect_on_npv, all);
    }
}

#[test]
fn a_cost_with_a_slip_of_its_sign() {
    let mut plan = Plan::clean();
    plan.put(at(6, 1), "-3100".into());
    let finding = only(&plan, "negative-cost", "Plan!C6 [hence_cost_works]");
    close(finding.effect_on_npv, 2.0 * 3100.0 * factor(1));
    // A credit of another size is none.
    let mut plan = Plan::clean();
    plan.put(at(6, 5), "-40".into());
    assert_eq!(plan.codes(), Vec::<String>::new());
    // Nor is scrap that is sold every fourth year, nor one of a size that comes now and then; a lone slip is one.
    let scrap = |years: &[usize]| {
        let mut plan = Plan::clean();
        for i in 0..YEARS {
            plan.put(at(6, i), if years.contains(&i) { "-18".into() } else { "20".into() });
        }
        plan.findings()
    };
    for years in [&[3, 7, 11, 15][..], &[4, 9]] {
        assert!(scrap(years).iter().all(|f| f.kind.code() != "negative-cost"), "{:?}", scrap(years));
    }
    assert!(scrap(&[7]).iter().any(|f| f.kind.code() == "negative-cost"), "{:?}", scrap(&[7]));
    // Declared negative, and one is not.
    let mut plan = Plan::clean();
    plan.set("A22", "'costs negative").name("hence_signs", Some("A22"));
    for i in 0..YEARS {
        plan.put(at(6, i), (-works(i)).to_string());
    }
    let codes = plan.codes();
    assert!(
        codes.iter().any(|code| code == &format!("negative-cost Plan!{} [hence_cost_running]", row(7))),
        "{codes:?}"
    );
}

#[test]
fn thousands_against_millions() {
    // Headings that disagree.
    let mut plan = Plan::clean();
    for (cell, text) in
        [("A6", "'Works (£m)"), ("A7", "'Running (£k)"), ("A10", "'Water (£k)"), ("A11", "'Fish (£k)")]
    {
        plan.set(cell, text);
    }
    only(&plan, "unit-mismatch", &format!("Plan!{} [hence_cost_works]", row(6)));
    plan.set("A6", "'Works (£k)");
    assert_eq!(plan.codes(), Vec::<String>::new());
    // A stream out of scale with all others.
    let mut plan = Plan::clean();
    for i in 0..YEARS {
        plan.put(at(10, i), (water(i) / 1000.0).to_string());
    }
    only(&plan, "unit-mismatch", &format!("Plan!{} [hence_benefit_water]", row(10)));
    // One cell in another unit than those beside it.
    let mut plan = Plan::clean();
    plan.put(at(10, 6), (water(6) * 1000.0).to_string());
    let finding = only(&plan, "unit-mismatch", "Plan!H10 [hence_benefit_water]");
    close(finding.effect_on_npv, water(6) * 999.0 * factor(6));
    // What is left over in the last year is no other unit.
    let mut plan = Plan::clean();
    for i in 0..YEARS {
        plan.put(at(10, i), if i + 1 == YEARS { "100000".into() } else { "100".into() });
    }
    let found = plan.findings();
    assert!(found.iter().all(|f| f.kind.code() != "unit-mismatch"), "{found:?}");
    // A total that is scaled by a formula.
    let mut plan = Plan::clean();
    plan.set("B20", "=(B19-B18)/1000>0");
    only(&plan, "unit-mismatch", "Plan!B20 [hence_npv]");
}

#[test]
fn a_cost_entered_negative_is_found_and_the_rest_is_looked_at() {
    let mut plan = Plan::clean();
    for i in 0..YEARS {
        plan.put(at(6, i), (-works(i)).to_string());
    }
    let pv: f64 = (0..YEARS).map(|i| works(i) * factor(i)).sum();
    // The results follow from it.
    for i in 0..YEARS {
        let costs = running(i) - works(i);
        plan.put(at(8, i), format!("=SUM({}:{})>{costs}", at(6, i), at(7, i)));
        plan.put(at(15, i), format!("={}*{}>{}", at(8, i), at(14, i), costs * factor(i)));
    }
    plan.set("B18", &format!("=SUM({})>{}", row(15), pv_costs() - 2.0 * pv));
    plan.set("B20", &format!("=B19-B18>{}", pv_benefits() - pv_costs() + 2.0 * pv));
    let place = format!("Plan!{} [hence_cost_works]", row(6));
    let finding = checked(&plan, "negative-cost", &place);
    close(finding.effect_on_npv, 2.0 * pv);
    // The results are typed, so that nothing but their numbers shows where they come from.
    plan.typed_results(pv_costs() - 2.0 * pv, pv_benefits(), pv_benefits() - pv_costs() + 2.0 * pv);
    checked(&plan, "negative-cost", &place);
}

#[test]
fn years_that_are_broken() {
    // One repeated: its flows count a year early.
    let mut plan = Plan::clean();
    plan.put(at(4, 6), "2031".into());
    plan.put(at(14, 6), format!("=1/(1+$B$2)^({}-$B$1)>{}", at(4, 6), factor(5)));
    let finding = checked(&plan, "years-broken", "Plan!H4");
    let net = water(6) + fish(6) - works(6) - running(6);
    close(finding.effect_on_npv, net * (factor(5) - factor(6)));
    assert_eq!((finding.found.as_str(), finding.expected.as_str()), ("2031", "2032"));
    // As text.
    let mut plan = Plan::clean();
    plan.put(at(4, 9), "'2035".into());
    let finding = checked(&plan, "years-broken", "Plan!K4");
    assert_eq!((finding.effect_on_npv, finding.found.as_str()), (None, "the text `2035`"));
    // All of them as texts.
    let mut plan = Plan::clean();
    for i in 0..YEARS {
        plan.put(at(4, i), format!("'{}", 2026 + i));
    }
    checked(&plan, "years-broken", &format!("Plan!{}", row(4)));
    // Blank; out of order; repeated, and late from there on.
    let mut plan = Plan::clean();
    plan.put(at(4, 3), String::new());
    checked(&plan, "years-broken", "Plan!E4");
    let mut plan = Plan::clean();
    plan.put(at(4, 3), "2030".into()).put(at(4, 4), "2029".into());
    checked(&plan, "years-broken", "Plan!E4:F4");
    let mut plan = Plan::clean();
    for i in 12..YEARS {
        plan.put(at(4, i), (2025 + i).to_string());
        plan.put(at(14, i), format!("=1/(1+$B$2)^({}-$B$1)>{}", at(4, i), factor(i - 1)));
    }
    checked(&plan, "years-broken", "Plan!N4:U4");
    // One left out: everything after it counts a year late, or a column is missing.
    let mut plan = Plan::clean();
    for i in 12..YEARS {
        plan.put(at(4, i), (2027 + i).to_string());
        let late = factor(i + 1);
        plan.put(at(14, i), format!("=1/(1+$B$2)^({}-$B$1)>{late}", at(4, i)));
    }
    let found = plan.findings();
    assert!(
        found.iter().any(|f| f.kind.code() == "years-broken" && f.place.to_string() == "Plan!N4:U4"),
        "{found:#?}"
    );
}

#[test]
fn a_total_named_beside_its_parts() {
    let mut plan = Plan::clean();
    plan.name("hence_cost_all", Some(&row(8)));
    let finding = checked(&plan, "double-count", &format!("Plan!{} [hence_cost_all]", row(8)));
    close(finding.effect_on_npv, -pv_costs());
}
