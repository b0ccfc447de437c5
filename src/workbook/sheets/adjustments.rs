//! What was made of the flows as entered, in words for the summary.

use super::AuditInput;
use crate::adjust;

/// Sign, unit, uplift, residual value and what follows the last year, a sentence for each stream that has any.
pub(super) fn words(input: &AuditInput<'_>) -> Vec<String> {
    let mut texts = Vec::new();
    for (c, choice) in input.appraisal.choices.iter().enumerate() {
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
            if let Some(own) = &input.outcomes[c].streams[s].own {
                parts.push(format!("discounted on {}, a basis of its own", own.basis.canonical()));
            }
            if input.outcomes[c].streams[s].multipliers.is_some() {
                parts.push(adjust::multiplier_words(stream, choice, &input.outcomes[c]));
            }
            if !parts.is_empty() {
                texts.push(format!("{}, {}: {}.", choice.name, stream.name, parts.join("; ")));
            }
        }
    }
    texts
}
