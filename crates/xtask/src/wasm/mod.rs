//! The page's computing module: built, given its glue, put where the page
//! loads it.

mod glue;
mod route;

use std::ffi::OsString;
use std::hash::{DefaultHasher, Hash, Hasher};
use std::path::{Path, PathBuf};
use std::{env, fs};

use wasm_bindgen_cli_support::Bindgen;

use crate::failure::{About, Failure, Outcome};
use crate::places::Places;
use crate::run;
use route::{Route, TARGET};

/// What the page loads; no others are written.
const NAME: &str = "courseband";

/// Part of the stamp: raise it when the glue is treated differently.
const TREATMENT: u32 = 1;

/// Builds the module, says by which route, and leaves everything alone when
/// nothing changed.
///
/// # Errors
/// When no toolchain can build it, the build fails, or the result still holds
/// what it must not hold.
pub(crate) fn build(places: &Places) -> Outcome<()> {
    let route = Route::find()?;
    println!("Building the wasm with {}", route.said());
    let target = places.target().join(route.folder());
    let hidden = Hidden::find(places, &route);
    run::show(
        route
            .cargo_build()
            .args(["--locked", "--release", "--package", "courseband-web"])
            .current_dir(places.root())
            .env("CARGO_TARGET_DIR", &target)
            .env("CARGO_ENCODED_RUSTFLAGS", hidden.flags()),
    )?;
    let built = target.join(TARGET).join("release/courseband_web.wasm");
    let bytes = fs::read(&built).about(built.display())?;
    let stamp = stamp_of(&bytes);
    if is_current(places, &stamp) {
        println!("The wasm is up to date");
        return Ok(());
    }
    hidden.check(&bytes)?;
    write_page(places, bytes, &stamp)
}

/// Gives the module its glue and moves both to the page.
fn write_page(places: &Places, bytes: Vec<u8>, stamp: &str) -> Outcome<()> {
    let draft = places.target().join("page-wasm");
    let _ = fs::remove_dir_all(&draft);
    fs::create_dir_all(&draft).about(draft.display())?;
    Bindgen::new()
        .input_bytes(NAME, bytes)
        .out_name(NAME)
        .no_modules(true)
        .about("glue")?
        .typescript(true)
        .remove_name_section(true)
        .remove_producers_section(true)
        .generate(&draft)
        .about("cannot write the glue")?;
    let js = draft.join(format!("{NAME}.js"));
    let text = fs::read_to_string(&js).about(js.display())?;
    fs::write(&js, glue::without_ways_out(&text)?).about(js.display())?;

    let folder = places.page_wasm();
    fs::create_dir_all(&folder).about(folder.display())?;
    let _ = fs::remove_file(folder.join("stamp"));
    for file in files() {
        fs::copy(draft.join(&file), folder.join(&file)).about(&file)?;
    }
    fs::write(folder.join("stamp"), stamp).about("stamp")?;
    let size = fs::metadata(folder.join(format!("{NAME}_bg.wasm"))).map_or(0, |data| data.len());
    println!("Wrote www/wasm: {} kB of wasm", size / 1000);
    Ok(())
}

fn files() -> [String; 3] {
    [format!("{NAME}.js"), format!("{NAME}.d.ts"), format!("{NAME}_bg.wasm")]
}

/// Names the module's bytes and how they are treated.
fn stamp_of(bytes: &[u8]) -> String {
    let mut hasher = DefaultHasher::new();
    bytes.hash(&mut hasher);
    TREATMENT.hash(&mut hasher);
    format!("{:016x}", hasher.finish())
}

fn is_current(places: &Places, stamp: &str) -> bool {
    let folder = places.page_wasm();
    fs::read_to_string(folder.join("stamp")).is_ok_and(|old| old == stamp)
        && files().iter().all(|file| folder.join(file).is_file())
}

/// Machine paths that must not end up in the module, each with its stand-in.
struct Hidden(Vec<(PathBuf, &'static str)>);

impl Hidden {
    fn find(places: &Places, route: &Route) -> Self {
        // The compiler takes the last prefix that fits: general ones first.
        let mut pairs = Vec::new();
        if let Some(home) = home() {
            pairs.push((home.clone(), "/home"));
            pairs.push((env::var_os("CARGO_HOME").map_or_else(|| home.join(".cargo"), PathBuf::from), "/cargo"));
        }
        let mut sysroots = route.sysroots();
        sysroots.reverse();
        pairs.extend(sysroots.into_iter().map(|root| (root, "/rust")));
        pairs.push((places.target(), "/target"));
        pairs.push((places.root().to_path_buf(), "/courseband"));
        pairs.retain(|(path, _)| path.is_absolute() && path.parent().is_some());
        Self(pairs)
    }

    /// The compiler's flags, in cargo's encoding, which allows spaces.
    fn flags(&self) -> OsString {
        let mut flags = OsString::from("-Ctarget-feature=+simd128");
        for (path, stand_in) in &self.0 {
            flags.push("\u{1f}--remap-path-prefix=");
            flags.push(path);
            flags.push("=");
            flags.push(stand_in);
        }
        flags
    }

    /// # Errors
    /// When one of the paths is in the module all the same.
    fn check(&self, wasm: &[u8]) -> Outcome<()> {
        for (path, _) in &self.0 {
            if holds(wasm, path) {
                return Err(Failure::new(format!("the wasm names a folder of this machine: {}", path.display())));
            }
        }
        Ok(())
    }
}

fn holds(bytes: &[u8], path: &Path) -> bool {
    // Debian's toolchain sits in /usr, too short a name to search for.
    let needle = format!("{}/", path.display());
    needle.len() > "/usr/".len() && bytes.windows(needle.len()).any(|window| window == needle.as_bytes())
}

fn home() -> Option<PathBuf> {
    env::var_os("HOME").or_else(|| env::var_os("USERPROFILE")).map(PathBuf::from)
}

#[cfg(test)]
mod tests {
    use super::{Path, holds, stamp_of};

    #[test]
    fn a_machine_path_is_found() {
        assert!(holds(b"panicked at /somewhere/else/lib.rs", Path::new("/somewhere/else")));
        assert!(!holds(b"panicked at /courseband/lib.rs", Path::new("/somewhere/else")));
    }

    #[test]
    fn a_stamp_follows_the_bytes() {
        assert_eq!(stamp_of(b"one"), stamp_of(b"one"));
        assert_ne!(stamp_of(b"one"), stamp_of(b"two"));
    }
}
