//! The settings file: `handsfull/settings.toml` in the user's configuration folder.
//!
//! Promises: a missing file means the defaults; an unknown or wrong setting is an error that names
//! it, never a silent default. It leaves out what the settings do.
//!
//! ```toml
//! volume = 60            # 0 to 100
//! text-only = false      # no sound out
//! keep-clips = true      # utterances beside the log
//! hold-to-talk = false   # a key opens the microphone for one utterance
//!
//! [keys]                 # terminal keys that stand for a key of the tool
//! enter = ["Enter", "F1"]
//! talk = ["Space"]
//! ```

use std::{collections::BTreeMap, env, fs, path::PathBuf};

use serde::Deserialize;

use crate::{
    session::{Key, Settings},
    terminal::keymap::{Keymap, KeymapError},
};

/// What can be wrong with the settings file.
#[derive(Debug, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum SettingsError {
    #[error("{path}: cannot be read: {source}", path = path.display())]
    Unreadable {
        path: PathBuf,
        source: std::io::Error,
    },
    #[error("{path}: {source}", path = path.display())]
    NotSettings {
        path: PathBuf,
        source: Box<toml::de::Error>,
    },
    #[error("{path}: volume = {volume} is not 0 to 100", path = path.display())]
    Volume { path: PathBuf, volume: i64 },
    #[error("{path}: {source}", path = path.display())]
    Keys { path: PathBuf, source: KeymapError },
}

#[derive(Debug, Default, Deserialize)]
#[serde(rename_all = "kebab-case", deny_unknown_fields)]
struct File {
    volume: Option<i64>,
    text_only: Option<bool>,
    keep_clips: Option<bool>,
    hold_to_talk: Option<bool>,
    #[serde(default)]
    keys: BTreeMap<String, Vec<String>>,
}

/// Where the settings file lies, by the XDG base directory rules.
#[must_use]
pub fn path() -> Option<PathBuf> {
    let base = env::var_os("XDG_CONFIG_HOME")
        .map(PathBuf::from)
        .filter(|p| p.is_absolute())
        .or_else(|| env::var_os("HOME").map(|home| PathBuf::from(home).join(".config")))?;
    Some(base.join("handsfull").join("settings.toml"))
}

/// Reads the settings file, or gives the defaults when there is none.
///
/// # Errors
/// [`SettingsError`] when the file is there and cannot be used.
pub fn load() -> Result<(Settings, Keymap), SettingsError> {
    let Some(path) = path() else {
        return Ok((Settings::default(), Keymap::default()));
    };
    match fs::read_to_string(&path) {
        Ok(text) => parse(&text, path),
        Err(e) if e.kind() == std::io::ErrorKind::NotFound => {
            Ok((Settings::default(), Keymap::default()))
        }
        Err(source) => Err(SettingsError::Unreadable { path, source }),
    }
}

fn parse(text: &str, path: PathBuf) -> Result<(Settings, Keymap), SettingsError> {
    let file: File = toml::from_str(text).map_err(|source| SettingsError::NotSettings {
        path: path.clone(),
        source: Box::new(source),
    })?;
    let mut settings = Settings::default();
    if let Some(volume) = file.volume {
        settings.volume =
            u8::try_from(volume)
                .ok()
                .filter(|v| *v <= 100)
                .ok_or(SettingsError::Volume {
                    path: path.clone(),
                    volume,
                })?;
    }
    settings.text_only = file.text_only.unwrap_or(settings.text_only);
    settings.keep_clips = file.keep_clips.unwrap_or(settings.keep_clips);
    settings.hold_to_talk = file.hold_to_talk.unwrap_or(settings.hold_to_talk);
    let mut keymap = Keymap::default();
    for (name, strokes) in &file.keys {
        let wrong = |source| SettingsError::Keys {
            path: path.clone(),
            source,
        };
        let key: Key = Keymap::key_named(name).map_err(wrong)?;
        for stroke in strokes {
            keymap.add(stroke, key).map_err(wrong)?;
        }
    }
    Ok((settings, keymap))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn refused(text: &str, part: &str) {
        let error = parse(text, PathBuf::from("settings.toml")).expect_err(text);
        let message = error.to_string();
        assert!(message.contains(part), "{message}");
    }

    #[test]
    fn an_empty_file_means_the_defaults() {
        let (settings, _) = parse("", PathBuf::new()).expect("settings");
        assert_eq!(settings, Settings::default());
    }

    #[test]
    fn settings_are_taken_from_the_file() {
        let text = "volume = 30\ntext-only = true\n[keys]\nenter = [\"F1\"]";
        let (settings, keymap) = parse(text, PathBuf::new()).expect("settings");
        assert_eq!((settings.volume, settings.text_only), (30, true));
        assert_eq!(keymap.named("F1"), Some(Key::Enter));
    }

    #[test]
    fn wrong_settings_are_named() {
        refused("volume = 101", "volume = 101 is not 0 to 100");
        refused("loudness = 3", "loudness");
        refused("[keys]\nenter = [\"F99\"]", "F99");
        refused("[keys]\nreturn = [\"F1\"]", "return");
    }
}
