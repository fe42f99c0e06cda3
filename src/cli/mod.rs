//! The command line: one file per command, exit status in one place.
