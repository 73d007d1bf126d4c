//! Whole sessions on the pure state machine, without sound, terminal or files.

#[path = "sessions/bench.rs"]
mod bench;
#[path = "sessions/days.rs"]
mod days;
