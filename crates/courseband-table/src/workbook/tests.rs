//! Workbooks put together here, part by part.

use super::values::{Look, day_text, look_of, number_text};
use super::*;
use crate::table::Table;

/// A packed file with its parts stored as they are.
fn packed(parts: &[(&str, &str)]) -> Vec<u8> {
    let (mut bytes, mut list) = (Vec::new(), Vec::new());
    for (name, text) in parts {
        let start = bytes.len() as u32;
        let size = (text.len() as u32).to_le_bytes();
        let check = archive::crc(text.as_bytes()).to_le_bytes();
        let length = (name.len() as u16).to_le_bytes();
        let middle = [&[20, 0, 0, 0, 0, 0, 0, 0, 0, 0][..], &check, &size, &size, &length, &[0, 0]].concat();
        bytes.extend([b"PK\x03\x04", &middle[..], name.as_bytes(), text.as_bytes()].concat());
        list.extend([b"PK\x01\x02", &[20, 0][..], &middle, &[0; 10], &start.to_le_bytes(), name.as_bytes()].concat());
    }
    let (count, at) = ((parts.len() as u16).to_le_bytes(), (bytes.len() as u32).to_le_bytes());
    let size = (list.len() as u32).to_le_bytes();
    bytes.extend(list);
    bytes.extend([b"PK\x05\x06", &[0, 0, 0, 0][..], &count, &count, &size, &at, &[0, 0]].concat());
    bytes
}

const RELATED: &str =
    r#"<Relationships><Relationship Id="r1" Type="http://x/officeDocument" Target="xl/workbook.xml"/></Relationships>"#;
const PARTS: &str = r#"<Relationships>
  <Relationship Id="a" Type="http://x/worksheet" Target="worksheets/one.xml"/>
  <Relationship Id="b" Type="http://x/worksheet" Target="/xl/worksheets/two.xml"/>
  <Relationship Id="c" Type="http://x/chartsheet" Target="chartsheets/c.xml"/>
  <Relationship Id="s" Type="http://x/sharedStrings" Target="sharedStrings.xml"/>
  <Relationship Id="t" Type="http://x/styles" Target="styles.xml"/>
</Relationships>"#;
const BOOK: &str = r#"<x:workbook xmlns:x="m" xmlns:r="r"><x:workbookPr/><x:sheets><x:sheet name="Read me" r:id="a"/>
  <x:sheet name="A &amp; B" r:id="b"/><x:sheet name="Chart" r:id="c"/></x:sheets></x:workbook>"#;
const STRINGS: &str = r#"<sst><si><t>mouse</t></si><si><r><t>gr</t></r><r><t xml:space="preserve">oup </t></r><rPh><t>x</t></rPh></si>
  <si><t>day</t></si><si><t>&lt;area&gt; &#956;m</t></si></sst>"#;
const STYLES: &str = r#"<styleSheet><numFmts><numFmt numFmtId="170" formatCode="dd\.mm\.yyyy;@"/></numFmts>
  <cellStyleXfs><xf numFmtId="14"/></cellStyleXfs><cellXfs><xf numFmtId="0"/><xf numFmtId="14"/><xf numFmtId="170"/></cellXfs></styleSheet>"#;
const ONE: &str = r#"<worksheet><sheetData><row r="1"><c r="A1" t="inlineStr"><is><t>Notes only</t></is></c></row></sheetData></worksheet>"#;
const TWO: &str = r#"<worksheet><sheetData>
  <row r="2"><c r="B2" t="s"><v>0</v></c><c r="C2" t="s"><v>1</v></c><c r="D2" t="s"><v>2</v></c><c r="E2" t="s"><v>3</v></c></row>
  <row r="4"><c r="B4" t="inlineStr"><is><t>m1</t></is></c><c r="C4" t="str"><f>F4</f><v>Plain</v></c><c r="D4" s="1"><v>45356</v></c><c r="E4"><v>0.30000000000000004</v></c></row>
  <row r="5" hidden="1"><c r="B5" t="inlineStr"><is><t>m1</t></is></c><c r="C5" t="inlineStr"><is><t>Plain</t></is></c><c r="D5" s="2"><v>45363.5</v></c><c r="E5"><f>1+1</f></c></row>
  <row><c t="inlineStr"><is><t>far left</t></is></c><c t="e"><v>#DIV/0!</v></c><c t="b"><v>1</v></c></row>
