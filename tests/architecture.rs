//! Keeps the directions of the crate: reads the sources and holds them to the map in `lib.rs`.
//!
//! What it checks: who may know whom, that the pure folders touch no file, clock, environment,
//! thread or terminal, that every file opens with what it is for, and that none grows too long.
//! Comments and string literals are taken out first, so that speaking of a thing is no use of it.

use std::{
    collections::BTreeMap,
    fs,
    path::{Path, PathBuf},
};

/// What each top-level module may know of the crate besides itself.
///
/// `plan` is the file form of the domain's plan and counts as domain for the outer parts.
const MAY_KNOW: &[(&str, &[&str])] = &[
    ("domain", &[]),
    ("speech", &["domain"]),
    ("session", &["domain", "speech"]),
    ("plan", &["domain"]),
    ("journal", &["domain", "plan"]),
    ("report", &["domain", "plan", "journal"]),
    ("voice", &["domain", "speech"]),
    ("terminal", &["domain", "speech", "session"]),
];

/// May see everything; nobody but `main.rs` and `lib.rs` sees them.
// The rehearsal acts the tester: it stands where the edges are joined.
const OUTERMOST: &[&str] = &["app", "commands", "main", "lib", "rehearsal"];

const PURE: &[&str] = &["domain", "speech", "session"];

/// What a pure folder must not touch.
const IMPURE: &[&str] = &[
    "std::fs",
    "std::env",
    "std::thread",
    "std::process",
    "std::net",
    "std::io",
    "SystemTime",
    "Instant",
    "println!",
    "eprintln!",
    "print!",
    "eprint!",
    "dbg!",
    "Zoned::now",
    "Timestamp::now",
    "::now()",
    "crossterm",
    "rustyline",
    "cpal",
    "vosk",
];

const LONGEST: usize = 600;

struct Source {
    path: PathBuf,
    /// The top-level module it belongs to.
    module: String,
    text: String,
    /// Without comments and string literals.
    code: String,
}

fn sources() -> Vec<Source> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut found = Vec::new();
    walk(&root, &mut found);
    found.sort();
    assert!(found.len() > 20, "the sources were not found");
    found
        .into_iter()
        .map(|path| {
            let text = fs::read_to_string(&path).expect("a source file");
            let inside = path.strip_prefix(&root).expect("under src");
            let first = inside.iter().next().expect("a name").to_string_lossy();
            Source {
                module: first.trim_end_matches(".rs").to_string(),
                code: bare(&text),
                text,
                path: inside.to_path_buf(),
            }
        })
        .collect()
}

fn walk(folder: &Path, found: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(folder).expect("a folder").flatten() {
        let path = entry.path();
        if path.is_dir() {
            walk(&path, found);
        } else if path.extension().is_some_and(|e| e == "rs") {
            found.push(path);
        }
    }
}

/// The code without comments, strings and character literals; line breaks stay.
fn bare(text: &str) -> String {
    let chars: Vec<char> = text.chars().collect();
    let mut out = String::with_capacity(text.len());
    let mut i = 0;
    while i < chars.len() {
        let rest = &chars[i..];
        match rest {
            ['/', '/', ..] => {
                while i < chars.len() && chars[i] != '\n' {
                    i += 1;
                }
            }
            ['/', '*', ..] => {
                let mut depth = 0;
                while i < chars.len() {
                    match &chars[i..] {
                        ['/', '*', ..] => (depth, i) = (depth + 1, i + 2),
                        ['*', '/', ..] => (depth, i) = (depth - 1, i + 2),
                        [c, ..] => {
                            if *c == '\n' {
                                out.push('\n');
                            }
                            i += 1;
                        }
                        [] => {}
                    }
                    if depth == 0 {
                        break;
                    }
                }
            }
            ['r', '"', ..] | ['r', '#', ..] => {
                let hashes = rest[1..].iter().take_while(|c| **c == '#').count();
                if rest.get(1 + hashes) == Some(&'"') {
                    let mut end = vec!['"'];
                    end.extend(std::iter::repeat_n('#', hashes));
                    i += 2 + hashes;
                    while i < chars.len() && !chars[i..].starts_with(&end) {
                        if chars[i] == '\n' {
                            out.push('\n');
                        }
                        i += 1;
                    }
                    i += end.len();
                } else {
                    out.push('r');
                    i += 1;
                }
            }
            ['"', ..] => {
                i += 1;
                while i < chars.len() && chars[i] != '"' {
                    if chars[i] == '\\' {
                        i += 1;
                    }
                    if chars.get(i) == Some(&'\n') {
                        out.push('\n');
                    }
                    i += 1;
                }
                i += 1;
            }
            ['\'', '\\', ..] => {
                i += 3;
                while i < chars.len() && chars[i] != '\'' {
                    i += 1;
                }
                i += 1;
            }
            ['\'', _, '\'', ..] => i += 3,
            [c, ..] => {
                out.push(*c);
                i += 1;
            }
            [] => {}
        }
    }
    out
}

