//! The worksheet functions, declared once: both add-ins, the function help and the README derive from this table.

/// One argument of a worksheet function.
#[derive(Clone, Copy, Debug)]
pub struct Argument {
    /// Its name, as the function wizard shows it.
    pub name: &'static str,
    /// Its help: meaning, unit, range.
    pub help: &'static str,
    /// Whether it may be left out.
    pub optional: bool,
}

/// One worksheet function.
#[derive(Clone, Copy, Debug)]
pub struct Function {
    /// Its name after `HENCE.`, in capitals.
    pub name: &'static str,
    /// What it gives, in one or two sentences.
    pub help: &'static str,
    /// Its arguments, the optional ones last.
    pub arguments: &'static [Argument],
    /// The C function that gives the same numbers.
    pub symbol: &'static str,
    /// A formula to copy.
    pub example: &'static str,
}

impl Function {
    /// Looks a function up by its name, with or without `HENCE.`, in any case.
    ///
    /// ```
    /// use hence::worksheet::Function;
    /// assert_eq!(Function::find("hence.factor").map(|function| function.symbol), Some("hence_factors"));
    /// assert!(Function::find("HENCE.FACTORIAL").is_none());
    /// ```
    pub fn find(name: &str) -> Option<&'static Function> {
        let name = name.trim();
        let bare = match name.get(..6) {
            Some(prefix) if prefix.eq_ignore_ascii_case("HENCE.") => &name[6..],
            _ => name,
        };
        FUNCTIONS.iter().find(|function| function.name.eq_ignore_ascii_case(bare))
    }

    /// The name as a formula writes it: `HENCE.FACTOR`.
    pub fn full_name(&self) -> String {
        format!("HENCE.{}", self.name)
    }

    /// How many arguments must be given.
    pub fn required(&self) -> usize {
        self.arguments.iter().filter(|argument| !argument.optional).count()
    }
}

/// The category under which spreadsheet programs list the functions.
pub const CATEGORY: &str = "hence";

const fn needed(name: &'static str, help: &'static str) -> Argument {
    Argument { name, help, optional: false }
}

const fn optional(name: &'static str, help: &'static str) -> Argument {
    Argument { name, help, optional: true }
}

const BASIS: Argument = needed(
    "basis",
    "A rate line such as \"3.5% to 30, 3% after\", the id of a schedule, or a rate such as 0.035",
);
const BASE_OF_CURVE: Argument =
    optional("base", "The base year, for a basis with edges in calendar years; else left out");
const LENGTH: Argument =
    optional("length", "The appraisal's length in years, for a basis that depends on it; else left out");

