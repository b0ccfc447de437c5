//! Rust source as a list of words, texts and marks: just enough to find calls and their arguments.

/// A piece of source; comments, characters and lifetimes are left out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Piece {
    /// An identifier, a keyword or a number.
    Word(String),
    /// The inside of a string literal, escapes as they stand.
    Text(String),
    /// Any other character.
    Mark(char),
}

/// A piece and the line it begins on, counted from 1.
#[derive(Clone, Debug)]
pub struct Token {
    pub piece: Piece,
    pub line: usize,
}

impl Token {
    pub fn is(&self, mark: char) -> bool {
        self.piece == Piece::Mark(mark)
    }

    pub fn word(&self) -> Option<&str> {
        if let Piece::Word(word) = &self.piece { Some(word) } else { None }
    }

    pub fn text(&self) -> Option<&str> {
        if let Piece::Text(text) = &self.piece { Some(text) } else { None }
    }
}

/// The tokens of a source file, without its module of unit tests.
pub fn of_program(source: &str) -> Vec<Token> {
    let all = tokens(source);
    let tests = "#[cfg(test)]mod";
    let spelled = |at: usize| -> String {
        all[at..all.len().min(at + 8)]
            .iter()
            .map(|token| match &token.piece {
                Piece::Word(word) => word.clone(),
                Piece::Text(_) => "\"".to_owned(),
                Piece::Mark(mark) => mark.to_string(),
            })
            .collect()
    };
    let mut kept = Vec::new();
    let mut at = 0;
    while at < all.len() {
        if all[at].is('#') && spelled(at) == tests {
            // `mod tests { ... }`; a module in a file of its own has no braces and ends at once.
            let open = at + 9;
            at = if all.get(open).is_some_and(|t| t.is('{')) { closing(&all, open) + 1 } else { open };
        } else {
            kept.push(all[at].clone());
            at += 1;
        }
    }
    kept
}

/// The index of the bracket that closes the one at `open`, or of the last token.
pub fn closing(tokens: &[Token], open: usize) -> usize {
    let mut depth = 0usize;
    for (at, token) in tokens.iter().enumerate().skip(open) {
        match token.piece {
            Piece::Mark('(' | '[' | '{') => depth += 1,
            Piece::Mark(')' | ']' | '}') => depth -= 1,
            _ => {}
        }
        if depth == 0 {
            return at;
        }
    }
    tokens.len() - 1
}

/// Splits at the commas that stand outside all brackets.
pub fn split(tokens: &[Token]) -> Vec<&[Token]> {
    let mut parts = Vec::new();
    let (mut depth, mut from) = (0i32, 0);
    for (at, token) in tokens.iter().enumerate() {
        match token.piece {
            Piece::Mark('(' | '[' | '{') => depth += 1,
            Piece::Mark(')' | ']' | '}') => depth -= 1,
            Piece::Mark(',') if depth == 0 => {
                parts.push(&tokens[from..at]);
                from = at + 1;
            }
            _ => {}
        }
    }
    if from < tokens.len() {
        parts.push(&tokens[from..]);
    }
    parts
}

fn tokens(source: &str) -> Vec<Token> {
    let chars: Vec<char> = source.chars().collect();
    let mut found = Vec::new();
    let (mut at, mut line) = (0, 1);
    while at < chars.len() {
        let (piece, end) = next(&chars, at);
        if let Some(piece) = piece {
            found.push(Token { piece, line });
        }
        line += chars[at..end].iter().filter(|c| **c == '\n').count();
        at = end;
    }
    found
}

/// The piece that begins at `at`, if it is kept, and where the next one begins.
fn next(chars: &[char], at: usize) -> (Option<Piece>, usize) {
    let peek = |ahead: usize| chars.get(at + ahead).copied().unwrap_or('\n');
    let is_word = |c: char| c.is_alphanumeric() || c == '_';
    let run = |from: usize, keep: &dyn Fn(char) -> bool| {
        chars[from..].iter().position(|c| !keep(*c)).map_or(chars.len(), |length| from + length)
    };
    match chars[at] {
        c if c.is_whitespace() => (None, at + 1),
        '/' if peek(1) == '/' => (None, run(at, &|c| c != '\n')),
        '/' if peek(1) == '*' => {
            let end =
                (at + 2..chars.len().saturating_sub(1)).find(|i| chars[*i] == '*' && chars[i + 1] == '/');
            (None, end.map_or(chars.len(), |end| end + 2))
        }
        '"' => plain(chars, at + 1),
        'b' if peek(1) == '"' => plain(chars, at + 2),
        'r' if peek(1) == '"' || (peek(1) == '#' && matches!(peek(2), '"' | '#')) => raw(chars, at + 1),
        'b' if peek(1) == 'r' && matches!(peek(2), '"' | '#') => raw(chars, at + 2),
        '\'' if peek(1) == '\\' => {
            // The character after the backslash may be a quotation mark itself.
            let end = (at + 3..chars.len()).find(|i| chars[*i] == '\'');
            (None, end.map_or(chars.len(), |end| end + 1))
        }
        '\'' if peek(2) == '\'' => (None, at + 3),
        '\'' => (None, run(at + 1, &is_word)),
        c if is_word(c) => {
            let end = run(at, &is_word);
            (Some(Piece::Word(chars[at..end].iter().collect())), end)
        }
        c => (Some(Piece::Mark(c)), at + 1),
    }
}

fn plain(chars: &[char], from: usize) -> (Option<Piece>, usize) {
    let mut at = from;
    while at < chars.len() && chars[at] != '"' {
        at += if chars[at] == '\\' { 2 } else { 1 };
    }
    let end = at.min(chars.len());
    (Some(Piece::Text(chars[from..end].iter().collect())), (end + 1).min(chars.len()))
}

fn raw(chars: &[char], from: usize) -> (Option<Piece>, usize) {
    let hashes = chars[from..].iter().take_while(|c| **c == '#').count();
    let start = from + hashes + 1;
    let closes = |i: &usize| {
        chars[*i] == '"' && chars[i + 1..].iter().take(hashes).filter(|c| **c == '#').count() == hashes
    };
    let end = (start..chars.len()).find(closes).unwrap_or(chars.len());
    (Some(Piece::Text(chars[start.min(end)..end].iter().collect())), (end + 1 + hashes).min(chars.len()))
}

#[test]
fn texts_are_told_from_comments_and_characters() {
    let source = "// \"no\"\n/* \"no\" */ f('\"', '\\'', r#\"a\"b\"#, b\"c\", \"d\\\"e\", &'static str)\n\
                  #[cfg(test)]\nmod tests { g(\"no\") }\nh(\"i\")";
    let all = of_program(source);
    let texts: Vec<&str> = all.iter().filter_map(Token::text).collect();
    assert_eq!(texts, ["a\"b", "c", "d\\\"e", "i"]);
    assert_eq!(all.last().map(|token| token.line), Some(5));
    assert!(all.iter().all(|token| token.word() != Some("g") && token.word() != Some("static")));
}
