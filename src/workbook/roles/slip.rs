//! What a name that is no role was probably meant to be.

use hence_core::distance;

use super::{PREFIX, ROLES, RoleInfo, Takes};

/// The message for a word that no role bears, with the nearest role.
pub(super) fn unknown(body: &str) -> String {
    let found = format!("{PREFIX}{body} is no role of hence");
    match nearest(body) {
        Some(meant) => format!("{found}; the nearest is {PREFIX}{meant}"),
        None => found,
    }
}

/// The message for a stream after a role that takes none.
pub(super) fn unwanted_stream(info: &RoleInfo, stream: &str) -> String {
    let singular = info.word.strip_suffix('s').unwrap_or_default();
    let one = ROLES.iter().find(|other| other.word == singular && other.takes == Takes::Stream);
    let advice = match one {
        Some(one) => format!("one stream is {PREFIX}{}_{stream}", one.word),
        None => format!("write {PREFIX}{}, and an option after two underscores", info.word),
    };
    format!("{PREFIX}{}_{stream} is no role of hence: `{}` takes no stream; {advice}", info.word, info.word)
}

/// The role nearest to the first word or words of `body`, with the rest kept as the stream.
fn nearest(body: &str) -> Option<String> {
    let lower = body.to_lowercase();
    let words: Vec<&str> = lower.split('_').collect();
    let mut best: Option<(usize, String)> = None;
    for info in ROLES {
        let count = info.word.split('_').count();
        if words.len() < count {
            continue;
        }
        let (head, rest) = (words[..count].join("_"), words[count..].join("_"));
        if !rest.is_empty() && info.takes == Takes::NoStream {
            continue;
        }
        let away = distance(&head, info.word);
        let allowed = (info.word.chars().count() / 3).max(1);
        if away <= allowed && best.as_ref().is_none_or(|(least, _)| away < *least) {
            let stream = match (info.takes, rest.is_empty()) {
                (Takes::Stream, true) => "_works".to_owned(),
                (_, true) => String::new(),
                (_, false) => format!("_{rest}"),
            };
            best = Some((away, format!("{}{stream}", info.word)));
        }
    }
    best.map(|(_, meant)| meant)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn distances_count_one_slip_each() {
        assert_eq!(distance("benifit", "benefit"), 1);
        assert_eq!(distance("yaers", "years"), 1);
        assert_eq!(distance("", "pv"), 2);
    }

    #[test]
    fn nothing_near_is_said_to_be_near() {
        assert_eq!(nearest("completely_different"), None);
        assert_eq!(nearest("yeras"), Some("years".to_owned()));
        assert_eq!(nearest("cots_pumps"), Some("cost_pumps".to_owned()));
    }
}
