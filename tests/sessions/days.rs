//! Whole days, printed as a tester would read them.

use super::bench::{Bench, job};

#[test]
fn a_session_begins_with_the_reminders_of_isolation() {
    let text = include_str!("../fixtures/garden.toml");
    let bench = Bench::new(job(text));
    assert!(
        bench.text.contains("Isolation, proving dead"),
        "{}",
        bench.text
    );
}