</sheetData></worksheet>"#;

fn xlsx() -> Vec<u8> {
    packed(&[
        ("_rels/.rels", RELATED),
        ("xl/workbook.xml", BOOK),
        ("xl/_rels/workbook.xml.rels", PARTS),
        ("xl/sharedStrings.xml", STRINGS),
        ("xl/styles.xml", STYLES),
        ("xl/worksheets/one.xml", ONE),
        ("xl/worksheets/two.xml", TWO),
    ])
}

fn lines(sheet: &Sheet) -> Vec<String> {
    (0..sheet.records())
        .map(|at| format!("{}: {}", sheet.line(at), sheet.cells(at).collect::<Vec<_>>().join("|")))
        .collect()
}

fn open(bytes: &[u8]) -> Workbook {
    Workbook::open(bytes).expect("opens").expect("a workbook")
}

#[test]
fn the_sheet_with_the_table_is_found_and_its_cells_are_text() {
    let book = open(&xlsx());
    assert_eq!(book.sheets(), ["Read me", "A & B"]);
    let sheet = book.read(None, None).expect("a sheet");
    let expected = [
        "2: |mouse|group |day|<area> μm",
        "4: |m1|Plain|2024-03-05|0.3",
        "5: |m1|Plain|2024-03-12 12:00",
        "6: far left|#DIV/0!|TRUE",
    ];
    assert_eq!(lines(&sheet), expected);
    assert_eq!(sheet.place(), Some(("A & B", "A2 to E6")));
    let notes = sheet.notes().join(" ");
    assert!(
        notes.contains("Sheet ‘A & B’ was read, one of 2")
            && notes.contains("1 formula has")
            && notes.contains("1 row is hidden"),
        "{notes}"
    );
}

#[test]
fn a_sheet_and_a_range_can_be_named() {
    let book = open(&xlsx());
    let cells = |text: &str| Some(CellRange::parse(text).expect("a range"));
    assert_eq!(lines(&book.read(Some("read ME"), None).expect("a sheet")), ["1: Notes only"]);
    let part = book.read(Some("A & B"), cells("$C$4:D5")).expect("a part");
    assert_eq!(lines(&part), ["4: Plain|2024-03-05", "5: Plain|2024-03-12 12:00"]);
    assert_eq!(lines(&book.read(None, cells("e:e")).expect("a column")), ["2: <area> μm", "4: 0.3"]);
    assert_eq!(lines(&book.read(None, cells("B4")).expect("a corner"))[0], "4: m1|Plain|2024-03-05|0.3");
    let error = book.read(Some("Sheet 9"), None).expect_err("no such sheet").to_string();
    assert!(error.contains("no sheet ‘Sheet 9’") && error.contains("‘Read me’, ‘A & B’"), "{error}");
    assert!(matches!(book.read(Some("Read me"), cells("K9")), Err(TableError::Empty)));
    for wrong in ["", "3", "A1:", "A0", "B9:A1", "A1:B2:C3", "AAAAA1", "A", "A-1", "A1:B99999999999999999999"] {
        assert!(CellRange::parse(wrong).is_err(), "{wrong}");
    }
}

