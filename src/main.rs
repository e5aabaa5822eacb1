//! The program's entry: parse arguments, call a face, turn a failure into an exit code.

fn main() {}
