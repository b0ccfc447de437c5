//! Finishing charts: axis titles, legend, number formats, and series told apart without colour.

use crate::problem::{Place, Problem, Result};
use crate::splice::{Edits, Element, bad_xml, escape, with_attribute};

/// Where a legend stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Legend {
    /// Below the plot.
    Bottom,
    /// To the right of the plot.
    Right,
    /// Above the plot.
    Top,
}

/// What a chart made by xlsxwriter still lacks. Charts and finishes go together by their order.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ChartFinish {
    /// Above the chart; also its alternative text. None takes the title away.
    pub title: Option<String>,
    /// Along the first axis (categories, or x).
    pub x_title: Option<String>,
    /// Along the second axis (values, or y).
    pub y_title: Option<String>,
    /// Number format of the first axis; `General` unless said.
    pub x_format: Option<String>,
    /// Number format of the second axis.
    pub y_format: Option<String>,
    /// Ends of the first axis; the program's choice unless said.
    pub x_range: Option<(f64, f64)>,
    /// None: no legend.
    pub legend: Option<Legend>,
    /// A marker at every point of a line. Without it lines differ by their dashes.
    pub markers: bool,
    /// Bars of all series lie in one line, the first label's on top.
    pub tornado: bool,
    /// Width and height in columns and rows; as made unless said.
    pub size: Option<(u32, u32)>,
}

/// Colours that differ in lightness and for the colour-blind too (Okabe and Ito's set, darkest first).
const COLOURS: [&str; 6] = ["000000", "0072B2", "D55E00", "009E73", "CC79A7", "E69F00"];
const DASHES: [&str; 6] = ["solid", "dash", "sysDot", "dashDot", "lgDash", "lgDashDotDot"];
const MARKERS: [&str; 6] = ["circle", "square", "triangle", "diamond", "x", "plus"];
/// The first is a plain fill.
const PATTERNS: [&str; 6] = ["", "wdUpDiag", "pct25", "wdDnDiag", "horz", "smGrid"];

const SPACE: [&str; 4] = ["date1904", "lang", "roundedCorners", "chart"];
const CHART: [&str; 7] =
    ["title", "autoTitleDeleted", "view3D", "plotArea", "legend", "plotVisOnly", "dispBlanksAs"];
const AXIS: [&str; 13] = [
    "axId",
    "scaling",
    "delete",
    "axPos",
    "majorGridlines",
    "minorGridlines",
    "title",
    "numFmt",
    "majorTickMark",
    "minorTickMark",
    "tickLblPos",
    "spPr",
    "crossAx",
];
const PLOT: [&str; 9] =
    ["barDir", "scatterStyle", "grouping", "wireframe", "varyColors", "ser", "dLbls", "gapWidth", "overlap"];
const SERIES: [&str; 17] = [
    "idx",
    "order",
    "tx",
    "spPr",
    "invertIfNegative",
    "pictureOptions",
    "marker",
    "dPt",
    "dLbls",
    "trendline",
    "errBars",
    "cat",
    "val",
    "xVal",
    "yVal",
    "smooth",
    "shape",
];

/// The chart part with titles, legend, axes and series finished.
///
/// Series get one look each, by their order: lines a dash (and a marker where wanted), areas and
/// bars a pattern, both a colour of different lightness. Axes are kept visible in every program,
/// labels of the first stay at its low end, and cached numbers are taken out, so that what is drawn
/// comes from the cells.
///
/// **Errors**: `bad-xml` where it is no chart part; `text-characters` for a title that XML does not allow.
pub fn finish_chart(xml: &[u8], finish: &ChartFinish) -> Result<Vec<u8>> {
    let root = Element::root(xml)?;
    let (Some(chart), "c:chartSpace") = (root.child("chart"), root.name()) else {
        return Err(bad_xml("the part is no chart"));
    };
    let plot_area = chart.child("plotArea").ok_or_else(|| bad_xml("the chart has no plot area"))?;
    let mut edits = Edits::default();
    put(&mut edits, &root, &SPACE, "roundedCorners", "<c:roundedCorners val=\"0\"/>");
    let caption = finish.title.as_deref().map(|title| titled(title, 1300, false)).transpose()?;
    put(&mut edits, chart, &CHART, "title", caption.as_deref().unwrap_or_default());
    let deleted = format!("<c:autoTitleDeleted val=\"{}\"/>", u8::from(caption.is_none()));
    put(&mut edits, chart, &CHART, "autoTitleDeleted", &deleted);
    let legend = finish.legend.map_or(String::new(), |at| {
        let at = match at {
            Legend::Bottom => "b",
            Legend::Right => "r",
            Legend::Top => "t",
        };
        format!("<c:legend><c:legendPos val=\"{at}\"/><c:overlay val=\"0\"/></c:legend>")
    });
    put(&mut edits, chart, &CHART, "legend", &legend);
    put(&mut edits, chart, &CHART, "dispBlanksAs", "<c:dispBlanksAs val=\"gap\"/>");

    let mut axes = 0;
    let mut series = 0;
    for part in &plot_area.children {
        match part.local() {
            "catAx" | "valAx" | "dateAx" => {
                finish_axis(&mut edits, part, finish, axes == 0)?;
                axes += 1;
            }
            "layout" => {}
            kind => finish_plot(&mut edits, part, kind, finish, &mut series),
        }
    }
    edits.apply(xml)
}

