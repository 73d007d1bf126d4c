//! The recogniser library, looked for and loaded when the program first needs it.
//!
//! The `vosk` crate declares C functions and expects the linker to find them. Here those very
//! symbols are defined by us and pass each call on to `libvosk.so`, which is opened at run time:
//! the program builds and starts on a machine that has no such library and then works from the
//! keypad. It promises that no call reaches the library before [`load`] has found every function.
//! It leaves out fetching the library (`models-download.sh`) and the voices themselves.
#![allow(unsafe_code)] // calling C is what this file is for

use std::{
    env,
    ffi::{OsString, c_char, c_int, c_short, c_void},
    path::{Path, PathBuf},
    sync::OnceLock,
};

use libloading::Library;

/// Why there is no recogniser.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum LinkError {
    /// Nowhere to be found.
    #[error(
        "keypad only: libvosk.so was not found (run ./models-download.sh, or set HANDSFULL_LIBVOSK)"
    )]
    Missing,
    /// Found, but it cannot be used here.
    #[error("keypad only: {} cannot be used: {reason}", path.display())]
    Unusable {
        /// Which file.
        path: PathBuf,
        /// What the loader said.
        reason: String,
    },
}

/// Quieter than the quietest level the crate offers: nothing may write over the prompt.
const SILENT: c_int = -100;

