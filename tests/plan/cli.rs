//! `handsfull plan` as a user runs it: exit codes, both streams, narrow screens, pipes, a terminal.

use std::{
    fs,
    io::{Read, Write},
    path::Path,
    time::{Duration, Instant},
};

use assert_cmd::Command;
use handsfull::plan;

use super::fixtures::{self, ALL};

fn handsfull() -> Command {
    Command::cargo_bin("handsfull").expect("the program is built")
}

struct Ran {
    code: i32,
    out: String,
    err: String,
}

fn ran(command: &mut Command) -> Ran {
    let done = command.output().expect("it runs");
    Ran {
        code: done.status.code().unwrap_or(-1),
        out: String::from_utf8_lossy(&done.stdout).into_owned(),
        err: String::from_utf8_lossy(&done.stderr).into_owned(),
    }
}

fn fixture(name: &str) -> String {
    fixtures::path(name).display().to_string()
}

#[test]
fn check_sums_a_job_up_in_a_paragraph() {
    let Ran { code, out, err } = ran(handsfull().args(["plan", "check", &fixture("barn.toml")]));
    assert_eq!((code, err.as_str()), (0, ""));
    insta::assert_snapshot!(out);
}

#[test]
fn check_lists_mistakes_and_says_so_with_code_three() {
    let broken = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/errors/size.toml");
    let Ran { code, out, err } = ran(handsfull().args(["plan", "check"]).arg(&broken));
    assert_eq!((code, out.as_str()), (3, ""));
    assert!(
        err.starts_with("handsfull: ") && err.contains("2 mistakes"),
        "{err}"
    );
    assert!(err.contains("size.toml:17:12: 700 mm² is no size"), "{err}");
    let Ran { code, err, .. } = ran(handsfull().args(["plan", "check", "no-such-file.toml"]));
    assert_eq!(code, 3);
    assert!(
        err.contains("no-such-file.toml: cannot be read: there is no such file"),
        "{err}"
    );
}

#[test]
fn the_example_is_a_job_without_a_mistake_or_a_notice() {
    let Ran { code, out, .. } = ran(handsfull().args(["plan", "example"]));
    assert_eq!((code, out.as_str()), (0, plan::EXAMPLE));
    let loaded = plan::examine(&out, "example").unwrap_or_else(|wrong| panic!("{wrong}"));
    assert_eq!(loaded.notices, []);
}

#[test]
fn show_fits_forty_columns_and_wider() {
    for name in ALL {
        for width in ["40", "64", "100"] {
            let Ran { code, out, err } =
                ran(handsfull().args(["plan", "show", &fixture(name), "--width", width]));
            assert_eq!(code, 0, "{err}");
            let columns: usize = width.parse().expect("a number");
            for line in out.lines() {
                assert!(line.chars().count() <= columns, "{name} at {width}: {line}");
            }
        }
    }
}

#[test]
fn show_one_circuit_with_its_tests_in_order() {
    let workshop = fixture("workshop.toml");
    let shown = ran(handsfull().args([
        "plan",
        "show",
        &workshop,
        "--circuit",
        "db1/1",
        "--width",
        "40",
    ]));
    insta::assert_snapshot!(shown.out);
    let Ran { code, err, .. } =
        ran(handsfull().args(["plan", "show", &workshop, "--circuit", "9"]));
    assert_eq!(code, 2);
    assert!(err.contains("the circuits are DB1/1, DB1/2"), "{err}");
}

/// Answers that make a small job; one line each.
const ANSWERS: &str = "SHED-2\nShed\n\n\nA. Tester\n12\n\n\n\n\n\nnone\n\ndone\n\nDB1\n\n\n1\nLamp\nfixed\n\n\n9\n\n\n\n\n\n\n\n\ndone\ndone\n\n";

#[test]
fn new_works_line_by_line_on_a_pipe() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("shed.toml");
    let Ran { code, out, err } = ran(handsfull()
        .args(["plan", "new"])
        .arg(&file)
        .write_stdin(ANSWERS));
    assert_eq!(code, 0, "{err}\n{out}");
    let job = plan::load(&file).unwrap_or_else(|wrong| panic!("{wrong}"));
    assert_eq!(job.boards[0].circuits[0].name, "Lamp");
    assert!(
        !folder.path().join("shed.toml.draft").exists(),
        "the draft is gone"
    );
    // A second interview does not touch what is there.
    let again = ran(handsfull()
        .args(["plan", "new"])
        .arg(&file)
        .write_stdin(ANSWERS));
    assert_eq!(again.code, 3);
    assert!(again.err.contains("is there already"), "{}", again.err);
}

