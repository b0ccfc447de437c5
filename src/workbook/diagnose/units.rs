//! Thousands against millions: what headings, declared units and sizes say of each other.

use super::lines::line_of;
use super::structure::{Look, figure};
use crate::appraisal::{Choice, Stream, StreamKind};
use crate::findings::{Finding, Kind};
use crate::problem::Place;
use crate::references::Range;

/// How many decades a stream has to be from its peers: by its size alone, and where its numbers are also finer (or coarser)
/// grained than theirs.
const OUT_OF_SCALE: (f64, f64) = (2.3, 1.4);
/// So many times finer or coarser.
const OUT_OF_GRAIN: f64 = 100.0;
/// Years with flows that a size is judged by, at least.
const FEWEST_YEARS: usize = 5;
/// How close two sizes have to be to a thousand (or a million) times each other.
const CLOSE: f64 = 0.15;

/// The most that a smooth row changes from one year with a flow to the next.
const SMOOTH: f64 = 2.0;

/// Streams in another unit than the others, by their headings, by what is declared, or by their sizes.
pub(super) fn findings(look: &Look) -> Vec<Finding> {
    let mut found: Vec<Finding> = Vec::new();
    let mut streams = look.seen.appraisal.choices.iter().flat_map(|choice| &choice.streams);
    let declared = streams.any(|stream| stream.unit != 1.0);
    for (c, choice) in look.seen.appraisal.choices.iter().enumerate() {
        let units: Vec<Option<(f64, String)>> =
            choice.streams.iter().map(|s| heading_unit(look, s)).collect();
        let mut new = by_heading(look, c, choice, &units);
        for s in 0..choice.streams.len() {
            let place = Place::area(&choice.streams[s].at);
            if new
                .iter()
                .any(|finding| (&finding.place.sheet, finding.place.range) == (&place.sheet, place.range))
            {
                continue;
            }
            let part = within(look, c, s);
            // Where units are declared, somebody has thought of them.
            new.extend(part.or_else(|| if declared { None } else { by_size(look, c, s) }));
        }
        new.retain(|new| found.iter().all(|other| other.place != new.place));
        found.extend(new);
    }
    found
}

/// The unit that a text states: 1000 for "£k", "EUR '000" or "thousands", 1,000,000 for "$m" or "million".
pub(super) fn unit_of(text: &str) -> Option<f64> {
    let lower = text.to_lowercase();
    let mut found = None;
    for word in
        lower.split(|c: char| c.is_whitespace() || matches!(c, '(' | ')' | '[' | ']' | ',' | ';' | ':'))
    {
        let bare = word.trim_matches(|c: char| matches!(c, '\'' | '’' | '‘' | '.' | '"'));
        let money = bare.trim_start_matches(['£', '$', '€']).trim_end_matches("/yr");
        let symbol = money.len() < bare.len();
        let unit = match money {
            "thousand" | "thousands" | "000" | "000s" | "1000s" => Some(1e3),
            "million" | "millions" | "mn" | "mio" | "000000" | "mln" => Some(1e6),
            "k" if symbol => Some(1e3),
            "m" if symbol => Some(1e6),
            "gbpk" | "eurk" | "usdk" | "keur" | "kgbp" | "kusd" | "k€" | "k£" | "k$" => Some(1e3),
            "gbpm" | "eurm" | "usdm" | "meur" | "mgbp" | "musd" | "m€" | "m£" | "m$" => Some(1e6),
            _ => None,
        };
        match (unit, found) {
            (Some(new), Some(old)) if new != old => return None,
            (Some(new), _) => found = Some(new),
            _ => {}
        }
    }
    found.or_else(|| {
        let pairs =
            [("eur m", 1e6), ("gbp m", 1e6), ("usd m", 1e6), ("£ m", 1e6), ("eur k", 1e3), ("gbp k", 1e3)];
        let ends = |part: &str| lower.trim_end_matches([')', ']']).ends_with(part);
        pairs.iter().find(|(part, _)| ends(part)).map(|(_, unit)| *unit)
    })
}

/// What the texts before a stream say of its unit, and the text.
fn heading_unit(look: &Look, stream: &Stream) -> Option<(f64, String)> {
    let headings = line_of(&stream.at.hull(), &look.cells)?.headings(&look.cells);
    headings.into_iter().rev().find_map(|text| Some((unit_of(&text)?, text)))
}

