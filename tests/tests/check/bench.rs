//! Runs the command line over files written for one test, in a folder of its own.

use std::ffi::OsString;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicU32, Ordering};

use humward::config::{self, Faults, Loaded};
use humward::exit::Exit;

/// A folder with files, removed when the test ends.
pub(crate) struct Bench {
    folder: PathBuf,
}

/// How a command ended and what it said; the folder's path is cut from it.
#[derive(Debug)]
pub(crate) struct Said {
    pub(crate) exit: Exit,
    pub(crate) out: String,
    pub(crate) err: String,
}

static COUNT: AtomicU32 = AtomicU32::new(0);

impl Bench {
    pub(crate) fn new(files: &[(&str, &str)]) -> Self {
        let name = format!(
            "humward-check-{}-{}",
            std::process::id(),
            COUNT.fetch_add(1, Ordering::Relaxed)
        );
        let folder = std::env::temp_dir().join(name);
        fs::create_dir_all(&folder).unwrap();
        for (name, text) in files {
            fs::write(folder.join(name), text).unwrap();
        }
        Self { folder }
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        if name.is_empty() {
            self.folder.clone()
        } else {
            self.folder.join(name)
        }
    }

    /// `humward check` of a file, or of the whole folder for an empty name.
    pub(crate) fn check(&self, name: &str, variables: &[(&str, &str)]) -> Said {
        let said = command(&["check", &self.path(name).to_string_lossy()], variables);
        let cut = |text: &str| text.replace(&format!("{}/", self.folder.display()), "");
        Said {
            exit: said.exit,
            out: cut(&said.out),
            err: cut(&said.err),
        }
    }

    pub(crate) fn load(&self, name: &str) -> Result<Loaded, Faults> {
        config::load(&self.path(name), &[])
    }
}

impl Drop for Bench {
    fn drop(&mut self) {
        if let Err(error) = fs::remove_dir_all(&self.folder) {
            assert!(
                std::thread::panicking(),
                "{}: {error}",
                self.folder.display()
            );
        }
    }
}

/// One file checked.
pub(crate) fn check(text: &str) -> Said {
    Bench::new(&[("site.toml", text)]).check("site.toml", &[])
}

/// One file loaded.
pub(crate) fn load(text: &str) -> Loaded {
    Bench::new(&[("site.toml", text)])
        .load("site.toml")
        .unwrap_or_else(|faults| panic!("{faults}"))
}

/// Any command line.
pub(crate) fn command(arguments: &[&str], variables: &[(&str, &str)]) -> Said {
    let arguments = std::iter::once("humward")
        .chain(arguments.iter().copied())
        .map(OsString::from);
    let variables: Vec<(String, String)> = variables
        .iter()
        .map(|(name, value)| ((*name).to_owned(), (*value).to_owned()))
        .collect();
    let (mut out, mut err) = (Vec::new(), Vec::new());
    let exit = humward::cli::run(arguments, &variables, &mut out, &mut err);
    Said {
        exit,
        out: String::from_utf8(out).unwrap(),
        err: String::from_utf8(err).unwrap(),
    }
}

/// The repository's root.
pub(crate) fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR")).parent().unwrap()
}

/// Compares with a golden file, or writes it when HUMWARD_BLESS is set.
pub(crate) fn golden(name: &str, text: &str) {
    let path = root().join("tests/fixtures/config").join(name);
    if std::env::var_os("HUMWARD_BLESS").is_some() {
        fs::write(&path, text).unwrap();
    }
    let kept = fs::read_to_string(&path).unwrap();
    for (number, (kept, now)) in kept.lines().zip(text.lines()).enumerate() {
        assert_eq!(now, kept, "{name}:{}", number + 1);
    }
    assert_eq!(text.lines().count(), kept.lines().count(), "{name}: lines");
}