#[test]
fn an_interview_broken_off_goes_on_where_it_stopped() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("shed.toml");
    let lines: Vec<&str> = ANSWERS.split_inclusive('\n').collect();
    let (first, rest) = lines.split_at(9);
    let stopped = ran(handsfull()
        .args(["plan", "new"])
        .arg(&file)
        .write_stdin(first.concat()));
    assert_eq!(stopped.code, 1);
    assert!(
        stopped.err.contains("kept in") && stopped.err.contains("shed.toml.draft"),
        "{}",
        stopped.err
    );
    assert!(!file.exists());
    let went_on = ran(handsfull()
        .args(["plan", "new"])
        .arg(&file)
        .write_stdin(rest.concat()));
    assert_eq!(went_on.code, 0, "{}", went_on.err);
    assert!(went_on.out.contains("after 9 answers"), "{}", went_on.out);
    assert_eq!(plan::load(&file).map(|j| j.reference), Ok("SHED-2".into()));
}

#[test]
fn back_and_bad_input_ask_again() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("shed.toml");
    let answers = ANSWERS
        .replace("SHED-2\n", "SHED 2\nBARN\nback\nSHED-2\n")
        .replace("\n12\n", "\n451\n12\n");
    let Ran { code, out, err } = ran(handsfull()
        .args(["plan", "new"])
        .arg(&file)
        .write_stdin(answers));
    assert_eq!(code, 0, "{err}\n{out}");
    assert!(
        out.contains("Not that: it must lie between -40 and 60."),
        "{out}"
    );
    assert_eq!(plan::load(&file).map(|j| j.reference), Ok("SHED-2".into()));
}

#[test]
fn a_draft_that_is_none_is_said_and_left_alone() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("shed.toml");
    let draft = folder.path().join("shed.toml.draft");
    fs::write(&draft, "answer = 7\n").expect("a draft");
    let Ran { code, err, .. } = ran(handsfull().args(["plan", "new"]).arg(&file).write_stdin(""));
    assert_eq!(code, 3);
    assert!(err.contains("not a draft of an interview"), "{err}");
    assert_eq!(
        fs::read_to_string(&draft).expect("still there"),
        "answer = 7\n"
    );
}

/// Reads what the terminal shows until a text appears.
fn until(seen: &std::sync::mpsc::Receiver<u8>, shown: &mut String, text: &str) {
    let end = Instant::now() + Duration::from_secs(20);
    while !shown.contains(text) {
        let left = end.saturating_duration_since(Instant::now());
        match seen.recv_timeout(left) {
            Ok(byte) => shown.push(char::from(byte)),
            Err(_) => panic!("`{text}` never appeared in:\n{shown}"),
        }
    }
}

#[test]
fn ctrl_c_at_a_terminal_keeps_the_answers() {
    use portable_pty::{CommandBuilder, PtySize, native_pty_system};
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("shed.toml");
    let size = PtySize {
        rows: 15,
        cols: 40,
        pixel_width: 0,
        pixel_height: 0,
    };
    let terminal = native_pty_system().openpty(size).expect("a terminal");
    let mut command = CommandBuilder::new(assert_cmd::cargo::cargo_bin("handsfull"));
    command.args(["plan", "new"]);
    command.arg(&file);
    command.env("TERM", "xterm");
    let mut child = terminal.slave.spawn_command(command).expect("it starts");
    drop(terminal.slave);
    let mut reader = terminal.master.try_clone_reader().expect("a reader");
    let (send, seen) = std::sync::mpsc::channel();
    std::thread::spawn(move || {
        let mut bytes = [0; 512];
        while let Ok(n @ 1..) = reader.read(&mut bytes) {
            for byte in &bytes[..n] {
                if send.send(*byte).is_err() {
                    return;
                }
            }
        }
    });
    let mut keys = terminal.master.take_writer().expect("a keyboard");
    let mut shown = String::new();
    until(&seen, &mut shown, "> ");
    write!(keys, "SHED-2\r").expect("typed");
    until(&seen, &mut shown, "What is the job");
    write!(keys, "Shed\r").expect("typed");
    until(&seen, &mut shown, "Where");
    // The editor says when it takes keys: only then is a half answer typed into it.
    shown.clear();
    until(&seen, &mut shown, "\x1b[?2004h");
    write!(keys, "half an addr\x03").expect("typed");
    until(&seen, &mut shown, "shed.toml.draft");
    let code = child.wait().expect("it ends").exit_code();
    assert_eq!(code, 1, "{shown}");
    let draft = fs::read_to_string(folder.path().join("shed.toml.draft")).expect("a draft");
    assert!(
        draft.contains("SHED-2") && draft.contains("\"Shed\""),
        "{draft}"
    );
    assert!(
        !draft.contains("half an addr"),
        "an answer not given is not kept"
    );
}
