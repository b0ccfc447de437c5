//! The answer: what the numbers say on the declared basis, and no more than they say.

use super::words::{list, money};
use super::{Facts, words};

/// The answer, a sentence each.
pub(super) fn answer(facts: &Facts<'_>) -> Vec<String> {
    let ranked = facts.ranked();
    let Some(&first) = ranked.first() else {
        let own = money(facts.options[0].absolute.npv);
        let name = facts.name(0);
        return vec![format!(
            "{name} is the one option and its own baseline: there is nothing to hold it against. As it stands its net \
             present value is {own}."
        )];
    };
    let level: Vec<usize> =
        ranked.iter().copied().filter(|&i| !facts.worth(first).beats(facts.worth(i))).collect();
    let mut texts = if ranked.len() == 1 {
        alone(facts, first)
    } else if level.len() > 1 {
        shared(facts, &level)
    } else {
        best(facts, first, ranked[1])
    };
    if !facts.one_basis() {
        texts.push(
            "The options are not all valued on one basis, from one base and with one timing, so that their present \
             values do not compare as they stand."
                .to_owned(),
        );
    }
    texts
}

/// Whether a value is above or below zero, rounding apart.
fn sign(facts: &Facts<'_>, option: usize) -> i32 {
    facts.worth(option).sign()
}

fn basis(facts: &Facts<'_>) -> &'static str {
    if facts.one_basis() { "On the declared basis" } else { "On the basis declared for each" }
}

fn alone(facts: &Facts<'_>, option: usize) -> Vec<String> {
    let (name, npv, over) = (facts.name(option), money(facts.npv(option)), facts.over());
    let what = match sign(facts, option) {
        0 => format!("is zero{over}"),
        1 => format!("is {npv}{over}, above zero"),
        _ => format!("is {npv}{over}, below zero"),
    };
    let mut texts = vec![format!("{} the net present value of {name} {what}.", basis(facts))];
    texts.extend(ratio(facts, option));
    texts
}

fn shared(facts: &Facts<'_>, level: &[usize]) -> Vec<String> {
    let names: Vec<String> = level.iter().map(|&i| facts.name(i)).collect();
    let (npv, over) = (money(facts.npv(level[0])), facts.over());
    let mut texts = vec![format!(
        "{} {} have the same net present value{over}, {npv}, and no option has a higher one.",
        basis(facts),
        list(&names, "and")
    )];
    texts.extend(none_above(facts, level[0]));
    texts
}

fn best(facts: &Facts<'_>, first: usize, second: usize) -> Vec<String> {
    let (name, npv, over) = (facts.name(first), money(facts.npv(first)), facts.over());
    let less = money(facts.npv(first) - facts.npv(second));
    let next = format!(
        "The next is {} with {}, which is {less} less.",
        facts.name(second),
        money(facts.npv(second))
    );
    let mut texts = vec![match none_above(facts, first) {
        Some(none) => format!("{none} The highest{over} is that of {name}: {npv}. {next}"),
        None => format!("{} {name} has the highest net present value{over}: {npv}. {next}", basis(facts)),
    }];
    texts.extend(ratio(facts, first).filter(|_| sign(facts, first) > 0));
    texts
}

/// That no option is above zero (or the baseline), where the highest is not.
fn none_above(facts: &Facts<'_>, highest: usize) -> Option<String> {
    let words = match (sign(facts, highest), facts.baseline()) {
        (1, _) => return None,
        (0, None) => "no option has a net present value above zero".to_owned(),
        (0, Some(i)) => format!("no option has a higher net present value than {}", facts.name(i)),
        (_, None) => "every option has a net present value below zero".to_owned(),
        (_, Some(i)) => format!("every option has a lower net present value than {}", facts.name(i)),
    };
    Some(format!("{} {words}.", basis(facts)))
}
fn ratio(facts: &Facts<'_>, option: usize) -> Option<String> {
    let totals = facts.options[option].totals();
    totals.ratio.map(|x| {
        format!(
            "The present value of its benefits{} is {} times that of its costs.",
            facts.over(),
            words::ratio(Some(x))
        )
    })
}
