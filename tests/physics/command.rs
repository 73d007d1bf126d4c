//! `handsfull reckon` as a user runs it: figures as JSON, words, and one clear line for what is
//! wrong.

use assert_cmd::Command;
use serde_json::Value;

fn run(line: &str) -> assert_cmd::assert::Assert {
    Command::cargo_bin("handsfull")
        .expect("the program is built")
        .arg("reckon")
        .args(line.split_whitespace())
        .assert()
}

pub fn json(line: &str) -> Value {
    let done = run(&format!("{line} --json")).success();
    serde_json::from_slice(&done.get_output().stdout).expect("one JSON object")
}

#[track_caller]
fn check(line: &str, value: f64, unit: &str) {
    let object = json(line);
    let got = object["value"].as_f64().expect("a value");
    assert!((got - value).abs() < 1e-4 * value.max(1.0), "{line}: {got}");
    assert_eq!(object["unit"], unit, "{line}");
    for key in ["low", "high", "source"] {
        assert!(object.get(key).is_some(), "{line}: no {key}");
    }
    assert!(
        !object["source"].as_str().unwrap_or("").is_empty(),
        "{line}"
    );
    if let (Some(low), Some(high)) = (object["low"].as_f64(), object["high"].as_f64()) {
        assert!(low <= high, "{line}");
    }
}

#[test]
fn figures_are_those_of_the_formulas_on_published_factors() {
    // IEC 60228:2004 figures, 0.004 rule.
    check(
        "r1r2 --line-mm2 2.5 --cpc-mm2 1.5 --length-m 30 --temperature-c 10",
        0.561_888,
        "ohm",
    );
    check(
        "r1r2 --line-mm2 1.0 --cpc-mm2 1.0 --length-m 15",
        0.543,
        "ohm",
    );
    check("r2 --cpc-mm2 1.5 --length-m 70", 0.847, "ohm");
    check("r2 --display-ohm 1.32 --lead-ohm 0.47", 0.85, "ohm");
    check(
        "r2 --cpc-mm2 1.5 --length-m 70 --parallel-ohm 0.25",
        0.193_026,
        "ohm",
    );
    check("bond --mm2 6 --length-m 15", 0.0462, "ohm");
    // IAEI Magazine July 2016: 145 A gives 0.34 Ω.
    check("bond --operating-a 145", 0.344_83, "ohm");
    check(
        "ring --line-mm2 4 --cpc-mm2 1.5 --length-m 100 --position 0.5",
        0.417_75,
        "ohm",
    );
    check(
        "ring --line-mm2 2.5 --cpc-mm2 1.5 --length-m 60 --position 0",
        0.275_738_6,
        "ohm",
    );
    check("ring --r1-ohm 0.54 --r2-ohm 0.90", 0.36, "ohm");
    check(
        "spur --ring-ohm 0.293 --reading-ohm 0.41 --line-mm2 2.5 --cpc-mm2 1.5",
        5.996_92,
        "metre",
    );
    check(
        "insulation --parallel-megohm 5,20,10,20,2",
        1.111_11,
        "megohm",
    );
    check(
        "insulation --parallel-megohm 5,20,10,>999",
        2.848_99,
        "megohm",
    );
    check("insulation --kind extra-low", 0.5, "megohm");
    check(
        "zs --device B --rated-a 32 --ze-ohm 0.35 --r1r2-ohm 0.5853",
        1.052_36,
        "ohm",
    );
    check(
        "zs --device B --rated-a 32 --ze-ohm 0.35 --r1r2-ohm 0.5853 --cold",
        0.9353,
        "ohm",
    );
    check("zs --device B --rated-a 32", 1.365_625, "ohm");
    check(
        "length --device B --rated-a 32 --ze-ohm 0.35 --line-mm2 2.5 --cpc-mm2 1.5",
        43.3805,
        "metre",
    );
    check(
        "length --device B --rated-a 32 --ze-ohm 0.35 --line-mm2 2.5 --cpc-mm2 1.5 --ring",
        173.522,
        "metre",
    );
    check("length --ohm 0.05 --mm2 10", 27.3224, "metre");
    check(
        "drop --current-a 20 --length-m 30 --line-mm2 2.5",
        10.6704,
        "volt",
    );
    check(
        "drop --current-a 16 --length-m 18 --millivolt-per-a-m 18",
        5.184,
        "volt",
    );
    check("temperature --ohm 0.5853 --to-c 70", 0.702_36, "ohm");
    check("temperature --ohm 1 --from-c 10 --to-c 70", 1.25, "ohm");
    check("electrode --rcd-ma 30", 1666.667, "ohm");
    check("electrode --electrode-ohm 200", 250.0, "milliamp");
    check("rcd --multiple 5", 40.0, "millisecond");
    check(
        "fault-current --line-neutral-ka 1.54 --three-phase",
        3.08,
        "kiloamp",
    );
    check("conductor --mm2 2.5", 7.41, "milliohm");
    check(
        "r1r2 --line-mm2 50 --cpc-mm2 50 --length-m 100 --material aluminium --rule exact \
         --temperature-c 80",
        2.0 * 0.079_599_38,
        "ohm",
    );
}

