//! The job file: TOML in, a checked [`Job`](crate::domain::plan::Job) out; what is wrong is named with its line.
