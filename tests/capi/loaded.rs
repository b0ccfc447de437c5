//! The release library loaded as a program loads it, for comparison with the library in Rust.

use std::ffi::{CStr, CString, c_char, c_void};
use std::ptr::null_mut;
use std::sync::OnceLock;

use hence::{HENCE_OK, hence_basis, hence_error, hence_growth, hence_spread};

use crate::library;

/// A function of the shared library by its C name.
fn symbol(name: &CStr) -> *mut c_void {
    static HANDLE: OnceLock<usize> = OnceLock::new();
    let handle = HANDLE.get_or_init(|| {
        let path = library::folder().join("libhence.so");
        let path = CString::new(path.to_str().expect("a path in UTF-8")).expect("no NUL");
        // SAFETY: a NUL-ended path; loading the library runs no code of its own.
        let handle = unsafe { libc::dlopen(path.as_ptr(), libc::RTLD_NOW | libc::RTLD_LOCAL) };
        assert!(!handle.is_null(), "{path:?} can be loaded");
        handle as usize
    });
    // SAFETY: a live handle and a NUL-ended name.
    let found = unsafe { libc::dlsym(*handle as *mut c_void, name.as_ptr()) };
    assert!(!found.is_null(), "{name:?} is exported");
    found
}

/// Calls a function of the shared library; the types are those of the header, which `symbols` and `header` hold to the
/// source.
macro_rules! c {
    ($name:ident($($argument:expr => $type:ty),* $(,)?)) => {{
        let name = CString::new(stringify!($name)).expect("no NUL");
        // SAFETY: the exported function of that name has these parameters.
        let function: unsafe extern "C" fn($($type),*) -> i32 = unsafe { std::mem::transmute(symbol(&name)) };
        // SAFETY: handles are live, arrays as long as said.
        let status = unsafe { function($($argument),*) };
        assert_eq!(status, HENCE_OK, "{}", stringify!($name));
    }};
}

/// A basis of the shared library.
pub struct Basis(*mut hence_basis);

// SAFETY: a basis does not change, and the interface allows any number of threads.
unsafe impl Send for Basis {}
// SAFETY: as above.
unsafe impl Sync for Basis {}

type Error = *mut hence_error;
type Handle = *const hence_basis;

impl Basis {
    pub fn parse(line: &str) -> Self {
        Basis::parse_at(line, 0, 0.0)
    }

    pub fn parse_at(line: &str, base_year: i32, length: f64) -> Self {
        let line = CString::new(line).expect("no NUL");
        let mut basis = null_mut();
        c!(hence_basis_parse_at(line.as_ptr() => *const c_char, base_year => i32, length => f64,
            &mut basis => *mut *mut hence_basis, null_mut() => Error));
        Basis(basis)
    }

    pub fn factors(&self, offsets: &[f64]) -> Vec<f64> {
        let mut out = vec![f64::NAN; offsets.len()];
        c!(hence_factors(self.0 => Handle, offsets.as_ptr() => *const f64, offsets.len() => usize,
            out.as_mut_ptr() => *mut f64, null_mut() => Error));
        out
    }

    pub fn forward_rates(&self, offsets: &[f64]) -> Vec<f64> {
        let mut out = vec![f64::NAN; offsets.len()];
        c!(hence_forward_rates(self.0 => Handle, offsets.as_ptr() => *const f64, offsets.len() => usize,
            out.as_mut_ptr() => *mut f64, null_mut() => Error));
        out
    }

    pub fn mean_rates(&self, offsets: &[f64]) -> Vec<f64> {
        let mut out = vec![f64::NAN; offsets.len()];
        c!(hence_mean_rates(self.0 => Handle, offsets.as_ptr() => *const f64, offsets.len() => usize,
            out.as_mut_ptr() => *mut f64, null_mut() => Error));
        out
    }

    pub fn instantaneous_rates(&self, offsets: &[f64]) -> Vec<f64> {
        let mut out = vec![f64::NAN; offsets.len()];
        c!(hence_instantaneous_rates(self.0 => Handle, offsets.as_ptr() => *const f64, offsets.len() => usize,
            out.as_mut_ptr() => *mut f64, null_mut() => Error));
        out
    }

    pub fn switching_values(
        &self,
        parameter: i32,
        offsets: &[f64],
        flows: &[f64],
        interval: (f64, f64),
    ) -> Vec<f64> {
        let mut values = vec![f64::NAN; 2 * flows.len()];
        let mut count = 0;
        c!(hence_switching_values(self.0 => Handle, parameter => i32, offsets.as_ptr() => *const f64,
            flows.as_ptr() => *const f64, flows.len() => usize, interval.0 => f64, interval.1 => f64,
            values.as_mut_ptr() => *mut f64, values.len() => usize, &mut count => *mut usize, null_mut() => Error));
        values.truncate(count);
        values
    }

