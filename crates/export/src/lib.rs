//! Pictures, field files and tables.
#![forbid(unsafe_code)]

mod error;
mod field;
mod picture;
mod table;
mod vtu;

pub use error::ExportError;
pub use field::Field;
pub use picture::{Colors, CurvePicture, Picture};
pub use table::{Table, format_interval, significant};
pub use vtu::VtuFile;