/// Top-level modules of this crate that a file names: `crate::x`, `crate::{x, y::z}`, and `super`
/// chains that climb to the root.
fn knows(source: &Source) -> Vec<String> {
    let code: String = source.code.split_whitespace().collect::<Vec<_>>().join(" ");
    let code = code.replace(" ::", "::").replace(":: ", "::");
    let mut known = Vec::new();
    let mut roots = vec!["crate::".to_string(), "handsfull::".to_string()];
    // A file `a/b/c.rs` reaches the root by three supers, `a/mod.rs` by one.
    let depth = source.path.iter().count()
        - usize::from(source.path.file_name().is_some_and(|n| n == "mod.rs"));
    roots.push("super::".repeat(depth));
    for root in roots {
        let mut from = 0;
        while let Some(at) = code[from..].find(&root) {
            let start = from + at;
            from = start + root.len();
            let before = code[..start].chars().next_back();
            let longer = before.is_some_and(|c| c.is_alphanumeric() || c == '_' || c == ':');
            if !longer {
                known.extend(heads(&code[from..]));
            }
        }
    }
    known.sort();
    known.dedup();
    known
}

/// The first names of a path or of a brace group: `a::b` gives `a`, `{a, b::{c}}` gives `a`, `b`.
fn heads(path: &str) -> Vec<String> {
    let name = |text: &str| -> String {
        text.trim_start()
            .chars()
            .take_while(|c| c.is_alphanumeric() || *c == '_')
            .collect()
    };
    let Some(group) = path.strip_prefix('{') else {
        return vec![name(path)];
    };
    let mut names = Vec::new();
    let mut depth = 0;
    let mut start = 0;
    for (at, c) in group.char_indices() {
        match c {
            '{' => depth += 1,
            '}' if depth == 0 => {
                names.push(name(&group[start..at]));
                break;
            }
            '}' => depth -= 1,
            ',' if depth == 0 => {
                names.push(name(&group[start..at]));
                start = at + 1;
            }
            _ => {}
        }
    }
    names.retain(|n| !n.is_empty());
    names
}

#[test]
fn modules_know_only_what_lies_further_in() {
    let allowed: BTreeMap<&str, &[&str]> = MAY_KNOW.iter().copied().collect();
    let mut wrong = Vec::new();
    for source in sources() {
        if OUTERMOST.contains(&source.module.as_str()) {
            continue;
        }
        let Some(may) = allowed.get(source.module.as_str()) else {
            wrong.push(format!(
                "src/{}: `{}` has no place in the map of this test",
                source.path.display(),
                source.module
            ));
            continue;
        };
        for known in knows(&source) {
            // Only modules count; `crate::Something` re-exported at the root is caught too,
            // since the root exports modules only.
            if known != source.module && !may.contains(&known.as_str()) {
                wrong.push(format!(
                    "src/{}: `{}` may not know `{known}`",
                    source.path.display(),
                    source.module
                ));
            }
        }
    }
    assert!(wrong.is_empty(), "\n{}", wrong.join("\n"));
}

