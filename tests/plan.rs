//! The job file and the order of its tests, from the outside: fixtures, one broken file an error,
//! sequences as whole lists, works, reminders, the interview, the command.

#[path = "plan/aloud.rs"]
mod aloud;
#[path = "plan/cli.rs"]
mod cli;
#[path = "plan/errors.rs"]
mod errors;
#[path = "plan/fixtures.rs"]
mod fixtures;
#[path = "plan/hostile.rs"]
mod hostile;
#[path = "plan/interview.rs"]
mod interview;
#[path = "plan/reminders.rs"]
mod reminders;
#[path = "plan/round_trip.rs"]
mod round_trip;
#[path = "plan/sequence.rs"]
mod sequence;
#[path = "plan/works.rs"]
mod works;
