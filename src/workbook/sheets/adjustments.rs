//! What was made of the flows as entered, in words for the summary and the brief.

use super::AuditInput;
use crate::adjust;
use crate::appraisal::Appraisal;
use crate::outcome::ChoiceOutcome;

/// A sentence for each stream of which anything was made.
pub(super) fn words(input: &AuditInput<'_>) -> Vec<String> {
    let all = adjusted(input.appraisal, input.outcomes);
    all.into_iter().map(|(option, stream, words)| format!("{option}, {stream}: {words}.")).collect()
}

/// Sign, unit, uplift, residual value, what follows the last year, basis, prices and weights, in words for each stream
/// that has any: option, stream, words.
pub(crate) fn adjusted(appraisal: &Appraisal, outcomes: &[ChoiceOutcome]) -> Vec<(String, String, String)> {
    let mut texts = Vec::new();
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for (s, stream) in choice.streams.iter().enumerate() {
            let mut parts = Vec::new();
            if stream.sign < 0.0 {
                parts.push("entered with the opposite sign".to_owned());
            }
            if stream.unit != 1.0 {
                parts.push(format!("in units of {}", stream.unit));
            }
            if stream.uplift.value != 0.0 {
                parts.push(format!("raised by {}", hence_core::percent(stream.uplift.value)));
            }
            if let Some(residual) = &stream.residual {
                parts.push(format!("with a value of {} left over in the last year", residual.value));
            }
            if let Some(tail) = &stream.tail {
                parts.push(format!("going on after the last year: {}", tail.value));
            }
            if let Some(own) = &outcomes[c].streams[s].own {
                parts.push(format!("discounted on {}, a basis of its own", own.basis.canonical()));
            }
            if outcomes[c].streams[s].multipliers.is_some() {
                parts.push(adjust::multiplier_words(stream, choice, &outcomes[c]));
            }
            if !parts.is_empty() {
                texts.push((choice.name.clone(), stream.name.clone(), parts.join("; ")));
            }
        }
    }
    texts
}
