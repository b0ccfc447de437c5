//! The brief as a page of its own: no scripts, nothing from elsewhere, one sheet of paper where it fits.

use super::{Block, Brief, Section, Table};
use crate::drawing::escaped;

/// How the page looks, on a screen and on paper.
const STYLE: &str = "\
:root{color-scheme:light}
body{font:15px/1.45 sans-serif;color:#222;background:#fff;margin:0 auto;padding:24px;max-width:900px}
h1{font-size:1.5em;line-height:1.25;margin:0 0 .4em}
h2{font-size:1.05em;margin:1.1em 0 .35em;border-bottom:1px solid #222}
p{margin:.35em 0}
ul{margin:.35em 0;padding-left:1.2em}
.answer{border-left:4px solid #222;padding:.1em 0 .1em .8em;font-size:1.1em}
.wide{overflow-x:auto}
table{border-collapse:collapse;width:100%;margin:.4em 0 .7em;font-variant-numeric:tabular-nums}
caption{text-align:left;font-size:.9em;color:#444;padding-bottom:.2em}
th,td{padding:.15em .5em;border-bottom:1px solid #bbb;text-align:left;vertical-align:top;overflow-wrap:anywhere;min-width:5em}
thead th{border-bottom:1px solid #222;vertical-align:bottom}
tbody th{font-weight:normal}
.number{min-width:0;text-align:right;white-space:nowrap;overflow-wrap:normal}
thead .number{white-space:normal}
dl{display:grid;grid-template-columns:max-content 1fr;gap:.1em .8em;margin:.35em 0}
dt{font-weight:bold}
dd{margin:0;overflow-wrap:anywhere}
.figures{display:grid;grid-template-columns:repeat(auto-fit,minmax(300px,1fr));gap:.6em 1em;align-items:start}
figure{margin:0}
.beside{display:grid;grid-template-columns:repeat(auto-fit,minmax(300px,1fr));gap:.4em 1em;align-items:start}
svg{display:block;width:100%;height:auto}
footer{margin-top:1em;font-size:.8em;color:#444;overflow-wrap:anywhere}
@page{size:A4;margin:11mm}
@media print{
body{font-size:8pt;line-height:1.28;padding:0;max-width:none}
h1{font-size:13pt;margin-bottom:.2em}
h2{margin:.6em 0 .2em;break-after:avoid}
p,ul{margin:.2em 0}
.answer{font-size:9.5pt}
table{margin:.2em 0 .4em}
th,td{padding:.04em .4em}
.figures{grid-template-columns:1fr 1fr}
.beside{grid-template-columns:3fr 2fr}
figure,table,dl,li{break-inside:avoid}
.wide{overflow-x:visible}
}
";

/// The page.
pub fn html(brief: &Brief) -> String {
    let mut out = String::from("<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\"/>\n");
    out.push_str("<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\"/>\n");
    // Whatever a name in the workbook may hold, nothing on the page runs, and nothing is fetched.
    out.push_str("<meta http-equiv=\"Content-Security-Policy\" ");
    out.push_str("content=\"default-src 'none'; style-src 'unsafe-inline'\"/>\n");
    out.push_str(&format!(
        "<title>{}</title>\n<style>\n{STYLE}</style>\n</head>\n",
        escaped(&brief.question)
    ));
    out.push_str(&format!("<body>\n<main>\n<h1>{}</h1>\n", escaped(&brief.question)));
    out.push_str("<div class=\"answer\">\n");
    for text in &brief.answer {
        out.push_str(&format!("<p>{}</p>\n", escaped(text)));
    }
    out.push_str("</div>\n");
    for section in &brief.sections {
        section_html(&mut out, section);
    }
    out.push_str("</main>\n<footer>\n");
    out.push_str(&format!("<p>{}</p>\n", escaped(&brief.sources.join(" "))));
    out.push_str("</footer>\n</body>\n</html>\n");
    out
}

fn section_html(out: &mut String, section: &Section) {
    out.push_str(&format!("<section>\n<h2>{}</h2>\n", escaped(&section.title)));
    if section.beside.is_some() {
        out.push_str("<div class=\"beside\">\n<div>\n");
    }
    for block in &section.blocks {
        match block {
            Block::Paragraph(text) => out.push_str(&format!("<p>{}</p>\n", escaped(text))),
            Block::List(texts) => {
                out.push_str("<ul>\n");
                for text in texts {
                    out.push_str(&format!("<li>{}</li>\n", escaped(text)));
                }
                out.push_str("</ul>\n");
            }
            Block::Terms(terms) => {
                out.push_str("<dl>\n");
                for (term, text) in terms {
                    out.push_str(&format!("<dt>{}</dt>\n<dd>{}</dd>\n", escaped(term), escaped(text)));
                }
                out.push_str("</dl>\n");
            }
            Block::Table(table) => table_html(out, table),
            Block::Figures(figures) => {
                out.push_str("<div class=\"figures\">\n");
                for figure in figures {
                    out.push_str(&format!("<figure>\n{}</figure>\n", figure.svg));
                }
                out.push_str("</div>\n");
            }
        }
    }
    if let Some(figure) = &section.beside {
        out.push_str(&format!("</div>\n<figure>\n{}</figure>\n</div>\n", figure.svg));
    }
    out.push_str("</section>\n");
}

fn table_html(out: &mut String, table: &Table) {
    out.push_str(&format!(
        "<div class=\"wide\">\n<table>\n<caption>{}</caption>\n<thead>\n<tr>",
        escaped(&table.caption)
    ));
    let class = |k: usize| if k < table.words { "" } else { " class=\"number\"" };
    for (k, heading) in table.headings.iter().enumerate() {
        out.push_str(&format!("<th scope=\"col\"{}>{}</th>", class(k), escaped(heading)));
    }
    out.push_str("</tr>\n</thead>\n<tbody>\n");
    for row in &table.rows {
        out.push_str("<tr>");
        for (k, cell) in row.iter().enumerate() {
            let cell = escaped(cell);
            match k {
                0 => out.push_str(&format!("<th scope=\"row\">{cell}</th>")),
                k => out.push_str(&format!("<td{}>{cell}</td>", class(k))),
            }
        }
        out.push_str("</tr>\n");
    }
    out.push_str("</tbody>\n</table>\n</div>\n");
}
