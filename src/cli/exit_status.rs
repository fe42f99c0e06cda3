//! The exit status of every command, in one place.

use std::process::ExitCode;

/// What the caller of the program learns from its status. Ordered: of several, the largest wins.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum ExitStatus {
    /// 0: done.
    Done,
    /// 1: done, and a gate that the user set was not met.
    GateMissed,
    /// 2: the input or the usage is wrong; also where one run of many was refused.
    InputWrong,
    /// 3: the machine failed: disk full, no permission, out of memory.
    MachineFailed,
}

impl ExitStatus {
    /// The number that the system sees.
    #[must_use]
    pub fn code(self) -> u8 {
        match self {
            Self::Done => 0,
            Self::GateMissed => 1,
            Self::InputWrong => 2,
            Self::MachineFailed => 3,
        }
    }
}

impl From<ExitStatus> for ExitCode {
    fn from(status: ExitStatus) -> Self {
        Self::from(status.code())
    }
}
