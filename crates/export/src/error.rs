//! What can be wrong with a request for a picture, a file or a table.

use std::path::PathBuf;

/// Everything that can go wrong in this crate, with the place and the mend.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum ExportError {
    /// A file could not be written.
    #[error("cannot write {path:?}: {reason}; choose a folder that exists and may be written to")]
    Io {
        /// The file.
        path: PathBuf,
        /// What the operating system said.
        reason: String,
    },
    /// An array does not fit the mesh.
    #[error("{what} has {given} values, but this mesh needs {expected}; give the array of this very mesh")]
    WrongLength {
        /// The array.
        what: String,
        /// The length it has.
        given: usize,
        /// The length it should have.
        expected: usize,
    },
    /// A value is infinite or not a number.
    #[error("{name} is not finite in cell {cell} near {place:?}; mend the computation that gave it")]
    NotFinite {
        /// The field or array.
        name: String,
        /// The number of the cell.
        cell: usize,
        /// Coordinates of the value's node or of the middle of the cell, one for each dimension.
        place: Vec<f64>,
    },
    /// An element order that cannot be shown.
    #[error(
        "field {name} has order {order}, but orders from 1 to {highest} can be shown; interpolate it to one of these"
    )]
    Order {
        /// The field.
        name: String,
        /// The order it has.
        order: usize,
        /// The highest order that can be shown.
        highest: usize,
    },
    /// Coordinates or values so large, or so close together, that they cannot be scaled to a picture.
    #[error("{what} spans {low:?} to {high:?}, which cannot be drawn to scale; choose another unit")]
    Extent {
        /// The mesh, or the name of the field.
        what: String,
        /// Lowest coordinates, or the smallest value.
        low: Vec<f64>,
        /// Highest coordinates, or the largest value.
        high: Vec<f64>,
    },
    /// A marker outside of the picture, or at coordinates that are not a number.
    #[error("marker {text:?} is at {place:?}, outside of the picture; give coordinates inside the box around the mesh")]
    Marker {
        /// The text of the marker.
        text: String,
        /// The coordinates given.
        place: Vec<f64>,
    },
    /// The raster image inside a large picture could not be encoded.
    #[error("the raster of the picture could not be encoded: {reason}; draw a part of the mesh or a coarser one")]
    Raster {
        /// What the encoder said.
        reason: String,
    },
}

impl ExportError {
    /// Writes a file, and names it when that fails.
    pub(crate) fn write(path: &std::path::Path, content: &[u8]) -> Result<(), Self> {
        std::fs::write(path, content).map_err(|e| Self::Io { path: path.to_path_buf(), reason: e.to_string() })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_missing_folder_is_named() {
        let path = std::path::Path::new("/no/such/folder/a.svg");
        let error = ExportError::write(path, b"x").unwrap_err();
        assert!(matches!(&error, ExportError::Io { path: p, .. } if p == path));
        assert!(error.to_string().contains("choose a folder"));
    }
}