/// Puts a child in the place the schema gives it, or in that of the child it replaces. No text takes it out.
fn put(edits: &mut Edits, parent: &Element, order: &[&str], name: &str, text: &str) {
    if let Some(old) = parent.child(name) {
        edits.replace(old.span.clone(), text);
        return;
    }
    let rank = |name: &str| order.iter().position(|n| *n == name);
    let behind = |child: &&Element| match rank(child.local()) {
        Some(there) => Some(there) > rank(name),
        None => true,
    };
    edits.insert(parent.children.iter().find(behind).map_or(parent.inner.end, |c| c.span.start), text);
}

/// A title; `size` in hundredths of a point.
fn titled(text: &str, size: u32, upright: bool) -> Result<String> {
    let Some(text) = escape(text) else {
        let what = "a chart's title holds a character that XML does not allow";
        return Err(Problem::error("text-characters", Place::default(), what).into());
    };
    let body = if upright { "<a:bodyPr rot=\"-5400000\" vert=\"horz\"/>" } else { "<a:bodyPr/>" };
    Ok(format!(
        "<c:title><c:tx><c:rich>{body}<a:lstStyle/><a:p><a:pPr><a:defRPr/></a:pPr>\
         <a:r><a:rPr lang=\"en-GB\" sz=\"{size}\" b=\"1\"/><a:t>{text}</a:t></a:r></a:p></c:rich></c:tx><c:overlay val=\"0\"/></c:title>"
    ))
}

fn finish_axis(edits: &mut Edits, axis: &Element, finish: &ChartFinish, first: bool) -> Result<()> {
    let (title, format) =
        if first { (&finish.x_title, &finish.x_format) } else { (&finish.y_title, &finish.y_format) };
    if let Some((low, high)) = finish.x_range.filter(|_| first) {
        let scaling = format!(
            "<c:scaling><c:orientation val=\"minMax\"/><c:max val=\"{high:?}\"/><c:min val=\"{low:?}\"/></c:scaling>"
        );
        put(edits, axis, &AXIS, "scaling", &scaling);
    }
    if finish.tornado && first {
        put(edits, axis, &AXIS, "scaling", "<c:scaling><c:orientation val=\"maxMin\"/></c:scaling>");
    }
    put(edits, axis, &AXIS, "delete", "<c:delete val=\"0\"/>");
    let line = |colour| {
        format!(
            "<c:spPr><a:ln w=\"6350\"><a:solidFill><a:srgbClr val=\"{colour}\"/></a:solidFill></a:ln></c:spPr>"
        )
    };
    if !first {
        let grid = format!("<c:majorGridlines>{}</c:majorGridlines>", line("D9D9D9"));
        put(edits, axis, &AXIS, "majorGridlines", &grid);
    }
    let at = axis.child("axPos").map(|at| at.attribute("val")).transpose()?.flatten();
    let upright = matches!(at.as_deref(), Some("l" | "r"));
    let title = title.as_deref().map(|title| titled(title, 1000, upright)).transpose()?;
    put(edits, axis, &AXIS, "title", title.as_deref().unwrap_or_default());
    if let Some(format) = format {
        let code = escape(format).ok_or_else(|| bad_xml("a number format holds a control character"))?;
        put(edits, axis, &AXIS, "numFmt", &format!("<c:numFmt formatCode=\"{code}\" sourceLinked=\"0\"/>"));
    }
    if first {
        put(edits, axis, &AXIS, "tickLblPos", "<c:tickLblPos val=\"low\"/>");
    }
    put(edits, axis, &AXIS, "spPr", &line("595959"));
    Ok(())
}

