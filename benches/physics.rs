//! How long the physics takes between a reading and what is said about it.
//!
//! A tester waits for this with probes in both hands: well under a tenth of a second is the aim.

#[path = "../tests/physics/jobs.rs"]
#[allow(dead_code)] // the tests use all of it
mod jobs;

use handsfull::domain::{
    assess::assess,
    expected::expected,
    kept::{Kept, Value},
    plan::{CircuitKind, Job},
    test::{Target, TestKind},
};

fn main() {
    divan::main();
}

/// A ring of ten points read whole, with its last reading far too high.
fn ring() -> (Job, Kept, Target) {
    let job = jobs::job(vec![jobs::circuit(
        1,
        CircuitKind::Ring,
        (2.5, 1.5),
        80.0,
        10,
    )]);
    let mut kept = Kept::new();
    let mut keep = |test, point, figure: &str| {
        kept.keep(
            jobs::target(test, 1, point),
            Value::Reading(figure.parse().expect("a reading")),
            1,
        );
    };
    keep(TestKind::RingR1, None, "0.58");
    keep(TestKind::RingRn, None, "0.58");
    keep(TestKind::RingR2, None, "0.94");
    for point in 1..=10 {
        keep(TestKind::RingLineNeutral, Some(point), "0.29");
        keep(TestKind::RingLineEarth, Some(point), "0.37");
    }
    (
        job,
        kept,
        jobs::target(TestKind::RingLineEarth, 1, Some(10)),
    )
}

#[divan::bench]
fn expected_range_of_a_ring_point(bencher: divan::Bencher) {
    let (job, kept, target) = ring();
    bencher.bench_local(|| expected(&job, &target, &kept));
}

#[divan::bench]
fn findings_of_a_ring_of_ten_points(bencher: divan::Bencher) {
    let (job, kept, target) = ring();
    let range = expected(&job, &target, &kept);
    let reading = "1.20".parse().expect("a reading");
    bencher.bench_local(|| assess(&job, &target, &range, &reading, &kept));
}

#[divan::bench]
fn findings_of_a_radial_of_ten_points(bencher: divan::Bencher) {
    let job = jobs::job(vec![jobs::circuit(
        1,
        CircuitKind::Radial,
        (2.5, 1.5),
        40.0,
        10,
    )]);
    let mut kept = Kept::new();
    for point in 1..=9 {
        let figure = format!("{:.2}", 0.076 * f64::from(point));
        kept.keep(
            jobs::target(TestKind::R1R2, 1, Some(point)),
            Value::Reading(figure.parse().expect("a reading")),
            1,
        );
    }
    let target = jobs::target(TestKind::R1R2, 1, Some(10));
    let range = expected(&job, &target, &kept);
    let reading = "1.90".parse().expect("a reading");
    bencher.bench_local(|| assess(&job, &target, &range, &reading, &kept));
}
