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

    const BASE: &str = "src/voice/base/am/final.mdl";
    println!("cargo:rustc-check-cfg=cfg(voice_base)");
    println!("cargo:rerun-if-changed={BASE}");
    if Path::new(BASE).is_file() {
        println!("cargo:rustc-cfg=voice_base");
    }
}
