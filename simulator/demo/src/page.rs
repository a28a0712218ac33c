//! Text on a page of 80 columns: wrapping with a hanging indent, tables, and colour where a terminal shows it.
//!
//! A column is a character; names and sentences here hold none that is wider. Colour repeats what a word says and never
//! stands for it.

use std::io::{self, Write};

/// Columns of a page.
pub const WIDTH: usize = 80;

/// Breaks `text` into lines of at most [`WIDTH`] columns: the first after `first`, the others indented by `hang`.
///
/// A word longer than a line is broken where the line ends. `first` and `hang` must leave room for a character.
#[must_use]
pub fn wrap(first: &str, hang: usize, text: &str) -> Vec<String> {
    let mut lines = Vec::new();
    let mut line = first.to_owned();
    let mut begun = false;
    for word in text.split_whitespace() {
        let mut word = word;
        loop {
            let used = columns(&line) + usize::from(begun);
            if used + columns(word) <= WIDTH {
                if begun {
                    line.push(' ');
                }
                line.push_str(word);
                begun = true;
                break;
            }
            if !begun {
                let room = WIDTH.saturating_sub(columns(&line)).max(1);
                let end = word
                    .char_indices()
                    .nth(room)
                    .map_or(word.len(), |(at, _)| at);
                line.push_str(&word[..end]);
                word = &word[end..];
            }
            lines.push(std::mem::replace(&mut line, " ".repeat(hang)));
            begun = false;
        }
    }
    if begun || lines.is_empty() {
        lines.push(line.trim_end().to_owned());
    }
    lines
}

fn columns(text: &str) -> usize {
    text.chars().count()
}

/// Lines of a table: every column but the last as wide as its widest cell, the last wrapped in what is left.
#[must_use]
pub fn table(indent: usize, rows: &[Vec<String>]) -> Vec<String> {
    let last = rows
        .iter()
        .map(Vec::len)
        .max()
        .unwrap_or(0)
        .saturating_sub(1);
    let widths: Vec<usize> = (0..last)
        .map(|column| {
            rows.iter()
                .filter_map(|row| row.get(column))
                .map(|cell| columns(cell))
                .max()
                .unwrap_or(0)
        })
        .collect();
    let mut lines = Vec::new();
    for row in rows {
        let mut first = " ".repeat(indent);
        for (cell, width) in row.iter().zip(&widths) {
            first.push_str(cell);
            first.push_str(&" ".repeat(width - columns(cell) + 2));
        }
        let hang = columns(&first);
        lines.extend(wrap(&first, hang, row.get(last).map_or("", String::as_str)));
    }
    lines
}

/// How something is shown where colour is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Ink {
    /// As everything else.
    Plain,
    /// Beside the matter.
    Faint,
    /// Look at it.
    Alert,
    /// Act now.
    Danger,
    /// Well again.
    Fine,
}

impl Ink {
    /// The code of ECMA-48's "select graphic rendition" that starts it.
    const fn code(self) -> &'static str {
        match self {
            Self::Plain => "",
            Self::Faint => "\x1b[2m",
            Self::Alert => "\x1b[1;33m",
            Self::Danger => "\x1b[1;31m",
            Self::Fine => "\x1b[32m",
        }
    }
}

/// Where lines go.
pub struct Page<'a> {
    out: &'a mut dyn Write,
    colour: bool,
}

impl std::fmt::Debug for Page<'_> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Page")
            .field("colour", &self.colour)
            .finish_non_exhaustive()
    }
}

impl<'a> Page<'a> {
    /// A page that goes to `out`.
    pub fn new(out: &'a mut dyn Write, colour: bool) -> Self {
        Self { out, colour }
    }

    /// Writes lines as they are and hands them on at once.
    ///
    /// # Errors
    /// Nobody takes them.
    pub fn lines(&mut self, lines: &[String], ink: Ink) -> io::Result<()> {
        for line in lines {
            let line = self.inked(line, ink);
            writeln!(self.out, "{line}")?;
        }
        self.out.flush()
    }

