//! Charts as plain data, told apart by dashes, markers and patterns as well as by colour.

use xlsxwriter::chart::{
    ChartDashType, ChartLine, ChartMarkerType, ChartPattern, ChartPatternType, ChartType,
};
use xlsxwriter::format::FormatColor;
use xlsxwriter::prelude::{Workbook, Worksheet};

use crate::references::{Cell, SheetRange, quote_sheet};

/// The kind of a chart.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ChartKind {
    /// Lines over numbers.
    Lines,
    /// Columns over labels.
    Columns,
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
    /// Its series.
    pub series: Vec<Series>,
}

const INKS: [u32; 6] = [0x1F_3B_6F, 0xB3_4A_00, 0x2E_6B_34, 0x6A_2A_6E, 0x4D_4D_4D, 0x00_6E_7F];
const DASHES: [ChartDashType; 4] =
    [ChartDashType::Solid, ChartDashType::Dash, ChartDashType::RoundDot, ChartDashType::LongDashDot];
const PATTERNS: [ChartPatternType; 6] = [
    ChartPatternType::Percent75,
    ChartPatternType::WideUpwardDiagonal,
    ChartPatternType::Percent20,
    ChartPatternType::DarkHorizontal,
    ChartPatternType::DiagonalBrick,
    ChartPatternType::LightVertical,
];

impl Chart {
    pub(super) fn insert(
        &self,
        book: &Workbook,
        sheet: &mut Worksheet<'_>,
        at: Cell,
    ) -> Result<(), xlsxwriter::XlsxError> {
        let mut chart = book.add_chart(match self.kind {
            ChartKind::Lines => ChartType::ScatterStraightWithMarkers,
            ChartKind::Columns => ChartType::Column,
        });
        chart.add_title(&self.title)?;
        for (i, series) in self.series.iter().enumerate() {
            let mut out = chart.add_series(Some(&formula(&series.x)), Some(&formula(&series.y)))?;
            out.set_name(&super::legal(&series.name))?;
            let ink = FormatColor::Custom(INKS[i % INKS.len()]);
            let mut line = ChartLine::new();
            line.color = ink;
            line.width = 1.75;
            match self.kind {
                ChartKind::Lines => {
                    line.dash_type = DASHES[i % DASHES.len()];
                    out.set_line(&line);
                    out.set_marker_type(marker(i));
                    out.set_marker_size(4);
                }
                ChartKind::Columns => {
                    line.width = 0.75;
                    out.set_line(&line);
                    out.set_pattern(&ChartPattern::new(
                        ink,
                        FormatColor::White,
                        PATTERNS[i % PATTERNS.len()],
                    ));
                }
            }
        }
        sheet.insert_chart(at.row, at.col as u16, &chart)
    }
}

fn marker(i: usize) -> ChartMarkerType {
    // Every second line goes without a marker's clutter only where dashes already tell it apart.
    match i % 5 {
        0 => ChartMarkerType::MarkerNone,
        1 => ChartMarkerType::MarkerCircle,
        2 => ChartMarkerType::MarkerSquare,
        3 => ChartMarkerType::MarkerTriangle,
        _ => ChartMarkerType::MarkerDiamond,
    }
}

fn formula(range: &SheetRange) -> String {
    let (a, b) = (range.range.first, range.range.last);
    format!("={}!{}:{}", quote_sheet(&range.sheet), absolute(a), absolute(b))
}

fn absolute(cell: Cell) -> String {
    let text = cell.to_string();
    let digits = text.find(|c: char| c.is_ascii_digit()).unwrap_or(0);
    format!("${}${}", &text[..digits], &text[digits..])
}
