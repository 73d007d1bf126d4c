//! Review, verification and schedule of a worked job, as whole outputs of the program.

#[path = "support/joinery.rs"]
mod joinery;
#[path = "support/records.rs"]
mod records;

#[path = "report/join.rs"]
mod join;
#[path = "report/review.rs"]
mod review;
#[path = "report/sheet.rs"]
mod sheet;
