//! `handsfull sheet` on the joinery, and on a job whose every name is hostile.

use std::{
    collections::BTreeMap,
    fs,
    path::{Path, PathBuf},
    process::Command,
};

use handsfull::report::sheet::{csv::COLUMNS, json::SCHEMA};

use crate::{
    joinery::{Bench, handsfull, target},
    records::BY,
};
use handsfull::domain::{record::Record, test::TestKind};

#[track_caller]
fn sheet(bench: &Bench, args: &[&str]) -> Vec<u8> {
    let mut all = vec!["sheet", "joinery.toml"];
    all.extend(args);
    let done = handsfull(bench.folder.path(), &all);
    let errors = String::from_utf8_lossy(&done.stderr).into_owned();
    assert!(done.status.success(), "{errors}");
    done.stdout
}

fn json(bench: &Bench) -> serde_json::Value {
    serde_json::from_slice(&sheet(bench, &["--json", "-"])).expect("JSON")
}

fn html(bench: &Bench) -> String {
    String::from_utf8(sheet(bench, &["--html", "-"])).expect("text")
}

#[test]
fn without_an_option_it_lies_beside_the_job_and_that_is_said() {
    let bench = Bench::worked();
    let done = handsfull(bench.folder.path(), &["sheet", "joinery.toml"]);
    let said = String::from_utf8(done.stderr).expect("text");
    assert!(said.contains("wrote joinery.sheet.html"), "{said}");
    assert!(said.contains("13 open"), "{said}");
    let text = fs::read_to_string(bench.folder.path().join("joinery.sheet.html")).expect("there");
    assert!(text.starts_with("<!DOCTYPE html>"));
}

#[test]
fn the_row_of_a_circuit_shows_the_value_that_matters_most_and_every_mark() {
    let bench = Bench::worked();
    let sheet = json(&bench);
    let columns = |at: usize| &sheet["boards"][0]["circuits"][at]["columns"];
    // The ring: highest line-cpc reading is the spur's; the insulation is beyond its limit.
    assert_eq!(columns(0)["r1_r2"]["value"], "0.41");
    assert_eq!(columns(0)["insulation_earth"]["value"], "0.42");
    assert_eq!(columns(0)["insulation_earth"]["marks"][0], "(X)");
    assert_eq!(columns(0)["polarity"]["state"], "open");
    // The radial: the amended value counts, and says so.
    assert_eq!(columns(1)["r1_r2"]["value"], "0.86");
    assert_eq!(
        columns(1)["r1_r2"]["marks"],
        serde_json::json!(["(H)", "(A)"])
    );
    assert_eq!(columns(1)["insulation_live"]["value"], ">299");
    assert_eq!(columns(1)["r1"]["state"], "not-required");
    assert_eq!(columns(1)["polarity"]["value"], "confirmed");
}

#[test]
fn figures_keep_their_zeros_everywhere() {
    let mut bench = Bench::new();
    bench.keep(target(TestKind::R1R2, Some(2), Some(3), None), "0.50");
    bench.close();
    let row = find(&json(&bench), "r1r2", 3);
    assert_eq!(row["value"], "0.50");
    assert!(html(&bench).contains(">0.50 Ω<"));
    let text = String::from_utf8(sheet(&bench, &["--csv", "-"])).expect("text");
    assert!(text.contains(",0.50,ohm,"), "{text}");
}

#[track_caller]
fn find(sheet: &serde_json::Value, test: &str, point: u64) -> serde_json::Value {
    let circuits = sheet["boards"][0]["circuits"].as_array().expect("circuits");
    circuits
        .iter()
        .flat_map(|c| c["results"].as_array().expect("results"))
        .find(|r| r["test"] == test && r["point"] == point && r["value"].is_string())
        .expect("there")
        .clone()
}

#[test]
fn what_is_open_left_out_and_still_in_stands_at_the_top_of_the_paper() {
    let bench = Bench::worked();
    let text = html(&bench);
    let open = text
        .find("Open: 13; temporary works still in: 1")
        .expect("a heading");
    let board = text.find("Board DB1").expect("a board");
    assert!(open < board);
    assert!(text.contains("line-cpc link at the board, DB1&#x2f;2"));
    assert!(text.contains("no access to the loft"));
    assert!(text.contains("read off the instrument&#x27;s memory"));
    assert!(text.contains("Signature"));
    assert!(text.contains("does not say that the installation is safe"));
}

