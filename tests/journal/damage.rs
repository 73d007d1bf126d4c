//! Cut, changed, copied and reordered logs: nothing kept is lost, nothing false is taken.

use std::{fs, path::PathBuf};

use handsfull::{
    domain::record::Record,
    journal::{Journal, Log, Trouble},
};

use crate::records::{at, note, reading};

struct Job {
    folder: tempfile::TempDir,
}

impl Job {
    /// A job with `n` notes kept, each with its number in it.
    fn with(n: u64) -> Self {
        let job = Self {
            folder: tempfile::tempdir().expect("a folder"),
        };
        let (mut journal, _) = job.open();
        for no in 1..=n {
            journal
                .append(&note(&format!("note {no}")), at(1))
                .expect("kept");
        }
        job
    }

    fn path(&self) -> PathBuf {
        self.folder.path().join("mill.toml")
    }

    fn log(&self) -> PathBuf {
        self.folder.path().join("mill.log.toml")
    }

    fn open(&self) -> (Journal, handsfull::journal::Recovery) {
        Journal::open_as(&self.path(), "mill", at(2), Some("0123456789ab")).expect("opens")
    }

    fn text(&self) -> String {
        fs::read_to_string(self.log()).expect("text")
    }

    fn edit(&self, change: impl Fn(&str) -> String) {
        fs::write(self.log(), change(&self.text())).expect("written");
    }

    fn aside(&self, n: u32) -> String {
        let name = format!("mill.log.damaged-{n}.toml");
        let bytes = fs::read(self.folder.path().join(name)).expect("set aside");
        String::from_utf8_lossy(&bytes).into_owned()
    }

    fn troubles(&self) -> Vec<(Option<u64>, Trouble)> {
        let log = Log::open(&self.log()).expect("a log");
        log.problems
            .into_iter()
            .map(|p| (p.entry, p.trouble))
            .collect()
    }

    fn notes(&self) -> Vec<String> {
        let log = Log::open(&self.log()).expect("a log");
        log.entries
            .into_iter()
            .filter_map(|e| match e.record {
                Record::Note { text, .. } => Some(text),
                _ => None,
            })
            .collect()
    }
}

fn blocks(text: &str) -> Vec<&str> {
    text.split_inclusive("\"\n\n").collect()
}

#[test]
fn cut_at_every_byte_the_entries_before_the_cut_stay_and_the_rest_is_set_aside() {
    let job = Job::with(3);
    let whole = fs::read(job.log()).expect("bytes");
    let text = String::from_utf8(whole.clone()).expect("text");
    // Where each entry is complete: after the quotation mark of its check.
    let ends: Vec<usize> = text
        .match_indices("check = \"")
        .map(|(at, _)| at + 9 + 64 + 1)
        .collect();
    assert_eq!(ends.len(), 4, "a head and three entries");
    for cut in 0..whole.len() {
        fs::remove_file(job.folder.path().join("mill.lock")).expect("there");
        for n in 1..3 {
            let _ = fs::remove_file(job.folder.path().join(format!("mill.log.damaged-{n}.toml")));
        }
        fs::write(job.log(), &whole[..cut]).expect("written");
        let complete = ends.iter().filter(|end| **end <= cut).count();
        let (mut journal, recovery) = job.open();
        let kept = complete.saturating_sub(1);
        let right: Vec<String> = (1..=kept).map(|no| format!("note {no}")).collect();
        assert_eq!(job.notes(), right, "cut at byte {cut}");
        assert_eq!(recovery.begun, complete == 0, "cut at byte {cut}");
        let from = if complete == 0 {
            0
        } else {
            ends[complete - 1] + 1
        };
        let torn = whole[from.min(cut)..cut]
            .iter()
            .any(|b| !b.is_ascii_whitespace());
        assert_eq!(recovery.set_aside.is_some(), torn, "cut at byte {cut}");
        if torn {
            assert_eq!(job.aside(1).as_bytes(), &whole[from..cut], "cut at {cut}");
        }
        // It goes on, and what goes on holds.
        journal.append(&note("after"), at(3)).expect("kept");
        drop(journal);
        assert_eq!(job.troubles(), vec![], "cut at byte {cut}");
        assert_eq!(job.notes().last().map(String::as_str), Some("after"));
    }
}