#[test]
fn open_document_cells_repeat_and_notes_stay_out() {
    let content = r#"<office:document-content xmlns:office="o" xmlns:table="t" xmlns:text="x"><office:body><office:spreadsheet>
      <table:table table:name="Data"><table:table-column/>
      <table:table-row><table:table-cell office:value-type="string"><text:p>rat</text:p></table:table-cell>
        <table:table-cell office:value-type="string"><text:p>day<text:s text:c="2"/>one</text:p><office:annotation><text:p>note</text:p></office:annotation></table:table-cell>
        <table:table-cell table:number-columns-repeated="16382"/></table:table-row>
      <table:table-row table:number-rows-repeated="2"><table:table-cell office:value-type="float" office:value="0.30000000000000004"><text:p>0,30</text:p></table:table-cell>
        <table:table-cell office:value-type="date" office:date-value="2024-03-05T00:00:00"><text:p>5.3.24</text:p></table:table-cell></table:table-row>
      <table:table-row table:visibility="filter"><table:covered-table-cell/><table:table-cell office:value-type="time" office:time-value="PT06H30M00S"/></table:table-row>
      <table:table-row table:number-rows-repeated="1048570"><table:table-cell table:number-columns-repeated="16384"/></table:table-row>
      </table:table></office:spreadsheet></office:body></office:document-content>"#;
    let manifest = ("META-INF/manifest.xml", "<manifest/>");
    let sheet = open(&packed(&[("content.xml", content), manifest])).read(None, None).expect("a sheet");
    assert_eq!(lines(&sheet), ["1: rat|day  one", "2: 0.3|2024-03-05", "3: 0.3|2024-03-05", "4: |06:30"]);
    assert!(sheet.notes()[0].contains("hidden"), "{:?}", sheet.notes());
    let locked = packed(&[("content.xml", "\u{1}"), ("META-INF/manifest.xml", "<m:encryption-data/>")]);
    assert!(matches!(Workbook::open(&locked), Err(TableError::LockedWorkbook)));
}

#[test]
fn rows_and_columns_without_end_are_refused() {
    let sheet = |row: &str| {
        format!(
            "<document-content><body><spreadsheet><table name=\"T\">{row}</table></spreadsheet></body></document-content>"
        )
    };
    let read = |row: &str| open(&packed(&[("content.xml", &sheet(row))])).read(None, None);
    let end = "18446744073709551615";
    let cell = |attributes: &str| format!("<table-cell value-type=\"string\" {attributes}><p>x</p></table-cell>");
    let blank = format!("<table-cell number-columns-repeated=\"{end}\"/>");
    let far = read(&format!("<table-row number-rows-repeated=\"{end}\"/><table-row>{}</table-row>", cell("")));
    assert!(matches!(far, Err(TableError::TooLarge { .. })));
    assert!(matches!(
        read(&format!("<table-row>{blank}{blank}{}</table-row>", cell(""))),
        Err(TableError::TooLarge { .. })
    ));
    let wide = read(&format!("<table-row>{}</table-row>", cell(&format!("number-columns-repeated=\"{end}\""))));
    assert!(matches!(wide, Err(TableError::TooLarge { .. })));
    let tall = read(&format!("<table-row number-rows-repeated=\"{end}\">{}</table-row>", cell("")));
    assert!(matches!(tall, Err(TableError::TooLarge { .. })));
    let rows = TWO.replace("r=\"4\"", &format!("r=\"{end}\""));
    let parts = [
        ("_rels/.rels", RELATED),
        ("xl/workbook.xml", BOOK),
        ("xl/_rels/workbook.xml.rels", PARTS),
        ("xl/worksheets/one.xml", ONE),
        ("xl/worksheets/two.xml", &rows),
    ];
    assert!(matches!(open(&packed(&parts)).read(Some("A & B"), None), Err(TableError::TooLarge { .. })));
}

