//! The joinery of `fixtures/workshop.toml` worked through as a session would: an invented job with
//! a good part, a joint too high, a correction, a skipped test and a link still in.
#![allow(dead_code)] // each test uses its share

use std::{
    fs,
    path::{Path, PathBuf},
};

use handsfull::{
    domain::{
        assess::assess,
        expect::Expected,
        expected::expected,
        kept::{Kept, Value},
        place::{BoardId, CircuitNo, PointNo},
        plan::Job,
        reading::Reading,
        record::{
            AlternativeKept, Entered, EntryNo, ExpectedShown, FindingKept, ReadingKept, Record,
            Work, WorkKind,
        },
        test::{Between, Stage, Target, TestKind},
    },
    journal::Journal,
    plan,
};

use super::records::{BY, at};

pub const FIXTURE: &str = include_str!("../fixtures/workshop.toml");

pub fn target(test: TestKind, way: Option<u16>, point: Option<u16>, name: Option<&str>) -> Target {
    Target {
        test,
        board: way.and_then(|_| BoardId::new("DB1").ok()),
        circuit: way.and_then(|way| CircuitNo::new(way, None).ok()),
        point: point.map(PointNo),
        name: name.map(Into::into),
    }
}

/// A range as a session puts it into the log.
pub fn shown(expected: &Expected) -> Option<ExpectedShown> {
    if expected.unknown.is_some() {
        return None;
    }
    Some(ExpectedShown {
        low: expected.low.map(|d| d.to_string()),
        high: expected.high.map(|d| d.to_string()),
        limit: expected.limit.as_ref().map(|limit| {
            let sign = if limit.minimum { ">=" } else { "<=" };
            format!("{sign}{}", limit.value)
        }),
        unit: expected.unit.word().into(),
        source: expected
            .sources
            .first()
            .map(|s| s.text.clone())
            .unwrap_or_default(),
    })
}

/// The job being worked.
pub struct Bench {
    pub folder: tempfile::TempDir,
    pub job: Job,
    journal: Option<Journal>,
    kept: Kept,
    seconds: i64,
}

impl Bench {
    /// The fixture in a folder of its own, its session opened.
    pub fn new() -> Self {
        Self::of(FIXTURE)
    }

    /// Another job file in its place.
    pub fn of(text: &str) -> Self {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("joinery.toml");
        fs::write(&path, text).expect("written");
        let job = plan::load(&path).expect("a job");
        let (journal, _) =
            Journal::open_as(&path, &job.reference, at(0), Some("0123456789ab")).expect("opens");
        let mut bench = Self {
            folder,
            journal: Some(journal),
            kept: Kept::new(),
            seconds: 0,
            job,
        };
        bench.put(Record::SessionOpened {
            by: BY.into(),
            job: bench.job.reference.clone(),
            program: "0.1.0".into(),
            resumed: false,
            voice: "base".into(),
        });
        bench
    }

    pub fn path(&self) -> PathBuf {
        self.folder.path().join("joinery.toml")
    }

    pub fn log(&self) -> PathBuf {
        self.folder.path().join("joinery.log.toml")
    }

    pub fn put(&mut self, record: Record) -> EntryNo {
        self.seconds += 20;
        let journal = self.journal.as_mut().expect("open");
        journal.append(&record, at(self.seconds)).expect("kept")
    }

    /// Lets the log go, as the end of a session does.
    pub fn close(&mut self) {
        self.journal = None;
    }

    /// A reading as the session would keep it, range and verdict worked out from the plan; findings
    /// are put in by hand where the scenario has them, so that their wording is not tested here.
    pub fn reading(&mut self, target: Target, value: &str) -> ReadingKept {
        let expected = expected(&self.job, &target, &self.kept);
        let unit = target.test.unit();
        let mut kept = ReadingKept {
            value: value.into(),
            unit: unit.filter(|_| value != "open").map(|u| u.word().into()),
            bound: "exact".into(),
            unit_assumed: false,
            expected: None,
            verdict: handsfull::domain::expect::Verdict::Unknown,
            findings: vec![],
            entered: Entered::Voice,
            heard: Some(format!("words for {value}")),
            margin: Some("12.50".into()),
            alternatives: vec![],
            confirmed: Entered::Voice,
            by: BY.into(),
            kept_as_found: None,
            corrects: None,
            clip: None,
            clip_digest: None,
            target: target.clone(),
        };
        let Some(unit) = unit else {
            kept.bound = "ticked".into();
            return kept;
        };
        let reading: Reading = value.parse().expect("a reading");
        let reading = reading.or_unit(unit);
        kept.bound = reading.bound().word().into();
        let assessment = assess(&self.job, &target, &expected, &reading, &self.kept);
        kept.expected = shown(&expected);
        kept.verdict = assessment.verdict;
        self.kept.keep(target, Value::Reading(reading), 1);
        kept
    }

