//! What entries add up to, one rule a test.

use super::*;
use crate::domain::{
    expect::Verdict,
    place::PointNo,
    record::{Entered, WorkKind},
    test::TestKind,
};

fn target(point: u16) -> Target {
    Target {
        test: TestKind::R1R2,
        board: Some(BoardId::new("DB1").expect("a board")),
        circuit: Some(CircuitNo::new(7, None).expect("a circuit")),
        point: Some(PointNo(point)),
        name: None,
    }
}

fn reading(point: u16, value: &str) -> Record {
    Record::Reading(Box::new(ReadingKept {
        target: target(point),
        value: value.into(),
        unit: Some("ohm".into()),
        bound: "exact".into(),
        unit_assumed: false,
        expected: None,
        verdict: Verdict::InRange,
        findings: vec![],
        entered: Entered::Voice,
        heard: None,
        margin: None,
        alternatives: vec![],
        confirmed: Entered::Voice,
        by: "R. Lark".into(),
        kept_as_found: None,
        corrects: None,
        clip: None,
        clip_digest: None,
    }))
}

fn link() -> Work {
    Work {
        kind: WorkKind::LineEarthLink,
        board: target(1).board,
        circuit: target(1).circuit,
        name: None,
    }
}

fn link_in() -> Record {
    Record::WorkIn {
        work: link(),
        by: "R. Lark".into(),
    }
}

fn link_out() -> Record {
    Record::WorkOut {
        work: link(),
        by: "R. Lark".into(),
    }
}

fn stand(records: &[Record]) -> Standing {
    let mut standing = Standing::new();
    for (no, record) in (1..).zip(records) {
        standing.apply(no, record);
    }
    standing
}

#[track_caller]
fn kept(standing: &Standing, point: u16) -> String {
    match standing.kept.reading(&target(point)) {
        Some(reading) => reading.to_string(),
        None => "nothing".into(),
    }
}

#[test]
fn the_newest_reading_counts_with_its_zeros() {
    let standing = stand(&[reading(1, "0.58"), reading(1, "0.50")]);
    assert_eq!(kept(&standing, 1), "0.50 Ω");
    assert_eq!(standing.kept.entry(&target(1)), Some(2));
}

#[test]
fn a_skipped_test_is_no_longer_skipped_once_it_is_done() {
    let skip = Record::Skipped {
        target: target(1),
        reason: "no access".into(),
        by: "R. Lark".into(),
    };
    let mut standing = stand(&[skip]);
    assert_eq!(standing.skipped[&target(1)].reason, "no access");
    standing.apply(2, &reading(1, "0.58"));
    assert!(standing.skipped.is_empty());
}

#[test]
fn a_repeat_takes_the_value_away_and_opens_the_stage_of_that_circuit() {
    let close = |way| Record::StageClosed {
        stage: Stage::Continuity,
        board: target(1).board,
        circuit: CircuitNo::new(way, None).ok(),
    };
    let repeat = Record::Repeat {
        target: target(1),
        because: 3,
    };
    let mut standing = stand(&[reading(1, "0.58"), close(7), close(8), repeat]);
    assert_eq!(kept(&standing, 1), "nothing");
    assert_eq!(standing.repeats[&target(1)], 3);
    assert_eq!(standing.closed.len(), 1, "circuit 8 stays closed");
    standing.apply(5, &reading(1, "0.60"));
    assert!(standing.repeats.is_empty());
}

#[test]
fn a_work_is_on_the_list_until_it_comes_out() {
    assert_eq!(stand(&[link_in(), link_in()]).works_in, vec![link()]);
    assert!(stand(&[link_in(), link_out()]).works_in.is_empty());
}

#[test]
fn an_amendment_counts_only_for_the_value_that_counts() {
    let amend = |corrects, value: &str| Record::Amended {
        corrects,
        value: value.into(),
        unit: Some("ohm".into()),
        reason: "read off the instrument's memory".into(),
        by: "R. Lark".into(),
    };
    let superseded = stand(&[reading(1, "0.58"), reading(1, "0.60"), amend(1, "9.99")]);
    assert_eq!(kept(&superseded, 1), "0.60 Ω");
    let twice = stand(&[reading(1, "0.58"), amend(1, "0.85"), amend(2, "0.85")]);
    assert_eq!(kept(&twice, 1), "0.85 Ω");
    assert_eq!(twice.kept.entry(&target(1)), Some(3));
    let nonsense = stand(&[reading(1, "0.58"), amend(1, "about half")]);
    assert_eq!(kept(&nonsense, 1), "0.58 Ω");
    assert_eq!(nonsense.unreadable, vec![2]);
}

#[test]
fn ticks_are_ticks_and_figures_are_figures() {
    let mut tick = target(1);
    tick.test = TestKind::Polarity;
    for (value, unit, target, right) in [
        ("yes", None, &tick, Some(Value::Ticked(true))),
        ("no", None, &tick, Some(Value::Ticked(false))),
        ("0.58", None, &tick, None),
        ("yes", None, &target(1), None),
        ("0.58", Some("furlong"), &target(1), None),
        ("0.58 MΩ", Some("ohm"), &target(1), None),
        (
            "open",
            None,
            &target(1),
            Some(Value::Reading(Reading::open())),
        ),
    ] {
        assert_eq!(read_value(value, unit, target), right, "{value} {unit:?}");
    }
}

#[test]
fn handhelds_that_agree_count_and_those_that_differ_wait_for_a_person() {
    let left = stand(&[reading(1, "0.58"), reading(2, "0.60")]);
    let mut right = Standing::new();
    right.apply(3, &reading(1, "0.58"));
    right.apply(4, &reading(2, "0.64"));
    let mut all = Standing::joined(vec![left, right]);
    assert_eq!(kept(&all, 1), "0.58 Ω");
    assert_eq!(kept(&all, 2), "nothing");
    assert_eq!(all.undecided[&target(2)].len(), 2);
    let decided = Record::Decided {
        target: target(2),
        takes: 4,
        reason: "the other was taken with the lead not nulled".into(),
        by: "R. Lark".into(),
    };
    all.apply(5, &decided);
    assert_eq!(kept(&all, 2), "0.64 Ω");
    assert!(all.undecided.is_empty());
}

#[test]
fn a_decision_for_an_entry_that_was_no_candidate_changes_nothing() {
    let left = stand(&[reading(2, "0.60")]);
    let right = {
        let mut side = Standing::new();
        side.apply(2, &reading(2, "0.64"));
        side
    };
    let mut all = Standing::joined(vec![left, right]);
    let decided = Record::Decided {
        target: target(2),
        takes: 9,
        reason: "a slip".into(),
        by: "R. Lark".into(),
    };
    all.apply(3, &decided);
    assert_eq!(all.undecided.len(), 1);
}

#[test]
fn one_handheld_cannot_take_out_the_link_another_put_in() {
    let all = Standing::joined(vec![stand(&[link_in()]), stand(&[link_in(), link_out()])]);
    assert_eq!(all.works_in, vec![link()]);
}

#[test]
fn a_repeat_asked_on_one_handheld_keeps_the_test_open_after_the_join() {
    let asks = stand(&[Record::Repeat {
        target: target(1),
        because: 1,
    }]);
    let mut measured = Standing::new();
    measured.apply(2, &reading(1, "0.58"));
    let all = Standing::joined(vec![asks, measured]);
    assert_eq!(kept(&all, 1), "nothing");
    assert!(all.repeats.contains_key(&target(1)));
    assert!(all.undecided.contains_key(&target(1)));
}
