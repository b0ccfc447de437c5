//! Calls for the stand-in host: what goes in and, from the library called here, what must come out.

use hence::worksheet::{Cell, CellError, Function, Range, call};

/// A value, as the host is handed it and as the library must see it.
#[derive(Clone)]
pub struct Value {
    text: String,
    /// None where the argument counts as left out.
    range: Option<Range<'static>>,
}

fn one(text: String, cell: Cell<'static>) -> Value {
    Value { text, range: Some(Range::single(cell)) }
}

fn refused(text: &str) -> Value {
    one(text.into(), Cell::Error(CellError::Value))
}

pub fn n(number: f64) -> Value {
    one(number_text(number), Cell::Number(number))
}

pub fn s(text: &str) -> Value {
    one(text_text(text), Cell::Text(text.to_owned().into()))
}

fn logical(logical: bool) -> Value {
    one(format!("b:{}", i32::from(logical)), Cell::Logical(logical))
}

fn integer(integer: i32) -> Value {
    one(format!("i:{integer}"), Cell::Number(integer.into()))
}

fn error(number: i32, error: CellError) -> Value {
    one(format!("e:{number}"), Cell::Error(error))
}

fn blank() -> Value {
    one("z".into(), Cell::Blank)
}

fn left_out() -> Value {
    Value { text: "m".into(), range: None }
}

fn array(rows: usize, columns: usize, values: &[Value]) -> Value {
    let texts: Vec<&str> = values.iter().map(|value| value.text.as_str()).collect();
    let cells = values.iter().map(|value| match &value.range {
        Some(range) => range.cells()[0].clone(),
        None => Cell::Blank,
    });
    let range = Range::new(rows, columns, cells.collect()).expect("as many values as cells");
    Value { text: format!("a:{rows}x{columns} {}", texts.join(" ")), range: Some(range) }
}

fn column(values: &[Value]) -> Value {
    array(values.len(), 1, values)
}

fn row(values: &[Value]) -> Value {
    array(1, values.len(), values)
}

fn numbers(numbers: impl IntoIterator<Item = f64>) -> Vec<Value> {
    numbers.into_iter().map(n).collect()
}

fn number_text(number: f64) -> String {
    format!("n:{:016x}", number.to_bits())
}

pub fn text_text(text: &str) -> String {
    units_text(&text.encode_utf16().collect::<Vec<_>>())
}

fn units_text(units: &[u16]) -> String {
    units.iter().fold("s:".to_owned(), |text, unit| text + &format!("{unit:04x}"))
}

/// What a cell of an answer must look like to the host: a number that is not finite is `#NUM!`, a blank an empty text.
fn cell_text(cell: &Cell<'_>) -> String {
    match cell {
        Cell::Number(number) if number.is_finite() => number_text(*number),
        Cell::Number(_) => "e:36".into(),
        Cell::Text(text) => text_text(text),
        Cell::Blank => "s:".into(),
        Cell::Logical(logical) => format!("b:{}", i32::from(*logical)),
        Cell::Error(error) => format!("e:{}", error_number(*error)),
    }
}

/// The host's numbers, from its documentation.
fn error_number(error: CellError) -> i32 {
    match error.text() {
        "#NULL!" => 0,
        "#DIV/0!" => 7,
        "#VALUE!" => 15,
        "#REF!" => 23,
        "#NAME?" => 29,
        "#NUM!" => 36,
        "#N/A" => 42,
        other => panic!("{other} has no number"),
    }
}

/// A line of the file of cases, whose result the caller worked out.
pub fn case(function: &str, arguments: &[Value], due: &str) -> String {
    let given: String = arguments.iter().map(|value| format!(" {}", value.text)).collect();
    format!("HENCE.{function}{given} = {due}\n")
}

/// A line of the file of cases, whose result comes from the library.
fn compared(function: &str, arguments: &[Value]) -> String {
    let declared = Function::find(function).expect("the function is in the table");
    let ranges: Vec<_> = arguments.iter().map(|value| value.range.clone()).collect();
    let answer = call(declared, &ranges);
    let cells: Vec<String> = answer.cells().iter().map(cell_text).collect();
    let due = match &cells[..] {
        [cell] => cell.clone(),
        _ => format!("a:{}x{} {}", answer.rows(), answer.columns(), cells.join(" ")),
    };
    case(function, arguments, &due)
}

const LINE: &str = "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after";

