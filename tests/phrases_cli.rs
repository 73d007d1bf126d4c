//! `handsfull hear --text`: one JSON line each, its keys and their order.

use assert_cmd::Command;

/// Standard output of `hear` with these arguments, which must succeed.
#[track_caller]
fn hear(args: &[&str]) -> String {
    let output = Command::cargo_bin("handsfull")
        .expect("the program")
        .arg("hear")
        .args(args)
        .output()
        .expect("it runs");
    assert!(output.status.success(), "{output:?}");
    String::from_utf8(output.stdout).expect("text")
}

#[track_caller]
fn check(context: &str, said: &str, line: &str) {
    let out = hear(&["--context", context, "--text", said]);
    assert_eq!(out, format!("{line}\n"));
}

#[test]
fn each_kind_of_meaning_has_its_keys() {
    check(
        "all",
        "Zero point five zero OHMS",
        r#"{"heard":"zero point five zero ohms","kind":"reading","value":"0.50","unit":"ohm","bound":"exact"}"#,
    );
    check(
        "all",
        "greater than nine nine nine",
        r#"{"heard":"greater than nine nine nine","kind":"reading","value":"999","bound":"above"}"#,
    );
    check(
        "all",
        "open circuit",
        r#"{"heard":"open circuit","kind":"reading","bound":"open"}"#,
    );
    check(
        "all",
        "board delta bravo one way four line two point three",
        r#"{"heard":"board delta bravo one way four line two point three","kind":"circuit","board":"DB1","circuit":"4L2","line":"L2","point":"3"}"#,
    );
    check(
        "confirm",
        "affirm",
        r#"{"heard":"affirm","kind":"reply","command":"affirm"}"#,
    );
    check(
        "all",
        "correction one point one zero",
        r#"{"heard":"correction one point one zero","kind":"control","command":"correction","value":"1.10","bound":"exact"}"#,
    );
    check(
        "all",
        "r one plus r two",
        r#"{"heard":"r one plus r two","kind":"control","command":"test","test":"r1r2"}"#,
    );
    check(
        "ohms",
        "one thirty seven",
        r#"{"heard":"one thirty seven","kind":"ambiguous","alternatives":[{"heard":"one thirty seven","kind":"reading","value":"137","bound":"exact","margin":0.0},{"heard":"one thirty seven","kind":"reading","value":"1.37","bound":"exact","margin":0.0}]}"#,
    );
    check(
        "confirm",
        "banana",
        r#"{"heard":"banana","kind":"nothing","why":"no phrase of this prompt begins with \"banana\""}"#,
    );
}

#[test]
fn several_texts_give_a_line_each() {
    let out = hear(&["--text", "affirm", "--text", "", "--text", "circuit twelve"]);
    let lines: Vec<&str> = out.lines().collect();
    assert_eq!(lines.len(), 3);
    assert!(lines[1].contains(r#""why":"nothing was said""#));
    assert!(lines[2].contains(r#""circuit":"12""#));
}

#[test]
fn an_unknown_context_is_refused_with_the_names() {
    let output = Command::cargo_bin("handsfull")
        .expect("the program")
        .args(["hear", "--context", "numbers", "--text", "one"])
        .output()
        .expect("it runs");
    assert_eq!(output.status.code(), Some(2));
    assert_eq!(
        String::from_utf8_lossy(&output.stderr),
        "handsfull: there is no context `numbers`\n  the contexts are ohms, insulation, live, tick, \
         confirm, question, pick, gate, digits, all\n"
    );
}
