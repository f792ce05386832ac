//! A coefficient is a value at a place.

use std::fmt;
use std::sync::Arc;

use hypercircle_mesh::{CellId, Mesh, RegionId};

use crate::{AssemblyError, Tensor};

/// Where a coefficient is asked for: coordinates, and the region and cell they lie in.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Place<const D: usize> {
    /// Coordinates in the units of the mesh.
    pub x: [f64; D],
    /// The region of the cell.
    pub region: RegionId,
    /// The cell.
    pub cell: CellId,
}

/// A value at a place: conductivity, source, film coefficient, prescribed temperature, …
///
/// Numbers, [`Tensor`]s, closures of a [`Place`], [`PerRegion`] tables and types of your own are coefficients.
///
/// Contract: the same place always gives the same value, whoever asks and in whatever order; several threads may ask
/// at once.
///
/// ```
/// use hypercircle_assembly::{Coefficient, Place};
/// use hypercircle_mesh::{CellId, RegionId};
/// let at = Place { x: [0.5, 2.0], region: RegionId(0), cell: CellId(0) };
/// let rising = |at: &Place<2>| 1.0 + at.x[1];
/// assert_eq!(rising.at(&at), 3.0);
/// assert_eq!(Coefficient::<2>::constant_in(&0.77, RegionId(0)), Some(0.77));
/// ```
#[diagnostic::on_unimplemented(
    message = "`{Self}` is no coefficient in {D} dimension(s)",
    note = "use an f64, a Tensor, a PerRegion table, or a closure with the argument written out, such as `|at: &Place<2>| at.x[0]`"
)]
pub trait Coefficient<const D: usize>: Send + Sync {
    /// What the coefficient gives: `f64` or [`Tensor`].
    type Value: Clone;

    /// The value at a place.
    fn at(&self, place: &Place<D>) -> Self::Value;

    /// The values at many places.
    fn fill(&self, places: &[Place<D>], values: &mut [Self::Value]) {
        for (value, place) in values.iter_mut().zip(places) {
            *value = self.at(place);
        }
    }

    /// The value in a region if it is known to be the same everywhere there: lets kernels use closed forms and
    /// the error bound drop its proviso about quadrature.
    fn constant_in(&self, _region: RegionId) -> Option<Self::Value> {
        None
    }
}

impl<const D: usize> Coefficient<D> for f64 {
    type Value = Self;
    fn at(&self, _place: &Place<D>) -> Self {
        *self
    }
    fn constant_in(&self, _region: RegionId) -> Option<Self> {
        Some(*self)
    }
}

impl<const D: usize> Coefficient<D> for Tensor<D> {
    type Value = Self;
    fn at(&self, _place: &Place<D>) -> Self {
        *self
    }
    fn constant_in(&self, _region: RegionId) -> Option<Self> {
        Some(*self)
    }
}

impl<const D: usize, F, V> Coefficient<D> for F
where
    F: Fn(&Place<D>) -> V + Send + Sync,
    V: Clone,
{
    type Value = V;
    fn at(&self, place: &Place<D>) -> V {
        self(place)
    }
}

/// A scalar coefficient, shared.
pub type Scalar<const D: usize> = Arc<dyn Coefficient<D, Value = f64>>;
/// A tensor coefficient, shared.
pub type Tensorial<const D: usize> = Arc<dyn Coefficient<D, Value = Tensor<D>>>;

