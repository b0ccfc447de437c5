//! Draws of one fixed rate against the second model at that rate: dates, timings, units, residual values, tails, baselines.

use std::num::NonZeroUsize;

use hence_core::{Catalogue, Distribution, Draws};
use hence_workbook::draws::{DrawsRequest, prepare};

use super::book::book;
use super::model::{Choice, Curve};
use super::{BOOKS, near};

#[test]
fn a_draw_values_what_the_workbook_says() {
    let catalogue = Catalogue::builtin();
    let draws = Draws { count: 3, seed: 1, threads: NonZeroUsize::MIN };
    let (mut options, mut endless) = (0, 0);
    for seed in 0..BOOKS {
        let book = book(seed);
        // Without --basis these workbooks are on another basis, with another timing perhaps.
        if book.request.basis.is_some() {
            continue;
        }
        // 1% + 0.5% + 1.5 x 1.2%
        let rate = 0.033;
        let parts = [0.01, 0.005, 1.5, 0.012].map(|value| Some(Distribution::Fixed(value)));
        let request = DrawsRequest { distributions: parts, roles: book.request.roles.clone(), plan: None };
        let prepared = prepare(&book.package(), &request, &catalogue);
        let prepared = prepared.unwrap_or_else(|error| panic!("{}: {error}", book.words));
        assert!(prepared.problems.iter().any(|problem| problem.code == "nothing-uncertain"));
        let report = prepared.draw(&draws, &[50.0]).unwrap_or_else(|error| panic!("{}: {error}", book.words));
        assert!((report.rate.mean - rate).abs() < 1e-15);
        let own: Vec<_> = book
            .choices
            .iter()
            .map(|choice| Choice { curve: Curve::Yearly(rate), ..choice.clone() }.value())
            .collect();
        let npv = |c: usize| own[c].pv_benefits - own[c].pv_costs;
        for (c, found) in report.options.iter().enumerate() {
            let words = format!("{}: {}", book.words, found.name);
            assert_eq!(
                (found.name.as_str(), found.baseline),
                (book.choices[c].name.as_str(), book.baseline == Some(c))
            );
            near(found.absolute.mean, npv(c), own[c].gross, &words);
            near(found.absolute.percentiles[0], npv(c), own[c].gross, &words);
            if let Some(baseline) = book.baseline {
                let over = found.increment.as_ref().expect("an increment").mean;
                near(over, npv(c) - npv(baseline), own[c].gross + own[baseline].gross, &words);
            }
            options += 1;
            endless += usize::from(own[c].endless);
        }
    }
    assert!(options > 200 && endless > 20, "{options} options, {endless} of them without end");
}
