//! The `braidwise` command.

fn main() {}
