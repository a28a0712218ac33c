//! Exit codes: how the demo ended.

use std::process::ExitCode;

/// How the demo ended. The numbers are stable.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Exit {
    /// The story came out as it is meant.
    AsMeant,
    /// It came out otherwise, or was broken off before its end.
    Otherwise,
    /// The command line is not understood.
    Usage,
    /// It could not run.
    CouldNotRun,
}

impl Exit {
    /// Every exit, in the order of its number.
    pub const ALL: [Self; 4] = [
        Self::AsMeant,
        Self::Otherwise,
        Self::Usage,
        Self::CouldNotRun,
    ];

    /// Its number.
    #[must_use]
    pub const fn number(self) -> u8 {
        match self {
            Self::AsMeant => 0,
            Self::Otherwise => 1,
            Self::Usage => 2,
            Self::CouldNotRun => 3,
        }
    }

    /// What it means, as `--help` says.
    #[must_use]
    pub const fn meaning(self) -> &'static str {
        match self {
            Self::AsMeant => "the story came out as meant",
            Self::Otherwise => "it came out otherwise, or was broken off before its end",
            Self::Usage => "the command line is not understood",
            Self::CouldNotRun => "it could not run; standard error says why",
        }
    }

    /// The list of all numbers with their meaning, a line each.
    #[must_use]
    pub fn table() -> String {
        let lines: Vec<String> = Self::ALL
            .into_iter()
            .map(|exit| format!("  {}  {}", exit.number(), exit.meaning()))
            .collect();
        lines.join("\n")
    }
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(exit.number())
    }
}

#[cfg(test)]
mod tests {
    use super::Exit;

    #[test]
    fn exits_are_numbered_from_zero_without_a_gap() {
        for (index, exit) in Exit::ALL.into_iter().enumerate() {
            assert_eq!(usize::from(exit.number()), index);
        }
    }
}
