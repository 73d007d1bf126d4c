//! Records as a session would keep them, for tests and benchmarks; a small generator of its own so
//! that the same seed gives the same log everywhere.
#![allow(dead_code)] // each test uses its share

use handsfull::domain::{
    expect::Verdict,
    moment::Moment,
    place::{BoardId, CircuitNo, PointNo},
    record::{
        AlternativeKept, Entered, EntryNo, ExpectedShown, FindingKept, ReadingKept, Record, Work,
        WorkKind,
    },
    test::{Stage, Target, TestKind},
};

pub const BY: &str = "R. Lark";

pub fn at(seconds: i64) -> Moment {
    let start: Moment = "2026-03-02T08:00:00+01:00".parse().expect("a time");
    let later = jiff::Timestamp::from_second(start.timestamp().as_second() + seconds);
    Moment::new(
        later.expect("a time"),
        jiff::tz::Offset::from_seconds(3600).expect("an offset"),
    )
}

pub fn target(test: TestKind, way: u16, point: Option<u16>) -> Target {
    Target {
        test,
        board: Some(BoardId::new("DB1").expect("a board")),
        circuit: Some(CircuitNo::new(way, None).expect("a circuit")),
        point: point.map(PointNo),
        name: None,
    }
}

pub fn kept(target: Target, value: &str) -> ReadingKept {
    let unit = target.test.unit();
    ReadingKept {
        value: value.into(),
        unit: unit.map(|u| u.word().into()),
        bound: match (unit, value) {
            (None, _) => "ticked".into(),
            (_, "open") => "open".into(),
            (_, v) if v.starts_with('>') => "above".into(),
            _ => "exact".into(),
        },
        unit_assumed: true,
        expected: unit.map(|u| ExpectedShown {
            low: Some("0.51".into()),
            high: Some("0.63".into()),
            limit: None,
            unit: u.word().into(),
            source: "IEC 60228:2004 table 1".into(),
        }),
        verdict: Verdict::InRange,
        findings: vec![],
        entered: Entered::Voice,
        heard: Some("zero point five eight ohms".into()),
        margin: Some("14.20".into()),
        alternatives: vec![AlternativeKept {
            words: "zero point five nine ohms".into(),
            meaning: "0.59 ohm".into(),
            margin: "14.20".into(),
        }],
        confirmed: Entered::Voice,
        by: BY.into(),
        kept_as_found: None,
        corrects: None,
        clip: None,
        clip_digest: None,
        target,
    }
}

pub fn reading(way: u16, point: u16, value: &str) -> Record {
    Record::Reading(Box::new(kept(
        target(TestKind::R1R2, way, Some(point)),
        value,
    )))
}

pub fn note(text: &str) -> Record {
    Record::Note {
        target: None,
        text: text.into(),
        by: BY.into(),
    }
}

/// A linear congruential generator (Knuth's MMIX constants, from memory): good enough to vary.
pub struct Chance(pub u64);

impl Chance {
    pub fn next(&mut self) -> u64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        self.0 >> 33
    }

    pub fn below(&mut self, n: u64) -> u64 {
        self.next() % n
    }
}

/// The `no`-th record of a long job: mostly readings, with works, notes, skips and amendments.
pub fn varied(no: EntryNo, chance: &mut Chance) -> Record {
    let way = 1 + u16::try_from(chance.below(40)).expect("small");
    let point = 1 + u16::try_from(chance.below(12)).expect("small");
    let work = Work {
        kind: WorkKind::LineEarthLink,
        board: BoardId::new("DB1").ok(),
        circuit: CircuitNo::new(way, None).ok(),
        name: None,
    };
    match chance.below(20) {
        0 => Record::WorkIn {
            work,
            by: BY.into(),
        },
        1 => Record::WorkOut {
            work,
            by: BY.into(),
        },
        2 => note("lid of \"point 3\" is cracked; renewed"),
        3 => Record::Skipped {
            target: target(TestKind::R1R2, way, Some(point)),
            reason: "no access".into(),
            by: BY.into(),
        },
        4 if no > 2 => Record::Amended {
            corrects: 1 + chance.below(no - 1),
            value: "0.61".into(),
            unit: Some("ohm".into()),
            reason: "read off the instrument's memory".into(),
            by: BY.into(),
        },
        5 => Record::Acknowledged {
            stage: Stage::Continuity,
            board: BoardId::new("DB1").ok(),
            circuit: CircuitNo::new(way, None).ok(),
            reminders: vec!["proved dead".into(), "leads nulled".into()],
            by: BY.into(),
            entered: Entered::Keypad,
        },
        6..=9 => {
            let test = TestKind::Insulation(handsfull::domain::test::Between::LivesEarth);
            let mut reading = kept(target(test, way, None), ">299");
            reading.heard = Some("greater than two nine nine".into());
            Record::Reading(Box::new(reading))
        }
        _ => {
            let value = format!("0.{:02}", chance.below(100));
            let mut reading = kept(target(TestKind::R1R2, way, Some(point)), &value);
            if chance.below(5) == 0 {
                reading.verdict = Verdict::Above;
                reading.kept_as_found = Some("known long run".into());
                reading.findings = vec![FindingKept {
                    code: "high-joint".into(),
                    text: "a joint about 0.20 Ω too high between point 3 and 4".into(),
                }];
            }
            if chance.below(4) == 0 {
                reading.entered = Entered::Keypad;
                reading.heard = None;
                reading.margin = None;
                reading.alternatives = vec![];
            }
            Record::Reading(Box::new(reading))
        }
    }
}
