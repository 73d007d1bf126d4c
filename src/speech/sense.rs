//! Tags in the order of speaking to one meaning.
//!
//! Promises: decimals come out exactly as said; tags that make no whole meaning (a circuit number
//! that cannot be, a figure too long for a reading) give the reason instead of a guess.

use rust_decimal::Decimal;

use crate::domain::{
    place::{BoardId, CircuitNo, Line, Place, PointNo},
    reading::{Bound, Reading, Unit},
};

use super::{
    meaning::{Control, Meaning, Reply},
    tag::{Slot, Tag},
};

/// What the tags say so far.
#[derive(Default)]
struct Draft {
    texts: [String; 8],
    bound: Option<Bound>,
    unit: Option<Unit>,
    own: Option<String>,
    spur: bool,
    same: bool,
}

/// The meaning of one way through a grammar.
///
/// # Errors
/// Why the tags make no meaning, as a whole phrase for the screen.
pub fn meaning<'a>(tags: impl IntoIterator<Item = &'a Tag>) -> Result<Meaning, String> {
    let mut draft = Draft::default();
    let mut slot = Slot::Figure;
    let mut whole = None;
    let mut correction = false;
    for tag in tags {
        match tag {
            Tag::Text(text) => draft.texts[slot as usize].push_str(text),
            Tag::Above => draft.bound = Some(Bound::Above),
            Tag::Below => draft.bound = Some(Bound::Below),
            Tag::Open => draft.bound = Some(Bound::Open),
            Tag::OverRange => draft.bound = Some(Bound::OverRange),
            Tag::Unit(unit) => draft.unit = Some(*unit),
            Tag::Slot(opened) => slot = *opened,
            Tag::Own(name) => draft.own = Some(name.clone()),
            Tag::Reply(reply) => whole = Some(Meaning::Reply(*reply)),
            Tag::Control(control) => whole = Some(Meaning::Control(control.clone())),
            Tag::Correction => correction = true,
            Tag::Spur => draft.spur = true,
            Tag::Same => draft.same = true,
        }
    }
    let inner = match whole {
        Some(whole) => Some(whole),
        None => draft.meaning()?,
    };
    match (inner, correction) {
        (inner, true) => Ok(Meaning::Control(Control::Correction(inner.map(Box::new)))),
        (Some(meaning), false) => Ok(meaning),
        (None, false) => Err("nothing of it has a meaning".into()),
    }
}

impl Draft {
    fn text(&self, slot: Slot) -> Option<&str> {
        Some(self.texts[slot as usize].as_str()).filter(|text| !text.is_empty())
    }

    fn meaning(&self) -> Result<Option<Meaning>, String> {
        if let Some(n) = self.text(Slot::Reason).and_then(|n| n.parse().ok()) {
            return Ok(Some(Meaning::Control(Control::Reason(n))));
        }
        if let Some(n) = self.text(Slot::Pick).and_then(|n| n.parse().ok()) {
            return Ok(Some(Meaning::Reply(Reply::Pick(n))));
        }
        if let Some(digits) = self.text(Slot::Digits) {
            return Ok(Some(Meaning::Control(Control::Digits(digits.into()))));
        }
        let place = self.place()?;
        if let (true, Some(point)) = (self.same, place.point) {
            return Ok(Some(Meaning::Control(Control::SameAs(point))));
        }
        if place != Place::default() {
            return Ok(Some(Meaning::Place(place)));
        }
        Ok(self.reading()?.map(Meaning::Reading))
    }

    fn place(&self) -> Result<Place, String> {
        let mut place = Place {
            name: self.own.clone(),
            ..Place::default()
        };
        if let Some(board) = self.text(Slot::Board) {
            place.board = Some(BoardId::new(board).map_err(|e| e.to_string())?);
        }
        if let Some(way) = self.text(Slot::Circuit) {
            let line = match self.text(Slot::Line) {
                Some("L1") => Some(Line::L1),
                Some("L2") => Some(Line::L2),
                Some("L3") => Some(Line::L3),
                _ => None,
            };
            let number = way
                .parse()
                .map_err(|_| format!("circuit {way} cannot be"))?;
            place.circuit = Some(CircuitNo::new(number, line).map_err(|e| e.to_string())?);
        }
        if let Some(point) = self.text(Slot::Point) {
            let number = point
                .parse()
                .map_err(|_| format!("point {point} cannot be"))?;
            place.point = Some(PointNo(number));
            place.spur = self.spur;
        }
        Ok(place)
    }

    fn reading(&self) -> Result<Option<Reading>, String> {
        match (self.bound, self.text(Slot::Figure)) {
            (Some(Bound::Open), _) => Ok(Some(Reading::open())),
            (Some(Bound::OverRange), _) => Ok(Some(Reading::over_range(self.unit))),
            (_, None) => Ok(None),
            (bound, Some(figure)) => {
                // "point five eight" is written with the zero that was not said.
                let leading = if figure.starts_with('.') { "0" } else { "" };
                let text = format!("{leading}{figure}");
                let value = Decimal::from_str_exact(&text)
                    .map_err(|_| format!("{text} is no figure of a display"))?;
                Reading::new(value, bound.unwrap_or(Bound::Exact), self.unit)
                    .map(Some)
                    .map_err(|e| e.to_string())
            }
        }
    }
}
