//! The file under a journal, behind a trait so that a failing disk can be put in its place.

use std::{
    fs::File,
    io::{self, Seek, SeekFrom, Write},
};

/// What a journal asks of its file.
pub(super) trait Medium: Send + std::fmt::Debug {
    /// Writes at the end, all or as much as could be written before the error.
    fn append(&mut self, bytes: &[u8]) -> io::Result<()>;
    /// Brings what was written to the medium itself.
    fn sync(&mut self) -> io::Result<()>;
    /// Cuts the file to `length` bytes.
    fn cut(&mut self, length: u64) -> io::Result<()>;
    /// How long the file is now.
    fn length(&mut self) -> io::Result<u64>;
}

impl Medium for File {
    fn append(&mut self, bytes: &[u8]) -> io::Result<()> {
        self.seek(SeekFrom::End(0))?;
        self.write_all(bytes)
    }

    fn sync(&mut self) -> io::Result<()> {
        self.sync_data()
    }

    fn cut(&mut self, length: u64) -> io::Result<()> {
        self.set_len(length)?;
        self.sync_all()
    }

    fn length(&mut self) -> io::Result<u64> {
        Ok(self.metadata()?.len())
    }
}
