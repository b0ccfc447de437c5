//! The brief: what it says of small workbooks whose results are worked out here by hand, and how it is printed.
//!
//! Two ways of one plan, at 10% from 2026: Alpha costs 100 in 2026 and brings 242 in 2028 (worth 200 then), Beta costs 50
//! in 2026 and brings 110 in 2027 (worth 100). Figures and names are made up.

use std::io::Write as _;
use std::process::{Command, Stdio};

use hence_core::{CAUTION, Catalogue};
use hence_workbook::brief::{Block, Brief, BriefRequest, Table, brief, html, markdown};
use hence_workbook::package::Package;
use hence_workbook::report::Status;
use hence_workbook::xml::Scanner;

use crate::small::Small;
use crate::tools::python;

/// An option: its name in a defined name, its costs and benefits of 2026, 2027 and 2028.
type Way<'a> = (&'a str, [f64; 3], [f64; 3]);

const ALPHA: Way = ("Alpha", [100.0, 0.0, 0.0], [0.0, 0.0, 242.0]);
const BETA: Way = ("Beta", [50.0, 0.0, 0.0], [0.0, 110.0, 0.0]);

/// A workbook of options on one basis.
fn plan(basis: &str, ways: &[Way]) -> Small {
    let mut cells =
        format!("A1: 'Base | 2026\nA2: 'Rate | '{basis}\nA3: 'Baseline |\nA4: 'Year | 2026 | 2027 | 2028\n");
    let mut names = "hence_base B1, hence_basis B2, hence_years B4:D4".to_owned();
    for (i, (name, costs, benefits)) in ways.iter().enumerate() {
        let (costs_row, benefits_row) = (5 + 2 * i, 6 + 2 * i);
        let row = |values: &[f64; 3]| values.map(|x| x.to_string()).join(" | ");
        cells +=
            &format!("A{costs_row}: 'Costs | {}\nA{benefits_row}: 'Sales | {}\n", row(costs), row(benefits));
        names += &format!(
            ", hence_cost_works__{name} B{costs_row}:D{costs_row}, hence_benefit_sales__{name} B{benefits_row}:D{benefits_row}, \
             hence_npv__{name} F{costs_row}"
        );
    }
    Small::default().sheet("Plan", &cells).names(&names)
}

/// The same with one of the options as the baseline.
fn over(baseline: &str, basis: &str, ways: &[Way]) -> Small {
    plan(basis, ways).sheet("More", &format!("A1: '{baseline}")).names("hence_baseline A1")
}

