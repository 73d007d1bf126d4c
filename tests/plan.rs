//! The job file and the order of its tests, from the outside: fixtures, one broken file an error,
//! sequences as whole lists.

#[path = "plan/errors.rs"]
mod errors;
#[path = "plan/fixtures.rs"]
mod fixtures;
#[path = "plan/sequence.rs"]
mod sequence;
