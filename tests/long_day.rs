//! A working day in one session, in a process of its own: what other tests hold would be counted too.

// The other sessions use the rest of the bench.
#[allow(dead_code)]
#[path = "sessions/bench.rs"]
mod bench;
#[path = "sessions/long_day.rs"]
mod long_day;
