//! What formulas come to from the results beside them, and how much a result moves with each cell that it rests on.

use std::collections::{HashMap, HashSet};

use hence_core::sum;

use super::cells::Cells;
use super::expr::{At, Expr};
use crate::reading::Value;
use crate::references::{Cell, Range};

/// The most cells that are followed from one result.
const FOLLOWED: usize = 400_000;

/// The value of an expression over the results that the file holds; none where it is not understood.
pub(crate) fn value(expr: &Expr, cells: &Cells) -> Option<f64> {
    at(expr, cells, None).filter(|x| x.is_finite())
}

/// The same of one element of an array, by its place in it.
fn at(expr: &Expr, cells: &Cells, element: Option<usize>) -> Option<f64> {
    match expr {
        Expr::Number(number) => Some(*number),
        Expr::Text | Expr::Unknown(..) => None,
        Expr::Cells(sheet, range) => held(cells, (*sheet, nth(*range, element)?)),
        Expr::Negative(part) => at(part, cells, element).map(|x| -x),
        Expr::Binary(sign, a, b) => {
            let (a, b) = (at(a, cells, element)?, at(b, cells, element)?);
            let truth = |holds: bool| f64::from(u8::from(holds));
            Some(match *sign {
                "+" => a + b,
                "-" => a - b,
                "*" => a * b,
                "/" => a / b,
                "^" => a.powf(b),
                "<" => truth(a < b),
                ">" => truth(a > b),
                "<=" => truth(a <= b),
                ">=" => truth(a >= b),
                "=" => truth(a == b),
                _ => truth(a != b),
            })
        }
        Expr::Call(name, parts) => call(name, parts, cells, element),
    }
}

/// The number in a cell, blank as 0; none where it shows something else, or its sheet was not read.
fn held(cells: &Cells, at: At) -> Option<f64> {
    match cells.get(at) {
        Some(content) => content.number(),
        None => cells.knows(at.0).then_some(0.0),
    }
}

/// A cell of a range by its place in it; a single cell stands for every element.
fn nth(range: Range, element: Option<usize>) -> Option<Cell> {
    if range.is_single() {
        return Some(range.first);
    }
    let (k, width) = (element? as u64, u64::from(range.cols()));
    let cell = Cell::new(range.first.row + (k / width) as u32, range.first.col + (k % width) as u32);
    range.contains(cell).then_some(cell)
}

/// An element of a range that is multiplied: a text counts as 0 there.
fn factor(part: &Expr, cells: &Cells, k: usize) -> Option<f64> {
    match part {
        Expr::Cells(sheet, range) => {
            let cell = (*sheet, nth(*range, Some(k))?);
            let is_text = cells.get(cell).is_some_and(|content| matches!(content.value, Value::Text(_)));
            if is_text { Some(0.0) } else { held(cells, cell) }
        }
        _ => at(part, cells, Some(k)),
    }
}

/// How many elements an array has: that of its ranges, all alike; 1 without any.
fn length(expr: &Expr) -> Option<usize> {
    let mut sizes = expr.ranges().into_iter().map(|(_, range)| (range.rows(), range.cols()));
    let several = |size: &(u32, u32)| *size != (1, 1);
    let first = sizes.find(several);
    if sizes.filter(several).any(|size| Some(size) != first) {
        return None;
    }
    let count = first.map_or(1, |(rows, cols)| u64::from(rows) * u64::from(cols));
    usize::try_from(count).ok().filter(|count| *count <= FOLLOWED)
}

/// The numbers that a function adds up: texts and blanks of a range are passed over, an array is worked out.
fn numbers(parts: &[Expr], cells: &Cells) -> Option<Vec<f64>> {
    let mut found = Vec::new();
    for part in parts {
        match part {
            Expr::Cells(sheet, range) => {
                if !cells.knows(*sheet) {
                    return None;
                }
                for (_, content) in cells.inside(*sheet, *range) {
                    found.extend(content.number());
                }
            }
            _ => {
                for k in 0..length(part)? {
                    found.push(at(part, cells, Some(k))?);
                }
            }
        }
    }
    Some(found)
}

