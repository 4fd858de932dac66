//! What a browser asks for: one request line and its headers.

use std::io::{self, BufRead, Read};

/// Longer requests are not the page's.
const LONGEST: u64 = 16 * 1024;

/// A request, read to its end. Bodies are not expected and not read.
#[derive(Debug)]
pub(crate) struct Request {
    method: String,
    path: String,
    host: String,
    keeps_open: bool,
}

impl Request {
    /// The next request, or nothing when the other side is done.
    ///
    /// # Errors
    /// When the connection breaks, or what comes is no request.
    pub(crate) fn read(input: &mut impl BufRead) -> io::Result<Option<Self>> {
        let mut input = input.take(LONGEST);
        let mut line = String::new();
        if input.read_line(&mut line)? == 0 {
            return Ok(None);
        }
        let mut words = line.split_whitespace();
        let (Some(method), Some(path), Some(version)) = (words.next(), words.next(), words.next()) else {
            return Err(io::Error::other("not a request"));
        };
        let mut request = Self {
            method: method.to_owned(),
            path: path.to_owned(),
            host: String::new(),
            keeps_open: version == "HTTP/1.1",
        };
        request.read_headers(&mut input)?;
        Ok(Some(request))
    }

    fn read_headers(&mut self, input: &mut impl BufRead) -> io::Result<()> {
        loop {
            let mut line = String::new();
            if input.read_line(&mut line)? == 0 {
                return Err(io::Error::other("the request breaks off"));
            }
            let Some((name, value)) = line.split_once(':') else {
                return Ok(());
            };
            match name.to_ascii_lowercase().as_str() {
                "host" => self.host = value.trim().to_ascii_lowercase(),
                "connection" if value.trim().eq_ignore_ascii_case("close") => self.keeps_open = false,
                _ => {}
            }
        }
    }

    /// Whether it was meant for this machine. Another name that leads here is
    /// how a foreign page would reach a local server.
    pub(crate) fn is_local(&self) -> bool {
        let name = match self.host.rsplit_once(':') {
            Some((name, port)) if port.bytes().all(|byte| byte.is_ascii_digit()) => name,
            _ => &self.host,
        };
        matches!(name, "localhost" | "127.0.0.1")
    }

    pub(crate) fn only_reads(&self) -> bool {
        matches!(self.method.as_str(), "GET" | "HEAD")
    }

    pub(crate) fn wants_body(&self) -> bool {
        self.method != "HEAD"
    }

    /// Without what follows a question mark.
    pub(crate) fn path(&self) -> &str {
        self.path.split(['?', '#']).next().unwrap_or_default()
    }

    pub(crate) fn keeps_open(&self) -> bool {
        self.keeps_open && self.only_reads()
    }
}
