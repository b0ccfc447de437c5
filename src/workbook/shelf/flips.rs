//! What the change of basis does to decisions, in words.

use crate::report::OptionReport;

use super::Record;

/// Every decision of a workbook that is another one now.
pub(super) fn flips(record: &Record) -> Vec<String> {
    let appraisals = record.report.options.chunk_by(|a, b| a.appraisal == b.appraisal);
    let of = |options: &[OptionReport]| -> Vec<String> {
        let name = options[0].appraisal.as_ref().map(|name| format!("{name}: ")).unwrap_or_default();
        of_appraisal(options).into_iter().map(|text| name.clone() + &text).collect()
    };
    appraisals.flat_map(of).collect()
}

fn of_appraisal(options: &[OptionReport]) -> Vec<String> {
    let mut said: Vec<String> = first(options).into_iter().collect();
    said.extend(options.iter().filter(|option| !option.baseline).filter_map(sign));
    said
}

/// Another option is first by the rule.
fn first(options: &[OptionReport]) -> Option<String> {
    let leaders = |rank: &dyn Fn(&OptionReport) -> Option<usize>| -> Vec<String> {
        options.iter().filter(|option| rank(option) == Some(1)).map(|option| option.name.clone()).collect()
    };
    let before = leaders(&|option| option.bridge.declared?.rank);
    let now = leaders(&|option| option.bridge.now.rank);
    if options.len() < 2 || before.is_empty() || before == now {
        return None;
    }
    let rule = options[0].decide.words();
    let now = if now.is_empty() { "none".to_owned() } else { now.join(" and ") };
    Some(format!("first by {rule} was {}, and is {now} now", before.join(" and ")))
}

/// An option was worth having and is not, or the reverse. On the workbook's own basis, else by what its cell held.
fn sign(option: &OptionReport) -> Option<String> {
    let before = option.bridge.declared.map(|stand| stand.npv).or(option.bridge.held)?;
    let now = option.bridge.now.npv;
    let words = |npv: f64| match npv {
        x if x > 0.0 => "positive",
        x if x < 0.0 => "negative",
        _ => "zero",
    };
    let (was, is) = (words(before), words(now));
    (was != is).then(|| format!("net present value of {} was {was}, and is {is} now", option.name))
}
