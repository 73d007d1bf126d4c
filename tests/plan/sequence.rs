//! The order of the tests, as whole lists.

use handsfull::domain::{sequence, test::TestKind};

use super::fixtures::{ALL, job};

fn listed(name: &str) -> String {
    let job = job(name);
    sequence::required(&job)
        .iter()
        .map(|target| format!("{:<34} {target}\n", target.test.stage().title()))
        .collect()
}

#[test]
fn a_single_phase_job_goes_continuity_ring_insulation_polarity() {
    insta::assert_snapshot!(listed("workshop.toml"));
}

#[test]
fn a_tt_job_ends_its_dead_tests_at_the_electrode_and_has_live_ones_when_asked() {
    insta::assert_snapshot!(listed("barn.toml"));
}

#[test]
fn a_three_phase_job_tests_every_pair_of_lives() {
    insta::assert_snapshot!(listed("press-hall.toml"));
}

#[test]
fn extra_low_voltage_circuits_have_their_separation_tested() {
    insta::assert_snapshot!(listed("garden.toml"));
}

#[test]
fn no_test_is_required_twice() {
    for name in ALL {
        let all = sequence::required(&job(name));
        for (i, target) in all.iter().enumerate() {
            assert!(!all[..i].contains(target), "{name}: {target}");
        }
        assert!(
            all.windows(2)
                .all(|w| w[0].test.stage() <= w[1].test.stage())
        );
        assert_eq!(all[0].test, TestKind::Leads);
    }
}
