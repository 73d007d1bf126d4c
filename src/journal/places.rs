//! Where the files of a job lie: all beside the job file, all named after it.

use std::path::{Path, PathBuf};

const LOG: &str = ".log.toml";
const JOB: &str = ".toml";

/// The files of one job, from the path of the job file (`NAME.toml`) or of its log
/// (`NAME.log.toml`).
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Places {
    folder: PathBuf,
    name: String,
}

impl Places {
    /// The places for a job file or a log; whether anything is there is another question.
    #[must_use]
    pub fn of(path: &Path) -> Self {
        let file = path
            .file_name()
            .map(|name| name.to_string_lossy().into_owned())
            .unwrap_or_default();
        let name = file
            .strip_suffix(LOG)
            .or_else(|| file.strip_suffix(JOB))
            .unwrap_or(&file);
        Self {
            folder: path.parent().map(Path::to_path_buf).unwrap_or_default(),
            name: name.to_owned(),
        }
    }

    fn beside(&self, ending: &str) -> PathBuf {
        self.folder.join(format!("{}{ending}", self.name))
    }

    /// The folder all of it lies in, as a path that can be opened.
    #[must_use]
    pub fn folder(&self) -> &Path {
        if self.folder.as_os_str().is_empty() {
            Path::new(".")
        } else {
            &self.folder
        }
    }

    /// The job file: `NAME.toml`. The log of a join, `NAME.joined.log.toml`, has the job file of
    /// `NAME` unless it has its own.
    #[must_use]
    pub fn job(&self) -> PathBuf {
        let own = self.beside(JOB);
        match self.name.strip_suffix(".joined") {
            Some(name) if !own.exists() => self.folder.join(format!("{name}{JOB}")),
            _ => own,
        }
    }

    /// The log: `NAME.log.toml`.
    #[must_use]
    pub fn log(&self) -> PathBuf {
        self.beside(LOG)
    }

    /// The log of a join: `NAME.joined.log.toml`.
    #[must_use]
    pub fn joined(&self) -> PathBuf {
        let name = self.name.strip_suffix(".joined").unwrap_or(&self.name);
        self.folder.join(format!("{name}.joined{LOG}"))
    }

    /// The folder of utterance clips: `NAME.clips`.
    #[must_use]
    pub fn clips(&self) -> PathBuf {
        self.beside(".clips")
    }

    /// The lock, with its witness of the newest entry: `NAME.lock`.
    #[must_use]
    pub fn lock(&self) -> PathBuf {
        self.beside(".lock")
    }

    /// A damaged tail set aside: `NAME.log.damaged-N.toml`.
    #[must_use]
    pub fn damaged(&self, n: u32) -> PathBuf {
        self.beside(&format!(".log.damaged-{n}.toml"))
    }

    /// A schedule: `NAME.sheet.html`, `.csv`, `.json`.
    #[must_use]
    pub fn sheet(&self, ending: &str) -> PathBuf {
        self.beside(&format!(".sheet.{ending}"))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn job_and_log_lead_to_the_same_places() {
        let from_job = Places::of(Path::new("jobs/mill.toml"));
        let from_log = Places::of(Path::new("jobs/mill.log.toml"));
        assert_eq!(from_job, from_log);
        assert_eq!(from_job.log(), Path::new("jobs/mill.log.toml"));
        assert_eq!(from_job.job(), Path::new("jobs/mill.toml"));
        assert_eq!(
            from_job.damaged(2),
            Path::new("jobs/mill.log.damaged-2.toml")
        );
    }

    #[test]
    fn a_bare_name_lies_in_the_present_folder() {
        assert_eq!(Places::of(Path::new("mill.toml")).folder(), Path::new("."));
    }

    #[test]
    fn a_joined_log_belongs_to_the_job_it_was_joined_from() {
        let joined = Places::of(Path::new("mill.toml")).joined();
        assert_eq!(joined, Path::new("mill.joined.log.toml"));
        let places = Places::of(&joined);
        assert_eq!(places.job(), Path::new("mill.toml"));
        assert_eq!(places.joined(), joined);
    }
}
