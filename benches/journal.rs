//! How long a log takes to open, verify, review and lay out, and that it grows with its length.
//!
//! `cargo bench --bench journal`. The allocator's counts show memory beside time.

#[path = "../tests/support/records.rs"]
mod records;

use std::{fs, path::PathBuf};

use divan::{AllocProfiler, Bencher};
use handsfull::{
    domain::sequence,
    journal::{Journal, inspect, replay, text},
    plan,
    report::{
        Integrity,
        review::{Filter, Material, Order, review},
        sheet,
    },
};
use records::{Chance, at, varied};

#[global_allocator]
static ALLOCATIONS: AllocProfiler = AllocProfiler::system();

const JOB: &str = include_str!("../tests/fixtures/workshop.toml");
const LENGTHS: [u64; 3] = [1_000, 10_000, 100_000];

fn main() {
    divan::main();
}

struct Desk {
    folder: tempfile::TempDir,
}

impl Desk {
    /// A log of that many entries, written at once: what is measured is reading.
    fn new(entries: u64) -> Self {
        let folder = tempfile::tempdir().expect("a folder");
        let header = text::Header {
            format: text::FORMAT,
            journal: "0123456789ab".into(),
            job: "JOINERY-1".into(),
            first: 1,
            joins: vec![],
        };
        let (mut out, mut check) = text::head(&header, at(0)).expect("laid out");
        let mut chance = Chance(1);
        for no in 1..=entries {
            let time = at(i64::try_from(no).expect("small"));
            let record = varied(no, &mut chance);
            let (entry, next) = text::entry(no, time, &record, &check).expect("laid out");
            out.push_str(&entry);
            check = next;
        }
        fs::write(folder.path().join("joinery.log.toml"), out).expect("written");
        fs::write(folder.path().join("joinery.toml"), JOB).expect("written");
        Self { folder }
    }

    fn path(&self) -> PathBuf {
        self.folder.path().join("joinery.toml")
    }
}

#[divan::bench(args = LENGTHS, sample_count = 5, sample_size = 1)]
fn open(bencher: Bencher, entries: u64) {
    let desk = Desk::new(entries);
    bencher.bench_local(|| {
        let (journal, recovery) = Journal::open(&desk.path(), "JOINERY-1", at(0)).expect("opens");
        assert_eq!(journal.last(), entries);
        recovery.standing
    });
}

#[divan::bench(args = LENGTHS, sample_count = 5, sample_size = 1)]
fn verify(bencher: Bencher, entries: u64) {
    let desk = Desk::new(entries);
    bencher.bench_local(|| {
        let seen = inspect(&desk.path()).expect("a log");
        assert!(seen.log.problems.is_empty());
        seen
    });
}

#[divan::bench(args = LENGTHS, sample_count = 5, sample_size = 1)]
fn append(bencher: Bencher, entries: u64) {
    let desk = Desk::new(entries);
    let (mut journal, _) = Journal::open(&desk.path(), "JOINERY-1", at(0)).expect("opens");
    let mut chance = Chance(2);
    bencher.bench_local(|| {
        let record = varied(journal.last() + 1, &mut chance);
        let time = at(200_000);
        journal.append(&record, time).expect("kept")
    });
}

fn with_material<T>(desk: &Desk, f: impl FnOnce(&Material) -> T) -> T {
    let job = plan::load(&desk.path()).expect("a job");
    let seen = inspect(&desk.path()).expect("a log");
    let standing = replay::standing(&seen.log);
    let required = sequence::required(&job);
    f(&Material {
        job: Some(&job),
        required: &required,
        entries: &seen.log.entries,
        standing: &standing,
        integrity: &Integrity::default(),
    })
}

#[divan::bench(args = LENGTHS, sample_count = 5, sample_size = 1)]
fn review_by_circuit(bencher: Bencher, entries: u64) {
    let desk = Desk::new(entries);
    bencher.bench_local(|| {
        with_material(&desk, |m| review(m, Order::Circuit, &Filter::default(), 40))
    });
}

#[divan::bench(args = LENGTHS, sample_count = 5, sample_size = 1)]
fn review_by_time(bencher: Bencher, entries: u64) {
    let desk = Desk::new(entries);
    bencher
        .bench_local(|| with_material(&desk, |m| review(m, Order::Time, &Filter::default(), 40)));
}

#[divan::bench(args = LENGTHS, sample_count = 5, sample_size = 1)]
fn schedule(bencher: Bencher, entries: u64) {
    let desk = Desk::new(entries);
    bencher.bench_local(|| {
        with_material(&desk, |m| {
            let schedule = sheet::schedule(m.job.expect("a job"), m);
            sheet::html::write(&schedule).expect("laid out")
        })
    });
}
