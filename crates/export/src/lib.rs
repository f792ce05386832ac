//! Pictures, field files and tables.
#![forbid(unsafe_code)]

mod error;
mod field;
mod table;

pub use error::ExportError;
pub use field::Field;
pub use table::{Table, format_interval, significant};
