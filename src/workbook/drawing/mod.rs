//! Charts as SVG texts for reports: lines and bars that need no colour to be told apart.

mod bars;
mod canvas;
mod lines;
mod measure;
mod ticks;

pub(crate) use bars::{Bar, bars};
pub(crate) use canvas::escaped;
pub(crate) use lines::{Line, lines};
pub(crate) use ticks::grouped;

/// What stands around a chart.
pub(crate) struct Frame<'a> {
    /// A word that no other chart of the page bears; its parts are named after it.
    pub id: &'a str,
    /// Above the chart, and its name for those who listen to it.
    pub title: &'a str,
    /// What the chart shows, in a sentence, for those who do not see it.
    pub description: &'a str,
    /// What the horizontal axis measures.
    pub x: &'a str,
    /// What the vertical axis measures; empty where it lists names.
    pub y: &'a str,
}
