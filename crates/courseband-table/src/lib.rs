//! Bytes of a table to observations and the problems found in it.