/// Every case, in order; the first is a text, so that whoever counts results counts one that holds memory.
pub fn all() -> String {
    let mut lines = vec![compared("SCHEDULE", &[s("uk-2003")])];
    lines.extend(by_hand());
    lines.extend(functions());
    lines.extend(texts());
    lines.extend(kinds());
    lines.extend(large());
    lines.concat()
}

/// Worked out by hand, without the library: at 100% a factor is a power of a half.
fn by_hand() -> Vec<String> {
    let halves =
        numbers([1.0, 0.5, 0.25]).iter().map(|value| value.text.clone()).collect::<Vec<_>>().join(" ");
    let flows = array(3, 2, &numbers([1.0, 2.0, 10.0, 20.0, 100.0, 200.0]));
    let years = row(&numbers([0.0, 1.0]));
    let values = ["2", "20", "200"].map(|value| number_text(value.parse().expect("a number"))).join(" ");
    vec![
        case("FACTOR", &[n(1.0), n(1.0)], &number_text(0.5)),
        case("FACTOR", &[n(1.0), column(&numbers([0.0, 1.0, 2.0]))], &format!("a:3x1 {halves}")),
        case("FACTOR", &[n(1.0), row(&numbers([0.0, 1.0, 2.0]))], &format!("a:1x3 {halves}")),
        case("VALUE", &[n(1.0), years, flows], &format!("a:3x1 {values}")),
        case("ELASTICITY", &[n(0.3), n(0.3)], &number_text(1.0)),
        case("FACTOR", &[s("3.5% to 30"), n(31.0)], "e:42"),
        case("FACTOR", &[n(3.5), n(1.0)], "e:36"),
        case("FACTOR", &[s("3.5% until 30"), n(1.0)], "e:15"),
        case("FACTOR", &[n(1.0), s("1")], "e:15"),
        case("SCHEDULE", &[s("uk-1066")], "e:15"),
    ]
}

/// Each function with all its arguments, with those that must be given, and over ranges.
fn functions() -> Vec<String> {
    let offsets = [0.0, 0.5, 1.0, 30.0, 31.0, 75.5, 125.0, 200.25, 300.0, 1000.0];
    let years = || row(&numbers((0..40).map(|i| 2026.0 + f64::from(i))));
    let flows = || row(&numbers((0..40).map(|i| if i == 0 { -1234.5 } else { 61.7 + f64::from(i) / 7.0 })));
    let mut lines = Vec::new();
    for function in ["FACTOR", "RATE", "MEANRATE", "INSTANT"] {
        for basis in [s(LINE), s("uk-2003"), s("gamma mean 4% sd 3%"), n(0.035)] {
            lines.push(compared(function, &[basis.clone(), column(&numbers(offsets))]));
            lines.push(compared(function, &[basis, n(17.0)]));
        }
        let calendar = s("2.5% to 2070, 1.5% after");
        lines.push(compared(function, &[calendar.clone(), n(60.0), n(2026.0)]));
        lines.push(compared(function, &[calendar, n(60.0)]));
        let by_length = s("3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated");
        lines.push(compared(function, &[by_length, n(5.0), left_out(), n(20.0)]));
        // Bases across, offsets down.
        let bases = row(&[s("3.5%"), s("uk-2003"), n(0.07)]);
        lines.push(compared(function, &[bases, column(&numbers([1.0, 10.0]))]));
    }
    for timing in ["flows middle", "flows middle, base start", "flows averaged"] {
        lines.push(compared("VALUE", &[s(LINE), years(), flows(), n(2026.0), s(timing)]));
    }
    lines.push(compared("VALUE", &[s("3.5%; flows middle"), years(), flows(), n(2026.0), left_out()]));
    lines.push(compared("VALUE", &[s(LINE), years(), flows()]));
    lines.push(compared("ANNUAL", &[s(LINE), n(1e6), n(60.0)]));
    lines.push(compared("ANNUAL", &[s(LINE), column(&numbers([1e6, -5.0, 0.0])), n(60.0)]));
    lines.push(compared("IRR", &[years(), flows()]));
    let two = [row(&numbers([0.0, 1.0, 2.0])), row(&numbers([-100.0, 230.0, -132.0]))];
    lines.push(compared("IRR", &two));
    lines.push(compared("IRR", &[two[0].clone(), two[1].clone(), n(0.15), n(0.5)]));
    lines.push(compared("RAMSEY", &[n(0.015), n(1.0), n(0.02)]));
    lines.push(compared("RAMSEY", &[n(0.01), n(2.0), column(&numbers([0.02, 0.013])), n(0.036)]));
    lines.push(compared("ELASTICITY", &[n(0.4), n(0.25)]));
    lines.push(compared("WEIGHT", &[row(&numbers([18_000.0, 32_000.0, 64_000.0])), n(32_000.0), n(1.3)]));
    lines.push(compared("REAL", &[n(0.06), n(0.02)]));
    lines.extend(uncertain(&years, &flows));
    lines.extend(welfare());
    lines.push(compared("EXPLAIN", &[s("uk-2003")]));
    lines.push(compared("EXPLAIN", &[s(LINE), years(), flows(), n(2026.0), s("flows late")]));
    lines.push(compared("WHY", &[s("VALUE"), s(LINE), years(), flows(), n(2026.0), s("flows late")]));
    lines.push(compared("WHY", &[s("hence.real"), n(0.05), column(&[n(0.02), n(-1.0)])]));
    lines.push(compared("WHY", &[s("FACTOR"), s(LINE), n(1.0)]));
    let seeds =
        [s("DRAWS"), s("1%"), n(1.0), n(0.02), n(1.0), n(1.0), left_out(), left_out(), left_out(), n(50.0)];
    lines.push(compared("WHY", &[&seeds[..], &[n(20.0), n(-1.0)]].concat()));
    lines
}

