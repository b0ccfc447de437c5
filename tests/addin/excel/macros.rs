//! hence.bas, the C interface for macros: made from include/hence.h and compared with what is held.
//!
//! There is no interpreter of Excel's macros here. What can be tried is tried in LibreOffice Basic, which reads most of
//! the language: that the module compiles, and that its functions for texts do what they say (`basic.rs`).

use super::header::{Item, Named, items};
use crate::root;

/// Names that the language keeps for itself, and what stands instead.
const INSTEAD: &[(&str, &str)] = &[("base", "origin"), ("error", "failure"), ("function", "function_name")];

/// Words of the language that cannot be names; INSTEAD must have another for each that the header uses.
const RESERVED: &str = "abs addressof and any array as attribute base boolean byref byte byval call case cbool cbyte ccur \
    cdate cdbl cdec cint circle clng clnglng clngptr close const csng cstr currency cvar cverr date debug decimal declare \
    defbool defbyte defcur defdate defdbl defint deflng deflnglng deflngptr defobj defsng defstr defvar dim do double \
    doevents each else elseif empty end endif enum eqv erase error event exit false fix for friend function get global \
    gosub goto if imp implements in input inputb int integer is lbound len lenb let like lock long longlong longptr loop \
    lset me mod name new next not nothing null object on open option optional or paramarray preserve print private pset \
    public put raiseevent redim rem resume return rset scale seek select set sgn shared single spc static step stop \
    string sub tab then to true type typeof ubound unlock until variant wend while with withevents write xor";

/// The name in a macro.
fn name_of(name: &str) -> &str {
    if let Some((_, instead)) = INSTEAD.iter().find(|(taken, _)| *taken == name) {
        return instead;
    }
    assert!(
        !RESERVED.split_whitespace().any(|word| word.eq_ignore_ascii_case(name)),
        "{name} is taken: give another"
    );
    name
}

/// The type of a value with its size and alignment in C.
fn scalar(kind: &str) -> Option<(&'static str, usize)> {
    Some(match kind {
        "int32_t" | "uint32_t" => ("Long", 4),
        "int64_t" | "uint64_t" => ("LongLong", 8),
        "size_t" => ("LongPtr", 8),
        "double" => ("Double", 8),
        "uint8_t" | "char" => ("Byte", 1),
        _ => return None,
    })
}

/// A parameter: arrays and outputs by reference to their first element, texts and handles as pointers.
fn parameter(parameter: &Named, items: &[Item]) -> String {
    let name = name_of(&parameter.name);
    assert_eq!(parameter.count, None, "an array as a parameter");
    if let Some((kind, _)) = scalar(&parameter.kind) {
        return format!("ByVal {name} As {kind}");
    }
    let kind = parameter.kind.strip_prefix("const ").unwrap_or(&parameter.kind);
    let (base, stars) = kind.split_once(' ').unwrap_or_else(|| panic!("not understood: {}", parameter.kind));
    let opaque = items.iter().any(|item| matches!(item, Item::Opaque { name } if name == base));
    let declared = items.iter().any(|item| matches!(item, Item::Struct { name, .. } if name == base));
    match stars {
        "*" if base == "char" || opaque => format!("ByVal {name} As LongPtr"),
        "*" if declared => format!("ByRef {name} As {base}"),
        "*" => format!("ByRef {name} As {}", scalar(base).unwrap_or_else(|| panic!("{base} is no type")).0),
        "**" if opaque => format!("ByRef {name} As LongPtr"),
        "*const *" if declared || base == "char" => format!("ByRef {name} As LongPtr"),
        _ => panic!("not understood: {}", parameter.kind),
    }
}

fn function(name: &str, result: &str, parameters: &[Named], items: &[Item]) -> String {
    let parameters: Vec<String> = parameters.iter().map(|given| parameter(given, items)).collect();
    let (word, end) = match result {
        "void" => ("Sub", String::new()),
        "const char *" => ("Function", " As LongPtr".to_owned()),
        _ => {
            let (kind, _) = scalar(result).unwrap_or_else(|| panic!("{result} is no result"));
            ("Function", format!(" As {kind}"))
        }
    };
    // Macros know no capitals: a function may not be called as a constant.
    let taken =
        |item: &Item| matches!(item, Item::Constant { name: other, .. } if other.eq_ignore_ascii_case(name));
    let called = match items.iter().any(taken) {
        true => format!("{name}_of_library Lib \"hence64.xll\" Alias \"{name}\""),
        false => format!("{name} Lib \"hence64.xll\""),
    };
    let head = format!("Public Declare PtrSafe {word} {called} (");
    let joined = parameters.join(", ");
    if head.len() + joined.len() + end.len() < 110 {
        return format!("{head}{joined}){end}\n");
    }
    format!("{head} _\n    {}){end}\n", parameters.join(", _\n    "))
}

