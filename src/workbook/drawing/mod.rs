//! Charts as SVG texts for reports: lines and bars that need no colour to be told apart.

mod bars;
mod canvas;
mod lines;
mod ticks;

pub(crate) use bars::{Bar, bars};
pub(crate) use lines::{Line, lines};

/// What stands around a chart.
pub(crate) struct Frame<'a> {
    /// Above the chart, and its name for those who listen to it.
    pub title: &'a str,
    /// What the chart shows, in a sentence, for those who do not see it.
    pub description: &'a str,
    /// Below the horizontal axis.
    pub x: &'a str,
    /// Above the vertical axis.
    pub y: &'a str,
}
