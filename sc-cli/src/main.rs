//! The `prevertex` program.
fn main() {}
