//! The acoustic part of a voice: the network, its feature settings and its table of phones.
//!
//! A base knows sounds and no words; graphs over it are built by `build`. The one that is shipped
//! is embedded in the program; another folder of the same layout can be named. It promises that a
//! base that loads has every file and a phone table that holds together. It leaves out how a base
//! is trained (`src/voice/lab`).

use std::{
    borrow::Cow,
    fs, io,
    path::{Path, PathBuf},
};

use super::build::phones::{PhoneTable, PhoneTableError};

/// The folder `HANDSFULL_BASE` may name in place of the embedded base.
pub const BASE_VARIABLE: &str = "HANDSFULL_BASE";

/// The files of a base, relative to its folder, besides `phones.txt`.
pub const FILES: [&str; 4] = [
    "am/final.mdl",
    "am/global_cmvn.stats",
    "conf/mfcc.conf",
    "conf/model.conf",
];

/// Why a base cannot be used.
#[derive(Debug, thiserror::Error)]
pub enum BaseError {
    /// A file is missing or unreadable.
    #[error("the voice's base lacks {}: {source}", path.display())]
    File {
        /// Which file.
        path: PathBuf,
        /// What the system said.
        source: io::Error,
    },
    /// The phone table does not hold together.
    #[error("the voice's base: phones.txt: {0}")]
    Phones(#[from] PhoneTableError),
    /// Built without an embedded base, and none was named.
    #[cfg(not(voice_base))]
    #[error("keypad only: this program was built without a voice (src/voice/base)")]
    None,
}

/// A base: what `FILES` hold, and the phones.
#[derive(Debug, Clone)]
pub struct Base {
    files: [Cow<'static, [u8]>; FILES.len()],
    phones: PhoneTable,
}

impl Base {
    /// The base that is embedded in the program.
    ///
    /// # Errors
    /// [`BaseError`] when the program was built without one.
    pub fn embedded() -> Result<Self, BaseError> {
        #[cfg(voice_base)]
        {
            Ok(Self {
                files: [
                    Cow::Borrowed(include_bytes!("base/am/final.mdl")),
                    Cow::Borrowed(include_bytes!("base/am/global_cmvn.stats")),
                    Cow::Borrowed(include_bytes!("base/conf/mfcc.conf")),
                    Cow::Borrowed(include_bytes!("base/conf/model.conf")),
                ],
                phones: include_str!("base/phones.txt").parse()?,
            })
        }
        #[cfg(not(voice_base))]
        Err(BaseError::None)
    }

    /// The base in a folder.
    ///
    /// # Errors
    /// [`BaseError`] when a file is missing or the phone table is wrong.
    pub fn read(folder: &Path) -> Result<Self, BaseError> {
        let file = |name: &str| {
            let path = folder.join(name);
            fs::read(&path).map_err(|source| BaseError::File { path, source })
        };
        let phones = String::from_utf8_lossy(&file("phones.txt")?).parse()?;
        let mut files = [const { Cow::Borrowed(&[] as &[u8]) }; FILES.len()];
        for (slot, name) in files.iter_mut().zip(FILES) {
            *slot = Cow::Owned(file(name)?);
        }
        Ok(Self { files, phones })
    }

    /// The named folder if there is one, else the embedded base.
    ///
    /// # Errors
    /// As [`Base::read`] and [`Base::embedded`].
    pub fn from(folder: Option<&Path>) -> Result<Self, BaseError> {
        folder.map_or_else(Self::embedded, Self::read)
    }

    /// Its phones.
    #[must_use]
    pub fn phones(&self) -> &PhoneTable {
        &self.phones
    }

    /// Its files with their names.
    pub fn files(&self) -> impl Iterator<Item = (&'static str, &[u8])> {
        FILES.into_iter().zip(self.files.iter().map(AsRef::as_ref))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_missing_folder_names_the_file_it_looked_for() {
        let error = Base::read(Path::new("no/such/base")).expect_err("there is none");
        assert!(error.to_string().contains("phones.txt"), "{error}");
    }

    #[test]
    fn the_committed_phone_table_holds_together() {
        let table: PhoneTable = include_str!("base/phones.txt").parse().expect("a table");
        assert_eq!(table.silence().id, 1);
        assert_eq!(table.len(), 158); // SIL, NSN and 39 CMUdict phones in four positions
    }
}
