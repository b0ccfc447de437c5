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
        // Years per column say what each label should be.
        let slip =
            axis.spans.is_none() && years.len() >= FEWEST_YEARS && (1..=MOST_GAPS).contains(&gaps.len());
        if !slip || years.len() < axis.labels.len() {
            continue;
        }
        let behind = Range::new(axis.at.nth(gaps[0]), axis.at.hull().range.last);
        let at = SheetRange::new(&axis.at.sheet, behind);
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

/// Whether results stand under years that are broken: what is off there follows from that.
pub(super) fn under_broken(seen: &Seen, findings: &[Finding], place: &SheetRange) -> bool {
    seen.appraisal.choices.iter().any(|choice| {
        let years = &seen.appraisal.axes[choice.axis].at;
        let broken = |i: usize| {
            let cell = years.nth(i);
            findings.iter().any(|finding| {
                finding.kind == Kind::YearsBroken
                    && finding.place.sheet.as_ref() == Some(&years.sheet)
                    && finding.place.range.is_some_and(|range| range.contains(cell))
            })
        };
        choice.targets.iter().filter(|t| t.at.sheet == place.sheet && t.held.len() > 1).any(|target| {
            let under = |cell| (0..target.held.len()).any(|i| target.at.nth(i) == cell && broken(i));
            under(place.range.first) && under(place.range.last)
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
