//! A pseudo-terminal with the field session in it, and what its screen shows.

use std::{
    io::{Read, Write},
    path::{Path, PathBuf},
    sync::{Arc, Mutex},
    thread,
    time::{Duration, Instant},
};

use portable_pty::{Child, CommandBuilder, MasterPty, PtySize, native_pty_system};

/// How long a screen may take on a loaded machine before the test fails.
const PATIENCE: Duration = Duration::from_secs(20);

/// A job folder of its own, with the pottery's ring in it.
pub fn job_folder() -> tempfile::TempDir {
    let folder = tempfile::tempdir().expect("a folder");
    let text = include_str!("../sessions/jobs/radial.toml");
    std::fs::write(folder.path().join("shed.toml"), text).expect("a job file");
    folder
}

/// The log of that job, or nothing yet.
pub fn log(folder: &Path) -> String {
    std::fs::read_to_string(folder.join("shed.log.toml")).unwrap_or_default()
}

/// A session in a terminal.
pub struct Tty {
    child: Box<dyn Child + Send + Sync>,
    master: Box<dyn MasterPty + Send>,
    keys: Box<dyn Write + Send>,
    shown: Arc<Mutex<(vt100::Parser, Vec<u8>)>>,
}

impl Tty {
    /// Starts the field session of the job in that folder.
    pub fn start(folder: &Path, columns: u16, rows: u16, env: &[(&str, &str)]) -> Self {
        let size = |rows, cols| PtySize {
            rows,
            cols,
            pixel_width: 0,
            pixel_height: 0,
        };
        let pair = native_pty_system()
            .openpty(size(rows, columns))
            .expect("a terminal");
        let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_handsfull"));
        let job: PathBuf = folder.join("shed.toml");
        command.args(["field", "--keypad-only"]);
        command.arg(&job);
        command.env_clear();
        command.env("TERM", "xterm-256color");
        command.env("HOME", folder);
        for (name, value) in env {
            command.env(name, value);
        }
        let child = pair
            .slave
            .spawn_command(command)
            .expect("the program starts");
        drop(pair.slave);
        let mut out = pair.master.try_clone_reader().expect("a reader");
        let keys = pair.master.take_writer().expect("a writer");
        let shown = Arc::new(Mutex::new((
            vt100::Parser::new(rows, columns, 0),
            Vec::new(),
        )));
        let sink = Arc::clone(&shown);
        thread::spawn(move || {
            let mut buffer = [0; 4096];
            while let Ok(n @ 1..) = out.read(&mut buffer) {
                let mut sink = sink.lock().expect("no panic in between");
                sink.0.process(&buffer[..n]);
                sink.1.extend_from_slice(&buffer[..n]);
            }
        });
        Self {
            child,
            master: pair.master,
            keys,
            shown,
        }
    }

    /// Presses keys.
    pub fn press(&mut self, keys: &str) {
        self.keys
            .write_all(keys.as_bytes())
            .expect("the terminal takes keys");
        self.keys.flush().expect("the terminal takes keys");
    }

    /// What the screen shows now.
    pub fn screen(&self) -> String {
        let shown = self.shown.lock().expect("no panic in between");
        shown.0.screen().contents()
    }

    /// Every byte so far.
    pub fn bytes(&self) -> Vec<u8> {
        self.shown.lock().expect("no panic in between").1.clone()
    }

    /// Waits until the screen shows a text; gives how long that took.
    #[track_caller]
    pub fn wait_for(&self, text: &str) -> Duration {
        self.wait_until(text, |screen| screen.contains(text))
    }

    #[track_caller]
    pub fn wait_until(&self, what: &str, done: impl Fn(&str) -> bool) -> Duration {
        let began = Instant::now();
        loop {
            if done(&self.screen()) {
                return began.elapsed();
            }
            assert!(
                began.elapsed() < PATIENCE,
                "no `{what}` on the screen:\n{}",
                self.screen()
            );
            thread::sleep(Duration::from_millis(2));
        }
    }

    pub fn resize(&mut self, columns: u16, rows: u16) {
        self.shown
            .lock()
            .expect("no panic in between")
            .0
            .screen_mut()
            .set_size(rows, columns);
        self.master
            .resize(PtySize {
                rows,
                cols: columns,
                pixel_width: 0,
                pixel_height: 0,
            })
            .expect("a terminal can be resized");
    }

    pub fn signal(&self, name: &str) {
        let pid = self
            .child
            .process_id()
            .expect("a running child")
            .to_string();
        let done = std::process::Command::new("kill")
            .args([format!("-{name}"), pid])
            .status()
            .expect("kill runs");
        assert!(done.success());
    }