/// Headings say units apart from each other and from what is declared.
fn by_heading(look: &Look, c: usize, choice: &Choice, units: &[Option<(f64, String)>]) -> Vec<Finding> {
    // What one unit of a stream comes to, over what its heading says: the same for all where all is well.
    let ratio = |s: usize| units[s].as_ref().map(|(unit, _)| choice.streams[s].unit / unit);
    let ratios: Vec<f64> = (0..units.len()).filter_map(ratio).collect();
    let declared = |s: usize| choice.streams[s].unit != 1.0;
    let same = |a: f64, b: f64| (a / b - 1.0).abs() < 1e-9;
    let votes = |r: f64| ratios.iter().filter(|x| same(**x, r)).count();
    // Where the workbook declares units, one of a stream is one of its heading's unit.
    let usual = if (0..units.len()).any(declared) {
        Some(1.0)
    } else {
        ratios.iter().copied().max_by_key(|r| votes(*r)).filter(|r| votes(*r) < ratios.len())
    };
    let Some(usual) = usual else { return Vec::new() };
    let mut found = Vec::new();
    for (s, stream) in choice.streams.iter().enumerate() {
        let (Some((_, text)), Some(ratio)) = (&units[s], ratio(s)) else { continue };
        if same(ratio, usual) {
            continue;
        }
        let scale = ratio / usual;
        let words = if declared(s) {
            format!(
                "The heading says `{text}`, and the declared unit of `{}` is {}.",
                stream.name,
                figure(stream.unit)
            )
        } else {
            format!(
                "The heading says `{text}`, other streams are in another unit, and no unit is declared for this one."
            )
        };
        found.push(finding(look, c, s, scale, 0.9, format!("entered under `{text}`"), words));
    }
    found
}

/// A thousand or a million, where a ratio of sizes is near one of them or its inverse.
fn near_scale(ratio: f64, close: f64) -> Option<f64> {
    [1e-6, 1e-3, 1e3, 1e6].into_iter().find(|scale| (ratio / scale - 1.0).abs() <= close)
}

/// The stream is out of scale with the other streams of its option and with its like in other options, and in scale a
/// thousand (or a million) times larger or smaller.
fn by_size(look: &Look, c: usize, s: usize) -> Option<Finding> {
    let choices = &look.seen.appraisal.choices;
    let stream = &choices[c].streams[s];
    let own = size(stream)?;
    let beside: Vec<&Stream> =
        choices[c].streams.iter().enumerate().filter(|(other, _)| *other != s).map(|(_, x)| x).collect();
    let name = crate::roles::key(&stream.name);
    let elsewhere = choices.iter().enumerate().filter(|(other, _)| *other != c).flat_map(|(_, x)| &x.streams);
    let alike = elsewhere
        .filter(|x| x.kind == stream.kind && x.at != stream.at && crate::roles::key(&x.name) == name);
    let mut peers: Vec<f64> = beside.iter().copied().chain(alike).filter_map(size).collect();
    if peers.len() < 2 {
        return None;
    }
    peers.sort_by(f64::total_cmp);
    // Of two in the middle the one that is nearer.
    let (low, high) = (peers[(peers.len() - 1) / 2], peers[peers.len() / 2]);
    let off = if own < low { own - low } else { (own - high).max(0.0) };
    // A number entered in thousands among units has three digits less, and one in units among thousands three more.
    let grains: Vec<f64> = beside.iter().filter_map(|x| grain(x)).collect();
    let own_grain = grain(stream).filter(|_| !grains.is_empty());
    let finer = own_grain.is_some_and(|own| grains.iter().all(|g| own * OUT_OF_GRAIN <= g * 1.01));
    let coarser = own_grain.is_some_and(|own| grains.iter().all(|g| own >= g * OUT_OF_GRAIN * 0.99));
    let in_grain = if off < 0.0 { finer } else { coarser };
    if off.abs() < if in_grain { OUT_OF_SCALE.1 } else { OUT_OF_SCALE.0 } {
        return None;
    }
    let decades =
        [3.0, 6.0].into_iter().min_by(|a, b| (off.abs() - a).abs().total_cmp(&(off.abs() - b).abs()))?;
    let scale = 10f64.powf(decades.copysign(off));
    let average = |decade: f64| figure(10f64.powf(decade));
    let words = format!(
        "`{}` comes to {} a year, and the streams beside it and its like in other options to {} to {}: in their unit it would \
         be {} times what it is.",
        stream.name,
        average(own),
        average(peers[0]),
        average(peers[peers.len() - 1]),
        figure(1.0 / scale)
    );
    let confidence = if in_grain { 0.75 } else { 0.6 };
    Some(finding(look, c, s, scale, confidence, format!("{} a year", average(own)), words))
}

/// The size of a stream: the logarithm of its mean flow a year, signs apart; none where nothing flows.
fn size(stream: &Stream) -> Option<f64> {
    let total: f64 = stream.raw.iter().map(|x| (x * stream.unit).abs()).sum();
    (total > 0.0).then(|| (total / stream.raw.len() as f64).log10())
}

