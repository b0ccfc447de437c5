//! A small .xlsb workbook written out record by record, after the published description of the format ([MS-XLSB]).

use std::io::{Cursor, Write as _};

/// A record: its number, the length of what follows, and that.
fn record(kind: u16, body: &[u8]) -> Vec<u8> {
    let mut bytes =
        if kind < 0x80 { vec![kind as u8] } else { vec![(kind & 0x7F) as u8 | 0x80, (kind >> 7) as u8] };
    let mut length = body.len();
    loop {
        let low = (length & 0x7F) as u8;
        length >>= 7;
        bytes.push(if length > 0 { low | 0x80 } else { low });
        if length == 0 {
            break;
        }
    }
    bytes.extend(body);
    bytes
}

/// A text with its length before it.
fn wide(text: &str) -> Vec<u8> {
    let units: Vec<u16> = text.encode_utf16().collect();
    let mut bytes = (units.len() as u32).to_le_bytes().to_vec();
    bytes.extend(units.into_iter().flat_map(u16::to_le_bytes));
    bytes
}

fn joined(parts: &[&[u8]]) -> Vec<u8> {
    parts.concat()
}

/// A name of the whole workbook for cells of the first sheet: rows and columns from 0.
fn name(name: &str, rows: (u32, u32), columns: (u16, u16)) -> Vec<u8> {
    let mut area = vec![0x3B, 0, 0];
    area.extend(rows.0.to_le_bytes());
    area.extend(rows.1.to_le_bytes());
    area.extend(columns.0.to_le_bytes());
    area.extend(columns.1.to_le_bytes());
    let body = joined(&[
        &[0; 5],
        &u32::MAX.to_le_bytes(),
        &wide(name),
        &(area.len() as u32).to_le_bytes(),
        &area,
        &0u32.to_le_bytes(),
        &u32::MAX.to_le_bytes(),
    ]);
    record(0x27, &body)
}

enum Cell<'a> {
    Number(f64),
    Text(&'a str),
}

fn cell(column: u32, value: &Cell<'_>) -> Vec<u8> {
    let at = joined(&[&column.to_le_bytes(), &[0; 4]]);
    match value {
        Cell::Number(x) => record(5, &joined(&[&at, &x.to_le_bytes()])),
        Cell::Text(text) => record(6, &joined(&[&at, &wide(text)])),
    }
}

/// Costs of 100 in 2026, benefits of 60 in 2027 and 2028, at 5% from 2026.
pub fn book() -> Vec<u8> {
    let rows: [&[Cell<'_>]; 6] = [
        &[Cell::Text("Base"), Cell::Number(2026.0)],
        &[Cell::Text("Basis"), Cell::Text("5%")],
        &[Cell::Text("Year"), Cell::Number(2026.0), Cell::Number(2027.0), Cell::Number(2028.0)],
        &[Cell::Text("Works"), Cell::Number(100.0), Cell::Number(0.0), Cell::Number(0.0)],
        &[Cell::Text("Floods"), Cell::Number(0.0), Cell::Number(60.0), Cell::Number(60.0)],
        &[Cell::Text("NPV")],
    ];
    let mut sheet = joined(&[&record(0x81, &[]), &record(0x94, &[0; 16]), &record(0x91, &[])]);
    for (i, row) in rows.iter().enumerate() {
        let height = joined(&[&(i as u32).to_le_bytes(), &[0; 4], &[0x2C, 1], &[0; 3], &0u32.to_le_bytes()]);
        sheet.extend(record(0, &height));
        for (column, value) in row.iter().enumerate() {
            sheet.extend(cell(column as u32, value));
        }
    }
    sheet.extend(joined(&[&record(0x92, &[]), &record(0x82, &[])]));

    let listed = joined(&[&0u32.to_le_bytes(), &1u32.to_le_bytes(), &wide("rId1"), &wide("Dyke")]);
    let sources =
        joined(&[&1u32.to_le_bytes(), &0u32.to_le_bytes(), &0i32.to_le_bytes(), &0i32.to_le_bytes()]);
    let workbook = joined(&[
        &record(0x83, &[]),
        &record(0x8F, &[]),
        &record(0x9C, &listed),
        &record(0x90, &[]),
        &record(0x161, &[]),
        &record(0x165, &[]),
        &record(0x16A, &sources),
        &record(0x162, &[]),
        &name("hence_base", (0, 0), (1, 1)),
        &name("hence_basis", (1, 1), (1, 1)),
        &name("hence_years", (2, 2), (1, 3)),
        &name("hence_cost_works", (3, 3), (1, 3)),
        &name("hence_benefit_floods", (4, 4), (1, 3)),
        &name("hence_npv", (5, 5), (1, 1)),
        &record(0x9D, &[0; 26]),
        &record(0x84, &[]),
    ]);

    let relations = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
    let links = |kind: &str, target: &str| {
        format!(
            "<Relationships xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\"><Relationship \
             Id=\"rId1\" Type=\"{relations}/{kind}\" Target=\"{target}\"/></Relationships>"
        )
    };
    let types = "<Types xmlns=\"http://schemas.openxmlformats.org/package/2006/content-types\"><Default \
        Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/><Default \
        Extension=\"bin\" ContentType=\"application/vnd.ms-excel.sheet.binary.macroEnabled.main\"/></Types>";
    let mut zip = zip::ZipWriter::new(Cursor::new(Vec::new()));
    let parts: [(&str, Vec<u8>); 5] = [
        ("[Content_Types].xml", types.into()),
        ("_rels/.rels", links("officeDocument", "xl/workbook.bin").into()),
        ("xl/workbook.bin", workbook),
        ("xl/_rels/workbook.bin.rels", links("worksheet", "worksheets/sheet1.bin").into()),
        ("xl/worksheets/sheet1.bin", sheet),
    ];
    for (name, bytes) in parts {
        zip.start_file(name, zip::write::SimpleFileOptions::default()).expect("a new entry");
        zip.write_all(&bytes).expect("memory");
    }
    zip.finish().expect("memory").into_inner()
}
