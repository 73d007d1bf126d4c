//! One broken file for every mistake the loader knows, each provoking its message.
