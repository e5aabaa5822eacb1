//! The only place that reads time: wall clock for the log, a stopwatch for thinking.

use std::time::{Duration, Instant};

use jiff::Timestamp;

/// Where the time of a log line comes from.
#[derive(Clone, Debug)]
pub enum Clock {
    /// The machine's clock.
    System,
    /// Starts at a time and moves on by `step` milliseconds at each reading: tests and demos.
    Stepping {
        /// Time of the next reading.
        next: Timestamp,
        /// Milliseconds between readings; zero stands still.
        step: i64,
    },
}

impl Clock {
    /// A clock that stands at, or steps from, this many milliseconds after 1970.
    pub fn stepping(start: i64, step: i64) -> Self {
        Self::Stepping {
            next: Timestamp::from_millisecond(start).unwrap_or(Timestamp::UNIX_EPOCH),
            step,
        }
    }

    /// The time now.
    pub fn now(&mut self) -> Timestamp {
        match self {
            Self::System => Timestamp::now(),
            Self::Stepping { next, step } => {
                let now = *next;
                if let Ok(later) =
                    Timestamp::from_millisecond(now.as_millisecond().saturating_add(*step))
                {
                    *next = later;
                }
                now
            }
        }
    }
}

/// RFC 3339 in UTC, to the millisecond.
pub fn rfc3339(time: Timestamp) -> String {
    time.strftime("%Y-%m-%dT%H:%M:%S.%3fZ").to_string()
}

/// Tells thinking when its time is up.
#[derive(Clone, Copy, Debug)]
pub struct Deadline(Option<Instant>);

impl Deadline {
    /// That many milliseconds from now; `None`: never.
    pub fn in_ms(ms: Option<u64>) -> Self {
        Self(ms.and_then(|ms| Instant::now().checked_add(Duration::from_millis(ms))))
    }

    /// Whether there is time left.
    pub fn has_time(&self) -> bool {
        self.0.is_none_or(|end| Instant::now() < end)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_stepping_clock_steps_and_writes_utc() {
        let mut clock = Clock::stepping(1_767_261_600_000, 1500);
        assert_eq!(rfc3339(clock.now()), "2026-01-01T10:00:00.000Z");
        assert_eq!(rfc3339(clock.now()), "2026-01-01T10:00:01.500Z");
    }
}
