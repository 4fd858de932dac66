//! The page for giving away: a folder for any web server, and one file that holds everything.

mod bundle;
mod cases;
mod licences;
mod single;

use std::fs;
use std::path::{Path, PathBuf};

use crate::failure::{About, Failure, Outcome};
use crate::places::Places;

/// What was written.
#[derive(Debug)]
pub(crate) struct Written {
    /// The folder for a web server.
    pub(crate) folder: PathBuf,
    /// The single file.
    pub(crate) file: PathBuf,
}

/// Writes both into `dist`, with checksums, licences and the page for administrators. The wasm must be built.
///
/// # Errors
/// When a file cannot be read or written, or the modules cannot be joined.
pub(crate) fn write(places: &Places) -> Outcome<Written> {
    let version = env!("CARGO_PKG_VERSION");
    let dist = places.root().join("dist");
    let folder = dist.join(format!("courseband-{version}"));
    let _ = fs::remove_dir_all(&dist);
    copy(&places.www(), &folder, &|path| is_given(path))?;
    one_script(places, &folder)?;
    copy(&places.demo_data(), &folder.join("demo-data"), &|path| !name(path).ends_with(".py"))?;
    let wasm = fs::read(places.page_wasm().join("courseband_bg.wasm")).about("the wasm")?;
    let cases = cases::text(places, &wasm)?;
    hold(&folder.join("index.html"), &cases)?;
    let licences = licences::list(places)?;
    put(&folder.join("licences.txt"), licences.as_bytes())?;
    let file = dist.join(format!("courseband-{version}.html"));
    put(&file, single::page(places, &licences, &cases)?.as_bytes())?;
    put(&dist.join("for-it.html"), fs::read(places.www().join("for-it.html")).about("www/for-it.html")?.as_slice())?;
    put(&dist.join("licences.txt"), licences.as_bytes())?;
    let sums = sums(&dist)?;
    put(&dist.join("SHA256SUMS"), sums.as_bytes())?;
    println!("Wrote {} and {}", folder.display(), file.display());
    println!("The single file has {} kB", fs::metadata(&file).map_or(0, |m| m.len()) / 1000);
    Ok(Written { folder, file })
}

fn name(path: &Path) -> &str {
    path.file_name().and_then(|name| name.to_str()).unwrap_or_default()
}

/// Files of the page that go into the folder; its modules go as one script.
fn is_given(path: &Path) -> bool {
    let module = name(path).ends_with(".js") && !matches!(name(path), "worker.js" | "courseband.js");
    !module && !matches!(name(path), "stamp" | "package.json") && !name(path).ends_with(".d.ts")
}

/// Puts the modules into `main.js` and takes their preloads out of the page: one request instead of eighty.
fn one_script(places: &Places, folder: &Path) -> Outcome<()> {
    let read = |path: &Path| fs::read_to_string(places.www().join(path)).about(path.display());
    put(&folder.join("main.js"), bundle::bundle("main.js", &read)?.as_bytes())?;
    let index = folder.join("index.html");
    let page = fs::read_to_string(&index).about(index.display())?;
    let lines: Vec<&str> = page.lines().filter(|line| !line.contains("rel=\"modulepreload\"")).collect();
    put(&index, (lines.join("\n") + "\n").as_bytes())
}

fn put(path: &Path, bytes: &[u8]) -> Outcome<()> {
    if let Some(parent) = path.parent() {
        fs::create_dir_all(parent).about(parent.display())?;
    }
    fs::write(path, bytes).about(path.display())
}

/// Puts the reference cases into the folder's page, as data that the policy has nothing against.
fn hold(index: &Path, cases: &str) -> Outcome<()> {
    const END: &str = "</body>";
    let page = fs::read_to_string(index).about(index.display())?;
    if page.matches(END).count() != 1 {
        return Err(Failure::new(format!("{} must hold {END} once", index.display())));
    }
    put(
        index,
        page.replace(END, &format!("{}{END}", single::data("courseband-cases", "application/json", cases))).as_bytes(),
    )
}

/// Copies a folder, those files alone that are wanted.
fn copy(from: &Path, to: &Path, wanted: &dyn Fn(&Path) -> bool) -> Outcome<()> {
    for path in files(from)? {
        if wanted(&path) {
            let target = to.join(path.strip_prefix(from).unwrap_or(&path));
            put(&target, &fs::read(&path).about(path.display())?)?;
        }
    }
    Ok(())
}

/// All files below a folder, in one order everywhere.
fn files(folder: &Path) -> Outcome<Vec<PathBuf>> {
    let mut found = Vec::new();
    for entry in fs::read_dir(folder).about(folder.display())? {
        let path = entry.about(folder.display())?.path();
        if name(&path) == "node_modules" {
            continue;
        }
        if path.is_dir() { found.extend(files(&path)?) } else { found.push(path) }
    }
    found.sort();
    Ok(found)
}

/// Checksums as `sha256sum --check` reads them.
fn sums(dist: &Path) -> Outcome<String> {
    let mut lines = String::new();
    for path in files(dist)? {
        let digest = cases::digest(&fs::read(&path).about(path.display())?);
        let local = path.strip_prefix(dist).unwrap_or(&path);
        lines += &format!("{digest}  {}\n", local.display());
    }
    Ok(lines)
}