/// All of them, in the order of the help.
pub static FUNCTIONS: &[Function] = &[
    Function {
        name: "FACTOR",
        help: "The discount factor for one unit at an offset. Give a whole column of offsets to get a column of factors.",
        arguments: &[
            BASIS,
            needed("offset", "Years from the base, one or a range; 0 has factor 1"),
            BASE_OF_CURVE,
            LENGTH,
        ],
        symbol: "hence_factors",
        example: "=HENCE.FACTOR(\"3.5%\", A2:A101)",
    },
    Function {
        name: "RATE",
        help: "The forward rate of the year that ends at an offset: the rate from offset n-1 to n, a fraction per year.",
        arguments: &[
            BASIS,
            needed("year", "The number of the year after the base, one or a range; 1 is the first"),
            BASE_OF_CURVE,
            LENGTH,
        ],
        symbol: "hence_forward_rates",
        example: "=HENCE.RATE(\"uk-2003\", 31)",
    },
    Function {
        name: "MEANRATE",
        help: "The one yearly rate that gives the same factor at an offset, a fraction per year.",
        arguments: &[BASIS, needed("offset", "Years from the base, one or a range"), BASE_OF_CURVE, LENGTH],
        symbol: "hence_mean_rates",
        example: "=HENCE.MEANRATE(\"uk-2003\", 100)",
    },
    Function {
        name: "VALUE",
        help: "The present value at the base of the flows of the years. Several rows (or columns) of flows beside one row (or column) of years give a value for each.",
        arguments: &[
            BASIS,
            needed(
                "years",
                "Calendar years, financial years such as 2026/27, or dates; without a base, offsets in years",
            ),
            needed(
                "flows",
                "As many flows as years, or several rows (or columns) of them; blank cells count as 0",
            ),
            optional(
                "base",
                "The base year, financial year or date; left out, the years are offsets from the base",
            ),
            optional(
                "timing",
                "Positions such as \"flows middle, base start\"; left out, those of the basis, else end",
            ),
        ],
        symbol: "hence_present_values",
        example: "=HENCE.VALUE(\"3.5%\", B1:Z1, B2:Z2, 2026, \"flows middle\")",
    },
    Function {
        name: "ANNUAL",
        help: "The constant amount a year, over service years 1 to N, that has the present value given.",
        arguments: &[
            BASIS,
            needed("value", "A present value at the base, one or a range"),
            needed("years", "The number N of service years, a whole number from 1"),
            BASE_OF_CURVE,
            LENGTH,
        ],
        symbol: "hence_annual_equivalent",
        example: "=HENCE.ANNUAL(\"3.5%\", 1000000, 60)",
    },
    Function {
        name: "IRR",
        help: "Every internal rate of return of the flows, rising, one below the other; #NUM! where there is none.",
        arguments: &[
            needed("years", "Calendar years, financial years, dates or offsets in years, one for each flow"),
            needed("flows", "As many net flows; blank cells count as 0"),
            optional("lowest", "The lowest rate looked at; left out, -50%"),
            optional("highest", "The highest rate looked at; left out, 100%"),
        ],
        symbol: "hence_irr_all",
        example: "=HENCE.IRR(B1:Z1, B2:Z2)",
    },
    Function {
        name: "RAMSEY",
        help: "The social discount rate rho + elasticity x growth; with uncertain growth less elasticity x (elasticity + 1) x sd^2 / 2.",
        arguments: &[
            needed("rho", "Time preference and hazard together, a fraction per year"),
            needed("elasticity", "The elasticity of marginal utility, 0 to 20"),
            needed("growth", "Growth of consumption per head, a fraction per year"),
            optional("sd", "The standard deviation of growth, independent from year to year; left out, 0"),
        ],
        symbol: "hence_ramsey_rate_uncertain",
        example: "=HENCE.RAMSEY(1.5%, 1, 2%)",
    },
    Function {
        name: "ELASTICITY",
        help: "The elasticity of marginal utility that tax rates imply by equal absolute sacrifice: ln(1 - marginal) / ln(1 - average).",
        arguments: &[
            needed("marginal", "The marginal rate of tax, a fraction from 0 to below 1"),
            needed("average", "Tax as a share of the same income, a fraction above 0 and below 1"),
        ],
        symbol: "hence_elasticity_from_taxes",
        example: "=HENCE.ELASTICITY(40%, 25%)",
    },
    Function {
        name: "WEIGHT",
        help: "The equity weight of a group, (reference / income) ^ elasticity: above 1 for incomes below the reference.",
        arguments: &[
            needed("income", "The group's income, above 0"),
            needed("reference", "The reference income (often the median) in the same unit, above 0"),
            needed("elasticity", "The elasticity of marginal utility, 0 to 20"),
        ],
        symbol: "hence_equity_weight",
        example: "=HENCE.WEIGHT(18000, 32000, 1.3)",
    },
    Function {
        name: "REAL",
        help: "The real rate behind a nominal rate: (1 + nominal) / (1 + inflation) - 1.",
        arguments: &[
            needed("nominal", "The nominal rate, a fraction per year above -1"),
            needed("inflation", "Inflation, a fraction per year above -1"),
        ],
        symbol: "hence_real_rate",
        example: "=HENCE.REAL(6%, 2%)",
    },
    Function {
        name: "SCHEDULE",
        help: "The rate line of a published schedule.",
        arguments: &[needed("id", "The id of a built-in schedule, such as uk-2003")],
        symbol: "hence_schedule_line",
        example: "=HENCE.SCHEDULE(\"uk-2003\")",
    },
    Function {
        name: "EXPLAIN",
        help: "The basis in words, with its source; or what is wrong with it, or with years, flows, base and timing as HENCE.VALUE takes them.",
        arguments: &[
            BASIS,
            optional("years", "The years given to HENCE.VALUE, to be told what is wrong with them"),
            optional("flows", "The flows given to HENCE.VALUE"),
            optional("base", "The base given to HENCE.VALUE, or the base year of the curve"),
            optional("timing", "The timing given to HENCE.VALUE"),
        ],
        symbol: "hence_basis_describe",
        example: "=HENCE.EXPLAIN(\"uk-2003\")",
    },
];
