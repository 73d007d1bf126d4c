//! The log of a job on disk: kept, read back, cut, changed, copied, locked.

#[path = "journal/damage.rs"]
mod damage;
#[path = "journal/format.rs"]
mod format;
#[path = "journal/keeping.rs"]
mod keeping;
#[path = "journal/kills.rs"]
mod kills;
#[path = "journal/mangled.rs"]
mod mangled;
#[path = "support/records.rs"]
mod records;
