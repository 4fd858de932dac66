//! The server as a browser sees it.

use std::io::{Read, Write};
use std::net::{Ipv4Addr, TcpListener, TcpStream};
use std::path::PathBuf;
use std::sync::Arc;
use std::{env, fs, process, thread};

use super::{Server, Site};

/// A server over two small folders, with the address to ask.
fn started(name: &str) -> (TcpStream, PathBuf) {
    let root = env::temp_dir().join(format!("courseband-serve-{name}-{}", process::id()));
    let (page, demos) = (root.join("page"), root.join("demos"));
    fs::create_dir_all(page.join("wasm")).expect("a folder");
    fs::create_dir_all(&demos).expect("a folder");
    fs::write(page.join("index.html"), "<p>page").expect("a file");
    fs::write(page.join("main.js"), "let a;").expect("a file");
    fs::write(page.join("wasm/a.wasm"), [0, 97, 115, 109]).expect("a file");
    fs::write(demos.join("one.csv"), "a,b\n").expect("a file");
    fs::write(root.join("secret.txt"), "secret").expect("a file");
    let listener = TcpListener::bind((Ipv4Addr::LOCALHOST, 0)).expect("a free port");
    let address = listener.local_addr().expect("an address");
    let server = Server { listener, site: Arc::new(Site::new(page, demos)) };
    thread::spawn(move || server.answer());
    (TcpStream::connect(address).expect("a connection"), root)
}

fn asked(stream: &mut TcpStream, line: &str, host: &str) -> String {
    write!(stream, "{line} HTTP/1.1\r\nHost: {host}\r\nConnection: close\r\n\r\n").expect("written");
    let mut answer = Vec::new();
    stream.read_to_end(&mut answer).expect("an answer");
    String::from_utf8_lossy(&answer).into_owned()
}

/// One question to one server.
fn answer(name: &str, line: &str, host: &str) -> String {
    let (mut stream, root) = started(name);
    let answer = asked(&mut stream, line, host);
    let _ = fs::remove_dir_all(root);
    answer
}

#[test]
fn the_root_is_the_page_under_its_policy() {
    let answer = answer("root", "GET /", "localhost:80");
    assert!(answer.starts_with("HTTP/1.1 200 OK\r\n"), "{answer}");
    assert!(answer.contains("Content-Type: text/html; charset=utf-8\r\n"));
    assert!(answer.contains("Content-Security-Policy: default-src 'none'; script-src 'self' 'wasm-unsafe-eval';"));
    assert!(answer.contains("Cache-Control: no-cache\r\n"));
    assert!(answer.ends_with("\r\n\r\n<p>page"));
}

#[test]
fn kinds_are_what_browsers_insist_on() {
    assert!(answer("wasm", "GET /wasm/a.wasm", "127.0.0.1").contains("Content-Type: application/wasm\r\n"));
    assert!(answer("js", "GET /main.js?x=1", "localhost").contains("Content-Type: text/javascript"));
}

#[test]
fn the_invented_tables_stand_beside_the_page() {
    assert!(answer("demo", "GET /demo-data/one.csv", "localhost").ends_with("\r\n\r\na,b\n"));
}

#[test]
fn nothing_outside_the_folders_is_given_out() {
    for path in
        ["/../secret.txt", "/wasm/../../secret.txt", "/%2e%2e/secret.txt", "//etc/passwd", "/demo-data/../secret.txt"]
    {
        let answer = answer("outside", &format!("GET {path}"), "localhost");
        assert!(answer.starts_with("HTTP/1.1 404"), "{path}: {answer}");
    }
}

#[test]
fn other_names_and_other_methods_are_refused() {
    assert!(answer("name", "GET /", "elsewhere.example").starts_with("HTTP/1.1 403"));
    assert!(answer("suffix", "GET /", "localhost.elsewhere.example:80").starts_with("HTTP/1.1 403"));
    assert!(answer("post", "POST /", "localhost").starts_with("HTTP/1.1 405"));
}

#[test]
fn head_gives_the_length_without_the_body() {
    let answer = answer("head", "HEAD /main.js", "localhost");
    assert!(answer.contains("Content-Length: 6\r\n") && answer.ends_with("\r\n\r\n"), "{answer}");
}

#[test]
fn one_connection_serves_several_requests() {
    let (mut stream, root) = started("several");
    write!(stream, "GET /main.js HTTP/1.1\r\nHost: localhost\r\n\r\n").expect("written");
    let both = asked(&mut stream, "GET /", "localhost");
    assert_eq!(both.matches("HTTP/1.1 200 OK").count(), 2, "{both}");
    let _ = fs::remove_dir_all(root);
}
