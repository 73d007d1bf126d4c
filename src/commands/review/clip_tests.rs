//! Where today's hearing differs from what was kept.

use super::*;
use crate::{
    domain::{
        expect::Verdict,
        record::Entered,
        test::{Between, TestKind},
    },
    speech::{self, meaning::Hypothesis},
};

fn kept(test: TestKind, value: &str, unit: Option<&str>) -> ReadingKept {
    ReadingKept {
        target: Target {
            test,
            board: None,
            circuit: None,
            point: None,
            name: None,
        },
        value: value.into(),
        unit: unit.map(Into::into),
        bound: "exact".into(),
        unit_assumed: true,
        expected: None,
        verdict: Verdict::Unknown,
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
    }
}

/// Words as if heard where this test is read, through the grammars of the tool.
fn heard(reading: &ReadingKept, words: &str) -> Heard {
    let meaning = speech::understand(context_of(&reading.target), words);
    Heard {
        hypotheses: vec![Hypothesis {
            words: words.into(),
            meaning: meaning.clone(),
            margin: 0.0,
        }],
        meaning,
        clip: None,
    }
}

#[track_caller]
fn check(reading: &ReadingKept, words: &str, difference: Option<&str>) {
    let found = differs(reading, &heard(reading, words));
    assert_eq!(found.as_deref(), difference);
}

#[test]
fn the_same_value_heard_again_is_no_difference() {
    let ohms = kept(TestKind::R1R2, "0.58", Some("ohm"));
    check(&ohms, "zero point five eight", None);
    check(&ohms, "zero point five eight ohms", None);
    let megohms = kept(
        TestKind::Insulation(Between::LineEarth),
        ">299",
        Some("megohm"),
    );
    check(&megohms, "greater than two nine nine", None);
}

#[test]
fn a_correction_says_its_value_too() {
    let ohms = kept(TestKind::R1R2, "0.26", Some("ohm"));
    check(&ohms, "correction zero point two six", None);
}

#[test]
fn another_value_or_none_is_one() {
    let ohms = kept(TestKind::R1R2, "0.50", Some("ohm"));
    check(
        &ohms,
        "zero point five",
        Some("kept 0.50 Ω, heard now \"zero point five\": 0.5 Ω"),
    );
    let nothing = differs(&ohms, &heard(&ohms, "zero point"));
    assert!(nothing.expect("a difference").contains("nothing ("));
}
