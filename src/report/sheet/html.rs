//! The schedule as one HTML file: nothing to fetch, prints on A4 landscape, readable without
//! colour.
//!
//! Promises: every text out of plan and log is escaped; the drawings, which are ours, are not.

use minijinja::{AutoEscape, Environment, UndefinedBehavior, Value, context, value::Serde};

use super::model::{Plot, Schedule};

const TEMPLATE: &str = include_str!("../templates/sheet.html");

/// The whole schedule as HTML.
///
/// # Errors
/// [`minijinja::Error`], which the template that is built in does not give.
pub fn write(schedule: &Schedule) -> Result<String, minijinja::Error> {
    let mut environment = Environment::new();
    environment.set_auto_escape_callback(|_| AutoEscape::Html);
    // A misspelt name in the template is an error, not a hole in a schedule.
    environment.set_undefined_behavior(UndefinedBehavior::Strict);
    // Inputs of the plan as a person writes them: 58, not 58.0.
    environment.add_filter("plain", |number: f64| number.to_string());
    environment.add_template("sheet.html", TEMPLATE)?;
    // Drawings are no part of the JSON export, so they do not come with the serialised schedule.
    let plots: Vec<Vec<Vec<Drawing>>> = schedule
        .boards
        .iter()
        .map(|board| {
            board
                .circuits
                .iter()
                .map(|circuit| circuit.plots.iter().map(Drawing::of).collect())
                .collect()
        })
        .collect();
    environment.get_template("sheet.html")?.render(context! {
        s => Value::from(Serde(schedule)),
        plots => Value::from(Serde(&plots)),
    })
}

#[derive(serde::Serialize)]
struct Drawing<'a> {
    title: &'a str,
    svg: &'a str,
}

impl<'a> Drawing<'a> {
    fn of(plot: &'a Plot) -> Self {
        Self {
            title: &plot.title,
            svg: &plot.svg,
        }
    }
}
