//! Registers the worksheet functions with the host from the table of functions, and takes them back.

use hence::worksheet::{CATEGORY, Function};

use crate::host::{Host, function};
use crate::procedures::{PROCEDURES, Procedure};
use crate::xloper::{Xloper12, kind};

/// The most UTF-16 units of a text that the host takes in a registration.
const TEXT_MAX: usize = 255;

/// A text as the host reads it: a count, then as many UTF-16 units.
struct Counted(Vec<u16>);

impl Counted {
    fn new(text: &str) -> Self {
        let units: Vec<u16> = text.encode_utf16().take(TEXT_MAX).collect();
        Counted(std::iter::once(units.len() as u16).chain(units).collect())
    }

    fn value(&self) -> Xloper12 {
        Xloper12::text(self.0.as_ptr())
    }
}

/// What the host is told about one function, before and after the number that makes it a worksheet function.
fn texts(function: &Function, procedure: &Procedure) -> (Vec<String>, Vec<String>) {
    let names: Vec<&str> = function.arguments.iter().map(|argument| argument.name).collect();
    let before = vec![
        procedure.symbol.to_owned(),
        // A value for the result and one for each argument, and then: any thread may call.
        format!("{}$", "Q".repeat(1 + procedure.arguments.len())),
        function.full_name(),
        names.join(","),
    ];
    let mut after = vec![
        CATEGORY.to_owned(),
        // No shortcut, no help topic.
        String::new(),
        String::new(),
        function.help.to_owned(),
    ];
    after.extend(function.arguments.iter().map(|argument| argument.help.to_owned()));
    if let Some(last) = after.last_mut() {
        // The host cuts up to two characters off the last text when it shows it.
        last.push_str("  ");
    }
    (before, after)
}

/// The functions of the table, each with the procedure that answers it.
fn functions() -> impl Iterator<Item = (&'static Function, &'static Procedure)> {
    PROCEDURES.iter().filter_map(|procedure| Some((Function::find(procedure.function)?, procedure)))
}

/// Registers every function; gives the registrations' numbers, and none where the host refused one.
pub(crate) fn register(host: Host) -> Option<Vec<f64>> {
    let module = host.call(function::GET_NAME, &[])?;
    let numbers =
        functions().map(|(function, procedure)| register_one(host, &module, function, procedure)).collect();
    host.free(&module);
    numbers
}

fn register_one(host: Host, module: &Xloper12, function: &Function, procedure: &Procedure) -> Option<f64> {
    let (before, after) = texts(function, procedure);
    let texts: Vec<Counted> = before.iter().chain(&after).map(|text| Counted::new(text)).collect();
    let mut values: Vec<Xloper12> = texts.iter().map(Counted::value).collect();
    values.insert(0, *module);
    // Of the kinds of procedure, 1 is a worksheet function.
    values.insert(1 + before.len(), Xloper12::integer(1));
    let number = host.call(function::REGISTER, &values.iter().collect::<Vec<_>>())?;
    // SAFETY: every bit pattern is a number; it counts only where the kind says so.
    (number.base_kind() == kind::NUMBER).then_some(unsafe { number.value.number })
}

/// Takes the registrations back, and deletes the names that came with them.
pub(crate) fn unregister(host: Host, numbers: &[f64]) {
    for ((function, _), number) in functions().zip(numbers) {
        let name = Counted::new(&function.full_name());
        host.call(function::SET_NAME, &[&name.value()]);
        host.call(function::UNREGISTER, &[&Xloper12::number(*number)]);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use hence::worksheet::FUNCTIONS;
    use std::sync::Mutex;

    /// The length that the host takes, the padding of the last text included.
    #[test]
    fn no_text_is_cut() {
        for (function, procedure) in functions() {
            let (before, after) = texts(function, procedure);
            for text in before.iter().chain(&after) {
                assert!(text.encode_utf16().count() <= TEXT_MAX, "{}: {text}", function.name);
            }
        }
    }

    #[test]
    fn what_the_host_is_told() {
        let (function, procedure) = functions().find(|(f, _)| f.name == "RAMSEY").expect("RAMSEY");
        let (before, after) = texts(function, procedure);
        assert_eq!(before, ["hence_xll_ramsey", "QQQQQ$", "HENCE.RAMSEY", "rho,elasticity,growth,sd"]);
        assert_eq!(after[0], "hence");
        assert_eq!(after.len(), 4 + 4);
        assert!(after[7].ends_with("left out, 0  "), "{}", after[7]);
    }

    /// What the stand-in below was asked: the host's function, and how many arguments came.
    static CALLS: Mutex<Vec<(i32, i32)>> = Mutex::new(Vec::new());
    static MODULE: [u16; 2] = [1, b'x' as u16];

    unsafe extern "system" fn entry(
        function: i32,
        count: i32,
        _: *const *const Xloper12,
        result: *mut Xloper12,
    ) -> i32 {
        let mut calls = CALLS.lock().expect("no test panicked");
        calls.push((function, count));
        let answer = match function {
            function::GET_NAME => Xloper12::text(MODULE.as_ptr()),
            _ => Xloper12::number(calls.len() as f64),
        };
        if !result.is_null() {
            // SAFETY: the caller owns the result.
            unsafe { result.write(answer) };
        }
        0
    }

    #[test]
    fn each_function_is_registered_once_and_taken_back() {
        let host = Host::stand_in(entry);
        let numbers = register(host).expect("registered");
        assert_eq!(numbers.len(), FUNCTIONS.len());
        unregister(host, &numbers);
        let calls = std::mem::take(&mut *CALLS.lock().expect("no test panicked"));
        let registered = FUNCTIONS.iter().map(|f| (function::REGISTER, 10 + f.arguments.len() as i32));
        let taken_back = FUNCTIONS.iter().flat_map(|_| [(function::SET_NAME, 1), (function::UNREGISTER, 1)]);
        let expected: Vec<(i32, i32)> = std::iter::once((function::GET_NAME, 0))
            .chain(registered)
            .chain([(function::FREE, 1)])
            .chain(taken_back)
            .collect();
        assert_eq!(calls, expected);
    }

    unsafe extern "system" fn refusing(_: i32, _: i32, _: *const *const Xloper12, _: *mut Xloper12) -> i32 {
        32
    }

    #[test]
    fn a_host_that_refuses_is_no_success() {
        assert!(register(Host::stand_in(refusing)).is_none());
    }
}
