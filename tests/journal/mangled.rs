//! Properties: whatever happens to the bytes, an entry that is handed out is one that was kept.

use std::collections::BTreeSet;

use handsfull::{
    domain::record::Record,
    journal::{Log, text},
};
use proptest::prelude::*;

use crate::records::{Chance, at, note, varied};

fn log_of(records: &[Record]) -> Vec<u8> {
    let header = text::Header {
        format: text::FORMAT,
        journal: "0123456789ab".into(),
        job: "mill".into(),
        first: 1,
        joins: vec![],
    };
    let (mut out, mut check) = text::head(&header, at(0)).expect("laid out");
    for (no, record) in (1..).zip(records) {
        let (entry, next) = text::entry(no, at(1), record, &check).expect("laid out");
        out.push_str(&entry);
        check = next;
    }
    out.into_bytes()
}

fn some_records(seed: u64, n: u64) -> Vec<Record> {
    let mut chance = Chance(seed);
    (1..=n).map(|no| varied(no, &mut chance)).collect()
}

#[derive(Debug, Clone)]
enum Hurt {
    Flip(prop::sample::Index, u8),
    Cut(prop::sample::Index),
    Remove(prop::sample::Index, usize),
    Insert(prop::sample::Index, Vec<u8>),
    Copy(prop::sample::Index, prop::sample::Index, usize),
}

fn hurt() -> impl Strategy<Value = Hurt> {
    let at = any::<prop::sample::Index>;
    prop_oneof![
        4 => (at(), 1u8..).prop_map(|(i, b)| Hurt::Flip(i, b)),
        1 => at().prop_map(Hurt::Cut),
        2 => (at(), 1usize..600).prop_map(|(i, n)| Hurt::Remove(i, n)),
        2 => (at(), prop::collection::vec(any::<u8>(), 1..40)).prop_map(|(i, b)| Hurt::Insert(i, b)),
        2 => (at(), at(), 1usize..900).prop_map(|(i, j, n)| Hurt::Copy(i, j, n)),
    ]
}

fn apply(bytes: &mut Vec<u8>, hurt: &Hurt) {
    if bytes.is_empty() {
        return;
    }
    let n = bytes.len();
    match hurt {
        Hurt::Flip(i, b) => bytes[i.index(n)] ^= b,
        Hurt::Cut(i) => bytes.truncate(i.index(n)),
        Hurt::Remove(i, count) => {
            let from = i.index(n);
            bytes.drain(from..(from + count).min(n));
        }
        Hurt::Insert(i, what) => {
            let at = i.index(n);
            bytes.splice(at..at, what.iter().copied());
        }
        Hurt::Copy(i, j, count) => {
            let from = i.index(n);
            let piece = bytes[from..(from + count).min(n)].to_vec();
            let at = j.index(n);
            bytes.splice(at..at, piece);
        }
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn every_entry_handed_out_of_a_damaged_log_is_one_that_was_kept_under_that_number(
        seed in any::<u64>(),
        hurts in prop::collection::vec(hurt(), 1..4),
    ) {
        let records = some_records(seed, 12);
        let mut bytes = log_of(&records);
        let whole = bytes.clone();
        for hurt in &hurts {
            apply(&mut bytes, hurt);
        }
        let log = Log::read(&bytes[..]).expect("memory can be read");
        let mut seen = BTreeSet::new();
        for entry in &log.entries {
            let at = usize::try_from(entry.no).expect("small");
            // A head that was copied or changed begins a chain of its own; its numbers start anew.
            let own = log.chains[entry.chain].start;
            let no = at - usize::try_from(own).expect("small");
            prop_assert!(no >= 1 && no <= records.len());
            prop_assert_eq!(&entry.record, &records[no - 1]);
            prop_assert!(seen.insert(at), "entry {} is handed out twice", at);
        }
        // Damage is never silent: all entries are there, or something is said, or the end was cut
        // off, which the log itself cannot know.
        let cut = whole.starts_with(&bytes);
        if log.problems.is_empty() && !cut {
            let read: Vec<_> = log.entries.iter().map(|e| e.record.clone()).collect();
            prop_assert_eq!(read, records);
        }
    }

    #[test]
    fn a_flipped_bit_costs_at_most_the_entry_it_lies_in(
        seed in any::<u64>(),
        at in any::<prop::sample::Index>(),
        bit in 0u8..8,
    ) {
        let records = some_records(seed, 8);
        let mut bytes = log_of(&records);
        let i = at.index(bytes.len());
        bytes[i] ^= 1 << bit;
        let log = Log::read(&bytes[..]).expect("memory can be read");
        // The line feed between two entries lies in neither: then both may be hurt.
        prop_assert!(log.entries.len() + 2 >= records.len(), "{:?}", log.problems);
    }

    #[test]
    fn any_text_in_a_record_comes_back(text in any::<String>(), by in "\\PC*") {
        let mut record = note(&text);
        if let Record::Note { by: name, .. } = &mut record {
            *name = by;
        }
        let log = Log::read(&log_of(std::slice::from_ref(&record))[..]).expect("memory");
        prop_assert_eq!(log.problems, vec![]);
        prop_assert_eq!(&log.entries[0].record, &record);
    }
}