fn call(name: &str, parts: &[Expr], cells: &Cells, element: Option<usize>) -> Option<f64> {
    let one = |i: usize| parts.get(i).and_then(|part| at(part, cells, element));
    let fold = |f: fn(f64, f64) -> f64| numbers(parts, cells)?.into_iter().reduce(f);
    match name {
        "SUM" => Some(sum(&numbers(parts, cells)?)),
        "SUBTOTAL" if matches!(one(0), Some(9.0 | 109.0)) => Some(sum(&numbers(&parts[1..], cells)?)),
        "AVERAGE" => {
            numbers(parts, cells).filter(|all| !all.is_empty()).map(|all| sum(&all) / all.len() as f64)
        }
        "MIN" => fold(f64::min),
        "MAX" => fold(f64::max),
        "SUMPRODUCT" => {
            let count = parts.iter().map(length).collect::<Option<Vec<_>>>()?.into_iter().max()?;
            let product = |k| parts.iter().map(|part| factor(part, cells, k)).product::<Option<f64>>();
            Some(sum(&(0..count).map(product).collect::<Option<Vec<f64>>>()?))
        }
        "NPV" => {
            let rate = one(0)?;
            let terms = numbers(&parts[1..], cells)?;
            Some(sum(&terms.iter().zip(1..).map(|(x, n)| x / (1.0 + rate).powi(n)).collect::<Vec<_>>()))
        }
        "IF" => match one(0)? {
            0.0 => one(2),
            _ => one(1),
        },
        "AND" => Some(f64::from(u8::from(numbers(parts, cells)?.iter().all(|x| *x != 0.0)))),
        "OR" => Some(f64::from(u8::from(numbers(parts, cells)?.iter().any(|x| *x != 0.0)))),
        "NOT" => one(0).map(|x| f64::from(u8::from(x == 0.0))),
        "ABS" => one(0).map(f64::abs),
        "INT" => one(0).map(f64::floor),
        "EXP" => one(0).map(f64::exp),
        "LN" => one(0).map(f64::ln),
        "MOD" => Some(one(0)?.rem_euclid(one(1)?)),
        "ROUND" => {
            let power = 10f64.powi(one(1)? as i32);
            one(0).map(|x| (x * power).round() / power)
        }
        "N" | "IFERROR" => one(0),
        "MATCH" => {
            let exact = parts.len() > 2 && one(2)? == 0.0;
            found_at(one(0)?, parts.get(1)?, cells, exact).map(|k| (k + 1) as f64)
        }
        "INDEX" | "HLOOKUP" | "VLOOKUP" => held(cells, picked(name, parts, cells, element)?),
        _ => None,
    }
}

/// The cell that a look-up takes its result from.
fn picked(name: &str, parts: &[Expr], cells: &Cells, element: Option<usize>) -> Option<At> {
    let one = |i: usize| parts.get(i).and_then(|part| at(part, cells, element));
    let step = |x: f64, most: u32| (x >= 1.0 && x <= f64::from(most)).then_some(x as u32 - 1);
    let Some(Expr::Cells(sheet, range)) = parts.get(usize::from(name != "INDEX")) else { return None };
    let Range { first, last } = *range;
    let (down, along) = match name {
        "INDEX" if range.rows() == 1 && parts.len() == 2 => (0, step(one(1)?, range.cols())?),
        "INDEX" => {
            (step(one(1)?, range.rows())?, if parts.len() > 2 { step(one(2)?, range.cols())? } else { 0 })
        }
        _ => {
            let exact = parts.len() > 3 && one(3)? == 0.0;
            let across = name == "HLOOKUP";
            let end = if across { Cell::new(first.row, last.col) } else { Cell::new(last.row, first.col) };
            let keys = Expr::Cells(*sheet, Range::new(first, end));
            let k = u32::try_from(found_at(one(0)?, &keys, cells, exact)?).ok()?;
            if across { (step(one(2)?, range.rows())?, k) } else { (k, step(one(2)?, range.cols())?) }
        }
    };
    Some((*sheet, Cell::new(first.row + down, first.col + along)))
}

/// Where a number stands in a row or column of keys; unless exactly, the last key that is no larger.
fn found_at(wanted: f64, keys: &Expr, cells: &Cells, exact: bool) -> Option<usize> {
    let Expr::Cells(sheet, range) = keys else { return None };
    let mut keys = cells.inside(*sheet, *range).filter_map(|(cell, content)| Some((cell, content.number()?)));
    let cell = if exact {
        keys.find(|(_, key)| *key == wanted)?.0
    } else {
        keys.take_while(|(_, key)| *key <= wanted).last()?.0
    };
    Some((cell.row - range.first.row + cell.col - range.first.col) as usize)
}

