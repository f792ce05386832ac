//! A solution: the field, its certificate, and where everything else is asked for.

use std::sync::{Arc, OnceLock};

use hypercircle_assembly::{Pattern, Scatter, Space, System, Terms};
use hypercircle_bounds::Certificate;
use hypercircle_element::Lagrange;
use hypercircle_mesh::{CellId, Locator, Mesh};
use hypercircle_solve::{Coordinates, CsrView, LinearSolver, LinearSystem, Outcome};

use crate::Error;

/// The approximate solution of a problem, with everything that follows from it.
///
/// ```
/// use hypercircle::Diffusion;
/// use hypercircle::mesh::Rectangle;
/// let plate = Rectangle::new([0.0, 0.0], [1.0, 1.0], [8, 8]).region("plate").mesh()?;
/// let solution = Diffusion::on(plate)
///     .conductivity("plate", 52.0)
///     .dirichlet("bottom", 100.0)
///     .robin("top", 750.0, 0.0)
///     .solve()?;
/// // One-dimensional: two resistances in series, 1/52 and 1/750.
/// let flow = 100.0 / (1.0 / 52.0 + 1.0 / 750.0);
/// assert!((solution.value(&[0.3, 0.0])? - 100.0).abs() < 1e-10);
/// assert!((solution.inflow("bottom")? - flow).abs() < 1e-9);
/// assert!(solution.certificate()?.bound() < 1e-6); // exact up to rounding
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
pub struct Solution<const D: usize> {
    space: Space<D>,
    terms: Terms<D>,
    system: Arc<System>,
    values: Vec<f64>,
    outcome: Outcome,
    certificate: OnceLock<Certificate<D>>,
    locator: OnceLock<Locator<D>>,
}

impl<const D: usize> Solution<D> {
    /// Assembles and solves.
    pub(crate) fn new(space: Space<D>, terms: Terms<D>, solver: &mut dyn LinearSolver) -> Result<Self, Error> {
        let pattern = Pattern::new(&space);
        let system = System::assemble(&space, &pattern, &terms, &Scatter)?;
        drop(pattern);
        let reduced = system.constraints.reduce(&system.matrix, &system.load);
        let positions = space.positions();
        let coordinates: Vec<f64> = reduced.free.iter().flat_map(|unknown| positions[*unknown as usize]).collect();
        let linear = LinearSystem {
            matrix: CsrView::try_from(&reduced.matrix)?,
            load: &reduced.load,
            coordinates: Some(Coordinates::new(D, &coordinates)?),
        };
        let mut free = vec![0.0; reduced.free.len()];
        let outcome = solver.solve(&linear, &mut free)?;
        let values = system.constraints.expand(&reduced, &free);
        Ok(Self {
            space,
            terms,
            system: Arc::new(system),
            values,
            outcome,
            certificate: OnceLock::new(),
            locator: OnceLock::new(),
        })
    }

    /// The mesh.
    #[must_use]
    pub fn mesh(&self) -> &Arc<Mesh<D>> {
        self.space.mesh()
    }

    /// The finite element space.
    #[must_use]
    pub fn space(&self) -> &Space<D> {
        &self.space
    }

    /// The terms that were solved.
    #[must_use]
    pub fn terms(&self) -> &Terms<D> {
        &self.terms
    }

    /// The assembled system.
    #[must_use]
    pub fn system(&self) -> &System {
        &self.system
    }

    /// Values of all unknowns; the first ones are those of the vertices.
    #[must_use]
    pub fn values(&self) -> &[f64] {
        &self.values
    }

    /// How many unknowns there are, prescribed ones included.
    #[must_use]
    pub fn unknown_count(&self) -> usize {
        self.values.len()
    }

    /// What the linear solver reports of itself.
    pub fn outcome(&self) -> &Outcome {
        &self.outcome
    }

    /// The certificate: guaranteed bound of the error, its parts and the equilibrated flux. Made at the first call and kept.
    ///
    /// # Errors
    /// A coefficient that is not finite at a point where it was not asked before.
    pub fn certificate(&self) -> Result<&Certificate<D>, Error> {
        if let Some(certificate) = self.certificate.get() {
            return Ok(certificate);
        }
        let certificate = Certificate::of(&self.space, &self.terms, &self.system, &self.values)?;
        Ok(self.certificate.get_or_init(|| certificate))
    }

    /// The cell a point lies in and its reference coordinates there.
    ///
    /// # Errors
    /// A point outside the mesh, or one that is not finite.
    pub fn locate(&self, x: &[f64; D]) -> Result<(CellId, [f64; D]), Error> {
        Ok(self.locator.get_or_init(|| Locator::new(self.mesh().clone())).find(x)?)
    }

    /// Value at a point. The first question prepares the search for points; later ones take about a microsecond.
    ///
    /// # Errors
    /// As for [`Solution::locate`].
    pub fn value(&self, x: &[f64; D]) -> Result<f64, Error> {
        let (cell, at) = self.locate(x)?;
        Ok(self.space.value(&self.values, cell, &at))
    }

    /// Gradient at a point; on a side between cells, that of the lowest cell.
    ///
    /// # Errors
    /// As for [`Solution::locate`].
    pub fn gradient(&self, x: &[f64; D]) -> Result<[f64; D], Error> {
        let (cell, at) = self.locate(x)?;
        Ok(self.space.gradient(&self.values, cell, &at))
    }

    /// The flux −A∇u in the middle of every cell.
    #[must_use]
    pub fn fluxes(&self) -> Vec<[f64; D]> {
        let shape = self.space.basis().shape();
        let count = shape.vertex_count() as f64;
        let center: [f64; D] = std::array::from_fn(|i| shape.vertices().iter().map(|v| v[i]).sum::<f64>() / count);
        self.mesh()
            .cells()
            .map(|cell| {
                let gradient = self.space.gradient(&self.values, cell, &center);
                let place = crate::diffusion::middle(self.mesh(), cell);
                self.terms.conductivity.at(&place).apply(&gradient).map(|q| -q)
            })
            .collect()
    }

    /// Values at the nodes of every cell, in the order of the basis ([`Lagrange`]), for pictures and files.
    #[must_use]
    pub fn cell_values(&self, cell: CellId) -> Vec<f64> {
        self.space.unknowns(cell).iter().map(|k| self.values[*k as usize]).collect()
    }

    /// The basis on the reference cell.
    #[must_use]
    pub fn basis(&self) -> &Lagrange {
        self.space.basis()
    }
}
