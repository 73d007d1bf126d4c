//! Temporary works a test stands on, works that would falsify one, and what a failure repeats.

use handsfull::domain::{
    place::{BoardId, CircuitNo, PointNo},
    plan::Job,
    record::{Work, WorkKind},
    sequence::{influenced_by, required, test_voltage, works_in_the_way, works_needed},
    test::{Between, Target, TestKind},
};

use super::fixtures::job;

fn target(job: &Job, text: &str) -> Target {
    required(job)
        .into_iter()
        .find(|t| t.to_string() == text)
        .unwrap_or_else(|| panic!("no test `{text}`"))
}

fn kinds(works: &[Work]) -> Vec<WorkKind> {
    works.iter().map(|w| w.kind).collect()
}

#[track_caller]
fn needs(job: &Job, text: &str, expected: &[WorkKind]) {
    assert_eq!(
        kinds(&works_needed(job, &target(job, text))),
        expected,
        "{text}"
    );
}

#[test]
fn each_test_names_the_works_it_stands_on() {
    use WorkKind::*;
    let workshop = job("workshop.toml");
    needs(&workshop, "Lead resistance", &[]);
    // 1.8 m lies within the reach of ordinary leads, 14 m does not.
    needs(&workshop, "Main earthing conductor", &[EarthOff]);
    needs(
        &workshop,
        "Protective bonding, water",
        &[EarthOff, LongLeadNull],
    );
    needs(&workshop, "R1+R2, DB1/2, point 3", &[LineEarthLink]);
    needs(
        &workshop,
        "Ring rn, neutral end to end, DB1/1",
        &[RingLegsOut],
    );
    needs(
        &workshop,
        "Ring L-N, cross-connected, DB1/1, point 4",
        &[RingLegsOut, CrossLineNeutral],
    );
    needs(
        &workshop,
        "Ring L-E, cross-connected, DB1/1, point 4",
        &[RingLegsOut, CrossLineEarth],
    );
    needs(&workshop, "Insulation L-N, DB1/3", &[LoadsOut]);
    needs(
        &workshop,
        "Insulation L+N-E, DB1/3",
        &[LoadsOut, LivesJoined],
    );
    needs(&workshop, "Polarity, DB1/1", &[]);
    let barn = job("barn.toml");
    needs(&barn, "R2 (long lead), DB1/1, point 2", &[LongLeadNull]);
    // Electronics stay in; only the lives are joined.
    needs(&barn, "Insulation L+N-E, DB1/2", &[LivesJoined]);
    needs(&barn, "Earth electrode, rod by the gate", &[ElectrodeOff]);
    needs(&barn, "Ze", &[EarthOff]);
    needs(&barn, "Zs, DB1/1, point 3", &[]);
}

#[test]
fn surge_protection_comes_out_once_a_board() {
    let hall = job("press-hall.toml");
    let works = works_needed(&hall, &target(&hall, "Insulation L1-L2, MSB/1"));
    assert_eq!(works[0].name.as_deref(), Some("surge protection"));
    assert_eq!(works[0].circuit, None);
    let other = works_needed(&hall, &target(&hall, "Insulation L1-L2, DB2/2"));
    assert!(other.iter().all(|w| w.name.is_none()), "DB2 has none");
}

#[test]
fn links_of_an_earlier_test_stand_in_the_way_of_the_next() {
    let workshop = job("workshop.toml");
    #[track_caller]
    fn check(job: &Job, before: &str, now: &str, expected: &[WorkKind]) {
        let in_place = works_needed(job, &target(job, before));
        let now = target(job, now);
        assert_eq!(kinds(&works_in_the_way(job, &now, &in_place)), expected);
    }
    use WorkKind::*;
    let cross = "Ring L-N, cross-connected, DB1/1, point 6";
    check(
        &workshop,
        cross,
        "Ring L-E, cross-connected, DB1/1, point 1",
        &[CrossLineNeutral],
    );
    check(
        &workshop,
        cross,
        "Insulation L-N, DB1/1",
        &[RingLegsOut, CrossLineNeutral],
    );
    // Another circuit is not disturbed by it.
    check(&workshop, cross, "R1+R2, DB1/2, point 1", &[]);
    check(
        &workshop,
        "R1+R2, DB1/2, point 3",
        "Insulation L-N, DB1/2",
        &[LineEarthLink],
    );
    check(
        &workshop,
        "Insulation L+N-E, DB1/2",
        "Insulation L-N, DB1/2",
        &[LivesJoined],
    );
    // The next bond: the first one is home, the long lead may stay nulled.
    check(
        &workshop,
        "Protective bonding, water",
        "Protective bonding, roof steel",
        &[EarthOff],
    );
    // A long-lead null falsifies short-lead readings everywhere.
    check(
        &workshop,
        "Protective bonding, water",
        "R1+R2, DB1/2, point 1",
        &[EarthOff, LongLeadNull],
    );
}

