//! Eight hours in one session: the state stays small. How long it took is printed, not judged.

use std::time::Instant;

use handsfull::session::{Event, Key, screen::screen};

use super::bench::{Bench, job};

/// Resident memory of this process in kilobytes, where the system tells it.
fn resident_kb() -> Option<u64> {
    let text = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = text.lines().find(|l| l.starts_with("VmRSS:"))?;
    line.split_whitespace().nth(1)?.parse().ok()
}

/// One simulated second: four ticks, ten levels, each shown; every minute speech and its words.
fn second(bench: &mut Bench, at: u64) -> usize {
    let mut lines = 0;
    for tick in 0..4 {
        bench.take(Event::Tick(at * 1000 + tick * 250));
    }
    for level in 0..10_u8 {
        bench.take(Event::Level(
            (at as u8).wrapping_mul(7).wrapping_add(level) % 100,
        ));
        lines += screen(bench.state(), 40, 15).len();
    }
    if at.is_multiple_of(60) {
        bench.take(Event::Speaking(true));
        bench.take(Event::Speaking(false));
        match at / 60 % 4 {
            0 => bench.say("zero point two three"),
            1 => bench.say("negative"),
            2 => bench.say("what is open"),
            _ => bench.take(Event::Key(Key::Minus)),
        }
    }
    lines
}

#[test]
fn memory_stays_flat_over_eight_hours() {
    let mut bench = Bench::new(job(include_str!("../fixtures/workshop.toml")));
    bench.mute = true;
    bench.reach_reading();
    // The first hour fills caches and the allocator's pools.
    let mut lines = 0;
    for at in 0..3_600 {
        lines += second(&mut bench, at);
    }
    let before = resident_kb();
    let began = Instant::now();
    for at in 3_600..8 * 3_600 {
        lines += second(&mut bench, at);
    }
    let took = began.elapsed();
    println!(
        "seven hours in {took:?}, {lines} lines drawn; resident before {before:?} kB, after {:?} kB",
        resident_kb()
    );
    if let (Some(before), Some(after)) = (before, resident_kb()) {
        // Fifty bytes kept an event would be 17 MB.
        assert!(
            after < before + 8_192,
            "{before} kB before, {after} kB after"
        );
    }
}
