//! The text of a script: header, commands, expected output; and words with their options.

use std::str::FromStr;

/// One script as written.
#[derive(Debug, Clone)]
pub(crate) struct Script {
    /// Header lines: plan settings.
    pub(crate) settings: Vec<Words>,
    /// Commands in the order they stand.
    pub(crate) commands: Vec<Command>,
    /// Everything before the line `---`, as it stands.
    pub(crate) asked: String,
    /// Everything after it.
    pub(crate) expected: String,
}

/// One command: when, and what.
#[derive(Debug, Clone)]
pub(crate) struct Command {
    /// The line without its comment.
    pub(crate) text: String,
    /// Signal time it begins, s.
    pub(crate) from: f64,
    /// Signal time it ends, s; `None` for a single moment.
    pub(crate) to: Option<f64>,
    /// What is done, with options.
    pub(crate) words: Words,
}

/// The words of one line; text in double quotes is one word.
#[derive(Debug, Clone)]
pub(crate) struct Words {
    line: String,
    words: Vec<String>,
}

impl Script {
    /// Reads a script whose file is called `name`.
    pub(crate) fn read(name: &str, text: &str) -> Self {
        let (asked, expected) = text
            .split_once("\n---\n")
            .map_or((text.trim_end(), ""), |(asked, expected)| (asked, expected));
        assert!(
            asked.starts_with("# ") && asked.lines().next().is_some_and(|why| why.len() > 20),
            "{name}: the first line says why the script exists"
        );
        let mut script = Self {
            settings: Vec::new(),
            commands: Vec::new(),
            asked: asked.to_owned(),
            expected: expected.to_owned(),
        };
        for line in asked.lines() {
            let line = line.split('#').next().unwrap_or_default().trim();
            if line.is_empty() {
                continue;
            }
            let timed = line.starts_with(|c: char| c.is_ascii_digit());
            if !timed {
                assert!(
                    script.commands.is_empty(),
                    "{name}: {line}: settings stand before the first command"
                );
                script.settings.push(Words::of(line));
                continue;
            }
            let (time, what) = line.split_once(' ').unwrap_or((line, ""));
            let (from, to) = match time.split_once('-') {
                Some((from, to)) => (from, Some(to)),
                None => (time, None),
            };
            let seconds = |text: &str| {
                text.parse()
                    .unwrap_or_else(|_| panic!("{name}: {line}: {text:?} is no time in seconds"))
            };
            script.commands.push(Command {
                text: line.split_whitespace().collect::<Vec<_>>().join(" "),
                from: seconds(from),
                to: to.map(seconds),
                words: Words::of(what.trim()),
            });
        }
        script
    }
}

impl Words {
    /// Splits a line.
    pub(crate) fn of(line: &str) -> Self {
        let mut words = Vec::new();
        for (place, part) in line.split('"').enumerate() {
            if place % 2 == 1 {
                words.push(part.to_owned());
            } else {
                words.extend(part.split_whitespace().map(str::to_owned));
            }
        }
        Self {
            line: line.to_owned(),
            words,
        }
    }

    /// The word at a place, which must be there.
    pub(crate) fn at(&self, place: usize) -> &str {
        self.words
            .get(place)
            .unwrap_or_else(|| panic!("{}: word {} is missing", self.line, place + 1))
    }

    /// A number at a place.
    pub(crate) fn number(&self, place: usize) -> f64 {
        self.parsed(self.at(place))
    }

    /// Whether a word stands anywhere.
    pub(crate) fn has(&self, word: &str) -> bool {
        self.words.iter().any(|found| found == word)
    }

    /// The word after an option's name.
    pub(crate) fn option(&self, name: &str) -> Option<&str> {
        let place = self.words.iter().position(|word| word == name)?;
        Some(self.at(place + 1))
    }

    /// The word after an option's name, read.
    pub(crate) fn read<T: FromStr>(&self, name: &str) -> Option<T> {
        self.option(name).map(|text| self.parsed(text))
    }

    /// So many numbers after an option's name.
    pub(crate) fn numbers<const N: usize>(&self, name: &str) -> Option<[f64; N]> {
        let place = self.words.iter().position(|word| word == name)?;
        Some(std::array::from_fn(|i| self.number(place + 1 + i)))
    }

    /// The words from a place on, as a line of their own.
    pub(crate) fn rest(&self, place: usize) -> Self {
        Self {
            line: self.line.clone(),
            words: self.words.get(place..).unwrap_or_default().to_vec(),
        }
    }

    fn parsed<T: FromStr>(&self, text: &str) -> T {
        text.parse()
            .unwrap_or_else(|_| panic!("{}: {text:?} cannot be read", self.line))
    }
}
