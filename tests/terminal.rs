//! The field session through a real terminal, and through pipes: keys in, screen or text out.

#[path = "terminal/pipes.rs"]
mod pipes;
#[path = "terminal/screens.rs"]
mod screens;
#[path = "terminal/tty.rs"]
mod tty;
