//! Lets the `vosk` crate link without libvosk: an empty archive stands where the linker looks,
//! and `src/voice/vosk_link.rs` supplies the symbols by loading the real library at run time.
//! Also says whether the trained voice is there to be embedded: without it the program still
//! builds and works from the keypad.
use std::{env, fs, path::Path, path::PathBuf};

fn main() {
    let out = PathBuf::from(env::var_os("OUT_DIR").expect("cargo sets OUT_DIR"));
    // `!<arch>\n` is a whole, empty `ar` archive.
    fs::write(out.join("libvosk.a"), b"!<arch>\n").expect("OUT_DIR can be written");
    println!("cargo:rustc-link-search=native={}", out.display());
    println!("cargo:rerun-if-changed=build.rs");
    clips(&out);

    const BASE: &str = "src/voice/base/am/final.mdl";
    println!("cargo:rustc-check-cfg=cfg(voice_base)");
    println!("cargo:rerun-if-changed={BASE}");
    if Path::new(BASE).is_file() {
        println!("cargo:rustc-cfg=voice_base");
    }
}

/// Lists the read-back clips as `CLIPS: &[(name, bytes)]`, in order of their names.
fn clips(out: &Path) {
    const FOLDER: &str = "src/voice/clips";
    println!("cargo:rerun-if-changed={FOLDER}");
    let root = PathBuf::from(env::var_os("CARGO_MANIFEST_DIR").expect("cargo sets it"));
    let mut names: Vec<String> = fs::read_dir(FOLDER)
        .expect("the clips folder is part of the source")
        .filter_map(|entry| entry.ok()?.file_name().into_string().ok())
        .filter_map(|name| name.strip_suffix(".flac").map(str::to_owned))
        .collect();
    names.sort();
    let mut list = String::from(
        "/// Name and FLAC bytes of every clip.\npub const CLIPS: &[(&str, &[u8])] = &[\n",
    );
    for name in names {
        let file = root.join(FOLDER).join(format!("{name}.flac"));
        list += &format!("    ({name:?}, include_bytes!({file:?})),\n");
    }
    list += "];\n";
    fs::write(out.join("clips.rs"), list).expect("OUT_DIR can be written");
}
