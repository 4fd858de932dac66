//! Findings to a description of strips, then to any plotters backend.