/// The largest power of ten that every flow is a whole multiple of; none where they are of no such kind.
fn grain(stream: &Stream) -> Option<f64> {
    let whole = |x: &f64, power: f64| {
        let count = x / power;
        count.abs() < 1e12 && count.abs() > 0.5 && (count - count.round()).abs() <= 1e-6
    };
    let flows = || stream.raw.iter().map(|x| x * stream.unit).filter(|x| *x != 0.0);
    flows().next()?;
    (-5..=9).rev().map(|n| 10f64.powi(n)).find(|power| flows().all(|x| whole(&x, *power)))
}

/// Part of a row is a thousand times the cells beside it.
fn within(look: &Look, c: usize, s: usize) -> Option<Finding> {
    let stream = &look.seen.appraisal.choices[c].streams[s];
    let filled: Vec<usize> = (0..stream.raw.len()).filter(|i| stream.raw[*i] != 0.0).collect();
    if filled.len() < FEWEST_YEARS {
        return None;
    }
    // Cut where a cell is a thousand times the one before; the shorter part is the odd one. Elsewhere the row is smooth, or
    // a jump would tell nothing.
    let step = |k: usize| stream.raw[filled[k]] / stream.raw[filled[k - 1]];
    let cuts: Vec<usize> = (1..filled.len()).filter(|k| near_scale(step(*k), CLOSE).is_some()).collect();
    if (1..filled.len()).any(|k| !cuts.contains(&k) && !(1.0 / SMOOTH..SMOOTH).contains(&step(k))) {
        return None;
    }
    let (from, to) = match cuts[..] {
        [cut] if cut * 2 <= filled.len() => (0, cut),
        [cut] => (cut, filled.len()),
        [a, b] => (a, b),
        _ => return None,
    };
    let beside = if from > 0 { from - 1 } else { to };
    let inside = if from > 0 { from } else { to - 1 };
    let scale = near_scale(stream.raw[filled[inside]] / stream.raw[filled[beside]], CLOSE)?;
    // Capital comes before running costs, and clearing away after them; what is left over or sold comes in the last year.
    let at_an_end = from == 0 || to == filled.len();
    let alone = to - from == 1;
    if at_an_end && scale > 1.0 && (stream.kind == StreamKind::Cost || alone) {
        return None;
    }
    let mut added = vec![0.0; look.seen.appraisal.choices.len()];
    added[c] =
        filled[from..to].iter().map(|i| stream.raw[*i] * (1.0 - 1.0 / scale) * look.worth(c, s, *i)).sum();
    let effect = look.in_flows(&added);
    let nth = |k: usize| stream.at.nth(filled[k]);
    Some(Finding {
        kind: Kind::UnitMismatch,
        place: Place::cells(&stream.at.sheet, Range::new(nth(from), nth(to - 1))).called(&stream.from),
        found: figure(stream.raw[filled[inside]]),
        expected: figure(stream.raw[filled[inside]] / scale),
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence: 0.85,
        words: format!(
            "Part of `{}` is {} times the cells beside it ({} against {}), as numbers in another unit are.",
            stream.name,
            figure(scale),
            figure(stream.raw[filled[inside]]),
            figure(stream.raw[filled[beside]])
        ),
    })
}

/// A stream that is `scale` times what it should be.
fn finding(
    look: &Look,
    c: usize,
    s: usize,
    scale: f64,
    confidence: f64,
    found: String,
    words: String,
) -> Finding {
    let stream = &look.seen.appraisal.choices[c].streams[s];
    let mut added = vec![0.0; look.seen.appraisal.choices.len()];
    added[c] = look.seen.outcomes[c].streams[s].pv * crate::formulas::side(stream.kind) * (1.0 - 1.0 / scale);
    let effect = look.in_flows(&added);
    Finding {
        kind: Kind::UnitMismatch,
        place: Place::area(&stream.at).called(&stream.from),
        found,
        expected: format!("{} times that, in the unit of the other streams", figure(1.0 / scale)),
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence,
        words,
    }
}

#[cfg(test)]
mod tests {
    use super::unit_of;

    #[test]
    fn units_as_headings_state_them() {
        for (text, unit) in [
            ("Works (£k)", 1e3),
            ("£000", 1e3),
            ("EUR '000", 1e3),
            ("Running cost, thousands", 1e3),
            ("€m", 1e6),
            ("Benefits, £ million", 1e6),
            ("EUR m", 1e6),
            ("keur", 1e3),
        ] {
            assert_eq!(unit_of(text), Some(unit), "{text}");
        }
        for text in ["Works", "m", "Water supply (m3)", "5 km of wall", "£", "k", "Town M", "£k or £m"] {
            assert_eq!(unit_of(text), None, "{text}");
        }
    }
}
