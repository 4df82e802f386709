//! One error type for the whole program.
//!
//! Every message names the object, what failed, the rule that was broken and the remedy. The kind
//! decides the exit code, so that a script can tell a mistake in the input from a bound that was
//! hit and from a check that failed.

use std::fmt;

/// What sort of failure an [`Error`] is; each has its own exit code.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// The request or an input file breaks a rule (exit code 2).
    Input,
    /// The question has no answer in mathematics (exit code 3).
    Undefined,
    /// A bound on size, memory, precision or order was hit (exit code 4).
    Bound,
    /// A check made at run time failed: the result must not be trusted (exit code 5).
    Check,
    /// Reading or writing failed (exit code 6).
    Io,
    /// Interrupted by the user or by a signal (exit code 7).
    Interrupted,
    /// A comparison or audit came out negative, or part of a scan failed (exit code 1).
    Negative,
}

/// An error with its kind, its message, and the chain of what caused it.
#[derive(Debug)]
pub struct Error {
    kind: Kind,
    message: String,
    cause: Option<Box<dyn std::error::Error + Send + Sync>>,
}

/// The result type used everywhere in the library.
pub type Result<T> = std::result::Result<T, Error>;

impl Error {
    /// An error of the given kind.
    pub fn new(kind: Kind, message: impl Into<String>) -> Error {
        Error { kind, message: message.into(), cause: None }
    }

    /// A mistake in the request or in an input file.
    pub fn input(message: impl Into<String>) -> Error {
        Error::new(Kind::Input, message)
    }

    /// A question without an answer in mathematics.
    pub fn undefined(message: impl Into<String>) -> Error {
        Error::new(Kind::Undefined, message)
    }

    /// A bound that was hit.
    pub fn bound(message: impl Into<String>) -> Error {
        Error::new(Kind::Bound, message)
    }

    /// A run-time check that failed.
    pub fn check(message: impl Into<String>) -> Error {
        Error::new(Kind::Check, message)
    }

    /// A failure of reading or writing, with its cause.
    pub fn io(message: impl Into<String>, cause: std::io::Error) -> Error {
        Error::new(Kind::Io, message).because(cause)
    }

    /// The user asked to stop.
    pub fn interrupted() -> Error {
        Error::new(Kind::Interrupted, "interrupted; everything finished so far is kept")
    }

    /// The same error with a cause attached.
    #[must_use]
    pub fn because(mut self, cause: impl Into<Box<dyn std::error::Error + Send + Sync>>) -> Error {
        self.cause = Some(cause.into());
        self
    }

    /// This error as the cause of a broader one of the same kind.
    #[must_use]
    pub fn within(self, message: impl Into<String>) -> Error {
        Error { kind: self.kind, message: message.into(), cause: Some(Box::new(self)) }
    }

    /// The kind.
    pub fn kind(&self) -> Kind {
        self.kind
    }

    /// The process exit code for this kind.
    pub fn exit_code(&self) -> u8 {
        match self.kind {
            Kind::Negative => 1,
            Kind::Input => 2,
            Kind::Undefined => 3,
            Kind::Bound => 4,
            Kind::Check => 5,
            Kind::Io => 6,
            Kind::Interrupted => 7,
        }
    }

    /// The message followed by every cause, one per line.
    pub fn chain(&self) -> String {
        let mut text = self.to_string();
        let mut next = std::error::Error::source(self);
        while let Some(cause) = next {
            text.push_str(&format!("\n  because: {cause}"));
            next = cause.source();
        }
        text
    }
}

impl fmt::Display for Error {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.message)
    }
}

impl std::error::Error for Error {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        self.cause.as_deref().map(|cause| cause as &(dyn std::error::Error + 'static))
    }
}
