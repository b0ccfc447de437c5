//! Formulas as trees, as far as totals and their parts are made of them; whatever else a formula says is kept as unknown.

use crate::model::Workbook;
use crate::references::{Cell, Constant, NameTarget, Range, Reference, Sheets, Token, tokens};

/// A cell of the workbook: its sheet by place, and where it stands on it.
pub(crate) type At = (usize, Cell);

/// Functions that reach cells which their text does not name.
const UNSETTLED: [&str; 2] = ["INDIRECT", "OFFSET"];
/// How deep brackets may nest.
const DEEP: usize = 100;

/// A formula or a part of one, with its references as they stand in its cell.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Expr {
    /// A number, or a logical value as one.
    Number(f64),
    /// A text, which counts for nothing.
    Text,
    /// Cells of one sheet.
    Cells(usize, Range),
    /// `-x`
    Negative(Box<Expr>),
    /// Two operands and what stands between them: `+ - * / ^` or a comparison.
    Binary(&'static str, Box<Expr>, Box<Expr>),
    /// A function by its name in capitals.
    Call(String, Vec<Expr>),
    /// Something not understood, and the cells that it names; true where it may name others that are not known.
    Unknown(Vec<Expr>, bool),
}

impl Expr {
    /// Reads a formula that stands on a sheet.
    pub(crate) fn read(formula: &str, sheet: usize, book: &Workbook) -> Expr {
        let tokens: Vec<Token> = tokens(formula.trim_start_matches('='))
            .into_iter()
            .map(|spanned| spanned.token)
            .filter(|token| *token != Token::Space)
            .collect();
        let mut reader = Reader { tokens: &tokens, at: 0, sheet, book, depth: 0 };
        match reader.comparison() {
            Some(expr) if reader.at == tokens.len() => expr,
            _ => {
                let hides = |token: &Token| match token {
                    Token::Ref(_) | Token::Name(..) => reader.cells(token).is_none(),
                    Token::Function(name) => UNSETTLED.iter().any(|other| name.eq_ignore_ascii_case(other)),
                    Token::TableRef(_) | Token::Other(_) => true,
                    _ => false,
                };
                let hidden = tokens.iter().any(hides);
                Expr::Unknown(tokens.iter().filter_map(|token| reader.cells(token)).collect(), hidden)
            }
        }
    }

    /// Every range of cells in it, in order.
    pub(crate) fn ranges(&self) -> Vec<(usize, Range)> {
        let mut found = Vec::new();
        self.gather(&mut found);
        found
    }

    fn gather(&self, found: &mut Vec<(usize, Range)>) {
        match self {
            Expr::Number(_) | Expr::Text => {}
            Expr::Cells(sheet, range) => found.push((*sheet, *range)),
            Expr::Negative(part) => part.gather(found),
            Expr::Binary(_, a, b) => {
                a.gather(found);
                b.gather(found);
            }
            Expr::Call(_, parts) | Expr::Unknown(parts, _) => {
                parts.iter().for_each(|part| part.gather(found))
            }
        }
    }
}

struct Reader<'a> {
    tokens: &'a [Token<'a>],
    at: usize,
    sheet: usize,
    book: &'a Workbook,
    depth: usize,
}

impl Reader<'_> {
    fn operator(&mut self, wanted: &[&'static str]) -> Option<&'static str> {
        let Token::Operator(sign) = self.tokens.get(self.at)? else { return None };
        let found = wanted.iter().copied().find(|w| w == sign)?;
        self.at += 1;
        Some(found)
    }

    fn binary(&mut self, signs: &[&'static str], next: fn(&mut Self) -> Option<Expr>) -> Option<Expr> {
        let mut left = next(self)?;
        while let Some(sign) = self.operator(signs) {
            left = Expr::Binary(sign, Box::new(left), Box::new(next(self)?));
        }
        Some(left)
    }

    fn comparison(&mut self) -> Option<Expr> {
        self.binary(&["<=", ">=", "<>", "<", ">", "="], Reader::sum)
    }

    fn sum(&mut self) -> Option<Expr> {
        self.binary(&["+", "-"], Reader::product)
    }

    fn product(&mut self) -> Option<Expr> {
        self.binary(&["*", "/"], Reader::power)
    }

    fn power(&mut self) -> Option<Expr> {
        self.binary(&["^"], Reader::unary)
    }

    /// A sign in front binds more closely than a power, as in cells.
    fn unary(&mut self) -> Option<Expr> {
        match self.operator(&["-", "+"]) {
            Some("-") => Some(Expr::Negative(Box::new(self.unary()?))),
            Some(_) => self.unary(),
            None => self.percent(),
        }
    }

    fn percent(&mut self) -> Option<Expr> {
        let mut expr = self.operand()?;
        while self.operator(&["%"]).is_some() {
            expr = Expr::Binary("/", Box::new(expr), Box::new(Expr::Number(100.0)));
        }
        Some(expr)
    }

    fn operand(&mut self) -> Option<Expr> {
        if self.depth > DEEP {
            return None;
        }
        let token = self.tokens.get(self.at)?;
        self.at += 1;
        match token {
            Token::Number(text) => text.parse().ok().map(Expr::Number),
            Token::Logical(truth) => Some(Expr::Number(f64::from(u8::from(*truth)))),
            Token::Text(_) => Some(Expr::Text),
            Token::Ref(_) | Token::Name(..) => self.cells(token),
            Token::Operator("(") => self.within(|reader| reader.comparison()),
            Token::Function(name) => {
                let name = name.to_uppercase();
                if UNSETTLED.contains(&name.as_str()) {
                    return None;
                }
                self.operator(&["("])?;
                let mut parts = Vec::new();
                if self.operator(&[")"]).is_some() {
                    return Some(Expr::Call(name, parts));
                }
                self.depth += 1;
                loop {
                    parts.push(self.comparison()?);
                    match self.operator(&[",", ")"])? {
                        "," => {}
                        _ => break,
                    }
                }
                self.depth -= 1;
                Some(Expr::Call(name, parts))
            }
            _ => None,
        }
    }

    fn within(&mut self, inner: fn(&mut Self) -> Option<Expr>) -> Option<Expr> {
        self.depth += 1;
        let expr = inner(self)?;
        self.depth -= 1;
        self.operator(&[")"])?;
        Some(expr)
    }

    /// What a reference or a name stands for.
    fn cells(&self, token: &Token) -> Option<Expr> {
        match token {
            Token::Ref(reference) => Some(Expr::Cells(self.sheet_of(reference)?, reference.range())),
            Token::Name(sheets, word) => {
                let scope = match sheets {
                    Some(sheets) if sheets.is_external() => return None,
                    Some(sheets) if !sheets.first.is_empty() => self.book.sheet_index(&sheets.first),
                    _ => Some(self.sheet),
                };
                match self.book.resolve(self.book.find_name(word, scope)?) {
                    NameTarget::Cells(at) => Some(Expr::Cells(self.book.sheet_index(&at.sheet)?, at.range)),
                    NameTarget::Constant(Constant::Number(number)) => Some(Expr::Number(number)),
                    _ => None,
                }
            }
            _ => None,
        }
    }

    fn sheet_of(&self, reference: &Reference) -> Option<usize> {
        match &reference.sheet {
            None => Some(self.sheet),
            Some(Sheets { last: Some(_), .. }) => None,
            Some(sheets) if sheets.is_external() => None,
            Some(sheets) => self.book.sheet_index(&sheets.first),
        }
    }
}
