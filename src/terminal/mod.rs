//! Keys in, small screen out.
//!
//! `keymap` names keys; `screen` draws lines on a terminal that can move its cursor; `plain` prints
//! a transcript where it cannot; `keyboard` waits for keys, signals and what the ear sends;
//! `script` takes lines of keys from a pipe. It leaves out what keys mean and what is shown: the
//! session decides both.

pub mod keyboard;
pub mod keymap;
pub mod lines;
pub mod plain;
pub mod screen;
pub mod script;