/// The members with the padding of C written out. Macros align a member of eight bytes to four or to eight, depending on
/// the version; with the padding written out both give C's layout, which is asserted.
fn structure(name: &str, members: &[Named]) -> String {
    let mut text = format!("Public Type {name}\n");
    let (mut offset, mut paddings, mut widest) = (0, 0, 1);
    let mut pad = |offset: &mut usize, align: usize, text: &mut String| {
        let missing = offset.next_multiple_of(align) - *offset;
        if missing > 0 {
            assert_eq!(missing, 4, "{name}: padding that is no Long");
            paddings += 1;
            text.push_str(&format!("    padding_{paddings} As Long\n"));
        }
        *offset += missing;
        assert_eq!((*offset % align, *offset % align.min(4)), (0, 0), "{name}");
    };
    for member in members {
        let (kind, size) = match member.kind.ends_with('*') {
            true => ("LongPtr", 8),
            false => scalar(&member.kind).unwrap_or_else(|| panic!("{} is no type of a member", member.kind)),
        };
        pad(&mut offset, size, &mut text);
        let count = member.count.map_or(String::new(), |count| format!("(0 To {})", count - 1));
        text.push_str(&format!("    {}{count} As {kind}\n", name_of(&member.name)));
        offset += size * member.count.unwrap_or(1);
        widest = widest.max(size);
    }
    pad(&mut offset, widest, &mut text);
    text + "End Type\n"
}

/// A comment, broken at blanks.
fn comment(about: &str) -> String {
    let mut lines = vec![String::from("'")];
    for word in about.split_whitespace() {
        if lines.last().is_some_and(|line| line.len() + word.len() > 108) {
            lines.push("'".into());
        }
        let line = lines.last_mut().expect("there is a line");
        line.push_str(&format!(" {word}"));
    }
    lines.join("\n") + "\n"
}

const BEFORE: &str = include_str!("macros-before.bas");
const AFTER: &str = include_str!("macros-after.bas");

/// The whole module, lines ended as the editor of macros needs them.
pub fn module() -> String {
    let header = std::fs::read_to_string(root().join("include/hence.h")).expect("include/hence.h");
    let items = items(&header);
    let mut text = BEFORE.to_owned();
    for item in &items {
        text.push_str(&match item {
            Item::Constant { name, value, about } => {
                format!("{}Public Const {name} As Long = {value}\n", comment(about))
            }
            Item::Struct { name, members, about } => {
                format!("\n{}{}", comment(about), structure(name, members))
            }
            Item::Function { name, result, parameters, about } => {
                format!("\n{}{}", comment(about), function(name, result, parameters, &items))
            }
            Item::Opaque { .. } => continue,
        });
    }
    (text + AFTER).replace('\n', "\r\n")
}

/// `HENCE_ACCEPT=1` writes the new module and fails on purpose, so that an accepting run is never taken for a passing
/// one.
#[test]
fn the_declarations_for_macros_are_those_of_the_header() {
    let path = root().join("ffi/addin/excel/hence.bas");
    let held = std::fs::read_to_string(&path).unwrap_or_default();
    let made = module();
    assert!(made.is_ascii(), "the editor of macros reads no UTF-8");
    if std::env::var_os("HENCE_ACCEPT").is_some() {
        std::fs::write(&path, &made).expect("hence.bas is writable");
        panic!("hence.bas was accepted: look at the difference, then run again without HENCE_ACCEPT");
    }
    assert!(held == made, "hence.bas differs from include/hence.h: run once with HENCE_ACCEPT=1 and look");
}

/// Every function of the header is declared, and the structs have the layout of the library.
#[test]
fn the_declarations_are_complete_and_laid_out_alike() {
    let module = module();
    let header = std::fs::read_to_string(root().join("include/hence.h")).expect("include/hence.h");
    for name in super::declared(&header) {
        let declared =
            [format!("Function {name} Lib"), format!("Sub {name} Lib"), format!("Alias \"{name}\"")];
        assert_eq!(
            declared.iter().map(|text| module.matches(text.as_str()).count()).sum::<usize>(),
            1,
            "{name}"
        );
    }
    let size = |name: &str| {
        let (_, rest) = module.split_once(&format!("Public Type {name}\r\n")).expect("the type");
        let (members, _) = rest.split_once("End Type").expect("its end");
        members.lines().filter(|line| !line.trim().is_empty()).map(bytes).sum::<usize>()
    };
    assert_eq!(size("hence_error"), size_of::<hence::hence_error>());
    assert_eq!(size("hence_range"), size_of::<hence::hence_range>());
    assert_eq!(size("hence_growth"), size_of::<hence::hence_growth>());
    assert_eq!(size("hence_spread"), size_of::<hence::hence_spread>());
    assert!(module.contains("argument As Long\r\n    padding_1 As Long\r\n    index As LongLong\r\n"));
    assert_eq!(std::mem::offset_of!(hence::hence_error, index), 16);
}

/// No name is declared twice, capitals apart.
#[test]
fn no_name_is_taken_twice() {
    let module = module().to_lowercase();
    let words = ["public const ", "public type ", "function ", "sub "];
    let mut names: Vec<&str> = module
        .lines()
        .filter(|line| line.starts_with("public "))
        .filter_map(|line| words.iter().find_map(|word| line.split_once(word)))
        .map(|(_, rest)| rest.split([' ', '(', '\r']).next().expect("a name"))
        .collect();
    assert!(names.contains(&"hence_ok") && names.contains(&"hence_factors") && names.contains(&"hencetext"));
    let count = names.len();
    names.sort_unstable();
    names.dedup();
    assert_eq!(names.len(), count);
}

/// The bytes of a member as declared: `message(0 To 255) As Byte`.
fn bytes(line: &str) -> usize {
    let (name, kind) = line.trim().split_once(" As ").expect("a member");
    let count = match name.split_once("(0 To ") {
        Some((_, last)) => last.trim_end_matches(')').parse::<usize>().expect("a number") + 1,
        None => 1,
    };
    count
        * match kind {
            "Byte" => 1,
            "Long" => 4,
            "LongLong" | "LongPtr" | "Double" => 8,
            other => panic!("{other} is not known"),
        }
}
