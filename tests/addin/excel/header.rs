//! Reads include/hence.h strictly: what is not understood fails, so that nothing of the header is passed over.

/// A type and a name, of a parameter or a member: `const double *`, `offsets`.
#[derive(Debug, PartialEq)]
pub struct Named {
    pub kind: String,
    pub name: String,
    /// How many, where it is an array.
    pub count: Option<usize>,
}

/// One declaration, with the first paragraph of its comment.
#[derive(Debug, PartialEq)]
pub enum Item {
    Constant { name: String, value: i64, about: String },
    Opaque { name: String },
    Struct { name: String, members: Vec<Named>, about: String },
    Function { name: String, result: String, parameters: Vec<Named>, about: String },
}

/// The declarations of a header in their order.
pub fn items(header: &str) -> Vec<Item> {
    let mut items = Vec::new();
    let (mut about, mut statement) = (Vec::new(), String::new());
    let mut only_cpp = false;
    for line in without_first_comment(header).lines().map(str::trim) {
        match line.split_whitespace().next().unwrap_or("") {
            "#ifdef" => {
                assert_eq!(line, "#ifdef __cplusplus");
                only_cpp = true;
            }
            "#endif" => only_cpp = false,
            _ if only_cpp => {}
            "#ifndef" => assert_eq!(line, "#ifndef HENCE_H"),
            "#include" => {
                assert!(["<stddef.h>", "<stdint.h>"].iter().any(|file| line.ends_with(file)), "{line}")
            }
            "#define" if line == "#define HENCE_H" => {}
            "#define" => {
                let [_, name, value] = line.split_whitespace().collect::<Vec<_>>()[..] else {
                    panic!("not understood: {line}")
                };
                let value = value.parse().unwrap_or_else(|_| panic!("not a whole number: {line}"));
                items.push(Item::Constant { name: name.into(), value, about: first_paragraph(&mut about) });
            }
            // A comment within a struct is about a member; the declarations for macros leave those out.
            word if word.starts_with("//") => {
                if statement.is_empty() {
                    about.push(line.trim_start_matches('/').trim().to_owned());
                }
            }
            _ => {
                statement = format!("{statement} {line}").trim().to_owned();
                let open = statement.matches('{').count() - statement.matches('}').count();
                if statement.ends_with(';') && open == 0 {
                    items.push(declaration(&statement, first_paragraph(&mut about)));
                    statement.clear();
                }
            }
        }
    }
    assert!(statement.is_empty(), "not ended: {statement}");
    items
}

fn without_first_comment(header: &str) -> &str {
    let header = header.trim_start();
    let rest = header.strip_prefix("/*").expect("the header begins with a comment");
    let (_, code) = rest.split_once("*/").expect("the comment ends");
    assert!(!code.replace("/* HENCE_H */", "").contains("/*"), "a second comment of this kind");
    code
}

fn first_paragraph(about: &mut Vec<String>) -> String {
    let about = std::mem::take(about);
    about.into_iter().take_while(|line| !line.is_empty()).collect::<Vec<_>>().join(" ")
}

fn declaration(statement: &str, about: String) -> Item {
    let statement = statement.strip_suffix(';').expect("ends with a semicolon");
    if let Some(rest) = statement.strip_prefix("typedef struct {") {
        let (members, name) = rest.split_once('}').expect("a struct ends");
        let members =
            members.split(';').map(str::trim).filter(|member| !member.is_empty()).map(named).collect();
        return Item::Struct { name: identifier(name), members, about };
    }
    if let Some(rest) = statement.strip_prefix("typedef struct ") {
        let [name, again] = rest.split_whitespace().collect::<Vec<_>>()[..] else {
            panic!("not understood: {statement}")
        };
        assert_eq!(name, again, "an opaque struct is called as its type");
        return Item::Opaque { name: identifier(name) };
    }
    let (before, parameters) =
        statement.split_once('(').unwrap_or_else(|| panic!("not understood: {statement}"));
    let parameters = parameters.strip_suffix(')').unwrap_or_else(|| panic!("not understood: {statement}"));
    assert!(!parameters.contains(['(', ')']), "a pointer to a function: {statement}");
    let Named { kind: result, name, count: None } = named(before) else {
        panic!("not understood: {statement}")
    };
    let parameters = match parameters.trim() {
        "void" => Vec::new(),
        parameters => parameters.split(',').map(|parameter| named(parameter.trim())).collect(),
    };
    Item::Function { name, result, parameters, about }
}

/// `const double *offsets` or `char message[256]`.
fn named(text: &str) -> Named {
    let (text, count) = match text.strip_suffix(']') {
        Some(text) => {
            let (text, count) = text.split_once('[').expect("a bracket opens");
            (text, Some(count.parse().unwrap_or_else(|_| panic!("not a number of elements: {count}"))))
        }
        None => (text, None),
    };
    let start = text.rfind(|c: char| !c.is_ascii_alphanumeric() && c != '_').map_or(0, |i| i + 1);
    let (kind, name) = text.split_at(start);
    Named { kind: kind.trim().to_owned(), name: identifier(name), count }
}

fn identifier(name: &str) -> String {
    let name = name.trim();
    let fine = !name.is_empty() && name.bytes().all(|b| b.is_ascii_alphanumeric() || b == b'_');
    assert!(fine, "not a name: {name:?}");
    name.to_owned()
}

#[test]
fn declarations_are_read() {
    let header = "/* About. */\n#ifndef HENCE_H\n#define HENCE_H\n#include <stdint.h>\n// One.\n//\n// More.\n#define A 1\n\
                  typedef struct b b;\ntypedef struct {\n  // In.\n  uint32_t c;\n  const char *const *d;\n  char e[3];\n} f;\n\
                  #ifdef __cplusplus\nextern \"C\" {\n#endif\n// Gives\n// two.\nint32_t g(const b *h,\n b **i);\nvoid j(void);\n\
                  #endif  /* HENCE_H */\n";
    let named = |kind: &str, name: &str, count| Named { kind: kind.into(), name: name.into(), count };
    let expected = [
        Item::Constant { name: "A".into(), value: 1, about: "One.".into() },
        Item::Opaque { name: "b".into() },
        Item::Struct {
            name: "f".into(),
            members: vec![
                named("uint32_t", "c", None),
                named("const char *const *", "d", None),
                named("char", "e", Some(3)),
            ],
            about: String::new(),
        },
        Item::Function {
            name: "g".into(),
            result: "int32_t".into(),
            parameters: vec![named("const b *", "h", None), named("b **", "i", None)],
            about: "Gives two.".into(),
        },
        Item::Function { name: "j".into(), result: "void".into(), parameters: vec![], about: String::new() },
    ];
    assert_eq!(items(header), expected);
}

#[test]
fn what_is_not_understood_fails() {
    for odd in [
        "#define A (1 << 2)",
        "#define A(x) x",
        "enum a { B };",
        "typedef int32_t a;",
        "extern int32_t a;",
        "int32_t a(void (*b)(int32_t));",
        "typedef struct a b;",
        "#if 1",
        "int32_t a(void)",
    ] {
        let header = format!("/* About. */\n#ifndef HENCE_H\n{odd}\n#endif\n");
        let read = std::panic::catch_unwind(|| items(&header));
        assert!(read.is_err(), "{odd}: {read:?}");
    }
}
