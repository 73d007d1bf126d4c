//! Open libraries as a second opinion: a script under tests/oracles installs them by name into an
//! environment of its own and compares their values with `handsfull reckon --json`.
//!
//! Skipped, loudly, where there is no python, no pip, or no way to fetch them.

use std::{path::Path, process::Command};

#[test]
fn reckon_agrees_with_open_libraries() {
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/oracles/conductors.py");
    let program = assert_cmd::cargo::cargo_bin("handsfull");
    let done = Command::new("python3").arg(&script).arg(&program).output();
    let output = match done {
        Ok(output) => output,
        Err(error) => {
            eprintln!("SKIPPED: open libraries were not asked: python3 does not run: {error}");
            return;
        }
    };
    let said = String::from_utf8_lossy(&output.stdout);
    let complained = String::from_utf8_lossy(&output.stderr);
    println!("{said}");
    // 77 is the exit code by which a test says that it was skipped (GNU Automake's convention).
    if output.status.code() == Some(77) {
        eprintln!("SKIPPED: open libraries were not asked: {complained}");
        return;
    }
    assert!(output.status.success(), "{said}\n{complained}");
}