#[test]
fn the_end_cut_off_cleanly_is_noticed_by_the_witness() {
    let job = Job::with(3);
    let text = job.text();
    let cut = text.rfind("\n[[entry]]").expect("entries");
    job.edit(|text| text[..cut].to_owned());
    let (mut journal, recovery) = job.open();
    let troubles: Vec<_> = recovery.problems.into_iter().map(|p| p.trouble).collect();
    assert_eq!(troubles, vec![Trouble::Lost(3)]);
    assert_eq!(recovery.incidents.len(), 1);
    assert_eq!(journal.append(&note("after"), at(3)).expect("kept"), 4);
    drop(journal);
    // It has been told, and is in the log; it is not told again.
    assert_eq!(job.open().1.incidents, Vec::<String>::new());
}

#[test]
fn another_entry_under_the_last_number_is_noticed_by_the_witness() {
    let job = Job::with(2);
    let lock = job.folder.path().join("mill.lock");
    let seen = fs::read(&lock).expect("a witness");
    let cut = job.text().rfind("\n[[entry]]").expect("entries");
    job.edit(|text| text[..cut].to_owned());
    fs::remove_file(&lock).expect("there");
    job.open().0.append(&note("other"), at(3)).expect("kept");
    fs::write(&lock, seen).expect("put back");
    let troubles: Vec<_> = job
        .open()
        .1
        .problems
        .into_iter()
        .map(|p| p.trouble)
        .collect();
    assert_eq!(troubles, vec![Trouble::Replaced]);
}

#[test]
fn a_changed_entry_does_not_count_and_those_after_it_do() {
    let job = Job::with(4);
    job.edit(|text| text.replace("note 2", "note 9"));
    assert_eq!(job.troubles(), vec![(Some(2), Trouble::Broken)]);
    assert_eq!(job.notes(), ["note 1", "note 3", "note 4"]);
    let (journal, recovery) = job.open();
    assert_eq!(recovery.set_aside, None, "it stays where it is");
    assert_eq!(recovery.incidents.len(), 1);
    assert_eq!(journal.last(), 5);
    drop(journal);
    assert!(job.text().contains("note 9"));
    assert_eq!(job.open().1.incidents, Vec::<String>::new(), "told once");
}

#[test]
fn a_changed_check_is_proved_wrong_by_the_entry_after_it() {
    let job = Job::with(3);
    job.edit(|text| {
        let at = text.match_indices("check = \"").nth(2).expect("entry 2").0 + 20;
        let other = if &text[at..=at] == "0" { "1" } else { "0" };
        format!("{}{other}{}", &text[..at], &text[at + 1..])
    });
    assert_eq!(job.troubles(), vec![(Some(2), Trouble::CheckChanged)]);
    assert_eq!(job.notes(), ["note 1", "note 2", "note 3"]);
}

#[test]
fn a_changed_last_entry_is_set_aside() {
    let job = Job::with(3);
    job.edit(|text| text.replace("note 3", "note 9"));
    let (journal, recovery) = job.open();
    assert!(recovery.set_aside.is_some());
    // The witness knows as well that entry 3 had been kept.
    let lost = |p: &handsfull::journal::Problem| p.trouble == Trouble::Lost(3);
    assert!(recovery.problems.iter().any(lost));
    drop(journal);
    assert!(job.aside(1).contains("note 9"));
    assert_eq!(job.notes(), ["note 1", "note 2"]);
    assert_eq!(job.troubles(), vec![]);
}

#[test]
fn a_missing_entry_is_named_and_the_one_after_it_cannot_be_proved() {
    let job = Job::with(4);
    job.edit(|text| {
        let mut blocks = blocks(text);
        blocks.remove(2);
        blocks.concat()
    });
    assert_eq!(
        job.troubles(),
        vec![
            (Some(3), Trouble::Missing(2, 2)),
            (Some(3), Trouble::Broken)
        ]
    );
    assert_eq!(job.notes(), ["note 1", "note 4"]);
}

#[test]
fn entries_in_another_order_are_noticed() {
    let job = Job::with(5);
    job.edit(|text| {
        let mut blocks = blocks(text);
        blocks.swap(2, 3);
        blocks.concat()
    });
    let troubles = job.troubles();
    assert!(
        troubles.contains(&(Some(2), Trouble::Broken)),
        "{troubles:?}"
    );
    assert!(
        troubles.contains(&(Some(3), Trouble::Broken)),
        "{troubles:?}"
    );
    assert_eq!(job.notes(), ["note 1", "note 5"]);
}

