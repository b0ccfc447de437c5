//! The table of problem codes against the source: every code that the crate can report is in it, and no other.
//!
//! The codes are found by reading the source files: whatever a function or closure takes as `code`, at each of its
//! calls. A call whose code cannot be read this way fails, so that no code goes unseen.

mod tokens;

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};

use hence_workbook::codes::{CODES, Group};
use tokens::{Piece, Token, closing, split};

/// Every code found, and where it is first used.
type Found = BTreeMap<String, String>;

struct File {
    name: String,
    tokens: Vec<Token>,
    /// Functions and closures: which of their arguments is the code, if one is.
    defined: BTreeMap<String, BTreeSet<Option<usize>>>,
}

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../..")
}

fn rust_files(folder: &Path, files: &mut Vec<PathBuf>) {
    for entry in std::fs::read_dir(folder).expect("the source folder can be read") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            rust_files(&path, files);
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            files.push(path);
        }
    }
}

fn read(path: &Path) -> File {
    let source = std::fs::read_to_string(path).expect("a source file is text");
    let tokens = with_constants(tokens::of_program(&source));
    let defined = definitions(&tokens);
    let name = path.strip_prefix(root()).unwrap_or(path).display().to_string();
    File { name, tokens, defined }
}

/// The files of the crate, but for the table itself.
fn files() -> Vec<File> {
    let mut paths = Vec::new();
    rust_files(&root().join("src/workbook"), &mut paths);
    paths.sort();
    paths.iter().filter(|path| !path.ends_with("codes.rs")).map(|path| read(path)).collect()
}

/// The tokens with the names of the file's text constants replaced by their texts.
fn with_constants(mut tokens: Vec<Token>) -> Vec<Token> {
    let constant = |w: &[Token]| {
        let declared = w[0].word() == Some("const") && w[4].word() == Some("str") && w[5].is('=');
        declared.then(|| Some((w[1].word()?.to_owned(), w[6].piece.clone())))?
    };
    let constants: BTreeMap<String, Piece> = tokens.windows(7).filter_map(constant).collect();
    for token in &mut tokens {
        if let Some(text) = token.word().and_then(|word| constants.get(word)) {
            token.piece = text.clone();
        }
    }
    tokens
}

/// `fn name(.., code: &'static str, ..)` and `let name = |.., code, ..|`, and those that take no code.
fn definitions(tokens: &[Token]) -> BTreeMap<String, BTreeSet<Option<usize>>> {
    let mut defined: BTreeMap<String, BTreeSet<Option<usize>>> = BTreeMap::new();
    let word = |at: usize| tokens.get(at).and_then(Token::word);
    for at in 0..tokens.len() {
        let (name, parameters) = match word(at) {
            Some("fn") => {
                let Some(open) = (at + 2..tokens.len()).find(|i| tokens[*i].is('(')) else { continue };
                (word(at + 1), &tokens[open + 1..closing(tokens, open)])
            }
            Some("let") => {
                let name = at + 1 + usize::from(word(at + 1) == Some("mut"));
                let bar = name + 2 + usize::from(word(name + 2) == Some("move"));
                if !(tokens.get(name + 1).is_some_and(|t| t.is('='))
                    && tokens.get(bar).is_some_and(|t| t.is('|')))
                {
                    continue;
                }
                let Some(end) = (bar + 1..tokens.len()).find(|i| tokens[*i].is('|')) else { continue };
                (word(name), &tokens[bar + 1..end])
            }
            _ => continue,
        };
        let names =
            split(parameters).into_iter().map(|p| p.iter().filter_map(Token::word).find(|w| *w != "mut"));
        let index = names.filter(|name| *name != Some("self")).position(|name| name == Some("code"));
        if let Some(name) = name {
            defined.entry(name.to_owned()).or_default().insert(index);
        }
    }
    defined
}

fn is_kebab(text: &str) -> bool {
    let part =
        |part: &str| !part.is_empty() && part.bytes().all(|b| b.is_ascii_lowercase() || b.is_ascii_digit());
    text.split('-').all(part)
}

