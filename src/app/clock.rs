//! The wall clock watched against the clock that only counts: a jump, or a handheld that slept.
//!
//! Promises: a jump is told once, and a long one also says that the session was left for long. It
//! leaves out going back, which the journal enters itself with the next entry.

use std::{
    collections::VecDeque,
    time::{Duration, Instant, SystemTime},
};

use super::LONG_S;
use crate::session::Event;

/// Smaller jumps are a clock being trimmed.
const JUMP: Duration = Duration::from_secs(60);

/// Two clocks that ought to run alike.
#[derive(Debug)]
pub struct Clock {
    counted: Instant,
    wall: SystemTime,
    due: VecDeque<Event>,
}

impl Default for Clock {
    fn default() -> Self {
        Self {
            counted: Instant::now(),
            wall: SystemTime::now(),
            due: VecDeque::new(),
        }
    }
}

impl Clock {
    /// What is due to be told.
    pub fn due(&mut self) -> Option<Event> {
        self.due.pop_front()
    }

    /// Looks at both clocks; call it now and then.
    pub fn look(&mut self) {
        self.compare(Instant::now(), SystemTime::now());
    }

    fn compare(&mut self, counted: Instant, wall: SystemTime) {
        let by_count = counted.saturating_duration_since(self.counted);
        let by_wall = wall.duration_since(self.wall).unwrap_or_default();
        (self.counted, self.wall) = (counted, wall);
        let ahead = by_wall.saturating_sub(by_count);
        if ahead < JUMP {
            return;
        }
        let minutes = ahead.as_secs() / 60;
        self.due.push_back(Event::ClockChanged(format!(
            "forward by {minutes} min, or the handheld slept"
        )));
        if i64::try_from(ahead.as_secs()).is_ok_and(|s| s > LONG_S) {
            self.due.push_back(Event::LeftLong);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(counted_s: u64, wall_s: u64, told: usize) {
        let mut clock = Clock::default();
        let (counted, wall) = (clock.counted, clock.wall);
        clock.compare(
            counted + Duration::from_secs(counted_s),
            wall + Duration::from_secs(wall_s),
        );
        assert_eq!(std::iter::from_fn(|| clock.due()).count(), told);
    }

    #[test]
    fn a_jump_is_told_and_a_long_one_is_an_absence() {
        check(1, 1, 0);
        check(7_200, 7_200, 0);
        check(1, 40, 0);
        check(1, 120, 1);
        check(1, 3_600, 2);
        check(30, 1, 0);
    }
}