macro_rules! passed_on {
    ($($(#[$doc:meta])* fn $name:ident($($arg:ident: $kind:ty),*) $(-> $back:ty)?;)*) => {
        /// The functions of the open library.
        #[allow(missing_docs)]
        struct Functions {
            $($name: unsafe extern "C" fn($($kind),*) $(-> $back)?,)*
            // The functions live as long as the library they came from.
            _library: Library,
        }

        impl Functions {
            fn of(library: Library) -> Result<Self, libloading::Error> {
                // SAFETY: the signatures are those of the library's published header, as the
                // vosk-sys crate declares them too.
                unsafe {
                    Ok(Self {
                        $($name: *library.get(stringify!($name).as_bytes())?,)*
                        _library: library,
                    })
                }
            }
        }

        $(
            $(#[$doc])*
            ///
            /// # Safety
            /// As the library's header says; before [`load`] succeeded the process aborts.
            #[unsafe(no_mangle)]
            pub unsafe extern "C" fn $name($($arg: $kind),*) $(-> $back)? {
                // SAFETY: the caller keeps the header's contract.
                unsafe { (functions().$name)($($arg),*) }
            }
        )*
    };
}

passed_on! {
    /// Reads a model folder.
    fn vosk_model_new(path: *const c_char) -> *mut c_void;
    /// Gives a model back.
    fn vosk_model_free(model: *mut c_void);
    /// Number of a word, or -1.
    fn vosk_model_find_word(model: *mut c_void, word: *const c_char) -> c_int;
    /// Reads a speaker model (not used here, but the crate refers to it).
    fn vosk_spk_model_new(path: *const c_char) -> *mut c_void;
    /// Gives a speaker model back.
    fn vosk_spk_model_free(model: *mut c_void);
    /// A recogniser over the model's own graph.
    fn vosk_recognizer_new(model: *mut c_void, rate: f32) -> *mut c_void;
    /// A recogniser with a speaker model.
    fn vosk_recognizer_new_spk(model: *mut c_void, rate: f32, speaker: *mut c_void) -> *mut c_void;
    /// A recogniser over a list of phrases.
    fn vosk_recognizer_new_grm(model: *mut c_void, rate: f32, list: *const c_char) -> *mut c_void;
    /// Adds a speaker model.
    fn vosk_recognizer_set_spk_model(recogniser: *mut c_void, speaker: *mut c_void);
    /// How many hypotheses to return.
    fn vosk_recognizer_set_max_alternatives(recogniser: *mut c_void, most: c_int);
    /// Whether word times are returned.
    fn vosk_recognizer_set_words(recogniser: *mut c_void, on: c_int);
    /// Whether partial results carry word times.
    fn vosk_recognizer_set_partial_words(recogniser: *mut c_void, on: c_int);
    /// Whether results come as NLSML.
    fn vosk_recognizer_set_nlsml(recogniser: *mut c_void, on: c_int);
    /// Takes sound as bytes.
    fn vosk_recognizer_accept_waveform(recogniser: *mut c_void, data: *const c_char, length: c_int) -> c_int;
    /// Takes sound as 16-bit samples.
    fn vosk_recognizer_accept_waveform_s(recogniser: *mut c_void, data: *const c_short, length: c_int) -> c_int;
    /// Takes sound as floats.
    fn vosk_recognizer_accept_waveform_f(recogniser: *mut c_void, data: *const f32, length: c_int) -> c_int;
    /// The result after an endpoint.
    fn vosk_recognizer_result(recogniser: *mut c_void) -> *const c_char;
    /// What it looks like so far.
    fn vosk_recognizer_partial_result(recogniser: *mut c_void) -> *const c_char;
    /// The result of all sound taken.
    fn vosk_recognizer_final_result(recogniser: *mut c_void) -> *const c_char;
    /// Starts afresh.
    fn vosk_recognizer_reset(recogniser: *mut c_void);
    /// Gives a recogniser back.
    fn vosk_recognizer_free(recogniser: *mut c_void);
    /// How much the library writes to standard error.
    fn vosk_set_log_level(level: c_int);
}

static FUNCTIONS: OnceLock<Result<Functions, LinkError>> = OnceLock::new();

fn functions() -> &'static Functions {
    match FUNCTIONS.get() {
        Some(Ok(functions)) => functions,
        // Only code that went round `load` comes here; unwinding through C is not defined.
        _ => {
            eprintln!("handsfull: the recogniser was called before its library was loaded");
            std::process::abort()
        }
    }
}

/// Makes the recogniser usable: finds and opens the library once, silences it, and from then on
/// gives the same answer.
///
/// # Errors
/// [`LinkError`], one line that begins with "keypad only".
pub fn load() -> Result<(), LinkError> {
    let opened = FUNCTIONS.get_or_init(|| {
        one_heap();
        let executable = env::current_exe().ok();
        let current = env::current_dir().ok();
        open_first(&places(
            env::var_os("HANDSFULL_LIBVOSK"),
            executable.as_deref(),
            current.as_deref(),
            env::var_os("XDG_DATA_HOME"),
            env::var_os("HOME"),
        ))
    });
    match opened {
        Ok(functions) => {
            // SAFETY: takes a number, keeps nothing.
            unsafe { (functions.vosk_set_log_level)(SILENT) };
            Ok(())
        }
        Err(error) => Err(error.clone()),
    }
}

/// Lets all threads share one heap. The library allocates much on threads that come and go, and the
/// C library would give each a heap of its own and keep it: 135 MB in place of 58 after 28
/// utterances, and no faster.
fn one_heap() {
    // SAFETY: sets a number inside the allocator; where it is refused, nothing changes.
    #[cfg(all(target_os = "linux", target_env = "gnu"))]
    unsafe {
        libc::mallopt(libc::M_ARENA_MAX, 1);
    }
}

/// Where the library may stand, the first that exists wins: the path the user named (and only
/// that), beside the program, `models/` in any folder above the program or the current folder,
/// the user's data folder, and last whatever the system's loader knows by that name.
fn places(
    named: Option<OsString>,
    executable: Option<&Path>,
    current: Option<&Path>,
    data_home: Option<OsString>,
    home: Option<OsString>,
) -> Vec<PathBuf> {
    const FILE: &str = "libvosk.so";
    if let Some(path) = named.filter(|p| !p.is_empty()) {
        return vec![path.into()];
    }
    let mut found = Vec::new();
    let beside = executable.and_then(Path::parent);
    found.extend(beside.map(|folder| folder.join(FILE)));
    for start in [beside, current].into_iter().flatten() {
        found.extend(start.ancestors().map(|up| up.join("models").join(FILE)));
    }
    let data = data_home
        .filter(|p| !p.is_empty())
        .map(PathBuf::from)
        .or_else(|| home.map(|h| PathBuf::from(h).join(".local/share")));
    found.extend(data.map(|folder| folder.join("handsfull").join(FILE)));
    found.retain(|path| path.is_file());
    found.push(FILE.into());
    found
}

/// Opens the first place that works. A file that exists and cannot be used is told about rather
/// than passed over in silence, unless a later place works.
fn open_first(places: &[PathBuf]) -> Result<Functions, LinkError> {
    let mut first_trouble = LinkError::Missing;
    for path in places {
        // SAFETY: the library's initialisers are those of libvosk, as fetched by its digest.
        let opened = unsafe { Library::new(path) }.and_then(Functions::of);
        match opened {
            Ok(functions) => return Ok(functions),
            Err(error) if first_trouble == LinkError::Missing && path.components().count() > 1 => {
                first_trouble = LinkError::Unusable {
                    path: path.clone(),
                    reason: error.to_string(),
                };
            }
            Err(_) => {}
        }
    }
    Err(first_trouble)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_named_library_is_the_only_one_tried() {
        let all = places(Some("/no/such/lib.so".into()), None, None, None, None);
        assert_eq!(all, [PathBuf::from("/no/such/lib.so")]);
        let error = open_first(&all).err().expect("it does not exist");
        assert!(
            error
                .to_string()
                .starts_with("keypad only: /no/such/lib.so"),
            "{error}"
        );
    }

    #[test]
    fn the_models_folder_above_the_program_is_found() {
        let root = tempfile::tempdir().expect("a folder");
        let models = root.path().join("models");
        std::fs::create_dir_all(&models).expect("models");
        std::fs::write(models.join("libvosk.so"), b"not a library").expect("a file");
        let program = root.path().join("target/release/handsfull");
        let all = places(None, Some(&program), None, None, None);
        assert_eq!(all.first(), Some(&models.join("libvosk.so")));
        let error = open_first(&all[..1]).err().expect("it is no library");
        assert!(matches!(error, LinkError::Unusable { .. }), "{error}");
    }

    #[test]
    fn nothing_anywhere_is_one_line() {
        let error = open_first(&[]).err().expect("there is none");
        assert_eq!(error, LinkError::Missing);
        assert_eq!(error.to_string().lines().count(), 1);
    }
}
