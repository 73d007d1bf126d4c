//! The interview as a function of its answers: whole interviews, steps back, refusals.

use handsfull::{
    domain::plan::{CircuitKind, Conductor, Earthing, Material},
    plan::{
        self,
        interview::{Step, next, step},
        write::to_toml,
    },
};
use proptest::prelude::*;

/// A small job in the order of the questions.
const SMALL: &[&str] = &[
    "SHED-2",
    "Shed",
    "",
    "",
    "A. Tester",
    "12",
    "", // job
    "",
    "",
    "0.4",
    "",
    "",
    "3",
    "measured",
    "", // supply
    "water",
    "",
    "9",
    "",
    "done", // bonds
    "installation tester",
    "0417",
    "",
    "",
    "2 + 3", // instrument
    "",
    "lean-to",
    "no", // board
    "",
    "Sockets",
    "ring",
    "",
    "",
    "48",
    "",
    "",
    "30",
    "4",
    "3:5",
    "8, 20, 20, 40",
    "",
    "", // circuit
    "2",
    "Light",
    "lighting",
    "",
    "",
    "11",
    "guess",
    "",
    "",
    "lamp, porch",
    "",
    "",
    "",
    "6", //
    "done",
    "done",
    "lean-to = DB1, yard lamp = db1/2",
];

fn answers(list: &[&str]) -> Vec<String> {
    list.iter().map(|a| (*a).to_string()).collect()
}

#[test]
fn a_whole_interview_gives_a_job_that_loads_back() {
    let Step::Done(job) = next(&answers(SMALL)) else {
        panic!("{:?}", next(&answers(SMALL)));
    };
    assert_eq!(job.reference, "SHED-2");
    assert_eq!(job.supply.earthing, Earthing::TnCS);
    assert_eq!(job.boards.len(), 1);
    let ring = &job.boards[0].circuits[0];
    assert_eq!(ring.kind, CircuitKind::Ring);
    assert_eq!(ring.points[2].spur_m, Some(5.0));
    assert_eq!(ring.points[3].at_m, Some(40.0));
    // The protective conductor that flat cable of 2.5 mm² has: 1.5 mm².
    assert!(matches!(ring.cable.cpc, Some(Conductor::Size { mm2, .. }) if mm2 == 1.5));
    let text = to_toml(&job);
    assert_eq!(plan::parse(&text, "x"), Ok(*job));
    insta::assert_snapshot!(text);
}

#[test]
fn every_part_of_an_interview_asks_the_next_question() {
    let all = answers(SMALL);
    let mut ids = Vec::new();
    for n in 0..all.len() {
        match step(&all[..n]) {
            (Step::Ask(question), used) => {
                assert_eq!(used, n);
                assert!(!ids.contains(&question.id), "{} twice", question.id);
                ids.push(question.id);
            }
            other => panic!("after {n} answers: {other:?}"),
        }
    }
    insta::assert_snapshot!(ids.join("\n"));
}

#[test]
fn an_answer_that_cannot_be_right_is_refused_with_the_reason() {
    #[track_caller]
    fn check(upto: usize, answer: &str, part: &str) {
        let mut list = answers(&SMALL[..upto]);
        list.push(answer.into());
        match step(&list) {
            (Step::Refused(_, why), used) => {
                assert_eq!(used, upto);
                assert!(why.contains(part), "{why}");
            }
            other => panic!("{answer}: {other:?}"),
        }
    }
    check(0, "", "cannot be left empty");
    check(0, "a b", "letters, digits and dashes");
    check(4, "none", "at least one");
    check(4, "A,,B", "empty name");
    check(5, "warm", "`warm` is not a number");
    check(5, "451", "between -40 and 60");
    check(6, "perhaps", "yes or no");
    check(7, "TNCS", "did you mean `TN-C-S`?");
    check(8, "2", "1 or 3");
    check(12, "12 m", "without unit");
    check(15, "water\tand", "control characters");
    check(23, "3 %", "with a plus between");
    check(25, "db-1!", "capital letters and digits");
    check(28, "0", "1 to 199");
    check(30, "rign", "did you mean `ring`?");
    check(31, "3", "no size of IEC 60228");
    check(32, "none", "only SELV and PELV");
    check(35, "E32", "the types are");
    check(37, "0", "1 to 200 points");
    check(38, "9:5", "numbered 1 to 4");
    check(38, "3-5", "with a colon");
    check(39, "8, 20", "2 places for 4 points");
    check(39, "8, 20, 20, 400", "between 0 and 48");
    check(31, "2.5 al", "no size of IEC 60228 for aluminium");
    check(41, "much", "is not a number");
    check(42, "1", "a circuit 1 already");
}

