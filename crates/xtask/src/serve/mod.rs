//! The page on this machine's own address, for people and for the tests.

mod file;
mod request;

use std::io::{BufReader, Write};
use std::net::{Ipv4Addr, SocketAddr, TcpListener, TcpStream};
use std::sync::Arc;
use std::time::Duration;
use std::{env, thread};

use crate::failure::{About, Failure, Outcome};
use crate::places::Places;
use crate::run;
use file::Site;
use request::Request;

/// The port when none is asked for.
pub(crate) const PORT: u16 = 8127;

/// What the page may do, sent with every file: run its own code and its wasm,
/// load its own files, nothing else.
const POLICY: &str = "default-src 'none'; script-src 'self' 'wasm-unsafe-eval'; worker-src 'self' blob:; \
                      style-src 'self'; style-src-attr 'unsafe-inline'; img-src 'self' data: blob:; \
                      connect-src 'self'; form-action 'none'; base-uri 'none'; frame-ancestors 'none'";

/// A server that listens, not yet answering.
pub(crate) struct Server {
    listener: TcpListener,
    site: Arc<Site>,
}

impl Server {
    /// Listens on localhost only. Port 0 takes any free one.
    ///
    /// # Errors
    /// When the port is taken.
    pub(crate) fn on(port: u16, places: &Places) -> Outcome<Self> {
        let listener = TcpListener::bind((Ipv4Addr::LOCALHOST, port))
            .about(format!("port {port} (another one can be given with --port)"))?;
        Ok(Self { listener, site: Arc::new(Site::of(places)) })
    }

    /// Where it answers, as a browser wants it.
    ///
    /// # Errors
    /// When the system does not tell the port.
    pub(crate) fn address(&self) -> Outcome<String> {
        let port = self.listener.local_addr().map(|address: SocketAddr| address.port()).about("own address")?;
        Ok(format!("http://localhost:{port}/"))
    }

    /// Answers until the process ends, one thread for each connection.
    pub(crate) fn answer(self) {
        for stream in self.listener.incoming().flatten() {
            let site = Arc::clone(&self.site);
            thread::spawn(move || {
                // A browser that goes away is no failure of the server.
                let _ = converse(&stream, &site);
            });
        }
    }
}

/// Answers the requests of one connection until the other side closes it.
fn converse(stream: &TcpStream, site: &Site) -> std::io::Result<()> {
    stream.set_read_timeout(Some(Duration::from_secs(30)))?;
    stream.set_nodelay(true)?;
    let mut input = BufReader::new(stream);
    while let Some(request) = Request::read(&mut input)? {
        let answer = reply(&request, site);
        let mut output = stream;
        output.write_all(&answer.bytes(request.wants_body()))?;
        if !request.keeps_open() {
            break;
        }
    }
    Ok(())
}

fn reply(request: &Request, site: &Site) -> Answer {
    if !request.is_local() {
        return Answer::text("403 Forbidden", "This server answers on localhost only.");
    }
    if !request.only_reads() {
        return Answer::text("405 Method Not Allowed", "This server only gives files out.");
    }
    match site.file(request.path()) {
        Some((kind, body)) => Answer { status: "200 OK", kind, body },
        None => Answer::text("404 Not Found", "There is no such file."),
    }
}

/// What goes back.
struct Answer {
    status: &'static str,
    kind: &'static str,
    body: Vec<u8>,
}

impl Answer {
    fn text(status: &'static str, words: &str) -> Self {
        Self { status, kind: "text/plain; charset=utf-8", body: words.as_bytes().to_vec() }
    }

    fn bytes(&self, with_body: bool) -> Vec<u8> {
        let mut bytes = format!(
            "HTTP/1.1 {}\r\nContent-Type: {}\r\nContent-Length: {}\r\nCache-Control: no-cache\r\n\
             Content-Security-Policy: {POLICY}\r\nX-Content-Type-Options: nosniff\r\nReferrer-Policy: no-referrer\r\n\
             Cross-Origin-Resource-Policy: same-origin\r\n\r\n",
            self.status,
            self.kind,
            self.body.len()
        )
        .into_bytes();
        if with_body {
            bytes.extend_from_slice(&self.body);
        }
        bytes
    }
}

/// Prints the address, opens a browser if asked to, and answers until stopped.
///
/// # Errors
/// When the port is taken.
pub(crate) fn serve(places: &Places, port: u16, open: bool) -> Outcome<()> {
    let server = Server::on(port, places)?;
    let address = server.address()?;
    println!("Courseband is at {address}  (Ctrl-C ends it)");
    if open {
        show_in_browser(&address);
    }
    server.answer();
    Err(Failure::new("the server stopped"))
}

/// Best effort: the address is on the screen anyway.
fn show_in_browser(address: &str) {
    let has_screen = env::var_os("DISPLAY").is_some() || env::var_os("WAYLAND_DISPLAY").is_some();
    let opened = match env::consts::OS {
        "macos" => run::read(run::command("open").arg(address)),
        "windows" => run::read(run::command("explorer").arg(address)),
        _ if has_screen => run::read(run::command("xdg-open").arg(address)),
        _ => return,
    };
    if opened.is_err() {
        println!("Open the address in a browser.");
    }
}

#[cfg(test)]
mod tests;
