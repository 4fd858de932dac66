//! A text document written: headings, paragraphs, tables and one picture, as ECMA-376 (Office Open XML) has them, from
//! memory. No macro, no field, no link: nothing in it is run or fetched.

use super::write::{START, escaped, packed};

/// A part of a document.
#[derive(Debug, Clone, PartialEq)]
pub enum Block {
    /// The title.
    Title(String),
    /// A heading, 1 or 2 deep.
    Heading(u8, String),
    /// A paragraph.
    Text(String),
    /// A table with its heads, which are repeated on every page.
    Table(Vec<String>, Vec<Vec<String>>),
    /// The picture, so many millimetres wide and high.
    Picture(f64, f64),
}

const W: &str = "http://schemas.openxmlformats.org/wordprocessingml/2006/main";
const OFFICE: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const PACKAGE: &str = "http://schemas.openxmlformats.org/package/2006";
/// English metric units per millimetre.
const EMU: f64 = 36_000.0;

/// The bytes of a `.docx` file. `picture`: the bytes of a PNG.
#[must_use]
pub fn write_document(blocks: &[Block], picture: &[u8]) -> Vec<u8> {
    let kind = "application/vnd.openxmlformats-officedocument.wordprocessingml";
    let types = format!(
        "{START}<Types xmlns=\"{PACKAGE}/content-types\">\
         <Default Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/>\
         <Default Extension=\"xml\" ContentType=\"application/xml\"/><Default Extension=\"png\" ContentType=\"image/png\"/>\
         <Override PartName=\"/word/document.xml\" ContentType=\"{kind}.document.main+xml\"/>\
         <Override PartName=\"/word/styles.xml\" ContentType=\"{kind}.styles+xml\"/></Types>"
    );
    let relation = |id: &str, what: &str, target: &str| {
        format!("<Relationship Id=\"{id}\" Type=\"{OFFICE}/{what}\" Target=\"{target}\"/>")
    };
    let relations =
        |list: &str| format!("{START}<Relationships xmlns=\"{PACKAGE}/relationships\">{list}</Relationships>");
    let image = if picture.is_empty() { String::new() } else { relation("rId2", "image", "media/figure.png") };
    let mut parts: Vec<(String, Vec<u8>)> = vec![
        ("[Content_Types].xml".into(), types.into_bytes()),
        ("_rels/.rels".into(), relations(&relation("rId1", "officeDocument", "word/document.xml")).into_bytes()),
        ("word/document.xml".into(), body(blocks, !picture.is_empty()).into_bytes()),
        (
            "word/_rels/document.xml.rels".into(),
            relations(&(relation("rId1", "styles", "styles.xml") + &image)).into_bytes(),
        ),
        ("word/styles.xml".into(), styles().into_bytes()),
    ];
    if !picture.is_empty() {
        parts.push(("word/media/figure.png".into(), picture.to_vec()));
    }
    packed(&parts)
}

fn body(blocks: &[Block], pictured: bool) -> String {
    let mut text = format!("{START}<w:document xmlns:w=\"{W}\" xmlns:r=\"{OFFICE}\"><w:body>");
    for block in blocks {
        match block {
            Block::Title(title) => text += &paragraph(title, "Title"),
            Block::Heading(deep, title) => text += &paragraph(title, if *deep < 2 { "Heading1" } else { "Heading2" }),
            Block::Text(words) => text += &paragraph(words, ""),
            Block::Table(heads, rows) => text += &table(heads, rows),
            Block::Picture(width, height) if pictured => text += &drawing(*width, *height),
            Block::Picture(..) => {}
        }
    }
    // A4 with margins of 25 mm, in twentieths of a point.
    text + "<w:sectPr><w:pgSz w:w=\"11906\" w:h=\"16838\"/><w:pgMar w:top=\"1417\" w:right=\"1134\" w:bottom=\"1417\" \
            w:left=\"1134\" w:header=\"708\" w:footer=\"708\" w:gutter=\"0\"/></w:sectPr></w:body></w:document>"
}

fn run(words: &str) -> String {
    format!("<w:r><w:t xml:space=\"preserve\">{}</w:t></w:r>", escaped(words))
}

fn paragraph(words: &str, style: &str) -> String {
    let style = if style.is_empty() { String::new() } else { format!("<w:pPr><w:pStyle w:val=\"{style}\"/></w:pPr>") };
    format!("<w:p>{style}{}</w:p>", run(words))
}

fn table(heads: &[String], rows: &[Vec<String>]) -> String {
    let mut text = String::from(
        "<w:tbl><w:tblPr><w:tblW w:w=\"5000\" w:type=\"pct\"/><w:tblBorders><w:top w:val=\"single\" w:sz=\"6\"/>\
         <w:bottom w:val=\"single\" w:sz=\"6\"/><w:insideH w:val=\"single\" w:sz=\"2\"/></w:tblBorders></w:tblPr><w:tblGrid>",
    );
    text += &"<w:gridCol/>".repeat(heads.len());
    text += "</w:tblGrid>";
    let row = |cells: &[String], head: bool| {
        let cell = |cell: &String| format!("<w:tc>{}</w:tc>", paragraph(cell, if head { "Head" } else { "Cell" }));
        let repeated =
            if head { "<w:trPr><w:cantSplit/><w:tblHeader/></w:trPr>" } else { "<w:trPr><w:cantSplit/></w:trPr>" };
        format!("<w:tr>{repeated}{}</w:tr>", cells.iter().map(cell).collect::<String>())
    };
    text += &row(heads, true);
    for cells in rows {
        text += &row(cells, false);
    }
    text + "</w:tbl>" + &paragraph("", "")
}

