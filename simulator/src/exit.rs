//! Exit codes: what the end of a command means to a script. The same numbers as the daemon's.

use std::process::ExitCode;

/// How a command ended. The numbers are stable.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Exit {
    /// It did what was asked.
    Fine,
    /// The scenario is wrong, told on standard error.
    Scenario,
    /// The command line is not understood.
    Usage,
    /// A file could not be read or written, or the broker does not take us.
    ReadWrite,
}

impl Exit {
    /// Every exit, in the order of its number.
    pub const ALL: [Exit; 4] = [Exit::Fine, Exit::Scenario, Exit::Usage, Exit::ReadWrite];

    /// Its number.
    #[must_use]
    pub const fn number(self) -> u8 {
        match self {
            Exit::Fine => 0,
            Exit::Scenario => 1,
            Exit::Usage => 2,
            Exit::ReadWrite => 3,
        }
    }

    /// What it means, as `--help` says.
    #[must_use]
    pub const fn meaning(self) -> &'static str {
        match self {
            Exit::Fine => "done",
            Exit::Scenario => "the scenario is wrong, told on standard error",
            Exit::Usage => "the command line is not understood",
            Exit::ReadWrite => {
                "a file could not be read or written, or the broker does not take us"
            }
        }
    }

    /// The list of all numbers with their meaning, a line each.
    #[must_use]
    pub fn table() -> String {
        let lines: Vec<String> = Exit::ALL
            .into_iter()
            .map(|exit| format!("  {}  {}", exit.number(), exit.meaning()))
            .collect();
        lines.join("\n")
    }
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> ExitCode {
        ExitCode::from(exit.number())
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
