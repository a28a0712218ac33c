//! Where a value was written: a place in a file, an environment variable, or the defaults.
//!
//! Lines and columns count from 1; a column counts characters, not bytes.

use std::path::{Path, PathBuf};

/// Where something was written.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Place {
    /// In a file, from one byte offset to another.
    File {
        /// Index in [`Sources`].
        file: usize,
        /// First byte.
        start: usize,
        /// One past the last byte.
        end: usize,
    },
    /// In the environment; the index of the variable in [`Sources`].
    Variable(usize),
    /// Nowhere: it is the default, or shipped with the program.
    BuiltIn,
}

/// One file as it was read.
#[derive(Debug)]
pub(crate) struct SourceFile {
    pub(crate) path: PathBuf,
    pub(crate) text: String,
}

/// Every file and variable that was read.
#[derive(Debug, Default)]
pub(crate) struct Sources {
    files: Vec<SourceFile>,
    variables: Vec<(String, String)>,
}

impl Sources {
    /// Keeps a file; its index goes into places.
    pub(crate) fn add_file(&mut self, path: &Path, text: String) -> usize {
        self.files.push(SourceFile {
            path: path.into(),
            text,
        });
        self.files.len() - 1
    }

    /// Keeps a variable; its index goes into places.
    pub(crate) fn add_variable(&mut self, name: &str, value: &str) -> usize {
        self.variables.push((name.into(), value.into()));
        self.variables.len() - 1
    }

    /// How many files were read.
    pub(crate) fn files(&self) -> usize {
        self.files.len()
    }

    /// The text of a file.
    pub(crate) fn text(&self, file: usize) -> Option<&str> {
        self.files.get(file).map(|source| source.text.as_str())
    }

    /// The variables that were kept, name and value.
    pub(crate) fn variables(&self) -> &[(String, String)] {
        &self.variables
    }

    /// The folder a relative path at this place starts from.
    pub(crate) fn folder(&self, place: Place) -> PathBuf {
        match place {
            Place::File { file, .. } => self
                .files
                .get(file)
                .and_then(|f| f.path.parent())
                .map(PathBuf::from),
            Place::Variable(_) | Place::BuiltIn => None,
        }
        .unwrap_or_default()
    }

    /// The place in words: `path:line:column`, `environment variable NAME`, or `default`.
    pub(crate) fn tell(&self, place: Place) -> Told {
        match place {
            Place::File { file, start, .. } => {
                self.files.get(file).map_or(Told::BuiltIn, |source| {
                    let (line, column) = line_column(&source.text, start);
                    Told::File {
                        path: source.path.clone(),
                        line,
                        column,
                    }
                })
            }
            Place::Variable(index) => self
                .variables
                .get(index)
                .map_or(Told::BuiltIn, |(name, _)| Told::Variable(name.clone())),
            Place::BuiltIn => Told::BuiltIn,
        }
    }

    /// What stands there, as it was written, cut to one line of 60 characters.
    pub(crate) fn as_written(&self, place: Place) -> String {
        let written = match place {
            Place::File { file, start, end } => self
                .files
                .get(file)
                .and_then(|source| source.text.get(start..end)),
            Place::Variable(index) => self.variables.get(index).map(|(_, value)| value.as_str()),
            Place::BuiltIn => None,
        }
        .unwrap_or("the default");
        let line = written.lines().next().unwrap_or_default().trim();
        let mut short: String = line.chars().take(60).collect();
        if short.len() < written.trim().len() {
            short.push_str(" ...");
        }
        short
    }
}

/// A place in words.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub enum Told {
    /// In a file.
    File {
        /// The file's path as it was opened.
        path: PathBuf,
        /// Line from 1.
        line: usize,
        /// Column from 1, in characters.
        column: usize,
    },
    /// A path that could not be read at all.
    Path(PathBuf),
    /// In this environment variable.
    Variable(String),
    /// In the defaults or the tables shipped with the program.
    BuiltIn,
}

impl std::fmt::Display for Told {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Self::File { path, line, column } => write!(f, "{}:{line}:{column}", path.display()),
            Self::Path(path) => write!(f, "{}", path.display()),
            Self::Variable(name) => write!(f, "environment variable {name}"),
            Self::BuiltIn => f.write_str("built in"),
        }
    }
}

/// Line and column, from 1, of a byte offset; an offset past the end is the end.
pub(crate) fn line_column(text: &str, offset: usize) -> (usize, usize) {
    let mut end = offset.min(text.len());
    while !text.is_char_boundary(end) {
        end -= 1;
    }
    let before = text.get(..end).unwrap_or_default();
    let line = before.matches('\n').count() + 1;
    let column = before
        .rsplit('\n')
        .next()
        .unwrap_or_default()
        .chars()
        .count()
        + 1;
    (line, column)
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::{Place, Sources, line_column};

    #[test]
    fn columns_count_characters_and_lines_count_from_one() {
        assert_eq!(line_column("ab\ncd", 0), (1, 1));
        assert_eq!(line_column("ab\ncd", 4), (2, 2));
        assert_eq!(line_column("name = \"Prüfstand\" x", 20), (1, 20));
        assert_eq!(line_column("a", 99), (1, 2));
    }

    #[test]
    fn long_values_are_cut_to_one_line() {
        let mut sources = Sources::default();
        let file = sources.add_file(
            Path::new("a.toml"),
            format!("x = [\n1,\n2]\ny = \"{}\"", "z".repeat(80)),
        );
        assert_eq!(
            sources.as_written(Place::File {
                file,
                start: 4,
                end: 12
            }),
            "[ ..."
        );
        let long = sources.as_written(Place::File {
            file,
            start: 16,
            end: 98,
        });
        assert_eq!(long.chars().count(), 64);
    }
}