#[test]
fn a_tail_that_stands_twice_counts_once_and_is_set_aside() {
    let job = Job::with(3);
    let tail = {
        let text = job.text();
        let at = text.match_indices("\n[[entry]]").nth(1).expect("entry 2").0;
        text[at..].to_owned()
    };
    job.edit(|text| format!("{text}{tail}"));
    assert_eq!(
        job.troubles(),
        vec![(Some(2), Trouble::Duplicate), (Some(3), Trouble::Duplicate)]
    );
    assert_eq!(job.notes(), ["note 1", "note 2", "note 3"]);
    let (journal, recovery) = job.open();
    assert_eq!(journal.last(), 4, "three notes and the incident");
    assert!(recovery.set_aside.is_some());
    drop(journal);
    assert_eq!(job.aside(1), tail);
    assert_eq!(job.troubles(), vec![]);
}

#[test]
fn a_copy_in_the_middle_counts_once() {
    let job = Job::with(3);
    job.edit(|text| {
        let mut blocks = blocks(text);
        blocks.insert(2, blocks[1]);
        blocks.concat()
    });
    assert_eq!(job.troubles(), vec![(Some(1), Trouble::Duplicate)]);
    assert_eq!(job.notes(), ["note 1", "note 2", "note 3"]);
}

#[test]
fn text_between_entries_is_reported_and_costs_nothing() {
    let job = Job::with(2);
    // A remark before each entry, under the check of the one before.
    job.edit(|text| text.replacen("\n[[entry]]", "# checked by the foreman\n[[entry]]", 2));
    let troubles = job.troubles();
    assert_eq!(
        troubles,
        vec![(None, Trouble::Stray), (None, Trouble::Stray)]
    );
    assert_eq!(job.notes(), ["note 1", "note 2"]);
}

#[test]
fn line_ends_of_another_system_change_nothing() {
    let job = Job::with(2);
    job.edit(|text| text.replace('\n', "\r\n"));
    assert_eq!(job.troubles(), vec![]);
    let (mut journal, recovery) = job.open();
    assert_eq!(recovery.incidents, Vec::<String>::new());
    journal.append(&note("after"), at(3)).expect("kept");
    drop(journal);
    assert_eq!(job.notes(), ["note 1", "note 2", "after"]);
}

#[test]
fn an_editor_that_drops_the_last_line_feed_costs_nothing() {
    let job = Job::with(2);
    job.edit(|text| text.trim_end().to_owned());
    let (mut journal, recovery) = job.open();
    assert_eq!(recovery.set_aside, None);
    journal.append(&note("after"), at(3)).expect("kept");
    drop(journal);
    assert_eq!(job.troubles(), vec![]);
    assert_eq!(job.notes(), ["note 1", "note 2", "after"]);
}

#[test]
fn a_changed_head_is_reported_and_the_entries_stay() {
    let job = Job::with(2);
    job.edit(|text| text.replace("job = \"mill\"", "job = \"quay\""));
    assert_eq!(job.troubles(), vec![(None, Trouble::Head)]);
    assert_eq!(job.notes(), ["note 1", "note 2"]);
    job.edit(|text| text.replacen("check", "chuck", 1));
    assert_eq!(
        job.notes(),
        ["note 1", "note 2"],
        "the first entry proves it"
    );
}

#[test]
fn a_changed_header_line_costs_at_most_what_stands_under_it() {
    let job = Job::with(3);
    job.edit(|text| text.replacen("[[journal]]", "[[jovrnal]]", 1));
    assert_eq!(job.troubles(), vec![(None, Trouble::Head)]);
    assert_eq!(job.notes(), ["note 1", "note 2", "note 3"]);
    let job = Job::with(3);
    job.edit(|text| text.replacen("[[entry]]", "[[entri]]", 1));
    assert_eq!(job.troubles(), vec![(Some(1), Trouble::Broken)]);
    assert_eq!(job.notes(), ["note 2", "note 3"]);
}

#[test]
fn zeros_after_a_power_cut_are_set_aside() {
    let job = Job::with(2);
    let mut bytes = fs::read(job.log()).expect("bytes");
    bytes.resize(bytes.len() + 4096, 0);
    fs::write(job.log(), &bytes).expect("written");
    let (journal, recovery) = job.open();
    assert!(recovery.set_aside.is_some());
    assert_eq!(journal.last(), 3);
    drop(journal);
    assert_eq!(job.troubles(), vec![]);
}

#[test]
fn a_value_of_another_version_is_reported_and_does_not_count() {
    let job = Job::with(0);
    let (mut journal, _) = job.open();
    journal
        .append(&reading(7, 1, "about half"), at(1))
        .expect("kept");
    drop(journal);
    let (_, recovery) = job.open();
    assert_eq!(recovery.standing.unreadable, vec![1]);
    assert_eq!(recovery.standing.kept.iter().count(), 0);
}
