//! Tables and what is read from them.

mod cases;
mod common;
mod hostile;
mod offers;
mod workbooks;