#[test]
fn what_cannot_be_read_is_refused_by_what_it_is() {
    let refused = |bytes: &[u8]| Workbook::open(bytes).expect_err("refused").to_string();
    assert!(refused(b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1rest").contains("older workbook (.xls)"));
    let mut locked = b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1".to_vec();
    locked.extend("EncryptedPackage".encode_utf16().flat_map(u16::to_le_bytes));
    assert!(refused(&locked).contains("password"));
    assert!(refused(b"PK\x03\x04rest").contains("broken off"));
    assert!(refused(&packed(&[("xl/workbook.bin", "")])).contains(".xlsb"));
    assert!(refused(&packed(&[("word/document.xml", "<a/>")])).contains("a document"));
    assert!(refused(&packed(&[("readme.txt", "a")])).contains("a compressed file"));
    assert!(refused(&packed(&[("_rels/.rels", RELATED)])).contains("no list of sheets"));
    let whole = xlsx();
    let mut spoilt = whole.clone();
    let at = whole.windows(5).position(|window| window == b"45356").expect("a value");
    spoilt[at] = b'9';
    let error = open(&spoilt).read(Some("A & B"), None).expect_err("a wrong sum").to_string();
    assert!(error.contains("two.xml cannot be unpacked"), "{error}");
    for cut in (0..whole.len()).step_by(13) {
        if let Ok(Some(book)) = Workbook::open(&whole[..cut]) {
            let _ = book.read(None, None);
        }
        let mut changed = whole.clone();
        changed[cut] ^= 0x55;
        if let Ok(Some(book)) = Workbook::open(&changed) {
            let _ = book.read(None, None);
        }
    }
}

#[test]
fn numbers_and_dates_are_written_as_people_see_them() {
    assert_eq!(number_text(0.1 + 0.2), "0.3");
    assert_eq!(number_text(1e300), "1e300");
    assert_eq!(number_text(-12.0), "-12");
    assert_eq!(number_text(0.0), "0");
    for (code, look) in [
        ("General", Look::Number),
        ("0.00E+00", Look::Number),
        ("#,##0.0 \"mm\"", Look::Number),
        ("[Red]0.0", Look::Number),
        ("yyyy-mm-dd", Look::Date),
        ("[$-409]d-mmm-yy;@", Look::Date),
        ("m/d/yyyy h:mm", Look::Date),
        ("mmm\\ yy", Look::Date),
        ("h:mm:ss", Look::Clock),
        ("[h]:mm", Look::Clock),
        ("\"day \"0", Look::Number),
        ("mm:ss.0", Look::Clock),
    ] {
        assert_eq!(look_of(code), look, "{code}");
    }
    let day = |value: f64, since_1904: bool| day_text(value, Look::Date, since_1904).unwrap_or_default();
    assert_eq!([day(1.0, false), day(59.0, false), day(61.0, false)], ["1900-01-01", "1900-02-28", "1900-03-01"]);
    assert_eq!([day(45_351.0, false), day(43_889.0, true)], ["2024-02-29", "2024-02-29"]);
    assert_eq!(day(45_351.999_999_999, false), "2024-03-01");
    assert_eq!(day(-3.0, false), "");
    assert_eq!(day_text(1.5, Look::Clock, false).as_deref(), Some("36:00"));
}

#[test]
fn a_workbook_is_a_table_like_any_other() {
    let text = "mouse,group,day,area\nm1,A,0,5\nm1,A,3,4\nm2,B,0,6\nm2,B,3,5\n";
    let rows: String = (text.lines().enumerate())
        .map(|(row, line)| {
            let cell = |cell: &str| match cell.parse::<f64>() {
                Ok(_) => format!("<c><v>{cell}</v></c>"),
                Err(_) => format!("<c t=\"inlineStr\"><is><t>{cell}</t></is></c>"),
            };
            format!("<row r=\"{}\">{}</row>", row + 1, line.split(',').map(cell).collect::<String>())
        })
        .collect();
    let sheet = format!("<worksheet><sheetData>{rows}</sheetData></worksheet>");
    let related = PARTS.replace("one.xml", "data.xml");
    let book = "<workbook><sheets><sheet name=\"Data\" id=\"a\"/></sheets></workbook>";
    let bytes = packed(&[
        ("_rels/.rels", RELATED),
        ("xl/workbook.xml", book),
        ("xl/_rels/workbook.xml.rels", &related),
        ("xl/worksheets/data.xml", &sheet),
    ]);
    let of = |bytes: &[u8]| Table::read(bytes).expect("a table").observe(&Default::default()).expect("a reading");
    let (from_book, from_text) = (of(&bytes), of(text.as_bytes()));
    assert_eq!(from_book.columns, from_text.columns);
    assert_eq!(from_book.observations.response, from_text.observations.response);
    assert_eq!(from_book.observations.line, from_text.observations.line);
}
