//! Exit status: its kinds, and what the argument parser's errors become.

use std::process::ExitCode;

use super::CliError;

/// How a run ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Exit {
    /// Answered.
    Answered = 0,
    /// Could not answer: files, catalogue, data.
    Failed = 1,
    /// Something in what was typed is wrong.
    Usage = 2,
    /// Answered, but what was required does not hold.
    Unmet = 3,
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(exit as u8)
    }
}

/// Help and version are answers; all else is wrong usage, already put into words by the parser.
pub(super) fn of_clap(error: &clap::Error) -> Result<Exit, CliError> {
    let exit = if error.use_stderr() {
        Exit::Usage
    } else {
        Exit::Answered
    };
    match error.print() {
        Err(cause) if cause.kind() != std::io::ErrorKind::BrokenPipe => {
            Err(CliError::Output(cause))
        }
        _ => Ok(exit),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn statuses_are_those_of_the_documentation() {
        let all = [Exit::Answered, Exit::Failed, Exit::Usage, Exit::Unmet];
        assert_eq!(all.map(|e| e as u8), [0, 1, 2, 3]);
    }
}