    /// Writes a paragraph.
    ///
    /// # Errors
    /// Nobody takes it.
    pub fn text(&mut self, text: &str) -> io::Result<()> {
        self.lines(&wrap("", 0, text), Ink::Plain)
    }

    /// Writes what was said at a time, its first word in the ink of how bad it is.
    ///
    /// # Errors
    /// Nobody takes it.
    pub fn said(&mut self, at: &str, sentence: &str, ink: Ink) -> io::Result<()> {
        let first = format!("{at}  ");
        let mut lines = wrap(&first, first.len(), sentence);
        if let Some(line) = lines.first_mut()
            && let Some(rest) = line.strip_prefix(&first)
        {
            let (word, rest) = rest.split_at(rest.find(' ').unwrap_or(rest.len()));
            *line = format!("{first}{}{rest}", self.inked(word, ink));
        }
        self.lines(&lines, Ink::Plain)
    }

    fn inked(&self, text: &str, ink: Ink) -> String {
        if self.colour && ink != Ink::Plain {
            format!("{}{text}\x1b[0m", ink.code())
        } else {
            text.to_owned()
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{Ink, Page, WIDTH, table, wrap};

    #[test]
    fn lines_hang_under_the_text_and_keep_to_the_page() {
        let words = "ab cde ".repeat(40);
        let lines = wrap("03:00:00  ", 10, &words);
        assert!(lines.len() > 2);
        assert!(lines.iter().all(|line| line.chars().count() <= WIDTH));
        assert!(lines[0].starts_with("03:00:00  ab"));
        assert!(
            lines[1..]
                .iter()
                .all(|line| line.starts_with("          ") && !line.ends_with(' '))
        );
        let again: Vec<&str> = lines
            .iter()
            .flat_map(|line| line.split_whitespace())
            .skip(1)
            .collect();
        assert_eq!(again, words.split_whitespace().collect::<Vec<_>>());
    }

    #[test]
    fn a_word_longer_than_the_page_is_broken_and_none_of_it_lost() {
        let lines = wrap("> ", 2, &format!("a {} b", "\u{fc}".repeat(200)));
        assert!(lines.iter().all(|line| line.chars().count() <= WIDTH));
        let letters = lines.concat().matches('\u{fc}').count();
        assert_eq!(letters, 200);
    }

    #[test]
    fn a_full_line_is_exactly_eighty_columns() {
        assert_eq!(
            wrap("", 0, &format!("{} {}", "x".repeat(39), "y".repeat(40))).len(),
            1
        );
        assert_eq!(
            wrap("", 0, &format!("{} {}", "x".repeat(40), "y".repeat(40))).len(),
            2
        );
    }

    #[test]
    fn columns_of_a_table_stand_under_each_other_and_the_last_wraps() {
        let rows = vec![
            vec!["a".to_owned(), "longer".to_owned(), "one ".repeat(30)],
            vec!["bcd".to_owned(), "x".to_owned(), "two".to_owned()],
        ];
        let lines = table(2, &rows);
        assert!(lines[0].starts_with("  a    longer  one one"));
        assert!(lines[1].starts_with("               one"));
        assert_eq!(lines.last().map(String::as_str), Some("  bcd  x       two"));
    }

    #[test]
    fn colour_is_only_where_it_is_wanted_and_only_on_the_word() {
        for (colour, expected) in [
            (false, "03:00:00  ALERT P-1 x\n"),
            (true, "03:00:00  \x1b[1;33mALERT\x1b[0m P-1 x\n"),
        ] {
            let mut out = Vec::new();
            Page::new(&mut out, colour)
                .said("03:00:00", "ALERT P-1 x", Ink::Alert)
                .unwrap();
            assert_eq!(String::from_utf8(out).unwrap(), expected);
        }
    }
}
