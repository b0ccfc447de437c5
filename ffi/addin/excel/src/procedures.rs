//! The exported procedures, one a worksheet function, each guarded against panics.

use std::panic::{AssertUnwindSafe, catch_unwind};

use hence::worksheet::{self, Function, Range};

use crate::answer::Answer;
use crate::arguments::argument;
use crate::xloper::{Xloper12, error};

/// An exported procedure.
pub(crate) struct Procedure {
    /// The name under which the library exports it.
    pub symbol: &'static str,
    /// The worksheet function, without `HENCE.`.
    pub function: &'static str,
    /// Its arguments in order.
    pub arguments: &'static [&'static str],
}

macro_rules! procedures {
    ($($symbol:ident: $function:literal ($($argument:ident),+);)+) => {
        $(
            /// A worksheet function, called by the host. Threads: any.
            ///
            /// # Safety
            /// The arguments are values of the host's that stay as they are during the call.
            #[unsafe(no_mangle)]
            pub unsafe extern "system" fn $symbol($($argument: *const Xloper12),+) -> *mut Xloper12 {
                // SAFETY: the caller's contract, passed on.
                unsafe { answer($function, &[$($argument),+]) }
            }
        )+

        /// All of them, in the order of the table of functions.
        pub(crate) const PROCEDURES: &[Procedure] = &[$(Procedure {
            symbol: stringify!($symbol),
            function: $function,
            arguments: &[$(stringify!($argument)),+],
        }),+];
    };
}

procedures! {
    hence_xll_factor: "FACTOR" (basis, offset, base, length);
    hence_xll_rate: "RATE" (basis, year, base, length);
    hence_xll_meanrate: "MEANRATE" (basis, offset, base, length);
    hence_xll_instant: "INSTANT" (basis, offset, base, length);
    hence_xll_value: "VALUE" (basis, years, flows, base, timing);
    hence_xll_annual: "ANNUAL" (basis, value, years, base, length);
    hence_xll_irr: "IRR" (years, flows, lowest, highest);
    hence_xll_switch: "SWITCH" (basis, parameter, years, flows, base, timing, lowest, highest);
    hence_xll_multiplier: "MULTIPLIER" (net, stream);
    hence_xll_draws: "DRAWS" (
        preference, elasticity, growth, years, flows, base, timing, hazard, percentiles, draws, seed
    );
    hence_xll_ramsey: "RAMSEY" (rho, elasticity, growth, sd);
    hence_xll_elasticity: "ELASTICITY" (marginal, average);
    hence_xll_brackets: "BRACKETS" (marginal, average, weights);
    hence_xll_hazard: "HAZARD" (probability, compounding);
    hence_xll_waiting: "WAITING" (years, compounding);
    hence_xll_growth: "GROWTH" (consumption, years);
    hence_xll_utility: "UTILITY" (consumption, elasticity);
    hence_xll_marginal: "MARGINAL" (consumption, elasticity);
    hence_xll_welfare: "WELFARE" (consumption, offsets, rho, elasticity, compounding);
    hence_xll_compensation: "COMPENSATION" (amount, now, later, years, rho, elasticity, compounding);
    hence_xll_exact: "EXACT" (flows, consumption, factors, base, elasticity);
    hence_xll_weight: "WEIGHT" (income, reference, elasticity);
    hence_xll_equivalent: "EQUIVALENT" (consumption, shares, elasticity);
    hence_xll_real: "REAL" (nominal, inflation);
    hence_xll_schedule: "SCHEDULE" (id);
    hence_xll_explain: "EXPLAIN" (basis, years, flows, base, timing);
    hence_xll_why: "WHY" (
        function, first, second, third, fourth, fifth, sixth, seventh, eighth, ninth, tenth, eleventh
    );
}

/// Answers one call. A panic, which would be a fault of the library, is `#VALUE!`.
///
/// # Safety
/// As for the procedures.
unsafe fn answer(function: &str, arguments: &[*const Xloper12]) -> *mut Xloper12 {
    let answered = catch_unwind(AssertUnwindSafe(|| {
        // SAFETY: the caller's contract, passed on.
        let arguments: Vec<Option<Range<'_>>> =
            arguments.iter().map(|pointer| unsafe { argument(*pointer) }).collect();
        match Function::find(function) {
            Some(function) => Answer::new(&worksheet::call(function, &arguments)),
            None => Answer::error(error::NAME),
        }
    }));
    answered.unwrap_or_else(|_| Answer::error(error::VALUE)).hand_over()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::answer::{COUNTING, free, live};
    use crate::xloper::kind;
    use hence::worksheet::FUNCTIONS;

    #[test]
    fn the_procedures_are_those_of_the_table() {
        assert_eq!(PROCEDURES.len(), FUNCTIONS.len());
        for (procedure, function) in PROCEDURES.iter().zip(FUNCTIONS) {
            assert_eq!(procedure.function, function.name);
            assert_eq!(procedure.symbol, format!("hence_xll_{}", function.name.to_lowercase()));
            let names: Vec<&str> = function.arguments.iter().map(|argument| argument.name).collect();
            assert_eq!(procedure.arguments, names, "{}", function.name);
        }
    }

    #[test]
    fn a_call_gives_an_answer_to_free() {
        let _one = COUNTING.lock().expect("no test panicked");
        let nothing = Xloper12::missing();
        // SAFETY: the argument lives during the call; the answer is freed once.
        unsafe {
            let answer = hence_xll_schedule(&nothing);
            assert_eq!((*answer).kind, kind::ERROR | kind::ADDIN_FREES);
            assert_eq!((*answer).value.error, error::VALUE);
            assert_eq!(live(), 1);
            free(answer);
        }
        assert_eq!(live(), 0);
    }
}
