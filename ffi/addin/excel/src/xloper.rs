//! The host's value type and the numbers around it, as its public interface documentation lays them down.

/// One value as the host knows it: 24 bytes of content, then what kind it is.
#[derive(Clone, Copy)]
#[repr(C)]
pub struct Xloper12 {
    /// The content; which field holds depends on `kind`.
    pub value: Value,
    /// One of [`kind`], with the bits that say who frees the content.
    pub kind: u32,
}

/// The content of a value.
#[derive(Clone, Copy)]
#[repr(C)]
pub union Value {
    /// Of a number.
    pub number: f64,
    /// Of a text: a count of UTF-16 units, then as many units, not ended by NUL.
    pub text: *const u16,
    /// Of a logical: 0 or 1.
    pub logical: i32,
    /// Of an error: one of [`error`].
    pub error: i32,
    /// Of an integer.
    pub integer: i32,
    /// Of an array.
    pub array: Array,
    /// The widest content, a macro's flow of control, which no function ever meets; it makes up the size.
    pub widest: [u64; 3],
}

/// An array of values, row by row.
#[derive(Clone, Copy)]
#[repr(C)]
pub struct Array {
    /// The first of them.
    pub cells: *const Xloper12,
    /// How many rows.
    pub rows: i32,
    /// How many columns.
    pub columns: i32,
}

const _: () = {
    assert!(size_of::<Xloper12>() == 32 && align_of::<Xloper12>() == 8);
    assert!(std::mem::offset_of!(Xloper12, kind) == 24);
    assert!(std::mem::offset_of!(Array, rows) == 8 && std::mem::offset_of!(Array, columns) == 12);
};

/// What a value is.
pub mod kind {
    /// A number.
    pub const NUMBER: u32 = 0x1;
    /// A text.
    pub const TEXT: u32 = 0x2;
    /// A logical.
    pub const LOGICAL: u32 = 0x4;
    /// An error value.
    pub const ERROR: u32 = 0x10;
    /// An array.
    pub const ARRAY: u32 = 0x40;
    /// An argument left out.
    pub const MISSING: u32 = 0x80;
    /// A blank cell.
    pub const BLANK: u32 = 0x100;
    /// An integer.
    pub const INTEGER: u32 = 0x800;
    /// The bits that name the kind.
    pub const MASK: u32 = 0x0fff;
    /// Set by the add-in on a result that the host hands back to `xlAutoFree12`.
    pub const ADDIN_FREES: u32 = 0x4000;
}

/// The host's numbers of error values.
pub mod error {
    /// `#NULL!`
    pub const NULL: i32 = 0;
    /// `#DIV/0!`
    pub const DIVISION: i32 = 7;
    /// `#VALUE!`
    pub const VALUE: i32 = 15;
    /// `#REF!`
    pub const REFERENCE: i32 = 23;
    /// `#NAME?`
    pub const NAME: i32 = 29;
    /// `#NUM!`
    pub const NUMBER: i32 = 36;
    /// `#N/A`
    pub const NOT_AVAILABLE: i32 = 42;
    /// `#GETTING_DATA`: the value is still to come.
    pub const GETTING_DATA: i32 = 43;
}

/// The most UTF-16 units that a cell's text may have.
pub const TEXT_MAX: usize = 32_767;
/// The most rows of a sheet.
pub const ROWS_MAX: usize = 1_048_576;
/// The most columns of a sheet.
pub const COLUMNS_MAX: usize = 16_384;

impl Xloper12 {
    const fn of(value: Value, kind: u32) -> Self {
        Xloper12 { value, kind }
    }

    /// A number.
    pub const fn number(number: f64) -> Self {
        Self::of(Value { number }, kind::NUMBER)
    }

    /// A text, which must outlive the value: a count, then as many units.
    pub const fn text(text: *const u16) -> Self {
        Self::of(Value { text }, kind::TEXT)
    }

    /// A logical.
    pub const fn logical(logical: bool) -> Self {
        Self::of(Value { logical: logical as i32 }, kind::LOGICAL)
    }

    /// An error value.
    pub const fn error(error: i32) -> Self {
        Self::of(Value { error }, kind::ERROR)
    }

    /// An integer.
    pub const fn integer(integer: i32) -> Self {
        Self::of(Value { integer }, kind::INTEGER)
    }

    /// An array, whose cells must outlive the value.
    pub const fn array(array: Array) -> Self {
        Self::of(Value { array }, kind::ARRAY)
    }

    /// An argument left out.
    pub const fn missing() -> Self {
        Self::of(Value { widest: [0; 3] }, kind::MISSING)
    }

    /// The kind alone, without the bits that say who frees the content.
    pub const fn base_kind(&self) -> u32 {
        self.kind & kind::MASK
    }
}
