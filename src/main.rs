//! The `planish` binary: parse, call, exit status.

fn main() {}
