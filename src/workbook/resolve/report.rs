//! What the names of a workbook say, what is missing, and what looks like a slip.

use crate::model::Workbook;
use crate::package::Package;
use crate::problem::{Place, Problem, Result};
use crate::references::Area;
use crate::roles::{self, Role, Way};

use super::{Context, find, groups};

/// A role that was found.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Found {
    /// The defined name as written.
    pub name: String,
    /// Its role in words: `cost: works`.
    pub role: String,
    /// What it refers to.
    pub place: Place,
    /// Its cells; none of hence's own names.
    pub at: Option<Area>,
    /// The option it belongs to; none where it is shared.
    pub option: Option<String>,
}

/// Which roles a workbook has by its names.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct NamesReport {
    /// In the order of options; shared ones last.
    pub found: Vec<Found>,
    /// What an appraisal needs and no name says, in words with the name that would.
    pub missing: Vec<String>,
    /// Names that look like slips or cannot be used.
    pub slips: Vec<Problem>,
}

/// Lists the roles of a workbook without reading its flows.
///
/// **Errors**: only where the workbook cannot be read at all; names that cannot be used are listed as slips.
pub fn names(package: &Package, book: &Workbook) -> Result<NamesReport> {
    let mut context = Context::open(package, book)?;
    let named = find::find(&mut context, &[], None);
    let split = groups::split(&mut context, named);
    let mut report = NamesReport::default();
    let only = split.groups.len() == 1 && split.shared.is_empty();
    for group in &split.groups {
        let option = (!only || group.named.iter().any(|named| named.name.option.is_some()))
            .then(|| group.name.clone());
        report.found.extend(group.named.iter().map(|named| found(named, option.clone())));
    }
    report.found.extend(split.shared.iter().map(|named| found(named, None)));
    for defined in &book.names {
        if let Some(Ok(name)) = roles::parse_name(&defined.name)
            && name.role.info().way == Way::Own
        {
            let place = Place::name(&defined.name);
            let (name, role) = (defined.name.clone(), name.words());
            report.found.push(Found { name, role, place, at: None, option: None });
        }
    }
    let all: Vec<Role> = split
        .groups
        .iter()
        .flat_map(|group| &group.named)
        .chain(&split.shared)
        .map(|named| named.name.role)
        .collect();
    let mut need = |has: bool, what: &str| {
        if !has {
            report.missing.push(what.to_owned());
        }
    };
    need(all.contains(&Role::Years) || all.contains(&Role::Offsets), "the years: hence_years");
    need(
        all.iter().any(|role| role.is_stream()),
        "a stream of flows: hence_cost_works, hence_benefit_access",
    );
    need(all.contains(&Role::Basis), "the basis: hence_basis (or --basis)");
    need(all.contains(&Role::Base) || all.contains(&Role::Offsets), "the base year: hence_base");
    need(all.iter().any(|role| role.is_output()), "a range to fill: hence_factor, hence_pv, hence_npv");
    report.slips = context.sorted();
    Ok(report)
}

fn found(named: &find::Named, option: Option<String>) -> Found {
    let (place, at) = (Place::area(&named.area), Some(named.area.clone()));
    Found { name: named.from.clone(), role: named.name.words(), place, at, option }
}
