//! The measures of an appraisal.
use crate::{Curve, Result};

/// Discounted payback.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Payback {
    /// The offset at which cumulated PV first reaches zero from below; none where it never does.
    pub first: Option<f64>,
    /// The offset from which it stays at or above zero; none where it ends below.
    pub last: Option<f64>,
}

/// Edges of eras in offset years; the edge year belongs to the earlier era.
#[derive(Clone, Debug, PartialEq)]
pub struct Eras(pub Vec<f64>);

impl Default for Eras {
    fn default() -> Self {
        Eras(vec![30.0, 100.0])
    }
}

/// PV of one stream.
pub fn present_value(_curve: &Curve, _offsets: &[f64], _flows: &[f64]) -> Result<f64> {
    unreachable!()
}
/// PV by year.
pub fn present_values(_factors: &[f64], _flows: &[f64]) -> Result<Vec<f64>> {
    unreachable!()
}
/// NPV.
pub fn net_present_value(_factors: &[f64], _benefits: &[f64], _costs: &[f64]) -> Result<f64> {
    unreachable!()
}
/// PV of benefits over PV of costs; `NoMeaning` where costs are not positive.
pub fn benefit_cost_ratio(_pv_benefits: f64, _pv_costs: f64) -> Result<f64> {
    unreachable!()
}
/// (NPV over the sum of D(1)..D(N), that sum).
pub fn annual_equivalent(_curve: &Curve, _npv: f64, _service_years: u32) -> Result<(f64, f64)> {
    unreachable!()
}
/// Discounted payback from PVs by year.
pub fn discounted_payback(_offsets: &[f64], _pv_by_year: &[f64]) -> Result<Payback> {
    unreachable!()
}
/// PV-weighted mean time of gross flows.
pub fn mean_time(_offsets: &[f64], _gross_pv: &[f64]) -> Result<f64> {
    unreachable!()
}
/// Share of gross PV by era; one more than there are edges.
pub fn era_shares(_offsets: &[f64], _gross_pv: &[f64], _eras: &Eras) -> Result<Vec<f64>> {
    unreachable!()
}