fn finish_plot(edits: &mut Edits, plot: &Element, kind: &str, finish: &ChartFinish, count: &mut usize) {
    put(edits, plot, &PLOT, "varyColors", "<c:varyColors val=\"0\"/>");
    if finish.tornado {
        // One piece of text, as two edits may not stand at one place.
        put(edits, plot, &PLOT, "overlap", "<c:gapWidth val=\"60\"/><c:overlap val=\"100\"/>");
        put(edits, plot, &PLOT, "gapWidth", "");
    }
    for series in plot.children.iter().filter(|child| child.local() == "ser") {
        let i = *count % COLOURS.len();
        *count += 1;
        let solid = format!("<a:solidFill><a:srgbClr val=\"{}\"/></a:solidFill>", COLOURS[i]);
        if matches!(kind, "scatterChart" | "lineChart") {
            let line = format!(
                "<c:spPr><a:ln w=\"22225\" cap=\"rnd\">{solid}<a:prstDash val=\"{}\"/><a:round/></a:ln></c:spPr>",
                DASHES[i]
            );
            put(edits, series, &SERIES, "spPr", &line);
            let marker = if finish.markers {
                let (symbol, edge) = (MARKERS[i], format!("<a:ln w=\"9525\">{solid}</a:ln>"));
                format!(
                    "<c:marker><c:symbol val=\"{symbol}\"/><c:size val=\"6\"/><c:spPr>{solid}{edge}</c:spPr></c:marker>"
                )
            } else {
                "<c:marker><c:symbol val=\"none\"/></c:marker>".to_owned()
            };
            put(edits, series, &SERIES, "marker", &marker);
            put(edits, series, &SERIES, "smooth", "<c:smooth val=\"0\"/>");
        } else {
            let fill = match PATTERNS[i] {
                "" => "<a:solidFill><a:srgbClr val=\"595959\"/></a:solidFill>".to_owned(),
                pattern => format!(
                    "<a:pattFill prst=\"{pattern}\"><a:fgClr><a:srgbClr val=\"{}\"/></a:fgClr>\
                     <a:bgClr><a:srgbClr val=\"FFFFFF\"/></a:bgClr></a:pattFill>",
                    COLOURS[i]
                ),
            };
            let area = format!("<c:spPr>{fill}<a:ln w=\"9525\">{solid}</a:ln></c:spPr>");
            put(edits, series, &SERIES, "spPr", &area);
            if kind == "barChart" {
                put(edits, series, &SERIES, "invertIfNegative", "<c:invertIfNegative val=\"0\"/>");
            }
        }
        for data in &series.children {
            for cache in data.children.iter().flat_map(|source| &source.children) {
                if matches!(cache.local(), "numCache" | "strCache") {
                    edits.replace(cache.span.clone(), "");
                }
            }
        }
    }
}

