//! What readings that are off most likely mean.

use super::{
    expect::{Expected, Finding, Verdict},
    kept::Kept,
    plan::Job,
    reading::Reading,
    test::Target,
};

/// Findings for a reading.
pub(crate) fn of(
    _job: &Job,
    _target: &Target,
    _expected: &Expected,
    _reading: &Reading,
    _kept: &Kept,
    _verdict: Verdict,
) -> Vec<Finding> {
    Vec::new()
}