#[test]
fn no_word_on_the_paper_calls_anything_safe_or_passed() {
    let bench = Bench::worked();
    let text = html(&bench).replace("It does not say that the installation is safe.", "");
    for claim in ["safe", "passed", "satisfactory", "compliant"] {
        assert!(!text.to_lowercase().contains(claim), "{claim}");
    }
}

#[test]
fn a_log_that_does_not_hold_says_so_on_the_paper() {
    let bench = Bench::worked();
    let text = fs::read_to_string(bench.log()).expect("text");
    fs::write(bench.log(), text.replacen("0.42", "0.45", 1)).expect("written");
    let text = html(&bench);
    assert!(text.contains("1 thing does NOT hold"), "{text}");
    assert!(text.contains("entry 7: does not match its check"), "{text}");
}

#[test]
fn sources_that_were_not_checked_are_marked() {
    let live = crate::joinery::FIXTURE
        .replace("testers = [", "rules = { live-tests = true }\ntesters = [");
    let live = if handsfull::plan::parse(&live, "x").is_ok() {
        live
    } else {
        // Where the rules stand in a job file is the plan's business.
        crate::joinery::FIXTURE.replace("[supply]", "[rules]\nlive-tests = true\n\n[supply]")
    };
    let mut bench = Bench::of(&live);
    bench.close();
    let sheet = json(&bench);
    let sources = sheet["sources"].as_array().expect("sources");
    let unchecked = sources.iter().filter(|s| s["checked"] == false).count();
    assert!(
        unchecked > 0,
        "transcribed tables are not the standard: {sources:?}"
    );
    assert!(html(&bench).contains("† not checked against the standard itself"));
}

const HOSTILE: &str =
    r#"<script>alert(1)</script> "quoted" 'n', a,b; =1+1 & Łódź {{ 7*7 }} </title>"#;

fn hostile() -> Bench {
    let mut text = String::new();
    for line in crate::joinery::FIXTURE.lines() {
        let keys = ["title", "address", "client", "description", "serial"];
        let key = line.split(" =").next().unwrap_or_default();
        if keys.contains(&key) || (key == "name" && !line.contains("machine room")) {
            text.push_str(&format!("{key} = '''{HOSTILE}'''\n"));
        } else {
            text.push_str(&line.replace("\"bench one\"", &format!("'''{HOSTILE}'''")));
            text.push('\n');
        }
    }
    // Bonds need names of their own.
    let text = text.replacen(HOSTILE, "A", 0);
    let mut seen = 0;
    let text: String = text
        .lines()
        .map(|line| {
            if line.starts_with("name = '''") {
                seen += 1;
                format!("name = '''{HOSTILE}{seen}'''\n")
            } else {
                format!("{line}\n")
            }
        })
        .collect();
    let mut bench = Bench::of(&text);
    bench.put(Record::Note {
        target: None,
        text: HOSTILE.into(),
        by: HOSTILE.into(),
    });
    bench.put(Record::Skipped {
        target: target(TestKind::Polarity, Some(1), None, None),
        reason: HOSTILE.into(),
        by: BY.into(),
    });
    let mut kept = bench.reading(target(TestKind::R1R2, Some(2), Some(1), None), "0.93");
    kept.heard = Some(HOSTILE.into());
    kept.kept_as_found = Some(HOSTILE.into());
    kept.by = HOSTILE.into();
    bench.put(Record::Reading(Box::new(kept)));
    bench.close();
    bench
}

#[test]
fn hostile_names_are_text_in_html() {
    let bench = hostile();
    let text = html(&bench);
    assert!(!text.contains("<script"), "a name became an element");
    assert!(!text.contains("49"), "a name became a template");
    assert_eq!(
        text.matches("</title>").count() - text.matches("<svg").count() + 1,
        1
    );
    assert!(text.contains("&lt;script&gt;alert(1)"), "it is still there");
}