/// The codes that an expression may give, or why they cannot be told.
fn codes_of(expression: &[Token]) -> Result<Vec<&str>, String> {
    let texts: Vec<&str> = expression.iter().filter_map(Token::text).collect();
    let words: Vec<&str> = expression.iter().filter_map(Token::word).collect();
    match (texts.as_slice(), words.last()) {
        (&[], Some(&"code")) => Ok(Vec::new()), // handed on, or the code of an error of the library
        (&[], _) => Err(format!(
            "the code is given as `{}`, not as a literal or a constant of the file",
            words.join(" ")
        )),
        (texts, _) => match texts.iter().find(|text| !is_kebab(text)) {
            Some(text) => Err(format!("{text:?} is no code: lower-case words joined by hyphens")),
            None => Ok(texts.to_vec()),
        },
    }
}

/// The codes of one file. `everywhere` holds the functions of all files that take a code.
fn codes_in(file: &File, everywhere: &BTreeMap<String, BTreeSet<usize>>, found: &mut Found) -> usize {
    let tokens = &file.tokens;
    let mut uses = 0;
    let mut keep = |at: usize, codes: Vec<&str>| {
        uses += codes.len();
        for code in codes {
            found.entry(code.to_owned()).or_insert_with(|| format!("{}:{}", file.name, tokens[at].line));
        }
    };
    for at in 0..tokens.len() {
        let Some(word) = tokens[at].word() else { continue };
        let after = |mark: char| tokens.get(at + 1).is_some_and(|token| token.is(mark));
        if word == "let" && after('(') && tokens.get(at + 2).and_then(Token::word) == Some("code") {
            // `let (code, what) = match .. { .. => ("a-code", ..), .. };`
            let end = (at..tokens.len()).find(|i| tokens[*i].is(';')).unwrap_or(tokens.len());
            let firsts = tokens[at..end].windows(3).filter(|w| w[0].is('(') && w[2].is(','));
            keep(at, firsts.filter_map(|w| w[1].text()).filter(|text| is_kebab(text)).collect());
        } else if after('(') && !(at > 0 && tokens[at - 1].word() == Some("fn")) {
            let arguments = split(&tokens[at + 2..closing(tokens, at + 1)]);
            let indices: BTreeSet<usize> = match file.defined.get(word) {
                Some(here) => here.iter().flatten().copied().collect(),
                None => everywhere.get(word).cloned().unwrap_or_default(),
            };
            for index in indices {
                let Some(argument) = arguments.get(index) else { continue };
                match codes_of(argument) {
                    Ok(codes) => keep(at, codes),
                    Err(why) => panic!("{}:{}: {word}: {why}", file.name, tokens[at].line),
                }
            }
        } else if word == "code" && after(':') && !tokens.get(at + 2).is_some_and(|token| token.is('&')) {
            // A field: `Problem { code: ..., .. }`.
            let value = split(&tokens[at + 2..])[0];
            keep(
                at,
                codes_of(value).unwrap_or_else(|why| panic!("{}:{}: {why}", file.name, tokens[at].line)),
            );
        }
    }
    uses
}

/// Every code that the crate can report of itself, and how often one is given.
fn used() -> (Found, usize) {
    let files = files();
    assert!(files.len() >= 80, "only {} source files were found under src/workbook", files.len());
    let mut everywhere: BTreeMap<String, BTreeSet<usize>> = BTreeMap::new();
    for (name, indices) in files.iter().flat_map(|file| &file.defined) {
        let indices: Vec<usize> = indices.iter().flatten().copied().collect();
        if !indices.is_empty() {
            everywhere.entry(name.clone()).or_default().extend(indices);
        }
    }
    let mut found = Found::new();
    let uses = files.iter().map(|file| codes_in(file, &everywhere, &mut found)).sum();
    (found, uses)
}

