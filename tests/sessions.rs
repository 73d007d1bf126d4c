//! Whole sessions on the pure state machine, without sound, terminal or files.

#[path = "sessions/bench.rs"]
mod bench;
#[path = "sessions/chance.rs"]
mod chance;
#[path = "sessions/days.rs"]
mod days;
#[path = "sessions/noise.rs"]
mod noise;
