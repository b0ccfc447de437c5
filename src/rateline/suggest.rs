//! The nearest known word, for hints.

/// The known word nearest to `word`, where it is near enough to be meant.
pub(crate) fn nearest<'a>(word: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let allowed = match word.chars().count() {
        0..=3 => 1,
        4..=8 => 2,
        _ => 3,
    };
    known
        .into_iter()
        .filter_map(|candidate| {
            let start = word.len() >= 3 && (candidate.starts_with(word) || word.starts_with(candidate));
            let steps = if start { 1 } else { distance(word, candidate) };
            (steps <= allowed).then_some((steps, candidate))
        })
        .min_by_key(|&(steps, _)| steps)
        .map(|(_, candidate)| candidate)
}

/// Characters to insert, delete, change or swap with a neighbour to get from one word to the other, for hints.
///
/// ```
/// assert_eq!(hence_core::distance("yaers", "years"), 1);
/// ```
pub fn distance(from: &str, to: &str) -> usize {
    let to: Vec<char> = to.chars().collect();
    let from: Vec<char> = from.chars().collect();
    let mut rows = vec![(0..=to.len()).collect::<Vec<_>>()];
    for i in 1..=from.len() {
        let mut row = vec![i];
        for j in 1..=to.len() {
            let change = rows[i - 1][j - 1] + usize::from(from[i - 1] != to[j - 1]);
            let mut best = change.min(rows[i - 1][j] + 1).min(row[j - 1] + 1);
            if i > 1 && j > 1 && from[i - 1] == to[j - 2] && from[i - 2] == to[j - 1] {
                best = best.min(rows[i - 2][j - 2] + 1);
            }
            row.push(best);
        }
        rows.push(row);
    }
    rows[from.len()][to.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn near_words_are_found_and_far_ones_are_not() {
        let known = ["growth", "gamma", "elasticity", "middle", "to"];
        assert_eq!(nearest("grwoth", known), Some("growth"));
        assert_eq!(nearest("gama", known), Some("gamma"));
        assert_eq!(nearest("mid", known), Some("middle"));
        assert_eq!(nearest("elastic", known), Some("elasticity"));
        assert_eq!(nearest("banana", known), None);
        assert_eq!(distance("too", "to"), 1);
        assert_eq!(distance("", "to"), 2);
    }
}