/// The words of `ErrorKind::code` in the library.
fn library() -> Found {
    let file = read(&root().join("src/error.rs"));
    let tokens = &file.tokens;
    let arms = tokens.windows(7).filter(|w| w[0].word() == Some("ErrorKind") && w[4].is('=') && w[5].is('>'));
    arms.filter_map(|w| Some((w[6].text()?.to_owned(), format!("{}:{}", file.name, w[6].line)))).collect()
}

#[test]
fn every_code_of_the_source_is_in_the_table_and_no_other() {
    let (mut found, uses) = used();
    let core = library();
    // What the reading must not miss: one code for each way in which codes are given.
    for (code, way) in [
        ("years-repeat", "Problem::error"),
        ("unknown-name", "Problem::warning"),
        ("subtotal-left-out", "a function of another file"),
        ("name-union", "a closure"),
        ("duplicate-row", "a method whose second argument is the code"),
        ("manual-calculation", "a closure whose second argument is the code"),
        ("merged-away", "a tuple"),
        ("base-value", "a field"),
    ] {
        assert!(found.contains_key(code), "{code} (given by {way}) was not found in the source");
    }
    assert!(uses >= 200 && found.len() >= 150, "only {uses} uses of {} codes were found", found.len());
    assert!(core.len() >= 15 && core.contains_key("rate-range"), "src/error.rs was not understood: {core:?}");
    found.extend(core);
    let listed: BTreeSet<&str> = CODES.iter().map(|code| code.code).collect();
    let missing = found.iter().filter(|(code, _)| !listed.contains(code.as_str()));
    let missing: Vec<String> =
        missing.map(|(code, at)| format!("    add to CODES: {code:?}, used at {at}")).collect();
    let unused = listed.iter().filter(|code| !found.contains_key(**code));
    let unused: Vec<String> =
        unused.map(|code| format!("    take out of CODES: {code:?}, used nowhere")).collect();
    assert!(
        missing.is_empty() && unused.is_empty(),
        "the table in src/workbook/codes.rs differs from the source:\n{}\nthen run once with HENCE_ACCEPT=1 for the README",
        [missing, unused].concat().join("\n")
    );
}

#[test]
fn the_table_is_grouped_sorted_and_worded() {
    let order: Vec<Group> = CODES.iter().map(|code| code.group).collect();
    assert!(order.is_sorted(), "codes of one group stand together, in the order of the groups");
    for pair in CODES.windows(2) {
        let sorted = pair[0].group != pair[1].group || pair[0].code < pair[1].code;
        assert!(sorted, "{} comes before {} in its group", pair[1].code, pair[0].code);
    }
    let once: BTreeSet<&str> = CODES.iter().map(|code| code.code).collect();
    assert_eq!(once.len(), CODES.len(), "a code is listed twice");
    for code in CODES {
        let plain = code.what.ends_with('.') && code.what.starts_with(|c: char| c.is_uppercase() || c == '`');
        assert!(is_kebab(code.code) && plain, "{}: {:?} is no short sentence", code.code, code.what);
        assert!(
            !code.what.contains(['|', '\n']) && code.what.len() <= 120,
            "{}: too long for a table",
            code.code
        );
    }
}

#[test]
fn codes_that_cannot_be_told_are_noticed() {
    let source = "fn refuse(at: Cell, code: &'static str) {} fn f() { refuse(c, ELSEWHERE) }";
    let tokens = with_constants(tokens::of_program(source));
    let call = tokens.iter().rposition(|token| token.word() == Some("refuse")).unwrap();
    let arguments = split(&tokens[call + 2..closing(&tokens, call + 1)]);
    assert!(codes_of(arguments[1]).unwrap_err().contains("ELSEWHERE"));
    assert_eq!(definitions(&tokens)["refuse"], BTreeSet::from([Some(1)]));
    let known = format!("const ELSEWHERE: &str = \"a-code\"; {source}");
    let tokens = with_constants(tokens::of_program(&known));
    assert_eq!(codes_of(&tokens[tokens.len() - 3..tokens.len() - 2]), Ok(vec!["a-code"]));
    assert!(codes_of(&[Token { piece: Piece::Text("Not a code".to_owned()), line: 1 }]).is_err());
}
