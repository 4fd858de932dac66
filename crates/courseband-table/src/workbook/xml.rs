//! XML as a stream of few kinds of events, names without their prefixes.

use super::damaged;
use crate::error::TableError;
use quick_xml::events::{BytesStart, Event};
use quick_xml::{Reader, XmlVersion};

/// What comes next.
pub(super) enum Token<'a> {
    /// An element begins.
    Open(Tag<'a>),
    /// An element ends.
    Close(String),
    /// Characters.
    Text(String),
    /// The document ends.
    End,
}

/// The beginning of an element.
pub(super) struct Tag<'a>(BytesStart<'a>);

impl Tag<'_> {
    /// Its name without a prefix.
    pub(super) fn name(&self) -> String {
        local(self.0.local_name().as_ref())
    }

    /// An attribute by its name without a prefix.
    pub(super) fn attribute(&self, name: &str) -> Option<String> {
        let found = self.0.attributes().flatten().find(|one| local(one.key.local_name().as_ref()) == name)?;
        found.normalized_value(XmlVersion::Implicit1_0).ok().map(|value| value.into_owned())
    }

    /// An attribute that is a number.
    pub(super) fn count(&self, name: &str) -> Option<usize> {
        self.attribute(name)?.trim().parse().ok()
    }
}

fn local(name: &(impl AsRef<[u8]> + ?Sized)) -> String {
    String::from_utf8_lossy(name.as_ref()).into_owned()
}

/// Reads a document.
pub(super) struct Stream<'a> {
    reader: Reader<&'a [u8]>,
    /// An empty element is opened, then closed.
    closing: Option<String>,
    part: &'a str,
}

impl<'a> Stream<'a> {
    /// `part`: what it is called where it is damaged.
    pub(super) fn new(text: &'a str, part: &'a str) -> Stream<'a> {
        Stream { reader: Reader::from_str(text), closing: None, part }
    }

    /// The next token.
    ///
    /// # Errors
    /// XML that is not well formed.
    pub(super) fn next(&mut self) -> Result<Token<'a>, TableError> {
        if let Some(name) = self.closing.take() {
            return Ok(Token::Close(name));
        }
        loop {
            let event = self.reader.read_event().map_err(|_| self.broken())?;
            return Ok(match event {
                Event::Start(tag) => Token::Open(Tag(tag)),
                Event::Empty(tag) => {
                    let tag = Tag(tag);
                    self.closing = Some(tag.name());
                    Token::Open(tag)
                }
                Event::End(tag) => Token::Close(local(tag.local_name().as_ref())),
                Event::Text(text) => Token::Text(text.xml10_content().into_owned()),
                Event::CData(text) => Token::Text(text.xml10_content().into_owned()),
                Event::GeneralRef(reference) => Token::Text(match reference.resolve_char_ref() {
                    Ok(Some(letter)) => letter.to_string(),
                    _ => match &*reference.xml10_content() {
                        "lt" => "<",
                        "gt" => ">",
                        "amp" => "&",
                        "quot" => "\"",
                        "apos" => "'",
                        _ => "\u{fffd}",
                    }
                    .to_string(),
                }),
                Event::Eof => Token::End,
                Event::Comment(_) | Event::Decl(_) | Event::PI(_) | Event::DocType(_) => continue,
            });
        }
    }

    /// What is wrong where an element is not closed.
    pub(super) fn broken(&self) -> TableError {
        damaged(&format!("its part {} cannot be read", self.part))
    }
}
