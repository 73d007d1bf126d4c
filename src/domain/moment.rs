//! When something was entered: an instant with the offset of the clock on the wall.
//!
//! Promises: milliseconds, printed and read back without loss (`2026-03-02T09:14:05.120+01:00`,
//! RFC 3339). It leaves out where the time comes from: the edges ask the clock and pass it in.

use std::{fmt, str::FromStr};

use jiff::{Timestamp, ZonedDateTime, tz::Offset};

/// An instant and the offset from UTC it was read with.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Moment {
    at: Timestamp,
    offset: Offset,
}

/// A text that is no time.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("`{0}` is not a time with offset, such as 2026-03-02T09:14:05.120+01:00")]
pub struct NotAMoment(pub String);

impl Moment {
    /// An instant, cut to whole milliseconds; years outside 1 to 9999, which no file can hold, and
    /// offsets of a day or more become the nearest that can stand.
    #[must_use]
    pub fn new(at: Timestamp, offset: Offset) -> Self {
        // The first and last millisecond a four-digit year can hold under any offset.
        const FIRST: i64 = -62_135_510_400_000;
        const LAST: i64 = 253_402_207_200_000 - 1;
        let ms = at.as_millisecond().clamp(FIRST, LAST);
        let minutes = (offset.seconds() / 60).clamp(-23 * 60 - 59, 23 * 60 + 59);
        Self {
            at: Timestamp::from_millisecond(ms).unwrap_or(at),
            offset: Offset::from_seconds(minutes * 60).unwrap_or(Offset::UTC),
        }
    }

    /// The instant.
    #[must_use]
    pub fn timestamp(self) -> Timestamp {
        self.at
    }

    /// Seconds from `earlier` to this moment; negative when the clock went back.
    #[must_use]
    pub fn seconds_since(self, earlier: Moment) -> i64 {
        (self.at.as_millisecond() - earlier.at.as_millisecond()) / 1000
    }

    /// Date and minute as on a clock: `2026-03-02 09:14`.
    #[must_use]
    pub fn minute(self) -> String {
        let text = self.to_string();
        match (text.get(..10), text.get(11..16)) {
            (Some(day), Some(minute)) => format!("{day} {minute}"),
            _ => text,
        }
    }

    /// The time of day alone: `09:14:05`.
    #[must_use]
    pub fn clock(self) -> String {
        let text = self.to_string();
        text.get(11..19).unwrap_or(&text).to_owned()
    }
}

impl From<&ZonedDateTime> for Moment {
    fn from(zoned: &ZonedDateTime) -> Self {
        Self::new(zoned.timestamp(), zoned.offset())
    }
}

impl fmt::Display for Moment {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:.3}", self.at.display_with_offset(self.offset))
    }
}

impl FromStr for Moment {
    type Err = NotAMoment;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        let wrong = || NotAMoment(text.into());
        let at: Timestamp = text.parse().map_err(|_| wrong())?;
        let minutes = if text.ends_with('Z') {
            0
        } else {
            let tail = text
                .len()
                .checked_sub(6)
                .and_then(|n| text.get(n..))
                .ok_or_else(wrong)?;
            let sign = match tail.as_bytes().first() {
                Some(b'+') => 1,
                Some(b'-') => -1,
                _ => return Err(wrong()),
            };
            let (hours, minutes) = tail
                .get(1..)
                .and_then(|t| t.split_once(':'))
                .ok_or_else(wrong)?;
            let number = |t: &str| t.parse::<i32>().map_err(|_| wrong());
            sign * (number(hours)? * 60 + number(minutes)?)
        };
        let offset = Offset::from_seconds(minutes * 60).map_err(|_| wrong())?;
        Ok(Self::new(at, offset))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, printed: &str) {
        let moment: Moment = text.parse().expect(text);
        assert_eq!(moment.to_string(), printed);
        assert_eq!(printed.parse::<Moment>().expect("reads back"), moment);
    }

    #[test]
    fn times_come_back_with_their_offset() {
        check(
            "2026-03-02T09:14:05.120+01:00",
            "2026-03-02T09:14:05.120+01:00",
        );
        check("2026-03-02T09:14:05Z", "2026-03-02T09:14:05.000+00:00");
        check(
            "1969-12-31T18:59:59.9999-05:30",
            "1969-12-31T18:59:59.999-05:30",
        );
    }

    #[test]
    fn what_is_no_time_is_refused() {
        for text in [
            "",
            "yesterday",
            "2026-03-02",
            "2026-03-02T09:14:05",
            "é26-03-02T09:14:05Z",
        ] {
            assert!(text.parse::<Moment>().is_err(), "{text}");
        }
    }

    #[test]
    fn years_no_file_can_hold_are_brought_to_the_nearest() {
        for at in [Timestamp::MIN, Timestamp::MAX] {
            let text = Moment::new(at, Offset::MAX).to_string();
            assert_eq!(text.len(), 29, "{text}");
            assert!(text.parse::<Moment>().is_ok(), "{text}");
        }
    }

    #[test]
    fn a_clock_set_back_shows_as_negative_seconds() {
        let late: Moment = "2026-03-02T10:00:00+01:00".parse().expect("a time");
        let early: Moment = "2026-03-02T08:59:30Z".parse().expect("a time");
        assert_eq!(early.seconds_since(late), -30);
    }
}
