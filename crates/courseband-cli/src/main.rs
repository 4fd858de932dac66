//! The native command `courseband`.
fn main() {}