#[test]
fn hostile_names_come_back_from_csv_whole() {
    let bench = hostile();
    let bytes = sheet(&bench, &["--csv", "-"]);
    assert!(bytes.ends_with(b"\r\n"));
    let mut reader = csv_lines(&bytes);
    let head = reader.remove(0);
    assert_eq!(head, COLUMNS.map(|(name, _)| name));
    assert!(reader.iter().any(|line| line[3].starts_with(HOSTILE)));
    assert!(reader.iter().any(|line| line[25] == HOSTILE));
}

/// RFC 4180 read by hand: nothing of the crate that wrote it.
fn csv_lines(bytes: &[u8]) -> Vec<Vec<String>> {
    let text = std::str::from_utf8(bytes).expect("text");
    let (mut lines, mut line, mut field) = (vec![], vec![], String::new());
    let mut chars = text.chars().peekable();
    let mut quoted = false;
    while let Some(c) = chars.next() {
        match (c, quoted) {
            ('"', true) if chars.peek() == Some(&'"') => {
                chars.next();
                field.push('"');
            }
            ('"', _) => quoted = !quoted,
            (',', false) => line.push(std::mem::take(&mut field)),
            ('\r', false) => {}
            ('\n', false) => {
                line.push(std::mem::take(&mut field));
                lines.push(std::mem::take(&mut line));
            }
            (c, _) => field.push(c),
        }
    }
    lines
}

#[test]
fn json_schema_and_columns_are_printed_without_a_job() {
    let bench = Bench::new();
    let done = handsfull(bench.folder.path(), &["sheet", "--schema"]);
    assert_eq!(done.stdout, SCHEMA.as_bytes());
    let done = handsfull(bench.folder.path(), &["sheet", "--columns"]);
    let text = String::from_utf8(done.stdout).expect("text");
    assert_eq!(text.lines().count(), COLUMNS.len());
    let done = handsfull(bench.folder.path(), &["sheet"]);
    assert_eq!(done.status.code(), Some(2));
}

#[test]
fn a_sheet_without_its_job_file_or_into_a_folder_that_is_not_there_is_refused() {
    let bench = Bench::worked();
    let run = |args: &[&str]| {
        let done = handsfull(bench.folder.path(), args);
        (
            done.status.code(),
            String::from_utf8(done.stderr).expect("text"),
        )
    };
    let (code, said) = run(&["sheet", "joinery.toml", "--html", "nowhere/out.html"]);
    assert_eq!(code, Some(3), "{said}");
    assert!(said.contains("cannot be written"), "{said}");
    fs::remove_file(bench.path()).expect("there");
    let (code, said) = run(&["sheet", "joinery.log.toml"]);
    assert_eq!(code, Some(3), "{said}");
    assert!(said.contains("there is no job file"), "{said}");
}

/// A Python with a module in it, or a loud skip. `HANDSFULL_PYTHON` names one, for instance of a
/// virtual environment.
fn python_with(module: &str) -> Option<PathBuf> {
    let python = std::env::var_os("HANDSFULL_PYTHON").unwrap_or_else(|| "python3".into());
    let has = Command::new(&python)
        .args(["-c", &format!("import {module}")])
        .output()
        .is_ok_and(|done| done.status.success());
    if !has {
        eprintln!("SKIPPED: no {module} in {python:?} (set HANDSFULL_PYTHON to one that has it)");
    }
    has.then(|| python.into())
}

#[track_caller]
fn python(python: &Path, script: &str, folder: &Path) -> String {
    let done = Command::new(python)
        .args(["-c", script])
        .current_dir(folder)
        .output()
        .expect("it runs");
    let errors = String::from_utf8_lossy(&done.stderr).into_owned();
    assert!(done.status.success(), "{errors}");
    String::from_utf8(done.stdout).expect("text")
}

#[test]
fn an_independent_reader_finds_the_json_as_its_schema_says() {
    let Some(with) = python_with("jsonschema") else {
        return;
    };
    for bench in [Bench::worked(), hostile(), Bench::new()] {
        sheet(&bench, &["--json", "out.json"]);
        fs::write(bench.folder.path().join("schema.json"), SCHEMA).expect("written");
        let said = python(
            &with,
            "import json, jsonschema\n\
             schema = json.load(open('schema.json'))\n\
             jsonschema.Draft202012Validator.check_schema(schema)\n\
             sheet = json.load(open('out.json'))\n\
             jsonschema.Draft202012Validator(schema).validate(sheet)\n\
             sheet['boards'][0]['circuits'][0]['columns']['zs']['state'] = 'fine'\n\
             assert not jsonschema.Draft202012Validator(schema).is_valid(sheet)\n\
             print('valid')",
            bench.folder.path(),
        );
        assert_eq!(said, "valid\n");
    }
}

