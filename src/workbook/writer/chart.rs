//! Charts as plain data. What tells series apart without colour is finished in the package's chart part.

use xlsxwriter::chart::ChartType;
use xlsxwriter::prelude::{Workbook, Worksheet};

use crate::formulas::refer;
use crate::references::{Cell, SheetRange};

/// The kind of a chart.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ChartKind {
    /// Lines over numbers.
    Lines,
    /// Columns over labels.
    Columns,
    /// Bars beside labels, the first on top.
    Bars,
}

/// One series of a chart.
#[derive(Clone, Debug, PartialEq)]
pub struct Series {
    /// Its name in the legend.
    pub name: String,
    /// Its labels, or numbers along the x axis.
    pub x: SheetRange,
    /// Its values.
    pub y: SheetRange,
}

/// A chart.
#[derive(Clone, Debug, PartialEq)]
pub struct Chart {
    /// Its kind.
    pub kind: ChartKind,
    /// Its title.
    pub title: String,
    /// Its series, at least one.
    pub series: Vec<Series>,
}

impl Chart {
    pub(super) fn insert(
        &self,
        book: &Workbook,
        sheet: &mut Worksheet<'_>,
        at: Cell,
    ) -> Result<(), xlsxwriter::XlsxError> {
        let mut chart = book.add_chart(match self.kind {
            ChartKind::Lines => ChartType::ScatterStraight,
            ChartKind::Columns => ChartType::Column,
            ChartKind::Bars => ChartType::Bar,
        });
        chart.add_title(&super::legal(&self.title))?;
        for series in &self.series {
            // A name that begins with an equals sign would be read as a reference.
            let name = super::legal(series.name.trim_start_matches('='));
            let formula = |range| format!("={}", refer("", range));
            let mut out = chart.add_series(Some(&formula(&series.x)), Some(&formula(&series.y)))?;
            out.set_name(&name)?;
        }
        sheet.insert_chart(at.row, at.col as u16, &chart)
    }
}
