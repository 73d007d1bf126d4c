//! Whole days, printed as a tester would read them at 40 columns.
//!
//! Each snapshot is a document: `>>` is what the tester did, `*` what happened, `?` the question.
//! Words after `>> "` went through the real grammars.

use super::bench::{Bench, job};

/// Acknowledges reminders, proves dead, fits and takes out, until a reading is asked for, then
/// plays the lines; again for each block of lines between empty ones.
fn play(plan: &str, blocks: &str) -> Bench {
    let mut bench = Bench::new(job(plan));
    for block in blocks.trim().split("\n\n") {
        bench.reach_reading();
        bench.script(block);
    }
    bench
}

#[test]
fn radial_with_a_questioned_reading_a_mishearing_and_a_link_nearly_left_in() {
    let mut bench = play(
        include_str!("jobs/radial.toml"),
        "say: zero point zero two ohms
say: affirm

say: nought point oh one
say: affirm

say: zero point two three
say: affirm

say: nought point nine one
say: negative
say: zero point four one
say: affirm

# The far end reads high: questioned, measured again with better contact.
say: zero point nine eight
say: affirm
say: measure again
say: zero point five nine
say: affirm
",
    );
    // The next test is insulation, and the link is still in: it cannot be passed over.
    bench.script("say: next\n-\n*4\n-\nsay: done");
    bench.reach_reading();
    bench.script("say: greater than two nine nine megohms\nsay: affirm");
    bench.reach_reading();
    bench.script("say: say again\nsay: four eighty\nsay: affirm");
    bench.reach_reading();
    bench.script("say: affirm\nsay: affirm");
    bench.reach_reading();
    bench.script("say: affirm");
    assert!(bench.quit, "{}", bench.text);
    insta::assert_snapshot!("radial", bench.text);
}

#[test]
fn ring_with_a_spur_and_one_neutral_open() {
    let mut bench = play(
        include_str!("jobs/ring.toml"),
        "0.00\n\n
0.01\n\n
0.44\n\n
say: open circuit
say: affirm
say: keep as found
4

say: zero point seven two
say: affirm",
    );
    bench.reach_reading();
    bench.script("*3\n-");
    // The open end was found and made good: the two ends it may have upset are done again first.
    for end in ["say: ring neutral", "say: ring line"] {
        bench.reach_reading();
        bench.script(end);
        bench.reach_reading();
        bench.script("0.44\n\n");
    }
    // Line to neutral, then line to earth; point 3 is the spur and reads higher.
    for reading in [
        "0.22", "0.22", "0.31", "0.22", "0.28", "0.29", "0.41", "0.28",
    ] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    for reading in ["+299", "+299", ""] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    bench.reach_reading();
    bench.script("\n");
    assert!(bench.quit, "{}", bench.text);
    insta::assert_snapshot!("ring", bench.text);
}

#[test]
fn tt_with_its_electrode_by_keypad_and_the_live_gate() {
    let mut bench = Bench::new(job(include_str!("jobs/tt.toml")));
    for reading in ["0.00", "0.02", "0.19", "0.40", "200", "200", "", "180"] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    bench.reach_reading();
    bench.script("say: stop\nsay: affirm");
    insta::assert_snapshot!("tt", bench.text);
}

#[test]
fn three_phase_board_with_circuits_called_by_name() {
    let mut bench = play(
        include_str!("jobs/three-phase.toml"),
        "0.00\n\n
0.02\n\n
say: way four line two
-",
    );
    bench.reach_reading();
    bench.script("say: zero point two two\nsay: correction zero point two one\nsay: affirm");
    bench.reach_reading();
    bench.script("say: zero point two one\nsay: affirm");
    bench.reach_reading();
    bench.script("say: zero point four three\nsay: affirm");
    for _ in 0..7 {
        bench.reach_reading();
        bench.script("+299\n\n");
    }
    bench.reach_reading();
    bench.script("say: skip\n1");
    bench.reach_reading();
    bench.script("say: skip\nsay: reason one");
    insta::assert_snapshot!("three_phase", bench.text);
}

#[test]
fn selv_with_its_separation_standby_and_a_lost_microphone() {
    let mut bench = play(
        include_str!("jobs/selv.toml"),
        "0.00\n\n
0.02\n\n
say: zero point two five
say: affirm

say: standby
say: zero point nine
say: resume
say: greater than two nine nine
say: affirm

0.
say: greater than nine nine nine
say: affirm",
    );
    bench.take(handsfull::session::Event::DeviceLost);
    for _ in 0..2 {
        bench.reach_reading();
        bench.script("+299\n\n");
    }
    bench.take(handsfull::session::Event::DeviceFound);
    bench.reach_reading();
    bench.script("/\n\n");
    bench.reach_reading();
    bench.script("\n\n");
    bench.reach_reading();
    bench.script("\n");
    assert!(bench.quit, "{}", bench.text);
    insta::assert_snapshot!("selv", bench.text);
}