/// How much one result moves with each cell that it rests on, directly or through others.
pub(crate) struct Slopes {
    /// The result's change for a change of 1 in the cell; NaN where it is not known.
    of: HashMap<At, f64>,
    /// The formulas that were gone through, each after all that it rests on.
    pub order: Vec<At>,
    /// Some formula may rest on cells that are not known.
    pub unsettled: bool,
}

impl Slopes {
    /// Follows a result back to the cells that it comes from, and no further than `ends`.
    pub(crate) fn of(result: At, cells: &Cells, ends: &HashSet<At>) -> Slopes {
        let (order, complete) = order(result, cells, ends);
        let mut slopes = Slopes { of: HashMap::from([(result, 1.0)]), order, unsettled: !complete };
        for formula in slopes.order.clone().into_iter().rev() {
            // What a branch not taken names is not reached.
            let Some(weight) = slopes.of.get(&formula).copied() else { continue };
            if let Some(expr) = cells.get(formula).and_then(|content| content.expr.as_ref()) {
                slopes.push(expr, weight, cells, None);
            }
        }
        slopes
    }

    /// The result's change for a change of 1 in the cell.
    pub(crate) fn at(&self, cell: At) -> f64 {
        self.of.get(&cell).copied().unwrap_or(0.0)
    }

    /// Whether anything leads from the cell to the result.
    pub(crate) fn reaches(&self, cell: At) -> bool {
        self.of.contains_key(&cell)
    }

    fn add(&mut self, cell: At, weight: f64) {
        *self.of.entry(cell).or_insert(0.0) += weight;
    }

    /// Whatever the expression names moves the result in a way that is not known.
    fn unknown(&mut self, expr: &Expr, cells: &Cells) {
        self.unsettled |= matches!(expr, Expr::Unknown(_, true));
        for (sheet, range) in expr.ranges() {
            let inside: Vec<Cell> = cells.inside(sheet, range).map(|(cell, _)| cell).collect();
            inside.into_iter().for_each(|cell| self.add((sheet, cell), f64::NAN));
        }
    }

    fn push(&mut self, expr: &Expr, weight: f64, cells: &Cells, element: Option<usize>) {
        let worth = |part: &Expr| at(part, cells, element);
        match expr {
            Expr::Number(_) | Expr::Text => {}
            Expr::Cells(sheet, range) => match nth(*range, element) {
                Some(cell) => self.add((*sheet, cell), weight),
                None => self.unknown(expr, cells),
            },
            Expr::Unknown(..) => self.unknown(expr, cells),
            Expr::Negative(part) => self.push(part, -weight, cells, element),
            Expr::Binary("+", a, b) => {
                self.push(a, weight, cells, element);
                self.push(b, weight, cells, element);
            }
            Expr::Binary("-", a, b) => {
                self.push(a, weight, cells, element);
                self.push(b, -weight, cells, element);
            }
            Expr::Binary(sign @ ("*" | "/" | "^"), a, b) => {
                let (x, y) = (worth(a).unwrap_or(f64::NAN), worth(b).unwrap_or(f64::NAN));
                let (by_a, by_b) = match *sign {
                    "*" => (y, x),
                    "/" => (1.0 / y, -x / (y * y)),
                    _ => (y * x.powf(y - 1.0), x.powf(y) * x.ln()),
                };
                self.push(a, weight * by_a, cells, element);
                self.push(b, weight * by_b, cells, element);
            }
            // A step, flat almost everywhere.
            Expr::Binary(..) => {}
            Expr::Call(name, parts) => self.push_call(name, parts, weight, cells, element, expr),
        }
    }

