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
const YEARS: Argument = needed(
    "years",
    "Calendar years, financial years such as 2026/27, or dates; without a base, offsets in years",
);
const BASE: Argument =
    optional("base", "The base year, financial year or date; left out, the years are offsets from the base");
const TIMING: Argument = optional(
    "timing",
    "Positions such as \"flows middle, base start\"; left out, those of the basis, else end",
);
const RHO: Argument = needed("rho", "Time preference and hazard together, a fraction per year");
const ELASTICITY: Argument = needed("elasticity", "The elasticity of marginal utility, 0 to 20");
const CONSUMPTION: Argument = needed("consumption", "Consumption, a head and year, above 0; one or a range");
const COMPOUNDING: Argument = optional("compounding", "\"yearly\" or \"continuous\"; left out, yearly");

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
        name: "INSTANT",
        help: "The instantaneous rate at an offset, a fraction per year with continuous compounding; at an edge that of the earlier band.",
        arguments: &[BASIS, needed("offset", "Years from the base, one or a range"), BASE_OF_CURVE, LENGTH],
        symbol: "hence_instantaneous_rates",
        example: "=HENCE.INSTANT(\"gamma mean 4% sd 3%\", 100)",
    },
    Function {
        name: "VALUE",
        help: "The present value at the base of the flows of the years. Several rows (or columns) of flows beside one row (or column) of years give a value for each.",
        arguments: &[
            BASIS,
            YEARS,
            needed(
                "flows",
                "As many flows as years, or several rows (or columns) of them; blank cells count as 0",
            ),
            BASE,
            TIMING,
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
        name: "SWITCH",
        help: "Every value of a parameter of the basis at which the net present value is zero, rising, one below the other; #NUM! where there is none. For two options to swap, give the flows of one less those of the other.",
        arguments: &[
            BASIS,
            needed(
                "parameter",
                "\"rate\" (a flat rate in place of the basis), \"preference\", \"elasticity\" or \"growth\"",
            ),
            YEARS,
            needed("flows", "As many net flows; blank cells count as 0"),
            BASE,
            TIMING,
            optional("lowest", "The lowest value looked at; left out, -50%, of the elasticity 0"),
            optional("highest", "The highest value looked at; left out, 100%, of the elasticity 20"),
        ],
        symbol: "hence_switching_values",
        example: "=HENCE.SWITCH(\"preference 1.5%, elasticity 1, growth 2%\", \"growth\", B1:Z1, B2:Z2, 2026)",
    },
    Function {
        name: "MULTIPLIER",
        help: "The multiple of one stream at which the net present value is zero, 1 - net / stream: 1.2 for costs that may rise by a fifth.",
        arguments: &[
            needed("net", "The net present value, or that of one option less another's"),
            needed("stream", "The part of it that is multiplied, with its sign: a cost is negative"),
        ],
        symbol: "hence_switching_multiplier",
        example: "=HENCE.MULTIPLIER(B5, -B3)",
    },
    Function {
        name: "DRAWS",
        help: "Net present values under seeded draws of the rate, preference + hazard + elasticity x growth. For each stream a row (a column where years run down): mean, standard deviation, share above 0, share in which it is first alone, percentiles.",
        arguments: &[
            needed(
                "preference",
                "A distribution such as \"normal mean 1% sd 0.3%\", \"uniform 0% to 2%\", \"triangular 0%, 1%, 2%\", \"0.3 at 1%, 0.7 at 2%\", or a number",
            ),
            needed("elasticity", "A distribution such as \"uniform 1 to 2\", or a number"),
            needed("growth", "A distribution such as \"normal mean 2% sd 0.5%\", or a number"),
            YEARS,
            needed(
                "flows",
                "As many net flows as years, or several rows (or columns) of them, an option each; blank cells count as 0",
            ),
            BASE,
            optional("timing", "Positions such as \"flows middle, base start\"; left out, end"),
            optional("hazard", "A distribution or a number; left out, 0"),
            optional("percentiles", "Numbers from 0 to 100; left out, 5, 25, 50, 75 and 95"),
            optional("draws", "How many draws, 1 to 1,000,000; left out, 10,000"),
            optional("seed", "A whole number from 0; left out, 1. The same seed gives the same draws"),
        ],
        symbol: "hence_draws_value",
        example: "=HENCE.DRAWS(\"uniform 0% to 2%\", \"uniform 1 to 2\", \"normal mean 2% sd 0.5%\", B1:Z1, B2:Z3, 2026)",
    },
    Function {
        name: "RAMSEY",
        help: "The social discount rate rho + elasticity x growth; with uncertain growth less elasticity x (elasticity + 1) x sd^2 / 2.",
        arguments: &[
            RHO,
            ELASTICITY,
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
        name: "BRACKETS",
        help: "The elasticity of marginal utility that several tax brackets imply by equal absolute sacrifice: the mean of HENCE.ELASTICITY over the brackets, weighted by taxpayers.",
        arguments: &[
            needed("marginal", "The marginal rate of tax in each bracket, a row or column of fractions"),
            needed("average", "As many: tax as a share of income at an income typical of the bracket"),
            needed("weights", "As many: the taxpayers in the bracket, or their share; 0 or more"),
        ],
        symbol: "hence_elasticity_from_brackets",
        example: "=HENCE.BRACKETS(B2:B5, C2:C5, D2:D5)",
    },
    Function {
        name: "HAZARD",
        help: "The hazard rate of a yearly probability that benefits end for good: p / (1 - p), with continuous compounding -ln(1 - p).",
        arguments: &[
            needed("probability", "The chance in one year, a fraction from 0 to below 1; one or a range"),
            COMPOUNDING,
        ],
        symbol: "hence_hazard_from_probability",
        example: "=HENCE.HAZARD(1%)",
    },
    Function {
        name: "WAITING",
        help: "The hazard rate of an expected waiting time until benefits end for good: 1 / (years - 1), with continuous compounding 1 / years.",
        arguments: &[needed("years", "The expected time in years, above 1; one or a range"), COMPOUNDING],
        symbol: "hence_hazard_from_waiting_time",
        example: "=HENCE.WAITING(100)",
    },
    Function {
        name: "GROWTH",
        help: "Growth of a series of consumption: six rows of a figure and its standard error. Growth a year along the log-linear trend, geometric mean growth a year (both without error), log trend, mean, standard deviation and persistence of log growth.",
        arguments: &[
            needed(
                "consumption",
                "A row or column of at least four values, one a year, above 0, in prices of one year",
            ),
            optional(
                "years",
                "The years of the values, which must follow on each other; left out, that is assumed",
            ),
        ],
        symbol: "hence_growth_estimate",
        example: "=HENCE.GROWTH(B2:B31, A2:A31)",
    },
    Function {
        name: "UTILITY",
        help: "The utility of a consumption, (c^(1 - elasticity) - 1) / (1 - elasticity), and ln c at an elasticity of 1.",
        arguments: &[CONSUMPTION, ELASTICITY],
        symbol: "hence_utility",
        example: "=HENCE.UTILITY(26000, 1.5)",
    },
    Function {
        name: "MARGINAL",
        help: "The utility of one more unit of consumption, c ^ -elasticity.",
        arguments: &[CONSUMPTION, ELASTICITY],
        symbol: "hence_marginal_utility",
        example: "=HENCE.MARGINAL(26000, 1.5)",
    },
    Function {
        name: "WELFARE",
        help: "The welfare of a path of consumption, its discounted utility. Only which of two paths is better, and ratios of differences, have a meaning.",
        arguments: &[
            needed("consumption", "A row or column of consumption a head, above 0"),
            needed("offsets", "As many: years from the base"),
            RHO,
            ELASTICITY,
            COMPOUNDING,
        ],
        symbol: "hence_welfare",
        example: "=HENCE.WELFARE(B2:B101, A2:A101, 1.5%, 1.5)",
    },
    Function {
        name: "COMPENSATION",
        help: "What must be received later so that giving up an amount now leaves welfare as it was.",
        arguments: &[
            needed("amount", "What is given up now; negative where it is received now and given up later"),
            needed("now", "Consumption now before the shift, above 0, in the unit of the amount"),
            needed("later", "Consumption at the later date before the shift, above 0"),
            needed("years", "The years from now to the later date"),
            RHO,
            ELASTICITY,
            COMPOUNDING,
        ],
        symbol: "hence_compensation",
        example: "=HENCE.COMPENSATION(1000, 26000, 31700, 10, 1.5%, 1.5)",
    },
    Function {
        name: "EXACT",
        help: "The exact value of flows that are not small against consumption: the amount at the base that changes welfare as much as they do. Their present value is its limit for small flows.",
        arguments: &[
            needed(
                "flows",
                "A row or column of benefits less costs, in the unit of consumption; blank cells count as 0",
            ),
            needed(
                "consumption",
                "As many: consumption at the date of each flow without the project, above 0",
            ),
            needed("factors", "As many: the discount factor of each flow, as HENCE.FACTOR gives them"),
            needed("base", "The consumption at the base, above 0"),
            ELASTICITY,
        ],
        symbol: "hence_equivalent_variation",
        example: "=HENCE.EXACT(D2:D101, B2:B101, C2:C101, B2, 1.5)",
    },
    Function {
        name: "WEIGHT",
        help: "The equity weight of a group, (reference / income) ^ elasticity: above 1 for incomes below the reference.",
        arguments: &[
            needed("income", "The group's income, above 0"),
            needed("reference", "The reference income (often the median) in the same unit, above 0"),
            ELASTICITY,
        ],
        symbol: "hence_equity_weight",
        example: "=HENCE.WEIGHT(18000, 32000, 1.3)",
    },
    Function {
        name: "EQUIVALENT",
        help: "The equally-distributed equivalent: the consumption which, had everybody that much, would give the welfare of the unequal distribution.",
        arguments: &[
            needed("consumption", "A row or column of consumption a head, above 0, one for each group"),
            needed("shares", "As many: the group's share of the population; they sum to 1"),
            ELASTICITY,
        ],
        symbol: "hence_equally_distributed_equivalent",
        example: "=HENCE.EQUIVALENT(B2:B6, C2:C6, 1.5)",
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
    Function {
        name: "WHY",
        help: "What is wrong with a call of another function, in words, since an error value carries no message: its name, then its arguments as they were given.",
        arguments: &[
            needed("function", "The name of the function, such as \"DRAWS\" or \"HENCE.DRAWS\""),
            optional("first", "Its first argument"),
            optional("second", "Its second argument"),
            optional("third", "Its third argument"),
            optional("fourth", "Its fourth argument"),
            optional("fifth", "Its fifth argument"),
            optional("sixth", "Its sixth argument"),
            optional("seventh", "Its seventh argument"),
            optional("eighth", "Its eighth argument"),
            optional("ninth", "Its ninth argument"),
            optional("tenth", "Its tenth argument"),
            optional("eleventh", "Its eleventh argument"),
        ],
        symbol: "hence_worksheet_call",
        example: "=HENCE.WHY(\"SWITCH\", \"3.5%\", \"growth\", B1:Z1, B2:Z2, 2026)",
    },
];
