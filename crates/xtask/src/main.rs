//! What the README commands do.
fn main() {}