/// The drawing part with the size and alternative text of its charts set, in their order.
pub(super) fn finish_drawing(xml: &[u8], finishes: &[ChartFinish]) -> Result<Vec<u8>> {
    let root = Element::root(xml)?;
    let mut edits = Edits::default();
    let charts = root.children.iter().filter(|anchor| anchor.child("graphicFrame").is_some());
    for (anchor, finish) in charts.zip(finishes) {
        let name = anchor.at(&["graphicFrame", "nvGraphicFramePr", "cNvPr"]);
        if let (Some(name), Some(title)) = (name, &finish.title) {
            edits.replace(name.span.clone(), with_attribute(name.tag, "descr", Some(title))?);
        }
        let (Some((columns, rows)), Some(from), Some(to)) =
            (finish.size, anchor.child("from"), anchor.child("to"))
        else {
            continue;
        };
        for (name, more) in [("col", columns), ("row", rows)] {
            let start = from.child(name).map(|e| &xml[e.inner.clone()]);
            let start = start.and_then(|s| std::str::from_utf8(s).ok()).and_then(|s| s.parse::<u32>().ok());
            if let (Some(start), Some(end)) = (start, to.child(name)) {
                edits.replace(end.inner.clone(), (start + more).to_string());
            }
        }
        for name in ["colOff", "rowOff"] {
            if let Some(offset) = to.child(name) {
                edits.replace(offset.inner.clone(), "0");
            }
        }
    }
    edits.apply(xml)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A chart as xlsxwriter makes it, shortened.
    fn part(kind: &str, series: &str) -> String {
        format!(
            "<c:chartSpace xmlns:c=\"c\" xmlns:a=\"a\"><c:lang val=\"en-US\"/><c:chart><c:title/><c:plotArea><c:layout/>\
             <c:{kind}><c:grouping val=\"standard\"/>{series}<c:axId val=\"1\"/><c:axId val=\"2\"/></c:{kind}>\
             <c:catAx><c:axId val=\"1\"/><c:scaling/><c:axPos val=\"b\"/><c:tickLblPos val=\"nextTo\"/><c:crossAx val=\"2\"/></c:catAx>\
             <c:valAx><c:axId val=\"2\"/><c:scaling/><c:axPos val=\"l\"/><c:majorGridlines/><c:crossAx val=\"1\"/></c:valAx>\
             </c:plotArea><c:plotVisOnly val=\"1\"/></c:chart></c:chartSpace>"
        )
    }

    fn series(n: usize) -> String {
        let one =
            "<c:ser><c:idx/><c:order/><c:cat><c:numRef><c:f>A1</c:f><c:numCache/></c:numRef></c:cat></c:ser>";
        one.repeat(n)
    }

    fn finished(xml: &str, finish: &ChartFinish) -> String {
        String::from_utf8(finish_chart(xml.as_bytes(), finish).unwrap()).unwrap()
    }

    /// The local names of an element's children.
    fn order(xml: &str, path: &[&str]) -> Vec<String> {
        let root = Element::root(xml.as_bytes()).unwrap();
        root.at(path).unwrap().children.iter().map(|child| child.local().to_owned()).collect()
    }

    #[test]
    fn elements_stand_in_the_order_of_the_schema() {
        let finish = ChartFinish {
            title: Some("PV by era".to_owned()),
            x_title: Some("Era".to_owned()),
            y_title: Some("PV & more".to_owned()),
            x_range: Some((0.0, 100.0)),
            legend: Some(Legend::Right),
            ..ChartFinish::default()
        };
        let xml = finished(&part("barChart", &series(1)), &finish);
        assert_eq!(order(&xml, &[]), ["lang", "roundedCorners", "chart"]);
        let chart = ["title", "autoTitleDeleted", "plotArea", "legend", "plotVisOnly", "dispBlanksAs"];
        assert_eq!(order(&xml, &["chart"]), chart);
        let plot = order(&xml, &["chart", "plotArea", "barChart"]);
        assert_eq!(plot, ["grouping", "varyColors", "ser", "axId", "axId"]);
        let ser = order(&xml, &["chart", "plotArea", "barChart", "ser"]);
        assert_eq!(ser, ["idx", "order", "spPr", "invertIfNegative", "cat"]);
        let axis = ["axId", "scaling", "delete", "axPos", "title", "tickLblPos", "spPr", "crossAx"];
        assert_eq!(order(&xml, &["chart", "plotArea", "catAx"]), axis);
        let axis = ["axId", "scaling", "delete", "axPos", "majorGridlines", "title", "spPr", "crossAx"];
        assert_eq!(order(&xml, &["chart", "plotArea", "valAx"]), axis);
        assert!(xml.contains("<c:max val=\"100.0\"/><c:min val=\"0.0\"/>"), "{xml}");
        assert!(xml.contains("PV &amp; more") && xml.contains("rot=\"-5400000\""), "{xml}");
        assert!(!xml.contains("numCache"), "{xml}");
    }

    #[test]
    fn series_differ_without_colour() {
        for (kind, mark) in [("lineChart", "prstDash val="), ("areaChart", "pattFill prst=")] {
            let xml = finished(&part(kind, &series(6)), &ChartFinish::default());
            let looks: std::collections::BTreeSet<_> =
                xml.split(mark).skip(1).map(|rest| rest.split('"').nth(1)).collect();
            // Of areas one is plain.
            assert_eq!(looks.len(), if kind == "lineChart" { 6 } else { 5 }, "{xml}");
        }
        let finish = ChartFinish { markers: true, ..ChartFinish::default() };
        let xml = finished(&part("lineChart", &series(2)), &finish);
        assert!(xml.contains("symbol val=\"circle\"") && xml.contains("symbol val=\"square\""), "{xml}");
        assert!(xml.contains("<c:autoTitleDeleted val=\"1\"/>") && !xml.contains("<c:title>"), "{xml}");
    }

    #[test]
    fn other_parts_and_bad_titles_are_refused() {
        assert!(finish_chart(b"<c:drawing/>", &ChartFinish::default()).is_err());
        let finish = ChartFinish { title: Some("\u{1}".to_owned()), ..ChartFinish::default() };
        let error = finish_chart(part("barChart", "").as_bytes(), &finish).unwrap_err();
        assert_eq!(error.problems()[0].code, "text-characters");
    }
}
