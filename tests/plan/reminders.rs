//! Reminders and connections: present for every stage and test, short, and never a promise.

use handsfull::domain::{
    plan::Job,
    reminders::{connections, reminders},
    sequence::{required, stages},
    test::{Stage, TestKind},
};

use super::fixtures::{ALL, job};

/// Every line of a job, with where it comes from.
fn every_line(job: &Job) -> Vec<(String, String)> {
    let mut lines = Vec::new();
    for stage in Stage::ALL {
        let mut scopes = vec![(None, None)];
        for board in &job.boards {
            scopes.push((Some(&board.id), None));
            scopes.extend(board.circuits.iter().map(|c| (Some(&board.id), Some(c.no))));
        }
        for (board, circuit) in scopes {
            let said = reminders(stage, job, board, circuit);
            assert!(said.len() >= 2, "{}: {said:?}", stage.title());
            lines.extend(
                said.into_iter()
                    .map(|line| (stage.title().to_string(), line)),
            );
        }
    }
    for target in required(job) {
        let said = connections(job, &target);
        assert!((1..=5).contains(&said.len()), "{target}: {said:?}");
        lines.extend(said.into_iter().map(|line| (target.to_string(), line)));
    }
    lines
}

#[test]
fn no_line_calls_anything_safe_and_all_wrap_on_a_small_screen() {
    for name in ALL {
        for (of, line) in every_line(&job(name)) {
            let lower = line.to_lowercase();
            for word in ["safe", "pass", "guarantee", "certif"] {
                assert!(!lower.contains(word), "{of}: {line}");
            }
            let longest = line.split_whitespace().map(|w| w.chars().count()).max();
            assert!(longest <= Some(20), "{of}: {line}");
            // Four lines of 38 columns at most; more than that nobody reads with gloves on.
            assert!(line.chars().count() <= 112, "{of}: {line}");
            assert!(line.ends_with(['.', '?']), "{of}: {line}");
        }
    }
}

#[test]
fn what_can_kill_is_said_at_its_stage() {
    #[track_caller]
    fn check(name: &str, stage: Stage, part: &str) {
        let said = reminders(stage, &job(name), None, None).join(" ");
        assert!(said.contains(part), "{part}: {said}");
    }
    check("workshop.toml", Stage::Isolation, "local rules");
    check("workshop.toml", Stage::Isolation, "proved again");
    check(
        "workshop.toml",
        Stage::Isolation,
        "L to N, L to E and N to E",
    );
    check("press-hall.toml", Stage::Isolation, "ten pairs");
    check(
        "barn.toml",
        Stage::Isolation,
        "solar panels on the south roof",
    );
    check("workshop.toml", Stage::Bonding, "can kill");
    check("workshop.toml", Stage::Insulation, "it shocks");
    check("workshop.toml", Stage::Insulation, "below 50 V");
    check("press-hall.toml", Stage::Insulation, "surge protection out");
    check("barn.toml", Stage::Insulation, "Electronics stay in");
    check(
        "barn.toml",
        Stage::Electrode,
        "Reconnect the electrode before",
    );
    check("barn.toml", Stage::CloseUp, "Electrode back on");
    check(
        "barn.toml",
        Stage::Energise,
        "competent and authorised under your local rules",
    );
    check("barn.toml", Stage::Live, "main switch off and locked first");
}

#[test]
fn a_circuit_is_reminded_of_its_own_matters_only() {
    let barn = job("barn.toml");
    let db1 = &barn.boards[0];
    let sockets = reminders(
        Stage::Insulation,
        &barn,
        Some(&db1.id),
        Some(db1.circuits[0].no),
    );
    assert!(
        !sockets.join(" ").contains("Electronics stay in"),
        "{sockets:?}"
    );
    let lights = reminders(
        Stage::Insulation,
        &barn,
        Some(&db1.id),
        Some(db1.circuits[1].no),
    );
    assert!(
        lights.join(" ").contains("Electronics stay in"),
        "{lights:?}"
    );
    assert!(lights[0].starts_with("250 V"), "{lights:?}");
}

#[test]
fn live_stages_are_there_only_when_the_job_asks_for_them() {
    assert!(!stages(&job("workshop.toml")).contains(&Stage::Energise));
    assert!(!stages(&job("workshop.toml")).contains(&Stage::Live));
    assert!(stages(&job("barn.toml")).contains(&Stage::Energise));
    let none_live = required(&job("workshop.toml"));
    assert!(none_live.iter().all(|t| t.test != TestKind::Ze));
}

#[test]
fn the_insulation_stage_of_a_board_with_surge_protection() {
    let hall = job("press-hall.toml");
    let said = reminders(Stage::Insulation, &hall, Some(&hall.boards[0].id), None);
    insta::assert_snapshot!(said.join("\n"));
}

#[test]
fn connections_of_a_ring_and_a_bond() {
    let workshop = job("workshop.toml");
    let said: String = required(&workshop)
        .iter()
        .filter(|t| t.test.stage() == Stage::Bonding || t.test.stage() == Stage::Ring)
        .step_by(3)
        .map(|t| format!("{t}\n  {}\n", connections(&workshop, t).join("\n  ")))
        .collect();
    insta::assert_snapshot!(said);
}
