//! Years that do not run on from one to the next.

use std::collections::BTreeMap;

use super::Seen;
use super::structure::Look;
use crate::appraisal::Label;
use crate::clock::label_words;
use crate::findings::{Finding, Kind};
use crate::problem::Place;
use crate::references::{Range, SheetRange};

/// Years in a row that make a gap between them a slip.
const FEWEST_YEARS: usize = 8;
/// More gaps than this are a way of giving years (every fifth, say), and no slip.
const MOST_GAPS: usize = 2;

/// The years that cells are meant to hold, one after the other, from those that most of them do; none where too few agree.
pub(super) fn meant(held: &[Option<i32>]) -> Option<Vec<i32>> {
    let start = |(i, year): (usize, &Option<i32>)| year.map(|year| year - i as i32);
    let mut votes: BTreeMap<i32, usize> = BTreeMap::new();
    held.iter().enumerate().filter_map(start).for_each(|start| *votes.entry(start).or_insert(0) += 1);
    let (&most, &count) = votes.iter().max_by_key(|(_, count)| **count)?;
    // Where the years slip by one from some place on, those before it are right.
    let first = held.iter().enumerate().find_map(start)?;
    let agreed = if votes[&first] * 4 >= held.len() { (first, votes[&first]) } else { (most, count) };
    (agreed.1 * 4 >= held.len() && agreed.1 > 1)
        .then(|| (0..held.len()).map(|i| agreed.0 + i as i32).collect())
}

/// Years that are left out of a row in which all others follow each other.
pub(super) fn findings(look: &Look) -> Vec<Finding> {
    let mut found = Vec::new();
    for (a, axis) in look.seen.appraisal.axes.iter().enumerate() {
        let years: Vec<i32> = axis
            .labels
            .iter()
            .filter_map(|label| match label {
                Label::Year(year) | Label::Number(year) | Label::Financial(year, _) => Some(*year),
                Label::Date(_) | Label::Offset(_) => None,
            })
            .collect();
        let gaps: Vec<usize> = (1..years.len()).filter(|i| years[*i] != years[i - 1] + 1).collect();
        let slip = years.len() >= FEWEST_YEARS && (1..=MOST_GAPS).contains(&gaps.len());
        if !slip || years.len() < axis.labels.len() {
            continue;
        }
        let cell = axis.at.nth(gaps[0]);
        let at = SheetRange::new(&axis.at.sheet, Range::cell(cell));
        let mut added = vec![0.0; look.seen.appraisal.choices.len()];
        for (c, choice) in
            look.seen.appraisal.choices.iter().enumerate().filter(|(_, choice)| choice.axis == a)
        {
            let _ = choice;
            let outcome = &look.seen.outcomes[c];
            for i in gaps[0]..years.len() {
                let late = f64::from(years[i] - years[0] - i as i32);
                let without = outcome.curve.factor(outcome.offsets[i] - late).unwrap_or(outcome.factors[i]);
                added[c] += outcome.net[i] * (outcome.factors[i] - without);
            }
        }
        let effect = look.in_flows(&added);
        found.push(Finding {
            kind: Kind::YearsBroken,
            place: Place::cells(&at.sheet, at.range),
            found: format!("{} after {}", label_words(&axis.labels[gaps[0]]), label_words(&axis.labels[gaps[0] - 1])),
            expected: (years[gaps[0] - 1] + 1).to_string(),
            effect_on_npv: effect.npv,
            ranking: effect.ranking,
            confidence: 0.8,
            words: "All other years follow each other. If no year is left out, every flow from here on counts too late; if one \
                    is, its flows are missing. The effect is that of the first reading."
                .to_owned(),
        });
    }
    found
}

/// Whether cells of results stand behind years that are left out: what is off there follows from that.
pub(super) fn behind_a_gap(seen: &Seen, gaps: &[Finding], place: &SheetRange) -> bool {
    seen.appraisal.choices.iter().any(|choice| {
        let years = &seen.appraisal.axes[choice.axis].at;
        let first = (0..years.len() as usize).find(|i| {
            let cell = years.nth(*i);
            gaps.iter().any(|gap| {
                gap.kind == Kind::YearsBroken
                    && gap.place.sheet.as_ref() == Some(&years.sheet)
                    && gap.place.range.is_some_and(|range| range.contains(cell))
            })
        });
        first.is_some_and(|first| {
            choice.targets.iter().any(|target| {
                let behind = |cell| (first..target.held.len()).any(|i| target.at.nth(i) == cell);
                target.at.sheet == place.sheet && behind(place.range.first) && behind(place.range.last)
            })
        })
    })
}

#[cfg(test)]
mod tests {
    use super::meant;

    fn of(years: &[i32]) -> Vec<Option<i32>> {
        years.iter().map(|year| (*year > 0).then_some(*year)).collect()
    }

    #[test]
    fn what_years_are_meant() {
        let run: Vec<i32> = (2026..2034).collect();
        for held in [
            [2026, 2027, 2027, 2029, 2030, 2031, 2032, 2033],
            [2026, 2027, 0, 2029, 2030, 2031, 2032, 2033],
            [2026, 2027, 2029, 2028, 2030, 2031, 2032, 2033],
            [2027, 2027, 2028, 2029, 2030, 2031, 2032, 2033],
            [2026, 2027, 2028, 2028, 2029, 2030, 2031, 2032],
        ] {
            assert_eq!(meant(&of(&held)), Some(run.clone()), "{held:?}");
        }
        assert_eq!(meant(&of(&[2026, 2031, 2036, 2041])), None);
    }
}
