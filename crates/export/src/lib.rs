//! Pictures, field files and tables: what an engineer puts into a report or hands to the next program.
//!
//! This crate takes a mesh and plain arrays, wherever they come from. It does not know how the problem was stated.
//!
//! ```
//! use hypercircle_export::{Field, Picture, Table, VtuFile, format_interval};
//! use hypercircle_mesh::Rectangle;
//! let plate = Rectangle::new([0.0, 0.0], [2.0, 1.0], [16, 8]).mesh()?;
//! // A field is its values at the nodes of each cell; here those of a formula.
//! let field = Field::of_function(&plate, "temperature", "°C", 2, |x| 20.0 + x[0] * x[1]);
//! let flux: Vec<[f64; 2]> = plate.cells().map(|c| plate.cell_center(c)).map(|[x, y]| [-y, -x]).collect();
//!
//! let svg = Picture::of(&plate).title("Plate").length_unit("m").field(&field).contours(10).arrows(&flux, "W/m²");
//! assert!(svg.to_svg()?.contains("temperature, °C"));
//!
//! let file = VtuFile::of(&plate).field(&field).cell_vectors("heat flux, W/m²", &flux);
//! assert!(file.to_xml()?.contains("UnstructuredGrid"));
//!
//! let table = Table::new(&["quantity", "value"]).row(["heat flow", &format_interval(1.0, 0.9991, 1.0009, "W/m")]);
//! assert!(table.to_string().contains("1.0000 [0.9991, 1.0009] W/m"));
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```
//!
//! - [`Field`]: values at the nodes of each cell, of any order up to 12, with name and unit;
//! - [`Picture`] of a triangle mesh and [`CurvePicture`] of an interval, as SVG without any need of installed fonts;
//! - [`VtuFile`]: fields, cell values and vectors in an open format that general-purpose viewers read;
//! - [`Table`], [`format_interval`], [`significant`]: numbers as plain text, aligned or separated by commas or tabs;
//! - [`ExportError`]: what can be wrong, where, and how to mend it.
#![forbid(unsafe_code)]

mod error;
mod field;
mod nodes;
mod picture;
mod table;
mod vtu;

pub use error::ExportError;
pub use field::Field;
pub use picture::{Colors, CurvePicture, Picture};
pub use table::{Table, format_interval, significant};
pub use vtu::VtuFile;
