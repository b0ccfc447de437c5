//! The brief as Markdown, with the numbers of the charts in place of the pictures.

use super::{Block, Brief, Section, Table};

/// The text.
pub fn markdown(brief: &Brief) -> String {
    let mut out = format!("# {}\n\n", plain(&brief.question));
    for text in &brief.answer {
        out.push_str(&format!("{}\n\n", start(text)));
    }
    for section in &brief.sections {
        section_text(&mut out, section);
    }
    out.push_str(&format!("---\n\n{}\n", start(&brief.sources.join(" "))));
    out
}

fn section_text(out: &mut String, section: &Section) {
    out.push_str(&format!("## {}\n\n", plain(&section.title)));
    for block in &section.blocks {
        match block {
            Block::Paragraph(text) => out.push_str(&format!("{}\n\n", start(text))),
            Block::List(texts) => {
                for text in texts {
                    out.push_str(&format!("- {}\n", start(text)));
                }
                out.push('\n');
            }
            Block::Terms(terms) => {
                for (term, text) in terms {
                    out.push_str(&format!("- **{}**: {}\n", plain(term), plain(text)));
                }
                out.push('\n');
            }
            Block::Table(table) => table_text(out, table),
            Block::Figures(figures) => {
                for table in figures.iter().filter_map(|figure| figure.table.as_ref()) {
                    table_text(out, table);
                }
            }
        }
    }
    if let Some(table) = section.beside.as_ref().and_then(|figure| figure.table.as_ref()) {
        table_text(out, table);
    }
}

fn table_text(out: &mut String, table: &Table) {
    let line = |cells: &[String]| {
        let cells: Vec<String> = cells.iter().map(|cell| plain(cell)).collect();
        format!("| {} |\n", cells.join(" | "))
    };
    let rule: Vec<&str> =
        (0..table.headings.len()).map(|k| if k < table.words { "---" } else { "---:" }).collect();
    out.push_str(&format!("{}:\n\n{}", start(&table.caption), line(&table.headings)));
    out.push_str(&format!("| {} |\n", rule.join(" | ")));
    for row in &table.rows {
        out.push_str(&line(row));
    }
    out.push('\n');
}

/// A text within a line: what Markdown would take for a mark stands for itself, and HTML is none. Control characters, and
/// those that turn the direction of what follows, are shown, not obeyed.
fn plain(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '\\' | '`' | '*' | '_' | '[' | ']' | '|' | '#' | '~' | '$' => out.extend(['\\', c]),
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '\n' | '\t' | '\r' => out.push(' '),
            '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}' => shown(&mut out, c),
            c if c.is_control() => shown(&mut out, c),
            c => out.push(c),
        }
    }
    out
}

fn shown(out: &mut String, c: char) {
    out.push('\\');
    out.extend(c.escape_unicode());
}

/// The same at the start of a line, where a dash or a number could begin a list.
fn start(text: &str) -> String {
    let text = plain(text);
    let digits = text.chars().take_while(char::is_ascii_digit).count();
    let (head, rest) = text.split_at(digits);
    let begins = rest.starts_with(['-', '+', '=']) && digits == 0;
    let numbers = digits > 0 && rest.starts_with(['.', ')']);
    if begins || numbers { format!("{head}\\{rest}") } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn marks_stand_for_themselves() {
        assert_eq!(plain("a|b *c* <i>\n[x](y)"), "a\\|b \\*c\\* &lt;i&gt; \\[x\\](y)");
        assert_eq!(plain("\u{1b}\u{202e}"), "\\\\u{1b}\\\\u{202e}");
        for (text, due) in [
            ("- a", "\\- a"),
            ("+ a", "\\+ a"),
            ("=== a", "\\=== a"),
            ("12. a", "12\\. a"),
            ("1) a", "1\\) a"),
            ("12 a", "12 a"),
            ("3.5% is a rate", "3\\.5% is a rate"),
        ] {
            assert_eq!(start(text), due);
        }
    }
}
