//! `handsfull plan check`: the mistakes of a job file, or one paragraph on what it holds.

use std::path::Path;

use super::{super::own_words, Failure, lay, read};
use crate::domain::{
    plan::{CircuitKind, Job},
    sequence,
    test::Stage,
    words::Worded,
};

/// Runs the check; gives the job that was checked.
pub(super) fn run(file: &Path, width: usize) -> Result<Job, Failure> {
    let loaded = read(file)?;
    let mut out = lay::wrapped(&summary(&loaded.job), 0, width);
    for name in &loaded.job.place_names {
        out.push_str(&lay::wrapped(&own_words::told(name)?, 0, width));
    }
    for notice in &loaded.notices {
        out.push_str(&lay::wrapped(&format!("Note: {}.", notice.text), 0, width));
    }
    lay::print(&out);
    Ok(loaded.job)
}

/// What a job holds, in one paragraph. It says nothing about the installation.
pub(super) fn summary(job: &Job) -> String {
    let circuits: Vec<_> = job.boards.iter().flat_map(|b| &b.circuits).collect();
    let kinds: Vec<String> = CircuitKind::WORDS
        .iter()
        .filter_map(
            |(word, kind)| match circuits.iter().filter(|c| c.kind == *kind).count() {
                0 => None,
                n => Some(format!("{n} {word}")),
            },
        )
        .collect();
    let points: usize = circuits.iter().map(|c| c.points.len()).sum();
    let tests = sequence::required(job);
    let live = tests
        .iter()
        .filter(|t| t.test.stage() == Stage::Live)
        .count();
    let live = match live {
        0 => "none of them live".to_string(),
        n => format!("{n} of them live"),
    };
    format!(
        "{}: {}. {} supply, {}, {} V to earth. {}, {} ({}), {}. {}, {live}. The file can be \
         worked with; that says nothing about the installation.",
        job.reference,
        job.title,
        job.supply.earthing.word(),
        if job.supply.three_phase {
            "three phases"
        } else {
            "one phase"
        },
        job.supply.u0_v,
        counted(job.boards.len(), "board"),
        counted(circuits.len(), "circuit"),
        kinds.join(", "),
        counted(points, "point"),
        counted(tests.len(), "required test"),
    )
}

fn counted(n: usize, what: &str) -> String {
    if n == 1 {
        format!("1 {what}")
    } else {
        format!("{n} {what}s")
    }
}