    pub fn keep(&mut self, target: Target, value: &str) -> EntryNo {
        let kept = self.reading(target, value);
        self.put(Record::Reading(Box::new(kept)))
    }

    /// The whole scenario.
    pub fn worked() -> Self {
        let mut bench = Self::new();
        let db1 = BoardId::new("DB1").ok();
        bench.put(Record::ProvedDead {
            board: db1.clone().expect("a board"),
            with: "two-pole indicator, proved on its proving unit before and after".into(),
            by: BY.into(),
        });
        bench.put(Record::Acknowledged {
            stage: Stage::Continuity,
            board: db1.clone(),
            circuit: None,
            reminders: vec!["loads out".into(), "link line and cpc at the board".into()],
            by: BY.into(),
            entered: Entered::Keypad,
        });
        bench.keep(target(TestKind::Leads, None, None, None), "0.00");
        bench.keep(target(TestKind::MainEarth, None, None, None), "0.02");
        bench.keep(target(TestKind::Bonding, None, None, Some("water")), "0.03");
        // The ring, sound, with its spur.
        for (test, value) in [
            (TestKind::RingR1, "0.42"),
            (TestKind::RingRn, "0.42"),
            (TestKind::RingR2, "0.68"),
        ] {
            bench.keep(target(test, Some(1), None, None), value);
        }
        for (point, l_n, l_e) in [
            (1, "0.20", "0.25"),
            (2, "0.21", "0.26"),
            (3, "0.21", "0.28"),
            (4, "0.31", "0.41"),
            (5, "0.21", "0.27"),
            (6, "0.21", "0.26"),
        ] {
            bench.keep(
                target(TestKind::RingLineNeutral, Some(1), Some(point), None),
                l_n,
            );
            bench.keep(
                target(TestKind::RingLineEarth, Some(1), Some(point), None),
                l_e,
            );
        }
        // The radial: a joint too high after the first point, one value heard wrong and corrected.
        let link = Work {
            kind: WorkKind::LineEarthLink,
            board: db1,
            circuit: CircuitNo::new(2, None).ok(),
            name: None,
        };
        bench.put(Record::WorkIn {
            work: link,
            by: BY.into(),
        });
        bench.keep(target(TestKind::R1R2, Some(2), Some(1), None), "0.23");
        let mut wrong = bench.reading(target(TestKind::R1R2, Some(2), Some(2), None), "0.93");
        wrong.margin = Some("1.10".into());
        wrong.alternatives = vec![AlternativeKept {
            words: "zero point five three".into(),
            meaning: "0.53 Ω".into(),
            margin: "1.10".into(),
        }];
        let first = bench.put(Record::Reading(Box::new(wrong)));
        let mut right = bench.reading(target(TestKind::R1R2, Some(2), Some(2), None), "0.63");
        right.corrects = Some(first);
        right.findings = vec![FindingKept {
            code: "high-joint".into(),
            text: "a joint about 0.22 Ω too high between points 1 and 2".into(),
        }];
        right.kept_as_found = Some("joint found, to be remade".into());
        bench.put(Record::Reading(Box::new(right)));
        let mut keyed = bench.reading(target(TestKind::R1R2, Some(2), Some(3), None), "0.80");
        keyed.entered = Entered::Keypad;
        keyed.confirmed = Entered::Keypad;
        keyed.heard = None;
        keyed.margin = None;
        let last = bench.put(Record::Reading(Box::new(keyed)));
        bench.put(Record::Skipped {
            target: target(TestKind::R1R2, Some(3), Some(5), None),
            reason: "no access to the loft".into(),
            by: BY.into(),
        });
        for way in [1, 2] {
            let pair = TestKind::Insulation(Between::LineNeutral);
            bench.keep(target(pair, Some(way), None, None), ">299");
            let pair = TestKind::Insulation(Between::LivesEarth);
            bench.keep(
                target(pair, Some(way), None, None),
                if way == 1 { "0.42" } else { "210" },
            );
        }
        bench.keep(target(TestKind::Polarity, Some(2), None, None), "yes");
        bench.put(Record::Note {
            target: Some(target(TestKind::R1R2, Some(2), Some(3), None)),
            text: "kettle outlet: plate cracked, renewed".into(),
            by: BY.into(),
        });
        bench.put(Record::Amended {
            corrects: last,
            value: "0.86".into(),
            unit: Some("ohm".into()),
            reason: "read off the instrument's memory".into(),
            by: "B. Mate".into(),
        });
        bench.put(Record::SessionClosed { open: 9 });
        bench.close();
        bench
    }
}

/// Runs the built program.
pub fn handsfull(folder: &Path, args: &[&str]) -> std::process::Output {
    std::process::Command::new(env!("CARGO_BIN_EXE_handsfull"))
        .args(args)
        .current_dir(folder)
        .env("COLUMNS", "40")
        .env("TZ", "UTC")
        .output()
        .expect("the program runs")
}