/// Switching values and draws; over many years once each, as they take long.
fn uncertain(years: &dyn Fn() -> Value, flows: &dyn Fn() -> Value) -> Vec<String> {
    let line = || s("preference 1.5%, elasticity 1, growth 2%");
    let (preference, growth) = (|| s("uniform 0% to 2%"), || s("normal mean 2% sd 0.5%"));
    let mut lines = Vec::new();
    let mut once = |line: String| lines.push(format!("once {line}"));
    for parameter in ["rate", "preference", "Elasticity", "growth", "luck"] {
        once(compared("SWITCH", &[line(), s(parameter), years(), flows(), n(2026.0)]));
    }
    let middle = || s("flows middle, base start");
    once(compared("SWITCH", &[line(), s("growth"), years(), flows(), n(2026.0), middle(), n(-0.1), n(0.5)]));
    once(compared("DRAWS", &[preference(), n(1.0), growth(), years(), flows(), n(2026.0), middle()]));
    lines.push(compared("MULTIPLIER", &[n(20.0), column(&numbers([-100.0, 120.0, 0.0]))]));
    let both = array(2, 2, &numbers([-100.0, 104.0, -99.0, 103.0]));
    let at = |values| row(&numbers(values));
    let given = |draws: f64| {
        let (percentiles, seed) = (at([10.0, 90.0]), n(7.0));
        let years = at([0.0, 1.0]);
        [
            preference(),
            n(1.0),
            growth(),
            years,
            both.clone(),
            left_out(),
            left_out(),
            n(0.01),
            percentiles,
            n(draws),
            seed,
        ]
    };
    lines.push(compared("DRAWS", &given(50.0)));
    lines.push(compared("DRAWS", &given(0.5)));
    let two = [at([0.0, 1.0]), at([-100.0, 104.0])];
    lines.push(compared("SWITCH", &[&[line(), s("rate")], &two[..]].concat()));
    lines.push(compared("SWITCH", &[&[n(0.035), s("growth")], &two[..]].concat()));
    lines
}

/// Hazards, growth and welfare.
fn welfare() -> Vec<String> {
    let series = || column(&numbers([100.0, 103.0, 104.5, 109.0, 108.0]));
    let fractions = || column(&numbers([0.5, 0.25, 0.125, 0.0625, 0.0625]));
    let offsets = || column(&numbers([0.0, 1.0, 2.0, 3.0, 4.0]));
    let flows = || column(&[n(-3.0), blank(), n(2.0), n(2.5), n(0.5)]);
    let mut lines = vec![
        compared("BRACKETS", &[fractions(), fractions(), offsets()]),
        compared("GROWTH", &[series()]),
        compared("GROWTH", &[series(), offsets()]),
        compared("GROWTH", &[series(), fractions()]),
        compared("UTILITY", &[series(), n(1.5)]),
        compared("MARGINAL", &[series(), n(1.5)]),
        compared("EXACT", &[flows(), series(), fractions(), n(100.0), n(1.5)]),
        compared("EXACT", &[flows(), series(), n(1.0), n(100.0), n(1.5)]),
        compared("EQUIVALENT", &[series(), fractions(), n(2.0)]),
    ];
    for compounding in [left_out(), s("yearly"), s("Continuous"), s("daily")] {
        let last = || compounding.clone();
        lines.push(compared("HAZARD", &[fractions(), last()]));
        lines.push(compared("WAITING", &[row(&numbers([100.0, 2.0, 0.5])), last()]));
        lines.push(compared("WELFARE", &[series(), offsets(), n(0.015), n(1.5), last()]));
        let shift = [1.0, 100.0, 120.0, 10.0, 0.015, 1.5].map(n);
        lines.push(compared("COMPENSATION", &[&shift[..], &[last()]].concat()));
    }
    lines
}

