//! Limits of a run and what was reached. Handed down by reference, never global.

use std::fmt;
use std::time::{Duration, Instant};

/// How much a run may use.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Limits {
    /// Terms of one polynomial.
    pub terms: usize,
    /// States of one determinant diagram.
    pub states: usize,
    /// Wall time.
    pub time: Duration,
}

impl Default for Limits {
    fn default() -> Self {
        Self {
            terms: 200_000,
            states: 2_000_000,
            time: Duration::from_secs(20),
        }
    }
}

/// Limits with the time of the start.
#[derive(Clone, Copy, Debug)]
pub struct Budget {
    limits: Limits,
    start: Instant,
    /// Width of a diagram that is still worth while.
    width: u64,
}

impl Default for Budget {
    fn default() -> Self {
        Self::new(Limits::default())
    }
}

impl Budget {
    /// Starts the clock.
    #[must_use]
    pub fn new(limits: Limits) -> Self {
        Self {
            limits,
            start: Instant::now(),
            width: u64::MAX,
        }
    }

    /// No limit at all.
    #[must_use]
    pub fn unlimited() -> Self {
        Self::new(Limits {
            terms: usize::MAX,
            states: usize::MAX,
            time: Duration::MAX,
        })
    }

    /// The same budget, its clock running, with at most `terms` terms.
    #[must_use]
    pub fn with_terms(mut self, terms: usize) -> Self {
        self.limits.terms = self.limits.terms.min(terms);
        self
    }

    /// The same budget, its clock running, for diagrams of a frontier whose states are about `width`.
    #[must_use]
    pub fn with_width(mut self, width: u64) -> Self {
        self.width = width;
        self
    }

    /// The width of a diagram that is still worth while.
    #[must_use]
    pub fn width(&self) -> u64 {
        self.width
    }

    /// The limits.
    #[must_use]
    pub fn limits(&self) -> Limits {
        self.limits
    }

    /// Fails when one polynomial would hold `count` terms and that is too many.
    ///
    /// # Errors
    /// [`Exceeded::Terms`].
    pub fn terms(&self, count: usize) -> Result<(), Exceeded> {
        if count > self.limits.terms {
            return Err(Exceeded::Terms(self.limits.terms));
        }
        Ok(())
    }

    /// Fails when a diagram would hold `count` states and that is too many.
    ///
    /// # Errors
    /// [`Exceeded::States`].
    pub fn states(&self, count: usize) -> Result<(), Exceeded> {
        if count > self.limits.states {
            return Err(Exceeded::States(self.limits.states));
        }
        Ok(())
    }

    /// Fails when the time is over. Costs one reading of the clock.
    ///
    /// # Errors
    /// [`Exceeded::Time`].
    pub fn time(&self) -> Result<(), Exceeded> {
        if self.start.elapsed() > self.limits.time {
            return Err(Exceeded::Time(self.limits.time));
        }
        Ok(())
    }
}

/// The limit that was reached.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Exceeded {
    /// Terms of one polynomial.
    Terms(usize),
    /// States of one diagram.
    States(usize),
    /// Wall time.
    Time(Duration),
    /// Bits of one root.
    Bits(u64),
}

impl fmt::Display for Exceeded {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Terms(limit) => write!(
                formatter,
                "the budget of {limit} terms for one polynomial was reached"
            ),
            Self::States(limit) => write!(
                formatter,
                "the budget of {limit} states for one determinant was reached"
            ),
            Self::Time(limit) => write!(
                formatter,
                "the budget of {} seconds was reached",
                limit.as_secs()
            ),
            Self::Bits(limit) => write!(
                formatter,
                "roots are not apart within the limit of {limit} bits"
            ),
        }
    }
}

impl Exceeded {
    /// The option that goes ten times as far.
    #[must_use]
    pub fn further(&self) -> String {
        match self {
            Self::Terms(limit) => format!("--budget terms={}", limit.saturating_mul(10).max(10)),
            Self::States(limit) => format!("--budget states={}", limit.saturating_mul(10).max(10)),
            Self::Bits(_) => "other nominal values, --set NAME=VALUE".to_owned(),
            Self::Time(limit) => {
                format!(
                    "--budget seconds={}",
                    limit.as_secs().saturating_mul(10).max(10)
                )
            }
        }
    }
}

impl std::error::Error for Exceeded {}
