//! Which option is the better one: the one rule behind ranks, best options and ties.

use hence_core::sum;

use crate::outcome::ChoiceOutcome;
use crate::tolerance::RELATIVE;

/// A net present value, and how far rounding alone may have moved it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Worth {
    /// The net present value, over the baseline where there is one.
    pub npv: f64,
    /// 1e-9 of the gross present value.
    pub dust: f64,
}

impl Worth {
    /// From the net and the gross present value: what costs and benefits come to, whatever their sides.
    pub fn of(npv: f64, gross: f64) -> Worth {
        Worth { npv, dust: RELATIVE * gross }
    }

    /// From the present values of streams, each with its sign in the net.
    pub fn of_streams(values: &[f64]) -> Worth {
        Worth::of(sum(values), values.iter().map(|value| value.abs()).sum())
    }

    /// What every option is worth, over the baseline where there is one.
    pub fn of_outcomes(outcomes: &[ChoiceOutcome], baseline: Option<usize>) -> Vec<Worth> {
        let own = |outcome: &ChoiceOutcome| {
            let gross = outcome.streams.iter().map(|stream| stream.pv.abs()).sum();
            Worth::of(outcome.absolute.npv, gross)
        };
        let over = over(outcomes.iter().map(own).collect(), baseline);
        // The totals' own net present value, to the last bit.
        let exact = |(worth, outcome): (Worth, &ChoiceOutcome)| Worth { npv: outcome.totals().npv, ..worth };
        over.into_iter().zip(outcomes).map(exact).collect()
    }

    /// Whether it is above another by more than rounding.
    pub fn beats(self, other: Worth) -> bool {
        self.npv - other.npv > self.dust.max(other.dust)
    }

    /// 1 above zero, -1 below, 0 where rounding could make it either.
    pub fn sign(self) -> i32 {
        if self.npv.abs() <= self.dust { 0 } else { self.npv.signum() as i32 }
    }
}

/// All less the baseline, where there is one; the baseline itself is nothing over itself.
pub(crate) fn over(mut worths: Vec<Worth>, baseline: Option<usize>) -> Vec<Worth> {
    if let Some(base) = baseline.and_then(|i| worths.get(i).copied()) {
        for worth in &mut worths {
            *worth = Worth { npv: worth.npv - base.npv, dust: worth.dust + base.dust };
        }
    }
    worths
}

/// The rank of each, 1 for the best: one more than there are options that beat it, so that ties share a rank.
pub fn ranks(worths: &[Worth]) -> Vec<usize> {
    let rank = |own: &Worth| 1 + worths.iter().filter(|other| other.beats(*own)).count();
    worths.iter().map(rank).collect()
}

/// All that the highest one does not beat; the highest first.
pub fn level(worths: &[Worth]) -> Vec<usize> {
    let highest = (0..worths.len()).max_by(|&a, &b| worths[a].npv.total_cmp(&worths[b].npv).then(b.cmp(&a)));
    let Some(highest) = highest else { return Vec::new() };
    let others = (0..worths.len()).filter(|&i| i != highest && !worths[highest].beats(worths[i]));
    std::iter::once(highest).chain(others).collect()
}

/// The best one; none where several are.
pub fn best(worths: &[Worth]) -> Option<usize> {
    match level(worths).as_slice() {
        [one] => Some(*one),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_differs_by_rounding_alone_shares_a_rank() {
        // 1e-9 of a gross present value of 1000 is 1e-6.
        let worth = |npv| Worth::of(npv, 1000.0);
        let near = [worth(50.0), worth(50.0 + 0.9e-6), worth(20.0)];
        assert_eq!((ranks(&near), best(&near), level(&near)), (vec![1, 1, 3], None, vec![1, 0]));
        let apart = [worth(50.0), worth(50.0 + 1.1e-6), worth(20.0)];
        assert_eq!((ranks(&apart), best(&apart)), (vec![2, 1, 3], Some(1)));
        assert_eq!((worth(0.9e-6).sign(), worth(-1.1e-6).sign()), (0, -1));
        assert_eq!((best(&[]), best(&[worth(-3.0)])), (None, Some(0)));
    }

    #[test]
    fn the_baseline_is_nothing_over_itself() {
        let worths = over(vec![Worth::of(10.0, 100.0), Worth::of(7.0, 50.0)], Some(1));
        assert_eq!((worths[0].npv, worths[1].npv), (3.0, 0.0));
        assert!((worths[0].dust - 1.5e-7).abs() < 1e-20, "the gross values of both count");
    }
}