    /// A session whose controlling terminal is another one: a hang-up of this one sends it no
    /// signal, only its reader can notice.
    pub fn without_signal(folder: &Path) -> Orphan {
        let pair = native_pty_system()
            .openpty(PtySize {
                rows: 15,
                cols: 40,
                pixel_width: 0,
                pixel_height: 0,
            })
            .expect("a terminal");
        let name = pair.master.tty_name().expect("a terminal has a name");
        let slave = || {
            let opened = std::fs::OpenOptions::new()
                .read(true)
                .write(true)
                .open(&name);
            std::process::Stdio::from(opened.expect("the terminal opens"))
        };
        let child = std::process::Command::new(env!("CARGO_BIN_EXE_handsfull"))
            .args(["field", "--keypad-only"])
            .arg(folder.join("shed.toml"))
            .env_clear()
            .env("TERM", "xterm-256color")
            .env("HOME", folder)
            .stdin(slave())
            .stdout(slave())
            .stderr(slave())
            .spawn()
            .expect("the program starts");
        Orphan {
            child,
            _slave: pair.slave,
            master: Some(pair.master),
        }
    }

    /// Waits for the end; gives the exit code.
    pub fn end(mut self) -> u32 {
        let began = Instant::now();
        loop {
            if let Some(status) = self.child.try_wait().expect("a child") {
                return status.exit_code();
            }
            assert!(
                began.elapsed() < PATIENCE,
                "it does not end:\n{}",
                self.screen()
            );
            thread::sleep(Duration::from_millis(5));
        }
    }

    /// Enter, at a finger's pace, until the screen shows a text.
    #[track_caller]
    pub fn enter_until(&mut self, text: &str) {
        for _ in 0..60 {
            let before = self.screen();
            if before.contains(text) {
                return;
            }
            let key = if before.contains("1 unit, 2 live source") {
                "1"
            } else {
                "\r"
            };
            // Faster than a finger would count as the key held down.
            thread::sleep(Duration::from_millis(160));
            self.press(key);
            self.wait_until("a change", |now| now != before);
        }
        panic!("no `{text}`:\n{}", self.screen());
    }
}

/// A session at a terminal that is about to go away.
pub struct Orphan {
    child: std::process::Child,
    _slave: Box<dyn portable_pty::SlavePty + Send>,
    master: Option<Box<dyn MasterPty + Send>>,
}

impl Orphan {
    /// Reads until the terminal was sent a text; no copy of its other end stays behind.
    pub fn wait_for(&self, text: &str) {
        use std::os::fd::BorrowedFd;
        let master = self.master.as_ref().expect("not hung up yet");
        let raw = master.as_raw_fd().expect("a file");
        // SAFETY: the master lives until `hang_up`, which takes the whole session.
        #[allow(unsafe_code)]
        let fd = unsafe { BorrowedFd::borrow_raw(raw) };
        let (mut seen, mut buffer) = (Vec::new(), [0; 4096]);
        let began = Instant::now();
        while !String::from_utf8_lossy(&seen).contains(text) {
            assert!(began.elapsed() < PATIENCE, "no `{text}`");
            let n = rustix::io::read(fd, &mut buffer).expect("the terminal can be read");
            seen.extend_from_slice(&buffer[..n]);
        }
    }

    /// The terminal goes away; gives the exit code and the processor time used since, in ticks of
    /// a hundredth of a second.
    pub fn hang_up(mut self) -> (Option<i32>, u64) {
        let pid = self.child.id();
        let before = ticks(pid).unwrap_or(0);
        self.master = None;
        let began = Instant::now();
        let mut used = 0;
        loop {
            used = ticks(pid).map_or(used, |now| now.saturating_sub(before).max(used));
            if let Some(status) = self.child.try_wait().expect("a child") {
                return (status.code(), used);
            }
            if began.elapsed() > PATIENCE {
                let _ = self.child.kill();
                panic!("it goes on without a terminal, {used} ticks of the processor later");
            }
            thread::sleep(Duration::from_millis(10));
        }
    }
}

/// User and system time of a process.
fn ticks(pid: u32) -> Option<u64> {
    let stat = std::fs::read_to_string(format!("/proc/{pid}/stat")).ok()?;
    let mut fields = stat.rsplit_once(')')?.1.split_whitespace().skip(11);
    Some(fields.next()?.parse::<u64>().ok()? + fields.next()?.parse::<u64>().ok()?)
}
