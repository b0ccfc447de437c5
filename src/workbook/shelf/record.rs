//! What a run over a shelf keeps of one workbook: from what, to what, on which basis, how it ended.

use serde::{Deserialize, Serialize};

use crate::problem::Problem;
use crate::report::{Report, Status};
use crate::sheets::Meta;

/// One workbook of a run. Records pass between processes, so that each number comes back as it went.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Record {
    /// The input, as it was given or found under a folder.
    pub input: String,
    /// The output; none where none was left.
    pub output: Option<String>,
    /// SHA-256 of the input file, lower-case hexadecimal; none where it could not be read.
    pub input_sha256: Option<String>,
    /// SHA-256 of the output file.
    pub output_sha256: Option<String>,
    /// SHA-256 of the canonical basis texts, one a line, by option; none where the workbook was not filled.
    pub basis_sha256: Option<String>,
    /// SHA-256 of all else that was asked for and enters the output.
    pub request_sha256: String,
    /// The version of hence.
    pub version: String,
    /// How it ended.
    pub status: Status,
    /// What was found and done: options with their bases and totals, problems, the verdict. Of a workbook that was not
    /// filled, the problems alone.
    pub report: Report,
}

impl Record {
    /// A workbook that was filled, before its output has a place.
    pub fn filled(meta: &Meta, report: &Report) -> Self {
        Record {
            input: meta.input_name.clone(),
            output: None,
            input_sha256: Some(meta.input_sha256.clone()),
            output_sha256: None,
            basis_sha256: Some(meta.basis_sha256.clone()),
            request_sha256: meta.request_sha256.clone(),
            version: meta.version.clone(),
            status: report.status(),
            report: report.clone(),
        }
    }

    /// A workbook that was not filled.
    pub fn failed(request_sha256: String, problems: &[Problem]) -> Self {
        Record {
            input: String::new(),
            output: None,
            input_sha256: None,
            output_sha256: None,
            basis_sha256: None,
            request_sha256,
            version: env!("CARGO_PKG_VERSION").to_owned(),
            status: Status::Failed,
            report: Report { problems: problems.to_vec(), ..Report::default() },
        }
    }
}

#[cfg(test)]
mod tests {
    use super::Record;
    use crate::problem::{Place, Problem};

    #[test]
    fn what_failed_and_why_comes_back_as_it_went() {
        let place = Place::cells("Costs", "B2:B4".parse().unwrap()).called("hence_cost_works");
        let problems = [Problem::error("years-repeat", place, "2031 stands twice").hint("one of them")];
        let record = Record::failed("00".into(), &problems);
        let text = serde_json::to_string(&record).unwrap();
        assert_eq!(serde_json::from_str::<Record>(&text).unwrap(), record);
        let unknown = text.replace("years-repeat", "years-repeated");
        assert!(serde_json::from_str::<Record>(&unknown).unwrap_err().to_string().contains("no code"));
    }
}
