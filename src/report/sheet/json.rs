//! The schedule as JSON; its schema is published with the program (`sheet --schema`).

use super::model::Schedule;

/// JSON Schema (draft 2020-12) of what [`write`] gives.
pub const SCHEMA: &str = include_str!("../schedule.schema.json");

/// The whole schedule as JSON, one final line feed.
///
/// # Errors
/// [`serde_json::Error`], which these types do not give.
pub fn write(schedule: &Schedule) -> Result<Vec<u8>, serde_json::Error> {
    let mut bytes = serde_json::to_vec_pretty(schedule)?;
    bytes.push(b'\n');
    Ok(bytes)
}
