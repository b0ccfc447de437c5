//! The one table of problem codes: what each short word at the end of a message means.

/// What a problem is about: the heading that its code stands under.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Group {
    /// The file and the parts of its package.
    File,
    /// What the workbook is made of: sheets, cells, names as the file has them.
    Structure,
    /// Names, and the roles they give to cells.
    Names,
    /// Years, base, basis, timing and other settings.
    Settings,
    /// Streams of costs, benefits and net flows, and blocks of them.
    Flows,
    /// Cells to be filled.
    Targets,
    /// Filling, comparing and the audit.
    Fill,
    /// Rates, schedules, dates and numbers: the words that the library has for its errors.
    Library,
}

impl Group {
    /// Every group, in the order of the table.
    pub const ALL: [Group; 8] = [
        Group::File,
        Group::Structure,
        Group::Names,
        Group::Settings,
        Group::Flows,
        Group::Targets,
        Group::Fill,
        Group::Library,
    ];

    /// Its heading.
    pub fn title(self) -> &'static str {
        match self {
            Group::File => "File and package",
            Group::Structure => "Workbook structure",
            Group::Names => "Names and roles",
            Group::Settings => "Years, base and settings",
            Group::Flows => "Flows",
            Group::Targets => "Targets",
            Group::Fill => "Fill and audit",
            Group::Library => "Rates, dates and numbers",
        }
    }
}

/// One code. It is the same in messages, in JSON and in the README, and never changes its meaning.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Code {
    /// The word.
    pub code: &'static str,
    /// What it is about.
    pub group: Group,
    /// What it means, in one sentence.
    pub what: &'static str,
}

macro_rules! codes {
    ($($group:ident { $($code:literal: $what:literal,)* })*) => {
        &[$($(Code { code: $code, group: Group::$group, what: $what },)*)*]
    };
}