/// Texts in and out: other scripts, beyond the first plane, empty, at and above the limit, not UTF-16.
fn texts() -> Vec<String> {
    let repeated = |count: usize, cell: Cell<'static>| one(format!("s*{count}:0061"), cell);
    let surrogate = |units: &[u16]| {
        let replaced = String::from_utf16_lossy(units);
        assert!(replaced.contains('\u{fffd}'), "an unpaired surrogate");
        one(units_text(units), Cell::Text(replaced.into()))
    };
    vec![
        compared("EXPLAIN", &[s("3,5 % – é 貼現 𝄞")]),
        compared("EXPLAIN", &[surrogate(&[0x33, 0xd834])]),
        compared("EXPLAIN", &[surrogate(&[0xdd1e, 0x25])]),
        compared("EXPLAIN", &[s("")]),
        compared("SCHEDULE", &[s("UK-2003 ")]),
        compared("EXPLAIN", &[repeated(32_767, Cell::Text("a".repeat(32_767).into()))]),
        compared("EXPLAIN", &[repeated(32_768, Cell::Error(CellError::Value))]),
        compared("EXPLAIN", &[refused("nowhere")]),
    ]
}

/// Every kind of value that a host may hand over, single and within a range.
fn kinds() -> Vec<String> {
    let errors = [
        (0, CellError::Null),
        (7, CellError::Division),
        (15, CellError::Value),
        (23, CellError::Reference),
        (29, CellError::Name),
        (36, CellError::Number),
        (42, CellError::NotAvailable),
        (43, CellError::NotAvailable),
        (99, CellError::Value),
    ];
    let mut mixed: Vec<Value> = errors.iter().map(|(number, kind)| error(*number, *kind)).collect();
    mixed.extend([n(1.0), blank(), s("x"), s(""), logical(true), integer(2), left_out(), n(3.0)]);
    mixed.push(n(0.5));
    let mut lines = vec![
        compared("FACTOR", &[n(1.0), column(&mixed)]),
        compared("FACTOR", &[n(1.0), array(6, 3, &mixed)]),
        compared("FACTOR", &[n(1.0), array(3, 6, &mixed)]),
        compared("FACTOR", &[integer(1), integer(2)]),
        compared("VALUE", &[n(1.0), row(&mixed[9..]), row(&mixed[9..])]),
        compared("VALUE", &[n(1.0), row(&numbers([0.0, 1.0])), row(&[n(4.0), blank()])]),
    ];
    let odd = ["sref", "ref", "flow", "big", "nowhere", "a:0x1", "a:1x0", "a:1x1 a:1x1 n:3ff0000000000000"];
    let single = errors.iter().map(|(number, kind)| error(*number, *kind));
    let single = single.chain([blank(), left_out(), logical(false)]).chain(odd.map(refused));
    for value in single {
        lines.push(compared("REAL", &[value.clone(), n(0.02)]));
        lines.push(compared("RAMSEY", &[n(0.01), n(2.0), n(0.02), value.clone()]));
        lines.push(compared("EXPLAIN", &[s("3.5%"), left_out(), left_out(), value]));
    }
    lines
}

/// A long column, and ranges larger than a sheet; once each.
fn large() -> Vec<String> {
    let offsets: Vec<Value> = numbers((0..100_000).map(|i| f64::from(i) / 100.0));
    let wide = vec!["n:3ff0000000000000"; 16_385].join(" ");
    [
        compared("FACTOR", &[s("gamma mean 4% sd 3%"), column(&offsets)]),
        compared("FACTOR", &[n(1.0), refused(&format!("a:1x16385 {wide}"))]),
    ]
    .map(|line| format!("once {line}"))
    .to_vec()
}
