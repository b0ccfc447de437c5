//! The question: as asked, else the workbook's title, else made from the names of the options.

use quick_xml::events::Event;

use super::{Facts, words};
use crate::package::Package;
use crate::xml::Scanner;

/// With more options than so many, a question counts them instead of naming them.
const NAMED: usize = 5;

/// The question in words.
pub(super) fn question(package: &Package, facts: &Facts<'_>, asked: Option<&str>) -> String {
    let given = |text: &str| Some(words::plain(text)).filter(|text| !text.is_empty());
    asked.and_then(given).or_else(|| title(package).as_deref().and_then(given)).unwrap_or_else(|| made(facts))
}

/// The title among the workbook's properties. One that cannot be read is none: it is no part of the appraisal.
fn title(package: &Package) -> Option<String> {
    let links = package.relationships("").ok()?;
    let link = links.into_iter().find(|link| !link.external && link.kind.ends_with("/core-properties"))?;
    let xml = package.part(&link.target).ok()??;
    let mut scanner = Scanner::new(&link.target, &xml).ok()?;
    let mut text: Option<String> = None;
    while let Some(token) = scanner.next().ok()? {
        match token.event {
            Event::Start(tag) if tag.local_name().as_ref() == b"title" => text = Some(String::new()),
            Event::End(tag) if tag.local_name().as_ref() == b"title" => return text,
            Event::Text(part) => {
                if let Some(text) = &mut text {
                    text.push_str(&part.decode().ok()?);
                }
            }
            Event::GeneralRef(reference) => {
                if let Some(text) = &mut text {
                    text.push_str(&resolved(&reference)?);
                }
            }
            Event::CData(part) => {
                if let Some(text) = &mut text {
                    text.push_str(&part.decode().ok()?);
                }
            }
            _ => {}
        }
    }
    None
}

/// The text of a reference to a character.
fn resolved(reference: &quick_xml::events::BytesRef<'_>) -> Option<String> {
    if let Some(c) = reference.resolve_char_ref().ok()? {
        return Some(c.to_string());
    }
    quick_xml::escape::resolve_predefined_entity(&reference.decode().ok()?).map(str::to_owned)
}

fn made(facts: &Facts<'_>) -> String {
    let options: Vec<usize> = (0..facts.options.len()).filter(|&i| Some(i) != facts.baseline()).collect();
    let over = facts.over();
    let names: Vec<String> = options.iter().map(|&i| facts.name(i)).collect();
    match (names.as_slice(), facts.baseline()) {
        ([], _) => format!("What does {} come to in present value?", facts.name(0)),
        ([one], None) => format!("Are the benefits of {one} worth more than its costs, in present value?"),
        ([one], Some(_)) => format!("Does {one} add to net present value{over}?"),
        (names, _) => {
            let which = if names.len() > NAMED {
                format!("the {} options", names.len())
            } else {
                words::list(names, "and")
            };
            format!("Which of {which} has the highest net present value{over}?")
        }
    }
}