/// Every code that a [`Problem`](crate::problem::Problem) can have, by group and sorted within it.
#[rustfmt::skip]
pub const CODES: &[Code] = codes! {
    File {
        "backslash-name": "Part names in the file hold backslashes, which programs read in different ways.",
        "bad-utf8": "A part of the file is not valid UTF-8 text.",
        "bad-xml": "A part of the file is not the XML that the format asks for.",
        "cannot-read": "The file cannot be opened or read.",
        "cannot-write": "The output cannot be written there.",
        "damaged-zip": "The zip package is damaged, or of a kind that is not read.",
        "doctype": "A part declares a document type, which workbooks may not hold.",
        "duplicate-entry": "The package holds two entries of one name.",
        "empty-file": "The file is empty.",
        "encoding": "A part is written in an encoding other than UTF-8.",
        "encrypted-entry": "A part inside the package is encrypted.",
        "file-too-large": "The file is larger than hence reads.",
        "html-file": "The file is a web page under a workbook's name.",
        "long-token": "A part holds a tag or a text longer than hence reads.",
        "missing-part": "The package lacks a part that every workbook has.",
        "not-a-package": "The file is not a zip package, so it is not an .xlsx workbook.",
        "not-a-workbook": "The file is a package, but not one of a workbook.",
        "old-format": "The file is an old binary workbook (.xls).",
        "other-format": "The file is of another format (.ods, .xlsb, an add-in, plain XML).",
        "output-exists": "The output exists already, and replacing it was not asked for.",
        "output-is-input": "The output would replace the input.",
        "output-too-large": "The output is too large to be packed.",
        "password-protected": "The workbook is protected by a password.",
        "signed": "The workbook is digitally signed, and a fill would break the signature.",
        "strict-format": "The workbook is saved in the strict variant of the format, which is not filled.",
        "template": "The file is a workbook template, not a workbook.",
        "truncated": "The end of the file is missing.",
        "unreadable": "Cells, or a file of schedules, cannot be read.",
        "xml-depth": "A part nests its elements deeper than hence reads.",
        "zip-bomb": "The package unpacks to more than hence reads, or to more than it says.",
    }
    Structure {
        "alternate-styles": "The workbook's styles have alternatives that do not match, so none can be added.",
        "bad-name": "A defined name has no name.",
        "bad-name-scope": "A defined name belongs to a sheet that the workbook does not have.",
        "bad-names": "More defined names are defined twice or belong to no sheet than are listed.",
        "bad-range": "A sheet gives a range that is not one, for its used cells or for a formula.",
        "bad-sheet": "A sheet lacks its name, its cells or its part of the file.",
        "bad-table": "A table has no name or no cells, and is passed over.",
        "bad-value": "A cell stores something that is not a value of its type.",
        "cell-address": "A sheet holds an address beyond the last row or column.",
        "cell-order": "The cells of a row are stored out of order.",
        "cell-row": "A cell is stored in a row that is not its own.",
        "duplicate-cell": "A cell is stored twice.",
        "duplicate-name": "A name is defined twice for the same sheet or for the whole workbook.",
        "duplicate-row": "A row is stored twice.",
        "duplicate-sheet": "Two sheets have one name; case makes no difference.",
        "external-link": "The workbook refers to other files, which are not opened.",
        "formula-size": "A sheet's formulas take more room, written out, than hence reads.",
        "macro-sheet": "A sheet is an old macro sheet or of a kind that is not known.",
        "misplaced-cell": "A cell is stored in a row that is not its own, in a sheet to be filled.",
        "missing-sheet-part": "The workbook lists a sheet that the file does not hold.",
        "name-scope": "A defined name belongs to a sheet number that is not there.",
        "no-sheets": "The workbook holds no sheets.",
        "odd-cell": "A sheet holds an element or a type of cell that the format does not have.",
        "odd-layout": "Texts or styles are stored where not every program would look for them.",
        "odd-value": "A cell's value or formula is written in a way that programs read differently.",
        "out-of-range": "A row or cell lies beyond the end of the sheet (XFD1048576).",
        "row-order": "The rows of a sheet are stored out of order.",
        "shared-formula": "A shared formula is stored in a way that cannot be read or changed.",
        "string-count": "The workbook claims many more texts than it holds.",
        "too-many-formats": "The workbook holds too many cell formats, or one that is overlong.",
        "too-many-names": "The workbook holds more defined names than hence reads.",
        "too-many-sheets": "The workbook holds more sheets than hence reads.",
        "too-many-strings": "The workbook's texts take more room than hence reads.",
        "too-many-styles": "No cell formats can be added: the workbook has as many as are allowed.",
        "two-sheet-data": "A sheet holds a second list of cells.",
        "unsafe-name": "Entries of the package would be unpacked elsewhere; they are copied as they are.",
    }
    Names {
        "ambiguous-stream": "A target names a stream that is both a cost and a benefit.",
        "duplicate-role": "Two ranges are given the same role for the same stream and option.",
        "loose-stream": "A stream has no option, in a workbook that has options.",
        "loose-target": "A target has no option, and the options give different values.",
        "missing-role": "The workbook, or an option, lacks something that a valuation needs.",
        "missing-sheet": "A range is on a sheet that the workbook does not have.",
        "name-constant": "A name stands for a constant, where cells are needed.",
        "name-dynamic": "A name is a formula whose cells may change; the hint says which they are now.",
        "name-external": "A name refers to another workbook.",
        "name-lost": "A name refers to cells that were deleted.",
        "name-missing-sheet": "A name refers to a sheet that does not exist.",
        "name-relative": "A name refers to other cells from each cell that uses it.",
        "name-sheets": "A name refers to several sheets at once.",
        "name-table": "A name refers to a part of a table that cannot be read: no such table, column or row, or another row for every cell.",
        "name-union": "A name refers to several ranges that are not pieces of one row or column, or one range is needed.",
        "nothing-to-suggest": "No row of years with flows beside it was found.",
        "range-too-large": "A range has more cells than hence reads.",
        "role-range": "What a role was given is neither cells of this workbook nor one of its names or tables.",
        "sheet-alike": "A sheet without names is laid out like one that is valued, and is not valued itself.",
        "unknown-name": "A name begins like one of hence's but has no role; it looks like a slip.",
        "unknown-option": "The baseline is not an option of this workbook.",
        "unknown-role": "The word before `=` is not a role that can be given.",
        "unknown-sheet": "A name is to belong to a sheet that the workbook does not have.",
        "unknown-stream": "A setting is about a stream that is not there.",
        "whole-range": "A name covers a whole row or column, headings too.",
    }
    Settings {
        "base-differs": "Options have different base years, so that their values do not compare.",
        "base-kind": "A year and the base are of different kinds, so there is no offset between them.",
        "base-value": "The base is not a year, a financial year or a date.",
        "base-years": "The base does not go with the years as they are written.",
        "baseline-basis": "An option's basis or base year is not that of the baseline.",
        "basis-differs": "The basis is not the one that was to be replaced.",
        "basis-formula": "The basis cell holds a formula, which a new basis would overwrite.",
        "basis-note": "A remark on the basis, such as a superseded or second-hand schedule.",
        "basis-overridden": "The command line gives another basis than the workbook; the command line counts.",
        "basis-text": "The basis cell held a number and now holds a text, which formulas cannot count with.",
        "basis-value": "The basis cell holds something other than a rate line, a schedule id or a number.",
        "blank-setting": "The cell of a setting is blank.",
        "consumption": "A level of consumption is blank, 0 or negative.",
        "consumption-base": "The path of consumption does not hold the base.",
        "consumption-mixed": "Consumption is given beside weights by income or a stream's own basis, with which it cannot be compared.",
        "consumption-years": "An option and its baseline run over different years, where consumption is given.",
        "curve-note": "A remark on the curve, such as a jump of the factor at an edge.",
        "elasticity": "The elasticity of marginal utility lies outside 0 to 20.",
        "elasticity-differs": "The elasticity cell and the basis give different elasticities; the cell counts.",
        "elasticity-missing": "Consumption or incomes need an elasticity of marginal utility, and nothing states one.",
        "income": "An income is 0 or negative.",
        "income-reference": "Incomes of groups are given without the income that counts once, or that without groups.",
        "no-basis-cell": "No cell states the basis, so a new one stands on the audit sheets alone.",
        "not-drawn": "A stream on a basis of its own keeps it in every draw.",
        "not-marginal": "A project is not small against consumption, and its exact value is more than 1% from the marginal method's.",
        "nothing-uncertain": "Every part of the rate to be drawn is one value, so that all draws are the same.",
        "one-cell": "A setting covers several cells, where one is allowed.",
        "part-missing": "A part of the rate to be drawn is given neither with the run nor by the workbook's basis.",
        "price-basis": "The text does not say which prices the flows are in, or asks for a conversion that nothing gives.",
        "price-index": "A level of the price index is blank, 0 or negative.",
        "price-rate": "A rate of inflation or of price growth lies outside -50% to 100%.",
        "price-tail": "A stream goes on after the last year, where the index of prices ends.",
        "price-year": "The year of the prices has no place among the years, or no level in the index.",
        "prices-differ": "A nominal rate stands on real flows, or a real rate on nominal ones.",
        "prices-unstated": "The schedule records whether its rates are real, and the workbook does not say it of its flows.",
        "series-gap": "A series that growth is estimated from has a blank cell.",
        "series-shape": "A series that growth is estimated from is not one row or column, or two with the years first.",
        "signs": "The text does not say which flows are negative.",
        "text-expected": "A setting holds a number or another value, where a text is allowed.",
        "timing-differs": "The timing cell and the basis give different timings; the cell counts.",
        "timing-ignored": "A timing is given that is not used: dates and offsets need none.",
        "unit": "The unit of a stream is not understood.",
        "uplift-range": "An uplift lies outside -100% to 500%.",
        "years-and-offsets": "Both years and offsets are given; allowed is one of them.",
        "years-blank": "A cell among the years, or the base, is blank.",
        "years-gap": "Years are left out between two of the years.",
        "years-mixed": "The years are of different kinds.",
        "years-order": "A year comes after a later one.",
        "years-repeat": "A year stands twice.",
        "years-shape": "The years are not one row or one column, or are too few or too many.",
        "years-value": "A cell among the years is not a year, a financial year or a date.",
    }
    Flows {
        "baseline-damage": "A damage is named for an option or for the baseline only, and counts as 0 for the other.",
        "benefit-sign": "A benefit is negative in every year.",
        "blank-zero": "Blank cells among the flows count as 0.",
        "block-empty": "A block holds no numbers and counts for nothing.",
        "block-heading": "A row of a block has no numbers and is taken for a heading.",
        "block-label": "A row of a block has no label, or the label of another.",
        "block-shape": "A block is not one row or column of labels beside as many cells as the years.",
        "block-years": "A row of a block repeats the years and is left out.",
        "cost-sign": "The signs of a cost are not as declared (positive, unless `hence_signs` says negative), or are mixed.",
        "date-value": "A cell holds a date, where a number is allowed.",
        "double-count": "A stream is a total of another one, whose flows would count twice.",
        "duplicate-stream": "Two streams of one kind have the same name.",
        "error-value": "A cell holds an error such as #REF!.",
        "linked-streams": "A stream only repeats another one.",
        "logical-value": "A cell holds TRUE or FALSE, where a number is allowed.",
        "merged": "Flows stand in merged cells, of which only the first holds one.",
        "misaligned": "A stream or target stands beside other cells than the years.",
        "no-flows": "Every cell of every stream is blank: nothing has been entered yet.",
        "no-result": "A formula has no stored result.",
        "overlap": "Two streams share cells, whose flows would count twice.",
        "residual-sign": "A residual value is negative, though values left over are entered as positive numbers.",
        "same-numbers": "A stream holds the numbers of another one, or of the sum of others.",
        "stream-blank": "A stream is blank in every year and counts as 0.",
        "subtotal-left-out": "A row of a block adds up other rows of it, and is left out.",
        "text-number": "A text looks like a number.",
        "text-value": "A cell holds a text, where a number or a blank is allowed.",
    }
    Targets {
        "array-part": "A cell to be written is part of an array formula or a data table.",
        "hidden": "A target has cells in hidden rows or columns.",
        "merged-away": "A cell to be written is hidden under merged cells.",
        "protected": "A target is on a protected sheet; it is filled all the same.",
        "target-array": "A target is part of an array formula.",
        "target-data-table": "A target is part of a what-if data table.",
        "target-merged": "A target is hidden inside merged cells.",
        "target-overlap": "Two targets share cells, or a target shares cells with an input.",
        "target-refreshed": "A target is filled by a pivot table or a query, which would overwrite it.",
        "target-table": "A target is in the headings or totals of a table.",
        "target-text": "A target holds text, which is never overwritten.",
        "text-format": "A target cell is formatted as text.",
        "validation": "A target has a validation rule, which the results may not meet.",
    }
    Fill {
        "awaits-recalculation": "Formulas in a target have no stored result, or one that the fill makes stale, so they are not compared.",
        "cannot-graft": "Part of hence's own sheets cannot be added: a fault of hence, please report it.",
        "chart-count": "The charts made are not those described: a fault of hence, please report it.",
        "companion": "The schedule that is to be shown beside the declared one could not be valued.",
        "coverage-cut": "More rows run along the years than Audit coverage lists.",
        "date-1904": "The workbook counts days from 1904, so copied dates shift by 1,462 days.",
        "differs": "A formula in a target does not give the value of the declared basis.",
        "flow-follows": "The formulas of a stream depend, or may depend, on filled cells.",
        "manual-calculation": "The workbook is set to manual calculation.",
        "many-references": "The workbook's formulas hold more references than are followed.",
        "map-basis": "A map was asked for, and no basis is stated by preference, elasticity and growth.",
        "no-formula": "A cell without a formula has no result to drop: a fault of hence, please report it.",
        "number-replaced": "Typed numbers in a target differed from the basis and were replaced.",
        "output-differs": "The output, read again, is not what was meant; nothing was written.",
        "outside-sheet": "A cell to be written lies beyond the end of the sheet.",
        "own-sheet": "One of hence's own sheets cannot be written.",
        "own-sheet-edited": "What hence wrote on one of its sheets was changed by hand, or has comments.",
        "package-change": "Parts of the package cannot be changed as planned: a fault of hence, please report it.",
        "precision-as-displayed": "The workbook keeps values as displayed, which would round the results for good.",
        "protected-workbook": "The workbook's structure is protected; sheets are added all the same.",
        "shared-workbook": "The workbook is shared and keeps a history, in which the fill does not appear.",
        "sheet-name-taken": "The workbook has a sheet of its own under the name of one of hence's.",
        "text-characters": "A text to be written holds a character that workbooks do not allow.",
        "text-length": "A text or formula to be written is longer than a cell allows.",
        "unequal-lives": "Annual equivalents over unequal lives do not compare under a declining curve.",
    }
    Library {
        "bad-schedule": "A schedule file is not valid.",
        "date": "A date, year or financial year cannot be read.",
        "diverges": "A sum to infinity does not converge.",
        "edges": "Edges of bands are missing, overlap or do not increase.",
        "needs-base": "The curve has edges in calendar years, and no base year is given.",
        "needs-length": "The curve depends on the appraisal's length, and none is given.",
        "no-meaning": "A result has no meaning for these inputs, such as a ratio over no cost.",
        "not-finite": "A number is not finite, or a result would be too large for one.",
        "outside-domain": "A year lies where the curve is not defined, such as after its last edge.",
        "rate-range": "A rate, or another parameter of a curve, is outside its allowed range.",
        "shape": "A range does not have the length or direction of the years, or a list is empty.",
        "syntax": "A text, such as a rate line, does not follow its grammar.",
        "unknown-schedule": "No schedule of that id is known.",
        "unsupported": "This version does not offer what was asked for.",
        "weights": "Weights, or chances, do not sum to 1 as they should, or one is negative.",
    }
};
