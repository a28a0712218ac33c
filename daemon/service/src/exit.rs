//! Exit codes: what the end of a command means to a script.

use std::process::ExitCode;

/// How a command ended. The numbers are stable.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Exit {
    /// It did what was asked.
    Fine,
    /// The configuration has faults, told on standard error.
    Configuration,
    /// The command line is not understood.
    Usage,
    /// A file could not be read or an output not written.
    ReadWrite,
    /// A recording is damaged; what could be read before the damage was used and told.
    Recording,
    /// A part of the daemon ended that must not; the log says which.
    Internal,
}

impl Exit {
    /// Every exit, in the order of its number.
    pub const ALL: [Self; 6] = [
        Self::Fine,
        Self::Configuration,
        Self::Usage,
        Self::ReadWrite,
        Self::Recording,
        Self::Internal,
    ];

    /// Its number.
    pub const fn number(self) -> u8 {
        match self {
            Self::Fine => 0,
            Self::Configuration => 1,
            Self::Usage => 2,
            Self::ReadWrite => 3,
            Self::Recording => 4,
            Self::Internal => 5,
        }
    }

    /// What it means, as `--help` says.
    pub const fn meaning(self) -> &'static str {
        match self {
            Self::Fine => "done",
            Self::Configuration => "the configuration has faults, told on standard error",
            Self::Usage => "the command line is not understood",
            Self::ReadWrite => "a file could not be read or an output not written",
            Self::Recording => "a recording is damaged",
            Self::Internal => "a part of the daemon ended that must not; the log says which",
        }
    }

    /// The list of all numbers with their meaning, a line each.
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