fn briefed_with(book: &Small, request: &BriefRequest) -> Brief {
    let package = Package::from_bytes("small.xlsx", book.bytes()).expect("a package");
    brief(&package, request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

fn briefed(book: &Small) -> Brief {
    briefed_with(book, &BriefRequest::default())
}

/// Every text of a section, tables as lines of cells.
fn texts(brief: &Brief, title: &str) -> Vec<String> {
    let section = brief.sections.iter().find(|section| section.title == title).expect("the section");
    let mut texts = Vec::new();
    for block in &section.blocks {
        match block {
            Block::Paragraph(text) => texts.push(text.clone()),
            Block::List(list) => texts.extend(list.iter().cloned()),
            Block::Terms(terms) => texts.extend(terms.iter().map(|(term, text)| format!("{term}: {text}"))),
            Block::Table(table) => texts.extend(lines(table)),
            Block::Figures(figures) => {
                texts.extend(figures.iter().flat_map(|figure| &figure.table).flat_map(lines))
            }
        }
    }
    texts
}

fn lines(table: &Table) -> Vec<String> {
    let headings = table.headings.join(" | ");
    std::iter::once(headings).chain(table.rows.iter().map(|row| row.join(" | "))).collect()
}

fn has(found: &[String], due: &str) {
    assert!(found.iter().any(|text| text == due), "{due}\nis not among\n{}", found.join("\n"));
}

#[test]
fn the_answer_names_the_highest_and_by_how_much() {
    let brief = briefed(&plan("10%", &[ALPHA, BETA]));
    assert_eq!(brief.question, "Which of “Alpha” and “Beta” has the highest net present value?");
    assert_eq!(
        brief.answer,
        [
            "On the declared basis “Alpha” has the highest net present value: 100.00. The next is “Beta” with 50.00, which \
             is 50.00 less.",
            "The present value of its benefits is 2.00 times that of its costs."
        ]
    );
    assert_eq!((brief.ranks.as_slice(), brief.status()), (&[1, 2][..], Status::Done));
    let found = texts(&brief, "The options");
    has(
        &found,
        "Option | PV of benefits | PV of costs | Net present value | Benefits / costs | Annual equivalent | Rank",
    );
    // Over two years the sum of factors is 1/1.1 + 1/1.21 = 2.1/1.21, and 100 x 1.21 / 2.1 = 57.62.
    has(&found, "Alpha | 200.00 | 100.00 | 100.00 | 2.00 | 57.62 | 1");
    has(&found, "Beta | 100.00 | 50.00 | 50.00 | 2.00 | 28.81 | 2");
    // Of a gross 300, the 200 stand after two years: 4/3 of a year.
    has(&found, "Alpha | 100% | 0% | 0% | 1.3 years");
}

#[test]
fn it_says_where_the_order_changes() {
    let brief = briefed(&plan("10%", &[ALPHA, BETA]));
    let found = texts(&brief, "What would change it");
    // 242 v^2 - 100 = 110 v - 50 at v = 0.735469, a rate of 35.97%.
    has(
        &found,
        "At a flat rate in place of the basis (declared: 10%), “Alpha” has the highest net present value below 35.97%, \
         “Beta” above 35.97% (searched: -50% to 100%).",
    );
    // 242 v^2 = 100 at a rate of sqrt(2.42) - 1.
    has(&found, "At a flat rate, the net present value of “Alpha” is zero at 55.56%.");
    // 242 / 1.09^2 - 100 and 242 / 1.11^2 - 100.
    has(
        &found,
        "With every rate of the basis 1 point lower, the highest net present value is 103.69, that of “Alpha”; 1 point \
         higher, the highest net present value is 96.41, that of “Alpha”.",
    );
    has(&found, "Stream | Net present value of zero | Equal to “Beta”");
    has(&found, "works | × 2.00 | × 1.50");
    has(&found, "sales | × 0.50 | × 0.75");
    assert_eq!(found.len(), 6, "{found:#?}");
}

#[test]
fn with_a_baseline_everything_is_over_it() {
    let none: Way = ("Nothing", [0.0; 3], [0.0, 0.0, 121.0]);
    let brief = briefed(&over("Nothing", "10%", &[none, ALPHA, BETA]));
    assert_eq!(
        brief.question,
        "Which of “Alpha” and “Beta” has the highest net present value over “Nothing”?"
    );
    // Nothing is worth 100 as it stands: Alpha adds nothing to that, and Beta takes 50 away.
    assert_eq!(
        brief.answer,
        [
            "On the declared basis no option has a higher net present value than “Nothing”. The highest over “Nothing” is \
             that of “Alpha”: 0.00. The next is “Beta” with -50.00, which is 50.00 less."
        ]
    );
    let found = texts(&brief, "The options");
    has(&found, "Nothing (baseline) | 0.00 | 0.00 | 0.00 | - | 0.00 | 1");
    has(&found, "As it stands, the net present value of the baseline “Nothing” is 100.00.");
    let one = briefed(&over("Nothing", "10%", &[none, BETA]));
    assert_eq!(one.question, "Does “Beta” add to net present value over “Nothing”?");
    assert_eq!(
        one.answer[0],
        "On the declared basis the net present value of “Beta” is -50.00 over “Nothing”, below zero."
    );
    // 110 v - 50 = 121 v^2 has no real solution: its discriminant is 12100 - 24200.
    let found = texts(&one, "What would change it");
    has(
        &found,
        "At a flat rate in place of the basis (declared: 10%), “Nothing” has the highest net present value at every flat \
         rate from -50% to 100%.",
    );
}

#[test]
fn nothing_is_called_best_that_loses() {
    let lost = |name, cost| (name, [cost, 0.0, 0.0], [0.0, 110.0, 0.0]);
    let brief = briefed(&plan("10%", &[lost("Alpha", 300.0), lost("Beta", 150.0)]));
    assert_eq!(
        brief.answer,
        [
            "On the declared basis every option has a net present value below zero. The highest is that of “Beta”: \
             -50.00. The next is “Alpha” with -200.00, which is 150.00 less."
        ]
    );
}

#[test]
fn equals_share_the_first_place() {
    let brief = briefed(&plan("10%", &[ALPHA, ("Twin", ALPHA.1, ALPHA.2), BETA]));
    assert_eq!(
        brief.answer,
        [
            "On the declared basis “Alpha” and “Twin” have the same net present value, 100.00, and no option has a higher one."
        ]
    );
    assert_eq!(brief.ranks, [1, 1, 3]);
}

#[test]
fn one_option_is_held_against_zero() {
    let brief = briefed(&plan("10%", &[ALPHA]));
    assert_eq!(brief.question, "Are the benefits of “Alpha” worth more than its costs, in present value?");
    assert_eq!(
        brief.answer,
        [
            "On the declared basis the net present value of “Alpha” is 100.00, above zero.",
            "The present value of its benefits is 2.00 times that of its costs."
        ]
    );
    let found = texts(&brief, "What would change it");
    has(
        &found,
        "At a flat rate in place of the basis (declared: 10%), the net present value of “Alpha” is zero at 55.56%.",
    );
    has(&found, "works | × 2.00");
}

#[test]
fn bases_that_differ_are_said_to() {
    let book = plan("10%", &[ALPHA, BETA]).sheet("Other", "A1: '5%").names("hence_basis__Beta A1");
    let brief = briefed(&book);
    assert!(brief.answer[0].starts_with("On the basis declared for each “Alpha”"), "{:?}", brief.answer);
    assert!(brief.answer.last().unwrap().contains("do not compare as they stand"), "{:?}", brief.answer);
    let found = texts(&brief, "The basis");
    has(&found, "For “Alpha”:");
    has(&found, "As declared: “5%”, from hence_basis__Beta at Other!A1");
}

#[test]
fn the_basis_stands_with_its_source() {
    let brief = briefed(&plan("uk-2003; flows middle", &[ALPHA]));
    let found = texts(&brief, "The basis");
    let rate = found.iter().find(|text| text.starts_with("Discount rate: ")).expect("the rate");
    assert!(
        rate.contains("3.5% a year for years 0 to 30") && rate.contains("HM Treasury (UK), 2003"),
        "{rate}"
    );
    has(&found, "As declared: “uk-2003; flows middle”, from hence_basis at Plan!B2");
    has(&found, "Base: 2026, from hence_base at Plan!B1");
    let timing = found.iter().find(|text| text.starts_with("Timing: ")).expect("the timing");
    // 1.035^0.5 and 1.035^-0.5.
    assert!(timing.contains("a flow in 2026 has factor 1.0173, in 2027 0.9829"), "{timing}");
    has(&found, CAUTION);
    // The schedule is superseded: a warning that matters to those who decide.
    let remarks = texts(&brief, "What was valued, and what was not");
    assert!(remarks.iter().any(|text| text.contains("uk-2003 is superseded")), "{remarks:#?}");
}

#[test]
fn other_bases_and_a_companion_are_told() {
    // A schedule with a companion that its body wants beyond 50 years; here both are valued, whatever the reach.
    let request = BriefRequest { against: vec!["50%".to_owned()], ..BriefRequest::default() };
    let brief = briefed_with(&plan("uk-2018", &[ALPHA, BETA]), &request);
    let found = texts(&brief, "What would change it");
    has(
        &found,
        "uk-2018 has uk-2018-reduced run beside it over more than 50 years; this appraisal reaches 2 years. On it, the \
         order of the options is the same.",
    );
    // At 50%, Beta's 110 / 1.5 - 50 = 23.33 beats Alpha's 242 / 2.25 - 100 = 7.56.
    has(&found, "50% (against) | “Beta”, 23.33 | changes | 7.56");
}

#[test]
fn parameters_of_a_rate_are_moved_one_by_one() {
    // 1% + 1 x 9% is 10%: Alpha is first up to 35.97%, which is a preference of 26.97%, an elasticity of 3.89 or a growth
    // of 34.97%.
    let brief = briefed(&plan("preference 1%, elasticity 1, growth 9%", &[ALPHA, BETA]));
    let found = texts(&brief, "What would change it");
    for due in [
        "With another preference in “preference 1%, elasticity 1, growth 9%”, “Alpha” has the highest net present value \
         below 26.97%, “Beta” above 26.97% (searched: -50% to 100%).",
        "With another growth in “preference 1%, elasticity 1, growth 9%”, “Alpha” has the highest net present value below \
         34.97%, “Beta” above 34.97% (searched: -50% to 100%).",
    ] {
        has(&found, due);
    }
    // 1% + 3.89 x 9% is 35.97% too; of an elasticity of 20, no curve is made.
    assert!(found.iter().any(|text| text.contains("elasticity in") && text.contains("3.89")), "{found:#?}");
}

#[test]
fn rows_that_nobody_named_are_told() {
    let book = plan("10%", &[ALPHA])
        .sheet("Extra", "A4: 'Year | 2026 | 2027 | 2028\nA5: 'Jobs | 1 | 2 | 3")
        .own_names("hence_years B4:D4, hence_cost_more B6:D6, hence_npv F1");
    // The second sheet is an option of its own: its years, a cost that is blank, and a row without a name.
    let brief = briefed(&book);
    let remarks = texts(&brief, "What was valued, and what was not");
    let told = remarks.iter().find(|text| text.contains("not valued")).expect("the rows");
    assert!(told.contains("“Jobs” (Extra!B5:D5)"), "{told}");
    assert_eq!(brief.not_valued, ["Jobs (Extra!B5:D5)"]);
    let clean = texts(&briefed(&plan("10%", &[ALPHA])), "What was valued, and what was not");
    has(&clean, "Counted as benefits: sales; as costs: works.");
    assert!(clean[1].starts_with("Every row of numbers along the years"), "{clean:#?}");
}

/// What the element, class or text is that a page must not hold is the page's own affair: everything of the workbook comes
/// out as text.
const HOSTILE: &str =
    "<script>alert(1)</script><img src=x onerror=alert(2)>\" onload=\"x' & [a](b) | *c* `d` \u{202e}e";

#[test]
fn what_a_workbook_holds_is_never_markup() {
    let block = format!("A1: 'Year | 2026 | 2027\nA2: 'Works{HOSTILE} | 10 | 20\n");
    let hostile = Small::default()
        .sheet("Ways <b>&\"'|", &block.replace(" | *c*", " *c*"))
        .names("hence_years B1:C1, hence_costs A2:C2, hence_npv B6")
        .sheet("Base", "A1: 2026\nA2: '4%\nA4: 'x")
        .names("hence_base A1, hence_basis A2");
    let request = BriefRequest {
        question: Some(HOSTILE.to_owned()),
        as_of: Some(HOSTILE.to_owned()),
        by: Some(HOSTILE.to_owned()),
        ..BriefRequest::default()
    };
    let package = Package::from_bytes(&format!("{HOSTILE}.xlsx"), hostile.bytes()).unwrap();
    let brief = brief(&package, &request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"));
    let page = html(&brief);
    well_formed(&page);
    for word in ["<script", "<img", "onload=\"x", "\u{202e}"] {
        assert!(!page.contains(word), "{word} in\n{page}");
    }
    assert!(page.contains("&lt;script&gt;alert(1)") && page.contains("\\u{202e}"));
    let text = markdown(&brief);
    for word in ["<script", "<img", "[a](b)", " *c*", " `d`", "\u{202e}"] {
        assert!(!text.contains(word), "{word} in\n{text}");
    }
    tables_are_even(&text);
}

/// The page as XML, which it is besides being HTML.
fn well_formed(page: &str) {
    let body = page.strip_prefix("<!DOCTYPE html>\n").expect("a page of HTML");
    let mut scanner = Scanner::new("page", body.as_bytes()).expect("UTF-8");
    while scanner.next().unwrap_or_else(|error| panic!("{error}\n{page}")).is_some() {}
}

/// Every row of a Markdown table has as many cells as its heading.
fn tables_are_even(text: &str) {
    let cells = |line: &str| line.replace("\\|", "").matches('|').count();
    let mut open: Option<usize> = None;
    let mut tables = 0;
    for line in text.lines() {
        match (line.starts_with('|'), open) {
            (true, Some(due)) => assert_eq!(cells(line), due, "{line}"),
            (true, None) => {
                open = Some(cells(line));
                tables += 1;
            }
            (false, _) => open = None,
        }
    }
    assert!(tables >= 3, "{text}");
}

fn sample() -> Package {
    let path = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/mine-drainage.xlsx");
    Package::open(&path).expect("the sample opens")
}

#[test]
fn the_sample_makes_a_page_and_a_text() {
    let request = BriefRequest {
        against: vec!["3.5%".into(), "uk-2003".into()],
        as_of: Some("1 December 2026".into()),
        by: Some("A. Reader".into()),
        ..BriefRequest::default()
    };
    let make = || brief(&sample(), &request, &Catalogue::builtin()).expect("a brief");
    let first = make();
    let (page, text) = (html(&first), markdown(&first));
    assert!(page == html(&make()) && text == markdown(&make()), "same input, same bytes");
    well_formed(&page);
    tables_are_even(&text);
    for part in ["As of 1 December 2026.", "By A. Reader.", "mine-drainage.xlsx, SHA-256 ", CAUTION] {
        assert!(page.contains(part) && text.contains(part), "{part}");
    }
    // Nothing is run, and nothing comes from elsewhere.
    for word in ["<script", "http-equiv=\"refresh\"", "href=", "src=", "url(", "@import"] {
        assert!(!page.contains(word), "{word}");
    }
    assert_eq!(page.matches("<svg").count(), 3);
    assert_eq!(page.matches("<desc id=").count(), 3);
    // The highest net present value is the one that a fill reports.
    let best = &first.options[first.ranks.iter().position(|rank| *rank == 1).expect("a first")];
    assert!(first.answer[0].contains(&format!("“{}”", best.name)));
}

/// What Python's parser of HTML makes of the page: tags in pairs, headings in order, cells with a scope, pictures with
/// words, one of each id.
const LOOK: &str = r#"
import sys
from html.parser import HTMLParser
VOID = {"meta", "br", "hr", "img", "input", "link"}
class Look(HTMLParser):
    def __init__(self):
        super().__init__()
        self.open, self.ids, self.heads, self.refs, self.svgs, self.lang = [], [], [], [], 0, None
    def handle_starttag(self, tag, attrs):
        attrs = dict(attrs)
        if tag in VOID: sys.exit("an open void tag: " + tag)
        self.open.append(tag)
        self.see(tag, attrs)
    def handle_startendtag(self, tag, attrs):
        self.see(tag, dict(attrs))
    def see(self, tag, attrs):
        if "id" in attrs: self.ids.append(attrs["id"])
        if tag == "html": self.lang = attrs.get("lang")
        if tag in ("h1", "h2", "h3"): self.heads.append(tag)
        if tag == "th" and attrs.get("scope") not in ("col", "row"): sys.exit("a heading cell without scope")
        if tag == "svg":
            self.svgs += 1
            if attrs.get("role") != "img": sys.exit("a picture without its role")
            self.refs += attrs["aria-labelledby"].split()
    def handle_endtag(self, tag):
        if not self.open or self.open.pop() != tag: sys.exit("crossed tags: " + tag)
look = Look()
look.feed(sys.stdin.buffer.read().decode("utf-8"))
look.close()
assert not look.open, look.open
assert look.lang == "en"
assert look.heads[0] == "h1" and look.heads.count("h1") == 1 and len(look.heads) > 4, look.heads
assert len(set(look.ids)) == len(look.ids), look.ids
assert look.svgs > 0 and set(look.refs) <= set(look.ids), look.refs
print("sound")
"#;

#[test]
fn another_parser_finds_the_page_sound() {
    let Some(python) = python("html.parser") else { return };
    let mut many: Vec<Way> = vec![ALPHA, BETA];
    many.extend(["C", "D", "E", "F", "G", "H", "I"].map(|name| (name, BETA.1, BETA.2)));
    let pages = [
        html(&brief(&sample(), &BriefRequest::default(), &Catalogue::builtin()).expect("a brief")),
        html(&briefed(&plan("10%", &[ALPHA]))),
        html(&briefed(&plan("10%", &many))),
    ];
    for page in pages {
        let mut child = Command::new(&python)
            .args(["-c", LOOK])
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("Python starts");
        child.stdin.take().expect("a pipe").write_all(page.as_bytes()).expect("it reads");
        let output = child.wait_with_output().expect("it ends");
        assert_eq!(
            String::from_utf8_lossy(&output.stdout).trim(),
            "sound",
            "{}",
            String::from_utf8_lossy(&output.stderr)
        );
    }
}

/// Ordinary letters on white need a contrast of 4.5 to 1 (WCAG 2.2, 1.4.3).
#[test]
fn letters_stand_out_from_the_page() {
    let page = html(&briefed(&plan("10%", &[ALPHA, BETA])));
    let linear = |c: f64| if c <= 0.04045 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) };
    let mut seen = 0;
    for colour in page.split(";color:#").chain(page.split("{color:#")).chain(page.split("fill:#222")).skip(1)
    {
        let digits: String = colour.chars().take_while(char::is_ascii_hexdigit).collect();
        if digits.len() != 3 {
            continue;
        }
        let part =
            |k: usize| linear(f64::from(u8::from_str_radix(&digits[k..=k].repeat(2), 16).unwrap()) / 255.0);
        let luminance = 0.2126 * part(0) + 0.7152 * part(1) + 0.0722 * part(2);
        assert!(1.05 / (luminance + 0.05) >= 4.5, "#{digits}");
        seen += 1;
    }
    assert!(seen >= 2, "{seen} colours of letters were found");
}

#[test]
fn numbers_without_measure_are_told_not_drawn() {
    let huge: Way = ("Huge", [1e290, 0.0, 0.0], [0.0, 0.0, 2e290]);
    let page = html(&briefed(&plan("10%", &[huge, BETA])));
    well_formed(&page);
    for word in ["NaN", "inf\"", "infinity"] {
        assert!(!page.contains(word), "{word}");
    }
    assert!(page.contains("too large or too small to be drawn"), "{page}");
}

#[test]
fn the_title_of_the_workbook_is_the_question() {
    let titled = |title: &str, question: Option<&str>| {
        let bytes = titled(&plan("10%", &[ALPHA]), title);
        let package = Package::from_bytes("small.xlsx", bytes).unwrap();
        let request = BriefRequest { question: question.map(str::to_owned), ..BriefRequest::default() };
        brief(&package, &request, &Catalogue::builtin()).expect("a brief").question
    };
    assert_eq!(titled("Shall we build <i>Alpha</i> &amp; Co?", None), "Shall we build Alpha & Co?");
    assert_eq!(
        titled("Shall we build Alpha &amp; Co,&#10; <![CDATA[or <not>]]>?", None),
        "Shall we build Alpha & Co, or <not>?"
    );
    assert_eq!(
        titled("  ", None),
        "Are the benefits of “Alpha” worth more than its costs, in present value?"
    );
    assert_eq!(titled("A title", Some("Asked?")), "Asked?");
    assert_eq!(titled("A title", Some("  ")), "A title");
}

/// The package with a title among its properties.
fn titled(book: &Small, title: &str) -> Vec<u8> {
    use hence_workbook::package::Changes;
    let package = Package::from_bytes("small.xlsx", book.bytes()).unwrap();
    let links = String::from_utf8(package.part("_rels/.rels").unwrap().unwrap()).unwrap();
    let kind = "http://schemas.openxmlformats.org/package/2006/relationships/metadata/core-properties";
    let link =
        format!("<Relationship Id=\"rIdT\" Type=\"{kind}\" Target=\"docProps/core.xml\"/></Relationships>");
    let links = links.replace("</Relationships>", &link);
    let core = format!(
        "<cp:coreProperties xmlns:cp=\"http://schemas.openxmlformats.org/package/2006/metadata/core-properties\" \
         xmlns:dc=\"http://purl.org/dc/elements/1.1/\"><dc:title>{title}</dc:title></cp:coreProperties>"
    );
    let changes = Changes {
        replace: [("_rels/.rels".to_owned(), links.into_bytes())].into(),
        add: vec![("docProps/core.xml".to_owned(), core.into_bytes())],
        ..Changes::default()
    };
    package.write(&changes).expect("a package")
}

#[test]
fn options_that_begin_alike_are_numbered() {
    let named = |name| (name, BETA.1, BETA.2);
    let book = plan("10%", &[named("Rebuild_the_old_quay"), named("Rebuild_the_old_pier")]);
    let page = html(&briefed(&book));
    for part in [">1. Rebuild the old quay</th>", ">2. Rebuild the old pier</th>", ">2. Rebuild"] {
        assert!(page.contains(part), "{part} in\n{page}");
    }
    assert!(!html(&briefed(&plan("10%", &[ALPHA, BETA]))).contains("1. Alpha"));
}

#[test]
fn what_is_not_taken_as_entered_is_told() {
    let book = plan("10%", &[ALPHA, BETA])
        .sheet("More", "A1: 0.5\nA2: '5%\nA3: 'real 2020")
        .names("hence_uplift_works A1, hence_basis_sales__Alpha A2, hence_price_basis A3");
    let brief = briefed(&book);
    let remarks = texts(&brief, "What was valued, and what was not");
    let told = remarks.iter().find(|text| text.starts_with("Adjusted")).expect("the adjustments");
    assert!(told.contains("“works” raised by 50% (in “Alpha” and “Beta”)"), "{told}");
    assert!(told.contains("“sales” discounted on 5%, a basis of its own (in “Alpha”)"), "{told}");
    let basis = texts(&brief, "The basis");
    has(&basis, "Another basis: “sales” on “5%”: 5% a year (as stated, no published source)");
    assert!(basis.iter().any(|text| text.starts_with("Prices: ") && text.contains("2020")), "{basis:#?}");
    // 242 / 1.05^2 - 150 = 69.50; 110 / 1.1 - 75 = 25.
    assert!(brief.answer[0].contains("69.50") && brief.answer[0].contains("25.00"), "{:?}", brief.answer);
    assert!(brief.answer.last().unwrap().contains("not all valued on one basis"), "{:?}", brief.answer);
}

#[test]
fn welfare_is_told_where_it_is_asked_for() {
    // The income is half of the reference: at an elasticity of 1, sales count twice.
    let weighted = plan("10%", &[ALPHA])
        .sheet("More", "A1: 1\nA2: 20000\nA3: 40000")
        .names("hence_elasticity A1, hence_income_sales A2, hence_income_reference A3");
    let brief = briefed(&weighted);
    // 2 x 242 / 1.21 - 100.
    assert!(brief.answer[0].contains("is 300.00, above zero"), "{:?}", brief.answer);
    let remarks = texts(&brief, "What was valued, and what was not");
    let told = remarks.iter().find(|text| text.starts_with("Adjusted")).expect("the weight");
    assert!(told.contains("“sales”") && told.contains("income"), "{told}");
    let book = plan("10%", &[ALPHA])
        .sheet("More", "A1: 1\nB4: 1000000 | 1000000 | 1000000")
        .names("hence_elasticity A1, hence_consumption B4:D4");
    let found = texts(&briefed(&book), "The options");
    assert!(
        found.iter().any(|text| text.starts_with("“Alpha” against consumption: exact value ")),
        "{found:#?}"
    );
}