#[test]
fn armour_is_given_by_its_resistance_and_extra_low_voltage_needs_no_earth() {
    let mut list = answers(&SMALL[..28]);
    list.extend(answers(&[
        "7",
        "",
        "",
        "4",
        "4.6 per m",
        "40",
        "",
        "",
        "",
        "2",
        "",
        "",
        "yes",
        "", // armoured radial
        "8",
        "",
        "selv",
        "",
        "",
        "12",
        "",
        "",
        "",
        "3",
        "",
        "",
        "", // SELV
        "done",
        "done",
        "",
    ]));
    let Step::Done(job) = next(&list) else {
        panic!("{:?}", next(&list));
    };
    let [armoured, selv] = job.boards[0].circuits.as_slice() else {
        panic!("two circuits");
    };
    assert_eq!(
        armoured.cable.cpc,
        Some(Conductor::Given {
            milliohm_per_m: 4.6
        })
    );
    assert!(armoured.long_lead);
    assert_eq!(selv.cable.cpc, None);
}

#[test]
fn a_motor_without_neutral_an_aluminium_feeder_and_a_delayed_rcd_can_be_written() {
    let mut list = answers(&SMALL[..8]);
    list.push("3".into());
    list.extend(answers(&SMALL[9..28]));
    list.extend(answers(&[
        "7",
        "Saw",
        "fixed",
        "3",
        "no", // a motor: L1, L2, L3 and earth
        "4",
        "",
        "22",
        "",
        "C16",
        "",
        "",
        "",
        "no",
        "no",
        "12.5", //
        "8",
        "Sub-main",
        "distribution",
        "3",
        "", // aluminium, with neutral
        "25 al",
        "",
        "40",
        "",
        "C63",
        "100 s",
        "",
        "",
        "no",
        "no",
        "", //
        "done",
        "done",
        "saw bench = DB1/7",
    ]));
    let Step::Done(job) = next(&list) else {
        panic!("{:?}", next(&list));
    };
    let [motor, feeder] = job.boards[0].circuits.as_slice() else {
        panic!("two circuits");
    };
    assert!(motor.without_neutral && !feeder.without_neutral);
    assert_eq!(motor.design_a, Some(12.5));
    let rcd = feeder.device.rcd.expect("an RCD");
    assert!(rcd.delayed && rcd.rated_ma == 100.0);
    assert!(matches!(
        (feeder.cable.line, feeder.cable.cpc),
        (
            Conductor::Size {
                mm2: 25.0,
                material: Material::Aluminium,
                ..
            },
            Some(Conductor::Size {
                mm2: 25.0,
                material: Material::Aluminium,
                ..
            })
        )
    ));
    assert_eq!(job.place_names[0].name, "saw bench");
    let text = to_toml(&job);
    assert_eq!(plan::parse(&text, "x").as_ref(), Ok(&*job), "{text}");
    // No test asks for a conductor that is not there.
    let pairs = handsfull::domain::sequence::insulation_pairs(&job, motor);
    assert_eq!(pairs.len(), 4, "{pairs:?}");
    assert!(pairs.iter().all(|pair| !pair.to_neutral()));
    assert_eq!(
        handsfull::domain::sequence::insulation_pairs(&job, feeder).len(),
        7
    );
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(128))]

    /// Whatever is answered: no panic, and what is finished loads back as the same job.
    #[test]
    fn any_answers_lead_somewhere(
        picks in prop::collection::vec((0..12_usize, "[ -~]{0,12}"), 0..160),
    ) {
        let mut list: Vec<String> = Vec::new();
        let usual = ["", "done", "2", "yes", "no", "12", "TT", "3", "X1", "none"];
        for (pick, noise) in picks {
            let answer = usual.get(pick).map_or(noise, |word| (*word).to_string());
            list.push(answer);
            match step(&list) {
                (Step::Refused(..), _) => {
                    list.pop();
                }
                (Step::Done(job), _) => {
                    let text = to_toml(&job);
                    prop_assert_eq!(plan::parse(&text, "x").map_err(|e| e.to_string()), Ok(*job));
                    break;
                }
                (Step::Ask(_), used) => prop_assert_eq!(used, list.len()),
            }
        }
    }
}