fn drawing(width: f64, height: f64) -> String {
    let [cx, cy] = [width, height].map(|length| (length * EMU) as u64);
    let main = "http://schemas.openxmlformats.org/drawingml/2006";
    format!(
        "<w:p><w:r><w:drawing><wp:inline xmlns:wp=\"{main}/wordprocessingDrawing\" distT=\"0\" distB=\"0\" distL=\"0\" distR=\"0\">\
         <wp:extent cx=\"{cx}\" cy=\"{cy}\"/><wp:docPr id=\"1\" name=\"Figure\"/><a:graphic xmlns:a=\"{main}/main\">\
         <a:graphicData uri=\"{main}/picture\"><pic:pic xmlns:pic=\"{main}/picture\"><pic:nvPicPr><pic:cNvPr id=\"1\" name=\"figure.png\"/>\
         <pic:cNvPicPr/></pic:nvPicPr><pic:blipFill><a:blip r:embed=\"rId2\"/><a:stretch><a:fillRect/></a:stretch></pic:blipFill>\
         <pic:spPr><a:xfrm><a:off x=\"0\" y=\"0\"/><a:ext cx=\"{cx}\" cy=\"{cy}\"/></a:xfrm><a:prstGeom prst=\"rect\"><a:avLst/></a:prstGeom>\
         </pic:spPr></pic:pic></a:graphicData></a:graphic></wp:inline></w:drawing></w:r></w:p>"
    )
}

fn styles() -> String {
    let style = |id: &str, name: &str, paragraph: &str, run: &str| {
        format!(
            "<w:style w:type=\"paragraph\" w:styleId=\"{id}\"><w:name w:val=\"{name}\"/><w:basedOn w:val=\"Normal\"/>\
             <w:pPr>{paragraph}</w:pPr><w:rPr>{run}</w:rPr></w:style>"
        )
    };
    let size = |half_points: u32| format!("<w:sz w:val=\"{half_points}\"/>");
    let spaced = |before: u32, after: u32| format!("<w:spacing w:before=\"{before}\" w:after=\"{after}\"/>");
    let kept = "<w:keepNext/>";
    let mut text = format!(
        "{START}<w:styles xmlns:w=\"{W}\"><w:docDefaults><w:rPrDefault><w:rPr><w:rFonts w:ascii=\"Calibri\" w:hAnsi=\"Calibri\" \
         w:cs=\"Calibri\"/><w:sz w:val=\"22\"/><w:lang w:val=\"en-GB\"/></w:rPr></w:rPrDefault><w:pPrDefault><w:pPr>\
         <w:spacing w:after=\"120\" w:line=\"276\" w:lineRule=\"auto\"/></w:pPr></w:pPrDefault></w:docDefaults>\
         <w:style w:type=\"paragraph\" w:default=\"1\" w:styleId=\"Normal\"><w:name w:val=\"Normal\"/></w:style>"
    );
    text += &style("Title", "Title", &spaced(0, 240), &format!("<w:b/>{}", size(36)));
    for (deep, half_points) in [(1, 28), (2, 24)] {
        let outline = format!("{kept}{}<w:outlineLvl w:val=\"{}\"/>", spaced(280, 80), deep - 1);
        text += &style(
            &format!("Heading{deep}"),
            &format!("heading {deep}"),
            &outline,
            &format!("<w:b/>{}", size(half_points)),
        );
    }
    text += &style(
        "Cell",
        "Cell",
        "<w:spacing w:before=\"20\" w:after=\"20\" w:line=\"240\" w:lineRule=\"auto\"/>",
        &size(16),
    );
    text += &style("Head", "Head", &format!("{kept}{}", spaced(20, 20)), &format!("<w:b/>{}", size(16)));
    text + "</w:styles>"
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::error::TableError;
    use crate::workbook::Workbook;

    #[test]
    fn words_are_text_and_the_picture_is_inside() {
        let blocks = [
            Block::Title("A & <b>".into()),
            Block::Heading(1, "One".into()),
            Block::Text("x \u{2212} y".into()),
            Block::Table(vec!["h".into()], vec![vec!["=1+1".into()]]),
            Block::Picture(100.0, 50.0),
        ];
        let bytes = write_document(&blocks, b"PNG-bytes");
        let text = String::from_utf8_lossy(&bytes);
        assert!(text.contains("A &amp; &lt;b&gt;") && text.contains("=1+1") && text.contains("PNG-bytes"));
        assert!(text.contains("cx=\"3600000\" cy=\"1800000\"") && !text.contains("<b>"));
        assert_eq!(text.matches("<w:p>").count(), text.matches("</w:p>").count());
        assert_eq!(bytes, write_document(&blocks, b"PNG-bytes"));
        assert!(!String::from_utf8_lossy(&write_document(&blocks, b"")).contains("figure.png"));
        // The packed file stands: it is opened, and refused for what it is.
        assert!(matches!(Workbook::open(&bytes), Err(TableError::NotText { .. })));
    }
}