    pub fn present_value(&self, offsets: &[f64], flows: &[f64]) -> f64 {
        let mut out = f64::NAN;
        c!(hence_present_value(self.0 => Handle, offsets.as_ptr() => *const f64, flows.as_ptr() => *const f64,
            flows.len() => usize, &mut out => *mut f64, null_mut() => Error));
        out
    }

    pub fn present_values(&self, offsets: &[f64], flows: &[f64]) -> Vec<f64> {
        let rows = flows.len() / offsets.len();
        let mut out = vec![f64::NAN; rows];
        c!(hence_present_values(self.0 => Handle, offsets.as_ptr() => *const f64, flows.as_ptr() => *const f64,
            rows => usize, offsets.len() => usize, out.as_mut_ptr() => *mut f64, null_mut() => Error));
        out
    }

    pub fn annual_equivalent(&self, value: f64, years: i32) -> f64 {
        let mut out = f64::NAN;
        c!(hence_annual_equivalent(self.0 => Handle, value => f64, years => i32, &mut out => *mut f64,
            null_mut() => Error));
        out
    }
}

impl Drop for Basis {
    fn drop(&mut self) {
        // SAFETY: the exported function takes a handle and gives nothing back.
        let free: unsafe extern "C" fn(*mut hence_basis) =
            unsafe { std::mem::transmute(symbol(c"hence_basis_free")) };
        // SAFETY: made by this library and freed once.
        unsafe { free(self.0) };
    }
}

pub fn irr_all(offsets: &[f64], flows: &[f64], interval: (f64, f64)) -> Vec<f64> {
    let mut rates = vec![f64::NAN; flows.len()];
    let mut count = 0;
    c!(hence_irr_all(offsets.as_ptr() => *const f64, flows.as_ptr() => *const f64, flows.len() => usize,
        interval.0 => f64, interval.1 => f64, rates.as_mut_ptr() => *mut f64, rates.len() => usize,
        &mut count => *mut usize, null_mut() => Error));
    rates.truncate(count);
    rates
}

pub fn offsets_from_years(years: &[f64], base: f64, timing: &str) -> Vec<f64> {
    let timing = CString::new(timing).expect("no NUL");
    let mut out = vec![f64::NAN; years.len()];
    c!(hence_offsets_from_years(years.as_ptr() => *const f64, years.len() => usize, base => f64,
        timing.as_ptr() => *const c_char, out.as_mut_ptr() => *mut f64, null_mut() => Error));
    out
}