#[test]
fn an_independent_reader_finds_the_same_in_csv_and_json() {
    let Some(with) = python_with("csv") else {
        return;
    };
    for bench in [Bench::worked(), hostile()] {
        sheet(&bench, &["--csv", "out.csv", "--json", "out.json"]);
        let said = python(
            &with,
            "import csv, json\n\
             rows = list(csv.DictReader(open('out.csv', newline='', encoding='utf-8'), strict=True))\n\
             s = json.load(open('out.json', encoding='utf-8'))\n\
             want = [(None, None, r) for r in s['results']]\n\
             for b in s['boards']:\n\
             \x20   want += [(b['id'], None, r) for r in b['results']]\n\
             \x20   want += [(b['id'], c, r) for c in b['circuits'] for r in c['results']]\n\
             assert len(rows) == len(want), (len(rows), len(want))\n\
             for row, (board, c, r) in zip(rows, want):\n\
             \x20   assert None not in row and None not in row.values()\n\
             \x20   assert row['board'] == (board or ''), row\n\
             \x20   assert row['circuit_name'] == (c['name'] if c else ''), row\n\
             \x20   for key in ['test', 'value', 'unit', 'state', 'by', 'heard', 'limit', 'time']:\n\
             \x20       assert row[key] == (r[key] or ''), (key, row, r)\n\
             print(len(rows))",
            bench.folder.path(),
        );
        let rows: usize = said.trim().parse().expect("a number");
        assert!(rows > 30, "{rows}");
    }
}

/// Runs a program of the system, or skips loudly when it is not installed.
fn tool(name: &str, args: &[&str], folder: &Path) -> Option<std::process::Output> {
    match Command::new(name).args(args).current_dir(folder).output() {
        Ok(done) => Some(done),
        Err(e) => {
            eprintln!("SKIPPED: {name}: {e}");
            None
        }
    }
}

#[test]
fn a_browser_prints_it_on_landscape_pages_with_every_value() {
    let bench = Bench::worked();
    let folder = bench.folder.path();
    sheet(&bench, &["--html", "out.html"]);
    let profile = format!("--user-data-dir={}", folder.join("profile").display());
    let page = format!("file://{}", folder.join("out.html").display());
    let args = [
        "--headless",
        "--no-sandbox",
        "--disable-gpu",
        "--disable-dev-shm-usage",
        &profile,
        "--no-pdf-header-footer",
        "--print-to-pdf=out.pdf",
        &page,
    ];
    let Some(done) = tool("chromium", &args, folder) else {
        return;
    };
    let errors = String::from_utf8_lossy(&done.stderr);
    assert!(folder.join("out.pdf").exists(), "{errors}");
    let Some(info) = tool("pdfinfo", &["out.pdf"], folder) else {
        return;
    };
    let info = String::from_utf8(info.stdout).expect("text");
    let about: BTreeMap<&str, &str> = info
        .lines()
        .filter_map(|line| line.split_once(':'))
        .map(|(key, value)| (key, value.trim()))
        .collect();
    let pages: usize = about["Pages"].parse().expect("a number");
    assert!((3..=8).contains(&pages), "{pages} pages");
    // A4 landscape in points: 842 by 595.
    assert!(
        about["Page size"].starts_with("84"),
        "{}",
        about["Page size"]
    );
    let Some(text) = tool("pdftotext", &["-layout", "out.pdf", "-"], folder) else {
        return;
    };
    let text = String::from_utf8(text.stdout).expect("text");
    for wanted in [
        "JOINERY-1",
        "0.86",
        ">299",
        "(X)",
        "line-cpc link at the board",
        "a joint about 0.22 Ω too high",
        "Signature",
        "every check holds",
    ] {
        assert!(
            text.contains(wanted),
            "{wanted} is not on the paper:\n{text}"
        );
    }
}
