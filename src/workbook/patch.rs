//! Splicing of single cells into a sheet part, everything else left byte for byte.

/// The result shown with a formula until the spreadsheet program recalculates.
#[derive(Clone, Debug, PartialEq)]
pub enum Cached {
    /// A number.
    Number(f64),
    /// A text.
    Text(String),
    /// None: the program computes it when it opens the file.
    None,
}

/// What is to become of one cell. Its style stays.
#[derive(Clone, Debug, PartialEq)]
pub enum CellWrite {
    /// A plain number.
    Number(f64),
    /// A plain text (written inline).
    Text(String),
    /// A formula, without the equals sign, and its result.
    Formula(String, Cached),
    /// The formula stays, its cached value goes (a dependent of a filled cell).
    DropValue,
}
