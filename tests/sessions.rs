//! Whole sessions on the pure state machine, without sound, terminal or files.

#[path = "sessions/bench.rs"]
mod bench;
#[path = "sessions/chance.rs"]
mod chance;
#[path = "sessions/days.rs"]
mod days;
#[path = "sessions/noise.rs"]
mod noise;
#[path = "sessions/said.rs"]
mod said;
#[path = "sessions/screens.rs"]
mod screens;