#[test]
fn bounds_and_verdicts_are_in_the_object() {
    let object = json("insulation --parallel-megohm >999,>299");
    assert_eq!(object["bound"], "above");
    assert!(object["high"].is_null());
    let zs = json("zs --device BS3036 --rated-a 30 --ze-ohm 0.8 --r1r2-ohm 0.9");
    assert_eq!(zs["verdict"], "above limit");
    assert_eq!(zs["source_checked"], false);
    let ring = json("ring --line-mm2 2.5 --cpc-mm2 1.5 --length-m 60 --spur-m 6");
    let spur = ring["spur_line_earth"].as_f64().expect("a spur");
    assert!((spur - 0.40971).abs() < 1e-4, "{spur}");
}

#[track_caller]
fn refused(line: &str, words: &[&str]) {
    let done = run(line).failure().code(2);
    let told = String::from_utf8_lossy(&done.get_output().stderr).into_owned();
    for word in words {
        assert!(told.contains(word), "{line}: `{word}` is not in: {told}");
    }
}

#[test]
fn bad_input_names_the_option_and_what_is_right() {
    let r1r2 = "r1r2 --line-mm2 2.5 --cpc-mm2 1.5";
    refused(
        &format!("{r1r2} --length-m -5"),
        &["--length-m", "-5", "0 to 10000"],
    );
    refused(&format!("{r1r2} --length-m 0"), &["--length-m", "above 0"]);
    refused(&format!("{r1r2} --length-m nan"), &["--length-m"]);
    refused(
        &format!("{r1r2} --length-m 30 --temperature-c 4000"),
        &["--temperature-c", "-50 to 250"],
    );
    refused(
        "r1r2 --line-mm2 700 --cpc-mm2 1.5 --length-m 30",
        &["--line-mm2", "700", "0.5, 0.75, 1"],
    );
    refused(
        "r1r2 --line-mm2 2.5 --cpc-mm2 1.5 --length-m 30 --material aluminium",
        &["aluminium", "10, 16"],
    );
    refused("r1r2 --length-m 30", &["--line-mm2", "missing"]);
    refused("zs --device B --rated-a 0", &["--rated-a", "0 A"]);
    refused(
        "zs --device BS3036 --rated-a 32",
        &["--rated-a", "5, 15, 20"],
    );
    refused("zs --device Z --rated-a 32", &["Z"]);
    refused(
        "zs --device B --rated-a 32 --time-s 1",
        &["--time-s", "0.4 or 5"],
    );
    refused(
        "ring --line-mm2 2.5 --cpc-mm2 1.5 --length-m 60 --position 1.5",
        &["--position", "0 to 1"],
    );
    refused(
        "insulation --parallel-megohm 5,oops",
        &["--parallel-megohm", "oops"],
    );
    refused(
        "insulation --parallel-megohm open",
        &["--parallel-megohm", ">999"],
    );
    refused("rcd --multiple 3", &["--multiple", "0.5, 1, 2 or 5"]);
    refused("electrode", &["--rcd-ma"]);
    refused("conductor --mm2 3", &["--mm2", "3"]);
}

#[test]
fn words_call_nothing_safe() {
    for line in [
        "zs --device B --rated-a 32 --ze-ohm 0.35 --r1r2-ohm 0.59",
        "insulation --parallel-megohm >999",
        "bond --mm2 10 --length-m 20",
    ] {
        let done = run(line).success();
        let told = String::from_utf8_lossy(&done.get_output().stdout).to_lowercase();
        assert!(!told.contains("safe") && !told.contains("pass"), "{told}");
        assert!(told.contains("source:"), "{told}");
    }
}