/// Turns a scalar or tensor coefficient into a tensor one.
///
/// ```
/// use hypercircle_assembly::{tensorial, Tensor};
/// use hypercircle_mesh::RegionId;
/// let steel = tensorial::<2, _>(50.0);
/// assert_eq!(steel.constant_in(RegionId(0)), Some(Tensor::from(50.0)));
/// ```
pub fn tensorial<const D: usize, C>(coefficient: C) -> Tensorial<D>
where
    C: Coefficient<D> + 'static,
    C::Value: Into<Tensor<D>>,
{
    struct AsTensor<C>(C);
    impl<const D: usize, C: Coefficient<D>> Coefficient<D> for AsTensor<C>
    where
        C::Value: Into<Tensor<D>>,
    {
        type Value = Tensor<D>;
        fn at(&self, place: &Place<D>) -> Tensor<D> {
            self.0.at(place).into()
        }
        fn constant_in(&self, region: RegionId) -> Option<Tensor<D>> {
            self.0.constant_in(region).map(Into::into)
        }
    }
    Arc::new(AsTensor(coefficient))
}

/// A table of one coefficient for each region.
///
/// ```
/// use hypercircle_assembly::{Coefficient, PerRegion};
/// use hypercircle_mesh::{Rectangle, RegionId};
/// let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).region("brick").mesh()?;
/// let table = PerRegion::<2, f64>::numbers(&mesh, &[("brick", 0.77)])?;
/// assert_eq!(table.constant_in(RegionId(0)), Some(0.77));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone)]
pub struct PerRegion<const D: usize, V> {
    entries: Vec<Arc<dyn Coefficient<D, Value = V>>>,
}

impl<const D: usize, V> PerRegion<D, V> {
    /// From one coefficient for each region, in the order of their numbers.
    ///
    /// # Errors
    /// [`AssemblyError::RegionWithout`] names the first region that has none.
    pub fn new(
        mesh: &Mesh<D>,
        what: &'static str,
        mut entries: Vec<Option<Arc<dyn Coefficient<D, Value = V>>>>,
    ) -> Result<Self, AssemblyError> {
        entries.resize_with(mesh.region_names().len(), || None);
        let complete = entries
            .into_iter()
            .enumerate()
            .map(|(i, entry)| {
                let region = || mesh.region_name(RegionId(i as u32)).to_owned();
                entry.ok_or_else(|| AssemblyError::RegionWithout { what, region: region() })
            })
            .collect::<Result<_, _>>()?;
        Ok(Self { entries: complete })
    }
}

impl<const D: usize> PerRegion<D, f64> {
    /// From numbers by the names of the regions.
    ///
    /// # Errors
    /// A name that is no region's, or a region without a number.
    pub fn numbers(mesh: &Mesh<D>, numbers: &[(&str, f64)]) -> Result<Self, AssemblyError> {
        let mut entries: Vec<Option<Scalar<D>>> = vec![None; mesh.region_names().len()];
        for (name, number) in numbers {
            entries[mesh.find_region(name)?.index()] = Some(Arc::new(*number));
        }
        Self::new(mesh, "number in the table", entries)
    }
}

impl<const D: usize, V: Clone> Coefficient<D> for PerRegion<D, V> {
    type Value = V;
    fn at(&self, place: &Place<D>) -> V {
        self.entries[place.region.index()].at(place)
    }
    fn fill(&self, places: &[Place<D>], values: &mut [V]) {
        // Neighboring cells mostly share their region: one call for each run.
        let mut start = 0;
        for run in places.chunk_by(|a, b| a.region == b.region) {
            self.entries[run[0].region.index()].fill(run, &mut values[start..start + run.len()]);
            start += run.len();
        }
    }
    fn constant_in(&self, region: RegionId) -> Option<V> {
        self.entries.get(region.index())?.constant_in(region)
    }
}

impl<const D: usize, V> fmt::Debug for PerRegion<D, V> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "PerRegion with {} regions", self.entries.len())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use hypercircle_mesh::Rectangle;

    #[test]
    fn a_region_without_an_entry_is_named() {
        let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).region("brick").mesh().unwrap();
        let error = PerRegion::<2, f64>::numbers(&mesh, &[]).unwrap_err();
        assert!(matches!(error, AssemblyError::RegionWithout { region, .. } if region == "brick"));
        assert!(PerRegion::<2, f64>::numbers(&mesh, &[("bricks", 1.0)]).is_err());
    }
}