#[test]
fn the_pure_folders_touch_no_file_clock_environment_thread_or_screen() {
    let mut wrong = Vec::new();
    for source in sources() {
        if !PURE.contains(&source.module.as_str()) {
            continue;
        }
        let code: String = source.code.split_whitespace().collect::<Vec<_>>().join(" ");
        for word in IMPURE {
            if uses(&code, word) {
                wrong.push(format!("src/{}: uses `{word}`", source.path.display()));
            }
        }
        // `use std::{fs, io}` hides the path in a group.
        for at in code.match_indices("std::{").map(|(at, _)| at) {
            for name in heads(&code[at + "std::".len()..]) {
                if ["fs", "env", "thread", "process", "net", "io"].contains(&name.as_str()) {
                    wrong.push(format!("src/{}: uses `std::{name}`", source.path.display()));
                }
            }
        }
    }
    assert!(wrong.is_empty(), "\n{}", wrong.join("\n"));
}

/// Whether the word stands in the code and is not part of a longer one.
fn uses(code: &str, word: &str) -> bool {
    let part = |c: char| c.is_alphanumeric() || c == '_';
    code.match_indices(word).any(|(at, _)| {
        let before = code[..at].chars().next_back();
        let after = code[at + word.len()..].chars().next();
        let starts = word.chars().next().is_some_and(part);
        let ends = word.chars().next_back().is_some_and(part);
        !(starts && before.is_some_and(part) || ends && after.is_some_and(part))
    })
}

#[test]
fn every_file_opens_with_what_it_is_for() {
    let wrong: Vec<String> = sources()
        .iter()
        .filter(|s| !s.text.starts_with("//! "))
        .map(|s| format!("src/{}", s.path.display()))
        .collect();
    assert!(wrong.is_empty(), "no `//!` at the top of {wrong:#?}");
}

#[test]
fn no_file_grows_beyond_its_length() {
    let wrong: Vec<String> = sources()
        .iter()
        .filter(|s| s.text.lines().count() > LONGEST)
        .map(|s| format!("src/{}: {} lines", s.path.display(), s.text.lines().count()))
        .collect();
    assert!(wrong.is_empty(), "longer than {LONGEST}: {wrong:#?}");
}

#[test]
fn nothing_is_left_for_later() {
    let mut wrong = Vec::new();
    for source in sources() {
        for word in ["todo!", "unimplemented!", "#[ignore]"] {
            if uses(&source.code, word) {
                wrong.push(format!("src/{}: {word}", source.path.display()));
            }
        }
    }
    assert!(wrong.is_empty(), "\n{}", wrong.join("\n"));
}

/// The scanner itself must see through strings, comments, groups and chains, or the tests above
/// could not fail.
#[test]
fn the_scanner_sees_uses_and_only_uses() {
    let source = |path: &str, text: &str| Source {
        path: path.into(),
        module: path.split('/').next().unwrap_or_default().into(),
        text: text.into(),
        code: bare(text),
    };
    #[track_caller]
    fn check(source: &Source, expected: &[&str]) {
        assert_eq!(knows(source), expected);
    }
    check(
        &source("domain/a.rs", "use crate::{voice, speech::{x, y}};"),
        &["speech", "voice"],
    );
    check(
        &source("domain/a.rs", "use super::super::voice::X;"),
        &["voice"],
    );
    check(&source("domain/a.rs", "use super::plan::Job;"), &[]);
    check(&source("domain/mod.rs", "use super::voice;"), &["voice"]);
    check(
        &source(
            "domain/a.rs",
            "// crate::voice\nlet s = \"crate::voice\"; /* crate::voice */",
        ),
        &[],
    );
    check(
        &source("domain/a.rs", "let x = crate::voice::go('\"', '\\'');"),
        &["voice"],
    );
    check(
        &source("domain/a.rs", "let x = r#\"crate::a\"#; crate::b::c()"),
        &["b"],
    );
    assert!(uses("let t = std::time::Instant::now();", "Instant"));
    assert!(!uses("let instantly = Instantly;", "Instant"));
    assert!(uses("println!()", "println!") && !uses("eprintln!()", "println!"));
}
