//! What the change of basis does to decisions, in words.

use crate::report::{OptionReport, Report};

use super::Record;

/// Every decision of a workbook that is another one now.
pub(super) fn flips(record: &Record) -> Vec<String> {
    appraisals(&record.report)
        .into_iter()
        .flat_map(|(name, options)| {
            let said = of_appraisal(options);
            said.into_iter().map(move |text| if name.is_empty() { text } else { format!("{name}: {text}") })
        })
        .collect()
}

/// The options of each appraisal, with its name where the workbook has several.
fn appraisals(report: &Report) -> Vec<(&str, &[OptionReport])> {
    if report.appraisals.is_empty() {
        return vec![("", &report.options)];
    }
    report.appraisals.iter().map(|one| (one.name.as_str(), one.options.as_slice())).collect()
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
