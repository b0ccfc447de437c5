//! Band edges: calendar years become offsets, order and ends are checked.

use crate::{Band, Edge, Error, ErrorKind, Result, Where};

/// The upper edges of bands as offsets; the last is infinite where the last band has no end.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Edges(Vec<f64>);

impl Edges {
    /// Edges known to increase (the offsets of a table).
    pub(super) fn increasing(uppers: Vec<f64>) -> Edges {
        Edges(uppers)
    }

    /// Resolves the edges of `bands`, counted from `edges_from` where that is not the base year.
    pub(super) fn resolve(bands: &[Band], edges_from: Option<i32>, at: &Where) -> Result<Edges> {
        let refuse = |index: usize, message: String| {
            Err(Error::new(ErrorKind::Edges, "bands", message).with_index(index))
        };
        if bands.is_empty() {
            return Err(Error::new(ErrorKind::Edges, "bands", "there is no band")
                .with_hint("state at least one rate"));
        }
        let last = bands.len() - 1;
        let mut uppers = Vec::with_capacity(bands.len());
        for (index, band) in bands.iter().enumerate() {
            let upper = match band.to {
                None if index < last => {
                    return refuse(index, "a band without an end stands before another band".into());
                }
                None => f64::INFINITY,
                Some(Edge::Offset(edge)) if !edge.is_finite() => {
                    return Err(Error::new(ErrorKind::NotFinite, "bands", format!("the edge is {edge}"))
                        .with_index(index));
                }
                Some(Edge::Offset(edge)) if edge <= 0.0 => {
                    return refuse(index, format!("the band ends at offset {edge}; an edge is above 0"));
                }
                Some(Edge::Offset(edge)) => edge + since_base(edges_from, at, index)?,
                Some(Edge::Year(year)) => since_base(Some(year), at, index)?,
            };
            if let Some(&before) = uppers.last()
                && upper <= before
            {
                return refuse(
                    index,
                    format!("the band ends at offset {upper}, not after the one before it ({before})"),
                );
            }
            uppers.push(upper);
        }
        if uppers[last] <= 0.0 {
            return refuse(
                last,
                format!("the last band ends at offset {}, not after the base", uppers[last]),
            )
            .map_err(|e| e.with_hint("an earlier base year, or a rate without an end (\"1% after\")"));
        }
        Ok(Edges(uppers))
    }

    /// The band that holds t; an edge belongs to the band it closes. Beyond the last edge: the last band.
    #[inline(always)]
    pub(super) fn band(&self, t: f64) -> usize {
        // Counting a few edges is quicker than a search, whose branches cannot be foreseen for mixed offsets.
        let before = match self.0.len() {
            ..=16 => self.0.iter().map(|&upper| usize::from(upper < t)).sum(),
            _ => self.0.partition_point(|&upper| upper < t),
        };
        before.min(self.0.len() - 1)
    }

    /// The band that begins at, or holds, the time just after 0.
    pub(super) fn band_after_zero(&self) -> usize {
        self.0.partition_point(|&upper| upper <= 0.0).min(self.0.len() - 1)
    }

    /// The largest offset.
    pub(super) fn end(&self) -> f64 {
        self.0[self.0.len() - 1]
    }

    pub(super) fn open(&self) -> bool {
        self.end() == f64::INFINITY
    }

    pub(super) fn uppers(&self) -> &[f64] {
        &self.0
    }

    /// The finite edges.
    pub(super) fn closed(&self) -> Vec<f64> {
        self.0.iter().copied().filter(|upper| upper.is_finite()).collect()
    }
}

/// The offset of a calendar year (0 where there is none to count from).
fn since_base(year: Option<i32>, at: &Where, index: usize) -> Result<f64> {
    let Some(year) = year else { return Ok(0.0) };
    let Some(base) = at.base_year else {
        return Err(Error::new(
            ErrorKind::NeedsBase,
            "bands",
            format!("the edges count from the calendar year {year}, and no base year is given"),
        )
        .with_index(index)
        .with_hint("state the base year"));
    };
    Ok(f64::from(year) - f64::from(base))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn band(value: f64, to: Option<Edge>) -> Band {
        Band { value, to }
    }

    #[test]
    fn calendar_years_count_from_the_base() {
        let bands = [band(0.025, Some(Edge::Year(2070))), band(0.015, None)];
        let at = Where { base_year: Some(2026), length: None };
        let edges = Edges::resolve(&bands, None, &at).unwrap();
        assert_eq!(edges.uppers(), [44.0, f64::INFINITY]);
        assert_eq!((edges.band(44.0), edges.band(44.5)), (0, 1));
        let error = Edges::resolve(&bands, None, &Where::default()).unwrap_err();
        assert_eq!((error.kind(), error.index()), (ErrorKind::NeedsBase, Some(0)));
    }

    #[test]
    fn offset_edges_may_count_from_another_year() {
        let bands = [band(0.035, Some(Edge::Offset(30.0))), band(0.03, None)];
        let at = Where { base_year: Some(2030), length: None };
        assert_eq!(Edges::resolve(&bands, Some(2026), &at).unwrap().uppers(), [26.0, f64::INFINITY]);
    }

    #[test]
    fn disorder_is_refused_with_its_band() {
        let refused = |bands: &[Band]| {
            let error = Edges::resolve(bands, None, &Where::default()).unwrap_err();
            assert_eq!(error.kind(), ErrorKind::Edges);
            error.index()
        };
        assert_eq!(refused(&[]), None);
        assert_eq!(refused(&[band(0.03, None), band(0.02, None)]), Some(0));
        let to = |edge| Some(Edge::Offset(edge));
        assert_eq!(refused(&[band(0.03, to(30.0)), band(0.02, to(30.0))]), Some(1));
        assert_eq!(refused(&[band(0.03, to(0.0)), band(0.02, None)]), Some(0));
        let past = Where { base_year: Some(2080), length: None };
        let bands = [band(0.025, Some(Edge::Year(2070)))];
        assert_eq!(Edges::resolve(&bands, None, &past).unwrap_err().kind(), ErrorKind::Edges);
    }
}