#[track_caller]
fn repeats(job: &Job, failed: &str, expected: &[&str]) {
    let again: Vec<String> = influenced_by(job, &target(job, failed))
        .iter()
        .map(ToString::to_string)
        .collect();
    assert_eq!(again, expected, "{failed}");
}

/// "Repeat that test and every earlier one it may have influenced" (domain facts, section 5; a
/// textbook's wording of BS 7671 643.1).
#[test]
fn a_failure_repeats_what_was_measured_through_the_same_joints() {
    let barn = job("barn.toml");
    repeats(&barn, "Lead resistance", &[]);
    repeats(&barn, "Protective bonding, frame", &[]);
    repeats(&barn, "R2 (long lead), DB1/1, point 1", &[]);
    repeats(
        &barn,
        "R2 (long lead), DB1/1, point 3",
        &["R2 (long lead), DB1/1, point 2"],
    );
    repeats(
        &barn,
        "Insulation L+N-E, DB1/1",
        &[
            "R2 (long lead), DB1/1, point 1",
            "R2 (long lead), DB1/1, point 2",
            "R2 (long lead), DB1/1, point 3",
            "Insulation L-N, DB1/1",
        ],
    );
    repeats(
        &barn,
        "RCD time at rated current, DB1/2",
        &[
            "Insulation L+N-E, DB1/2",
            "Polarity, DB1/2",
            "Zs, DB1/2, point 4",
        ],
    );
    repeats(&barn, "Ze", &["Main earthing conductor"]);
    let workshop = job("workshop.toml");
    let again = influenced_by(
        &workshop,
        &target(&workshop, "Ring L-E, cross-connected, DB1/1, point 1"),
    );
    // Three ends and six line-neutral readings: every reading on a ring sees the whole ring.
    assert_eq!(again.len(), 9);
    assert!(
        again
            .iter()
            .all(|t| t.circuit == CircuitNo::new(1, None).ok())
    );
}

/// Voltages of IEC 60364-6 table 6.1 / BS 7671 table 64: SELV, PELV 250 V; up to 500 V 500 V;
/// above 1000 V. Electronics that stay in: 250 V (the domain facts name their copies).
#[test]
fn the_test_voltage_follows_the_table() {
    #[track_caller]
    fn check(job: &Job, text: &str, volts: Option<u16>) {
        assert_eq!(
            test_voltage(job, &target(job, text)).map(|v| v.volts),
            volts,
            "{text}"
        );
    }
    check(&job("workshop.toml"), "Insulation L-N, DB1/1", Some(500));
    check(&job("workshop.toml"), "R1+R2, DB1/2, point 1", None);
    check(&job("barn.toml"), "Insulation L+N-E, DB1/2", Some(250));
    check(&job("garden.toml"), "Insulation L-N, GB/2", Some(250));
    check(
        &job("garden.toml"),
        "Separation, insulation, GB/3",
        Some(250),
    );
    // 230/400 V three-phase is still up to 500 V; 400/690 V is not.
    let mut hall = job("press-hall.toml");
    check(&hall, "Insulation L1-L2, DB2/2", Some(500));
    hall.supply.u0_v = 400.0;
    check(&hall, "Insulation L1-L2, DB2/2", Some(1000));
    check(&hall, "Insulation L-N, DB2/4L1", Some(500));
}

#[test]
fn the_lives_may_be_tested_to_earth_one_by_one() {
    let mut workshop = job("workshop.toml");
    workshop.rules.insulation_separately = true;
    let pairs: Vec<Between> = required(&workshop)
        .iter()
        .filter(|t| t.circuit == CircuitNo::new(2, None).ok())
        .filter_map(|t| match t.test {
            TestKind::Insulation(between) => Some(between),
            _ => None,
        })
        .collect();
    assert_eq!(
        pairs,
        [
            Between::LineNeutral,
            Between::LineEarth,
            Between::NeutralEarth
        ]
    );
}

#[test]
fn the_loop_is_read_where_it_is_longest() {
    use handsfull::domain::sequence::furthest_point;
    let workshop = job("workshop.toml");
    let db1 = BoardId::new("DB1").expect("a name");
    let circuit = |no| {
        workshop
            .circuit(&db1, CircuitNo::new(no, None).expect("a number"))
            .expect("a circuit")
    };
    assert_eq!(
        furthest_point(circuit(1)),
        PointNo(4),
        "the spur of the ring"
    );
    assert_eq!(furthest_point(circuit(2)), PointNo(3));
    assert_eq!(furthest_point(circuit(3)), PointNo(5));
    let mut ring = circuit(1).clone();
    ring.points.remove(3);
    // Without its spur: 26 m is nearest to the middle of 58 m.
    assert_eq!(furthest_point(&ring), PointNo(3));
}
