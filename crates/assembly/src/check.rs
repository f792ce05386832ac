//! Checks of coefficient values, with the place in the error.

use hypercircle_mesh::Mesh;

use crate::{AssemblyError, Place, Tensor};

/// A conductivity must be finite and positive definite.
///
/// # Errors
/// [`AssemblyError::NotFinite`] or [`AssemblyError::NotPositiveDefinite`].
#[inline]
pub fn conductivity<const D: usize>(mesh: &Mesh<D>, at: &Place<D>, a: &Tensor<D>) -> Result<(), AssemblyError> {
    let smallest = a.smallest_eigenvalue();
    if smallest > 0.0 && a.is_finite() {
        return Ok(());
    }
    let region = mesh.region_name(at.region).to_owned();
    Err(match a.entries().iter().flatten().find(|v| !v.is_finite()) {
        Some(value) => AssemblyError::NotFinite { what: "conductivity", at: at.x.to_vec(), region, value: *value },
        None => AssemblyError::NotPositiveDefinite { at: at.x.to_vec(), region, smallest },
    })
}

/// A source, an inflow or a prescribed value must be finite.
///
/// # Errors
/// [`AssemblyError::NotFinite`].
#[inline]
pub fn finite<const D: usize>(
    mesh: &Mesh<D>,
    what: &'static str,
    at: &Place<D>,
    value: f64,
) -> Result<(), AssemblyError> {
    if value.is_finite() {
        return Ok(());
    }
    let region = mesh.region_name(at.region).to_owned();
    Err(AssemblyError::NotFinite { what, at: at.x.to_vec(), region, value })
}

/// A reaction or film coefficient must be finite and not negative.
///
/// # Errors
/// [`AssemblyError::NotFinite`] or [`AssemblyError::Negative`].
#[inline]
pub fn not_negative<const D: usize>(
    mesh: &Mesh<D>,
    what: &'static str,
    at: &Place<D>,
    value: f64,
) -> Result<(), AssemblyError> {
    finite(mesh, what, at, value)?;
    if value >= 0.0 {
        return Ok(());
    }
    let region = mesh.region_name(at.region).to_owned();
    Err(AssemblyError::Negative { what, at: at.x.to_vec(), region, value })
}