    fn push_call(
        &mut self,
        name: &str,
        parts: &[Expr],
        weight: f64,
        cells: &Cells,
        element: Option<usize>,
        whole: &Expr,
    ) {
        let worth = |i: usize| parts.get(i).and_then(|part| at(part, cells, element));
        match name {
            "SUM" => self.push_terms(parts, cells, |_| weight),
            "SUBTOTAL" if matches!(worth(0), Some(9.0 | 109.0)) => {
                self.push_terms(&parts[1..], cells, |_| weight);
            }
            "AVERAGE" => {
                let count = numbers(parts, cells).map_or(0, |all| all.len());
                self.push_terms(parts, cells, |_| weight / count as f64);
            }
            "NPV" if worth(0).is_some() => {
                let rate = worth(0).unwrap_or_default();
                self.push_terms(&parts[1..], cells, |n| weight / (1.0 + rate).powi(n as i32 + 1));
            }
            "SUMPRODUCT" => {
                let counts: Option<Vec<usize>> = parts.iter().map(length).collect();
                let Some(count) = counts.and_then(|all| all.into_iter().max()) else {
                    return self.unknown(whole, cells);
                };
                for k in 0..count {
                    let values: Vec<f64> =
                        parts.iter().map(|part| factor(part, cells, k).unwrap_or(f64::NAN)).collect();
                    for (i, part) in parts.iter().enumerate() {
                        let others = values.iter().enumerate().filter(|(j, _)| *j != i).map(|(_, x)| x);
                        self.push(part, weight * others.product::<f64>(), cells, Some(k));
                    }
                }
            }
            "IF" => match worth(0) {
                Some(0.0) => {
                    parts.get(2).into_iter().for_each(|part| self.push(part, weight, cells, element))
                }
                Some(_) => parts.get(1).into_iter().for_each(|part| self.push(part, weight, cells, element)),
                None => self.unknown(whole, cells),
            },
            "ROUND" | "N" | "IFERROR" => {
                parts.first().into_iter().for_each(|part| self.push(part, weight, cells, element));
            }
            "ABS" if worth(0).is_some() => {
                self.push(&parts[0], weight * worth(0).unwrap_or_default().signum(), cells, element);
            }
            "INDEX" | "HLOOKUP" | "VLOOKUP" => match picked(name, parts, cells, element) {
                Some(cell) => self.add(cell, weight),
                None => self.unknown(whole, cells),
            },
            // Where a number stands moves in steps.
            "MATCH" => {}
            "MIN" | "MAX" if parts.iter().all(|part| length(part) == Some(1)) => {
                let wanted = call(name, parts, cells, element);
                match parts.iter().find(|part| at(part, cells, element) == wanted && wanted.is_some()) {
                    Some(part) => self.push(part, weight, cells, element),
                    None => self.unknown(whole, cells),
                }
            }
            _ => self.unknown(whole, cells),
        }
    }

    /// The terms of a sum, by their number.
    fn push_terms(&mut self, parts: &[Expr], cells: &Cells, weight: impl Fn(usize) -> f64) {
        let mut n = 0;
        for part in parts {
            if let Expr::Cells(sheet, range) = part {
                let terms = cells.inside(*sheet, *range).filter(|(_, content)| content.number().is_some());
                let terms: Vec<Cell> = terms.map(|(cell, _)| cell).collect();
                for cell in terms {
                    self.add((*sheet, cell), weight(n));
                    n += 1;
                }
                continue;
            }
            let Some(count) = length(part) else { return self.unknown(part, cells) };
            for k in 0..count {
                self.push(part, weight(n), cells, Some(k));
                n += 1;
            }
        }
    }
}

/// The formulas that a result rests on, each after those that it rests on itself; false where there are too many.
fn order(result: At, cells: &Cells, ends: &HashSet<At>) -> (Vec<At>, bool) {
    let (mut order, mut seen) = (Vec::new(), HashSet::new());
    let mut open = vec![(result, false)];
    while let Some((cell, done)) = open.pop() {
        if done {
            order.push(cell);
            continue;
        }
        let Some(expr) = cells.get(cell).and_then(|content| content.expr.as_ref()) else { continue };
        if ends.contains(&cell) || !seen.insert(cell) {
            continue;
        }
        if seen.len() > FOLLOWED {
            return (order, false);
        }
        open.push((cell, true));
        for (sheet, range) in expr.ranges() {
            let formulas = cells.inside(sheet, range).filter(|(_, content)| content.expr.is_some());
            open.extend(
                formulas.map(|(inner, _)| ((sheet, inner), false)).filter(|(at, _)| !seen.contains(at)),
            );
        }
    }
    (order, true)
}
