//! Exit statuses of `assess`, and which of several is the worst.

use gaussgap_conclusions::report::State;
use std::process::ExitCode;

/// How an assessment ended. Ordered by severity, mildest first: 0 < 3 < 1 < 2 < 4. A script that looks at one
/// number for a whole batch must not mistake "could not be read" or "could not be written" for a finding, nor a
/// finding that fails for one that is merely undecided.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Status {
    /// Every claim holds.
    Holds,
    /// A claim is undecided within the budget.
    Undecided,
    /// A claim fails.
    Fails,
    /// Bad input: a scenario or an argument.
    BadInput,
    /// An output could not be written, or another failure at run time.
    Failure,
}

impl Status {
    /// The exit status of the process.
    pub const fn code(self) -> u8 {
        match self {
            Self::Holds => 0,
            Self::Fails => 1,
            Self::BadInput => 2,
            Self::Undecided => 3,
            Self::Failure => 4,
        }
    }
}

impl From<State> for Status {
    fn from(state: State) -> Self {
        match state {
            State::Holds => Self::Holds,
            State::Fails => Self::Fails,
            State::Undecided => Self::Undecided,
        }
    }
}

impl From<Status> for ExitCode {
    fn from(status: Status) -> Self {
        Self::from(status.code())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_worst_of_several() {
        let worst = |list: &[Status]| list.iter().copied().max().unwrap().code();
        assert_eq!(worst(&[Status::Holds, Status::Undecided]), 3);
        assert_eq!(worst(&[Status::Undecided, Status::Fails, Status::Holds]), 1);
        assert_eq!(worst(&[Status::BadInput, Status::Fails]), 2);
        assert_eq!(worst(&[Status::BadInput, Status::Failure, Status::Holds]), 4);
    }
}
