//! `hence schedules`: the named bases and where they were published.

use std::path::PathBuf;

use hence_core::Schedule;

use crate::args::Schedules;
use crate::{Failure, Outcome, render, terminal};

/// Lists all, or prints one with its source.
pub fn run(args: &Schedules, folder: &Option<PathBuf>) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(folder)?;
    let text = match &args.id {
        None if args.document.json => {
            let list: Vec<_> = catalogue.schedules().into_iter().map(json).collect();
            format!("{:#}\n", serde_json::json!({"schema": 1, "schedules": list}))
        }
        None => list(&catalogue.schedules()),
        Some(id) => {
            let Some(schedule) = catalogue.get(id) else {
                return Err(Failure::Message(format!(
                    "schedules: no schedule {id:?} is known (unknown-schedule)\nTry: hence schedules, for the list"
                )));
            };
            if args.document.json {
                format!("{:#}\n", serde_json::json!({"schema": 1, "schedules": [json(schedule)]}))
            } else {
                one(schedule)
            }
        }
    };
    terminal::print(&text)?;
    Ok(Outcome::Done)
}

fn fields(schedule: &Schedule) -> Vec<(&'static str, String)> {
    let mut fields = vec![
        ("id", schedule.id().to_owned()),
        ("title", schedule.title().to_owned()),
        ("body", schedule.body().to_owned()),
        ("year", schedule.year().to_string()),
        ("place", schedule.place().to_owned()),
        ("address", schedule.address().to_owned()),
        ("line", schedule.spec().to_string()),
        ("status", schedule.status().to_string()),
        ("checked", schedule.checked().to_owned()),
        ("notes", schedule.notes().to_owned()),
    ];
    if let Some((id, beyond)) = schedule.companion() {
        fields.push(("companion", format!("{id}, run beside it beyond {beyond} years")));
    }
    fields.retain(|(_, text)| !text.is_empty());
    fields
}

fn json(schedule: &Schedule) -> serde_json::Value {
    let map = fields(schedule).into_iter().map(|(k, v)| (k.to_owned(), serde_json::Value::String(v)));
    serde_json::Value::Object(map.collect())
}

fn list(schedules: &[&Schedule]) -> String {
    let mut rows = vec![vec!["Id".to_owned(), "Status".to_owned(), "Source".to_owned()]];
    for s in schedules {
        rows.push(vec![
            s.id().to_owned(),
            s.status().to_string(),
            format!("{}, {}, {}", s.body(), s.title(), s.year()),
        ]);
    }
    format!(
        "{}
{}
",
        render::left_table(&rows),
        hence_core::CAUTION
    )
}

fn one(schedule: &Schedule) -> String {
    let rows: Vec<String> = fields(schedule).into_iter().map(|(k, v)| format!("{k:10} {v}\n")).collect();
    format!("{}\n{}\n", rows.concat(), hence_core::CAUTION)
}
