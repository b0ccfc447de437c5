//! What makes one output differ from another of the same input.

use hence_core::Catalogue;

use super::sha256;
use crate::fill::FillRequest;

impl FillRequest {
    /// SHA-256 of all that makes one output differ from another of the same input: what is asked for, the user's own
    /// schedules, the version of hence.
    pub fn sha256(&self, catalogue: &Catalogue) -> String {
        let mut text = serde_json::to_string(self).unwrap_or_default();
        for schedule in catalogue.schedules().iter().filter(|schedule| !schedule.is_builtin()) {
            text.push_str(&format!("\n{schedule:?}"));
        }
        sha256(format!("{}\n{text}", env!("CARGO_PKG_VERSION")).as_bytes())
    }
}

#[cfg(test)]
mod tests {
    use super::FillRequest;
    use hence_core::Catalogue;

    #[test]
    fn whatever_changes_an_output_changes_the_hash() {
        let plain = FillRequest::default();
        let catalogue = Catalogue::builtin();
        let house = |rate: &str| {
            let text = format!(
                "id = \"house\"\ntitle = \"House\"\nbody = \"Us\"\nyear = 2026\nplace = \"1\"\naddress = \"\"\n\
                 line = \"{rate}\"\nstatus = \"current\"\ncomplete = true\nchecked = \"ours\"\n"
            );
            catalogue.clone().with(&[("house.toml".into(), text)]).unwrap()
        };
        let mut hashes =
            vec![plain.sha256(&catalogue), plain.sha256(&house("3%")), plain.sha256(&house("4%"))];
        for other in [
            FillRequest { basis: Some("3%".into()), ..plain.clone() },
            FillRequest { replace: Some(("4%".into(), "3%".into())), ..plain.clone() },
            FillRequest { roles: vec![("years".into(), "A!B1:D1".into())], ..plain.clone() },
            FillRequest { formulas: false, ..plain.clone() },
            FillRequest { replace_formulas: true, ..plain.clone() },
            FillRequest { against: vec!["3%".into()], ..plain.clone() },
            FillRequest { as_of: Some("3%".into()), ..plain.clone() },
            FillRequest { by: Some("3%".into()), ..plain.clone() },
        ] {
            hashes.push(other.sha256(&catalogue));
        }
        let count = hashes.len();
        hashes.sort();
        hashes.dedup();
        assert_eq!(hashes.len(), count);
        assert_eq!(plain.sha256(&house("3%")), plain.clone().sha256(&house("3%")));
    }
}