pub fn ramsey_rate(rho: f64, eta: f64, g: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_ramsey_rate(rho => f64, eta => f64, g => f64, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn ramsey_rate_uncertain(rho: f64, eta: f64, g: f64, sd: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_ramsey_rate_uncertain(rho => f64, eta => f64, g => f64, sd => f64, &mut out => *mut f64,
        null_mut() => Error));
    out
}

pub fn elasticity_from_taxes(marginal: f64, average: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_elasticity_from_taxes(marginal => f64, average => f64, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn equity_weight(income: f64, reference: f64, elasticity: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_equity_weight(income => f64, reference => f64, elasticity => f64, &mut out => *mut f64,
        null_mut() => Error));
    out
}

pub fn real_rate(nominal: f64, inflation: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_real_rate(nominal => f64, inflation => f64, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn elasticity_from_brackets(marginal: &[f64], average: &[f64], weights: &[f64]) -> f64 {
    let mut out = f64::NAN;
    c!(hence_elasticity_from_brackets(marginal.as_ptr() => *const f64, average.as_ptr() => *const f64,
        weights.as_ptr() => *const f64, weights.len() => usize, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn hazard_from_probability(probability: f64, compounding: i32) -> f64 {
    let mut out = f64::NAN;
    c!(hence_hazard_from_probability(probability => f64, compounding => i32, &mut out => *mut f64,
        null_mut() => Error));
    out
}

pub fn hazard_from_waiting_time(years: f64, compounding: i32) -> f64 {
    let mut out = f64::NAN;
    c!(hence_hazard_from_waiting_time(years => f64, compounding => i32, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn growth_estimate(consumption: &[f64], years: Option<&[i32]>) -> hence_growth {
    // SAFETY: a struct of numbers, for which 0 is a value.
    let mut growth: hence_growth = unsafe { std::mem::zeroed() };
    growth.struct_size = size_of::<hence_growth>() as u32;
    let years = years.map_or(std::ptr::null(), <[i32]>::as_ptr);
    c!(hence_growth_estimate(consumption.as_ptr() => *const f64, years => *const i32, consumption.len() => usize,
        &mut growth => *mut hence_growth, null_mut() => Error));
    growth
}

pub fn utility(consumption: f64, elasticity: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_utility(consumption => f64, elasticity => f64, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn marginal_utility(consumption: f64, elasticity: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_marginal_utility(consumption => f64, elasticity => f64, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn welfare(consumption: &[f64], offsets: &[f64], rho: f64, elasticity: f64, compounding: i32) -> f64 {
    let mut out = f64::NAN;
    c!(hence_welfare(consumption.as_ptr() => *const f64, offsets.as_ptr() => *const f64, offsets.len() => usize,
        rho => f64, elasticity => f64, compounding => i32, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn welfare_factors(
    consumption: &[f64],
    offsets: &[f64],
    base: f64,
    rho: f64,
    elasticity: f64,
    compounding: i32,
) -> Vec<f64> {
    let mut out = vec![f64::NAN; offsets.len()];
    c!(hence_welfare_factors(consumption.as_ptr() => *const f64, offsets.as_ptr() => *const f64,
        offsets.len() => usize, base => f64, rho => f64, elasticity => f64, compounding => i32,
        out.as_mut_ptr() => *mut f64, null_mut() => Error));
    out
}

/// Amount, consumption at the two dates, years between them.
pub fn compensation(shift: [f64; 4], rho: f64, elasticity: f64, compounding: i32) -> f64 {
    let mut out = f64::NAN;
    let [amount, now, later, years] = shift;
    c!(hence_compensation(amount => f64, now => f64, later => f64, years => f64, rho => f64, elasticity => f64,
        compounding => i32, &mut out => *mut f64, null_mut() => Error));
    out
}

/// Flows, consumption and factors; the consumption at the base.
pub fn equivalent_variation(of: [&[f64]; 3], base: f64, elasticity: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_equivalent_variation(of[0].as_ptr() => *const f64, of[1].as_ptr() => *const f64,
        of[2].as_ptr() => *const f64, of[0].len() => usize, base => f64, elasticity => f64, &mut out => *mut f64,
        null_mut() => Error));
    out
}

/// Flows, consumption and factors; the consumption and the flow at the base.
pub fn compensating_variation(of: [&[f64]; 3], base: f64, base_flow: f64, elasticity: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_compensating_variation(of[0].as_ptr() => *const f64, of[1].as_ptr() => *const f64,
        of[2].as_ptr() => *const f64, of[0].len() => usize, base => f64, base_flow => f64, elasticity => f64,
        &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn equally_distributed_equivalent(consumption: &[f64], shares: &[f64], elasticity: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_equally_distributed_equivalent(consumption.as_ptr() => *const f64, shares.as_ptr() => *const f64,
        shares.len() => usize, elasticity => f64, &mut out => *mut f64, null_mut() => Error));
    out
}

pub fn switching_multiplier(net: f64, stream: f64) -> f64 {
    let mut out = f64::NAN;
    c!(hence_switching_multiplier(net => f64, stream => f64, &mut out => *mut f64, null_mut() => Error));
    out
}

/// Preference, hazard, elasticity and growth; a row of flows an option. The rates, and the values row by row.
pub fn draws_value(
    texts: [&str; 4],
    offsets: &[f64],
    flows: &[f64],
    (count, seed, threads): (usize, u64, u32),
) -> (Vec<f64>, Vec<f64>) {
    let texts = texts.map(|text| CString::new(text).expect("no NUL"));
    let rows = flows.len() / offsets.len();
    let (mut rates, mut values) = (vec![f64::NAN; count], vec![f64::NAN; rows * count]);
    c!(hence_draws_value(texts[0].as_ptr() => *const c_char, texts[1].as_ptr() => *const c_char,
        texts[2].as_ptr() => *const c_char, texts[3].as_ptr() => *const c_char, offsets.as_ptr() => *const f64,
        flows.as_ptr() => *const f64, rows => usize, offsets.len() => usize, count => usize, seed => u64,
        threads => u32, rates.as_mut_ptr() => *mut f64, values.as_mut_ptr() => *mut f64, null_mut() => Error));
    (rates, values)
}

pub fn draws_spread(values: &[f64], percentiles: &[f64]) -> (Vec<f64>, hence_spread) {
    // SAFETY: a struct of numbers, for which 0 is a value.
    let mut spread: hence_spread = unsafe { std::mem::zeroed() };
    spread.struct_size = size_of::<hence_spread>() as u32;
    let mut found = vec![f64::NAN; percentiles.len()];
    c!(hence_draws_spread(values.as_ptr() => *const f64, values.len() => usize, percentiles.as_ptr() => *const f64,
        percentiles.len() => usize, found.as_mut_ptr() => *mut f64, &mut spread => *mut hence_spread,
        null_mut() => Error));
    (found, spread)
}

/// First alone and first with others, a share an option.
pub fn draws_rank(values: &[f64], rows: usize) -> (Vec<f64>, Vec<f64>) {
    let (mut alone, mut tied) = (vec![f64::NAN; rows], vec![f64::NAN; rows]);
    c!(hence_draws_rank(values.as_ptr() => *const f64, rows => usize, values.len() / rows => usize,
        alone.as_mut_ptr() => *mut f64, tied.as_mut_ptr() => *mut f64, null_mut() => Error));
    (alone, tied)
}
