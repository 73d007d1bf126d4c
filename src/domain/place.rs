//! Names of boards, circuits, lines and points, as painted on them and as spoken.
//!
//! A [`Place`] may be partial ("circuit twelve" leaves the board to where the tester stands).
//! It leaves out whether such a place exists: the plan answers that.

use std::{fmt, str::FromStr};

use serde::{Deserialize, Serialize};

/// A name that is no name.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("`{text}` is not a {what}; {right}")]
pub struct PlaceError {
    /// What was given.
    pub text: String,
    /// Which kind of name it should have been.
    pub what: &'static str,
    /// What would be right.
    pub right: &'static str,
}

/// A board: capital letters and digits, 1 to 8 of them, such as `DB1`, `MSB`, `A`.
#[derive(Debug, Clone, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(try_from = "String", into = "String")]
pub struct BoardId(String);

/// A line conductor of a three-phase way.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[allow(missing_docs)] // IEC 60445 names
pub enum Line {
    L1,
    L2,
    L3,
}

/// A circuit on its board: the number of the way, and its line where single-phase circuits share
/// a three-phase way. Printed `7` or `4L2`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(try_from = "String", into = "String")]
pub struct CircuitNo {
    way: u16,
    line: Option<Line>,
}

/// A point of a circuit, counted from 1 along the run in the order of the plan.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(transparent)]
pub struct PointNo(pub u16);

/// A place called by name; what was not said is `None`.
#[derive(Debug, Clone, Default, PartialEq, Eq, Hash)]
pub struct Place {
    /// `board delta bravo one`.
    pub board: Option<BoardId>,
    /// `circuit twelve`, `way four line two`.
    pub circuit: Option<CircuitNo>,
    /// `point three`, `socket three`, `spur three`: a spur has a number like any other point.
    pub point: Option<PointNo>,
    /// `spur off three`: not that point, but the one on a spur that leaves there.
    pub spur: bool,
    /// A name of the job's own ("boiler house"), in lower case.
    pub name: Option<String>,
}

impl BoardId {
    /// # Errors
    /// [`PlaceError`] unless 1 to 8 capital letters and digits.
    pub fn new(text: &str) -> Result<Self, PlaceError> {
        let ok = (1..=8).contains(&text.len())
            && text
                .chars()
                .all(|c| c.is_ascii_uppercase() || c.is_ascii_digit());
        if ok {
            Ok(Self(text.into()))
        } else {
            Err(PlaceError {
                text: text.into(),
                what: "board name",
                right: "use 1 to 8 capital letters and digits, such as DB1",
            })
        }
    }

    /// The name as painted.
    #[must_use]
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl CircuitNo {
    /// # Errors
    /// [`PlaceError`] unless the way is 1 to 199.
    pub fn new(way: u16, line: Option<Line>) -> Result<Self, PlaceError> {
        if (1..=199).contains(&way) {
            Ok(Self { way, line })
        } else {
            Err(PlaceError {
                text: way.to_string(),
                what: "circuit number",
                right: "ways are numbered 1 to 199",
            })
        }
    }

    /// The number of the way.
    #[must_use]
    pub fn way(self) -> u16 {
        self.way
    }

    /// The line, where single-phase circuits share a three-phase way.
    #[must_use]
    pub fn line(self) -> Option<Line> {
        self.line
    }
}

impl fmt::Display for BoardId {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

impl fmt::Display for Line {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{self:?}")
    }
}

impl fmt::Display for CircuitNo {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.line {
            Some(line) => write!(f, "{}{line}", self.way),
            None => write!(f, "{}", self.way),
        }
    }
}

impl fmt::Display for PointNo {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.0)
    }
}

impl FromStr for CircuitNo {
    type Err = PlaceError;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        let wrong = || PlaceError {
            text: text.into(),
            what: "circuit number",
            right: "use the number of the way, 1 to 199, with its line where it has one: 7, 4L2",
        };
        let (way, line) = match text.split_once('L') {
            None => (text, None),
            Some((way, "1")) => (way, Some(Line::L1)),
            Some((way, "2")) => (way, Some(Line::L2)),
            Some((way, "3")) => (way, Some(Line::L3)),
            Some(_) => return Err(wrong()),
        };
        if !way.chars().all(|c| c.is_ascii_digit()) {
            return Err(wrong());
        }
        Self::new(way.parse().map_err(|_| wrong())?, line).map_err(|_| wrong())
    }
}

impl TryFrom<String> for CircuitNo {
    type Error = PlaceError;
    fn try_from(text: String) -> Result<Self, Self::Error> {
        text.parse()
    }
}

impl From<CircuitNo> for String {
    fn from(no: CircuitNo) -> Self {
        no.to_string()
    }
}

impl TryFrom<String> for BoardId {
    type Error = PlaceError;
    fn try_from(text: String) -> Result<Self, Self::Error> {
        Self::new(&text)
    }
}

impl From<BoardId> for String {
    fn from(id: BoardId) -> Self {
        id.0
    }
}
