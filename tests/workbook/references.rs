//! How formulas are cut into tokens.
//!
//! Source: the grammar of stored formulas in ISO/IEC 29500-1, 18.17.2; each row was cut by hand.

use hence_workbook::references::{Corner, MAX_ROWS, Token, shift, tokens};

/// One word for each token: its kind and its text.
fn kinds(formula: &str) -> Vec<String> {
    let all = tokens(formula);
    let joined: String = all.iter().map(|t| &formula[t.span.clone()]).collect();
    assert_eq!(joined, formula, "spans cover the formula");
    all.iter()
        .filter(|t| !matches!(t.token, Token::Operator(_) | Token::Space))
        .map(|t| {
            let text = &formula[t.span.clone()];
            match &t.token {
                Token::Ref(r) => {
                    let sheets = r.sheet.as_ref().map_or(String::new(), |s| {
                        let book = s.book.as_ref().map_or(String::new(), |b| format!("<{b}>"));
                        let last = s.last.as_ref().map_or(String::new(), |l| format!("|{l}"));
                        format!("{book}{}{last}!", s.first)
                    });
                    format!("ref {sheets}{}", r.range())
                }
                Token::Name(Some(s), name) => format!("name {}!{name}", s.first),
                Token::Name(None, name) => format!("name {name}"),
                Token::Function(name) => format!("fn {name}"),
                Token::TableRef(t) => format!("table {}[{}]", t.table.unwrap_or(""), t.part),
                Token::Text(_) => format!("text {text}"),
                Token::Number(n) => format!("number {n}"),
                Token::Logical(b) => format!("logical {b}"),
                Token::Error(e) => format!("error {e}"),
                Token::Other(o) => format!("other {o}"),
                Token::Operator(_) | Token::Space => String::new(),
            }
        })
        .collect()
}

// Each row is a form of ISO/IEC 29500-1, 18.17.2 (formulas, references, names, structured references).
#[test]
fn formulas_are_cut_where_the_grammar_cuts_them() {
    let table: &[(&str, &[&str])] = &[
        ("A1+$B$2", &["ref A1", "ref B2"]),
        ("=SUM(B9:A1)", &["fn SUM", "ref A1:B9"]),
        ("SUM(A:A,$2:3)", &["fn SUM", "ref A1:A1048576", "ref A2:XFD3"]),
        ("1.5E-3*A1^2%", &["number 1.5E-3", "ref A1", "number 2"]),
        (".5+2.", &["number .5", "number 2."]),
        ("'Q1 x'!A1", &["ref Q1 x!A1"]),
        ("'It''s'!$A1", &["ref It's!A1"]),
        ("Sheet1!B2:C3", &["ref Sheet1!B2:C3"]),
        ("2019!A1", &["ref 2019!A1"]),
        ("\u{dc}bersicht!A1", &["ref \u{dc}bersicht!A1"]),
        ("SUM(First:Last!A1)", &["fn SUM", "ref First|Last!A1"]),
        ("'First one:Last'!A1", &["ref First one|Last!A1"]),
        ("'First one':'Last one'!A1", &["ref First one|Last one!A1"]),
        ("A1:Sheet1!B2", &["ref A1", "ref Sheet1!B2"]),
        ("A1:INDEX(B:B,3)", &["ref A1", "fn INDEX", "ref B1:B1048576", "number 3"]),
        ("[1]Inputs!A1", &["ref <1>Inputs!A1"]),
        ("'[plan.xlsx]Inputs'!A1", &["ref <plan.xlsx>Inputs!A1"]),
        ("'C:\\x\\[plan.xlsx]In puts'!A1", &["ref <C:\\x\\plan.xlsx>In puts!A1"]),
        ("[0]!rate+Costs!rate", &["name !rate", "name Costs!rate"]),
        ("LOG10(A1)+LOG10", &["fn LOG10", "ref A1", "ref LOG10"]),
        ("rate_1+A1.x+_x+\\y", &["name rate_1", "name A1.x", "name _x", "name \\y"]),
        ("XFE1+A1048577", &["name XFE1", "name A1048577"]),
        ("_xlfn.LET(_xlpm.a,A1,_xlpm.a)", &["fn _xlfn.LET", "name _xlpm.a", "ref A1", "name _xlpm.a"]),
        ("Costs[Works]*2", &["table Costs[Works]", "number 2"]),
        ("Costs[[#This Row],[a]:[b]]", &["table Costs[[#This Row],[a]:[b]]"]),
        ("Costs[it's '[odd']]", &["table Costs[it's '[odd']]"]),
        ("[@Works]", &["table [@Works]"]),
        ("IF(TRUE,\"a\"\"b\",#N/A)", &["fn IF", "logical true", "text \"a\"\"b\"", "error #N/A"]),
        ("Sheet1!#REF!+#REF!A1+#DIV/0!", &["error Sheet1!#REF!", "error #REF!A1", "error #DIV/0!"]),
        ("_xlfn.ANCHORARRAY(A1)+B1#", &["fn _xlfn.ANCHORARRAY", "ref A1", "ref B1"]),
        ("{1,\"x\";TRUE,#N/A}", &["number 1", "text \"x\"", "logical true", "error #N/A"]),
        ("A1 & \" A1 \"", &["ref A1", "text \" A1 \""]),
        ("\"open", &["other \"open"]),
        ("A1+'open", &["ref A1", "other 'open"]),
        ("Costs[open", &["other Costs[open"]),
        ("1a|b", &["other 1a", "other |", "name b"]),
        ("", &[]),
    ];
    for (formula, expected) in table {
        assert_eq!(kinds(formula), *expected, "{formula}");
    }
}

#[test]
fn moving_wraps_at_the_edges_of_the_sheet() {
    let corner = Corner { row: 0, col: 3, row_fixed: false, col_fixed: true };
    assert_eq!(corner.moved(-1, 5), Corner { row: MAX_ROWS - 1, ..corner });
    assert_eq!(corner.moved(i64::from(MAX_ROWS) + 2, 0).row, 2);
}

#[test]
fn any_bytes_are_cut_without_a_panic() {
    let pieces =
        ["'", "\"", "[", "]", "!", ":", "$", "A1", "\u{e9}", "#REF!", "(", "1", ".", "e", "''", "\\"];
    for a in pieces {
        for b in pieces {
            for c in pieces {
                for d in pieces {
                    let formula = format!("{a}{b}{c}{d}");
                    let joined: String = tokens(&formula).iter().map(|t| &formula[t.span.clone()]).collect();
                    assert_eq!(joined, formula);
                    shift(&formula, 1, -1);
                }
            }
        }
    }
}
