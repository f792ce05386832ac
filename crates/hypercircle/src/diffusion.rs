//! The statement of a problem.

use std::sync::Arc;

use hypercircle_assembly::{
    Coefficient, Condition, PerRegion, Place, Scalar, Space, Tensor, Tensorial, Terms, tensorial,
};
use hypercircle_mesh::{Mesh, RegionId};
use hypercircle_solve::{Automatic, LinearSolver};

use crate::refine::{Answer, Goal, Tolerance};
use crate::solution::Solution;
use crate::watch::Unwatched;
use crate::{Error, Watch};

/// −div(A∇u) + c u = f on a mesh, with conditions on named sides; a side without a condition is insulated.
///
/// Names and values are checked when the problem is solved, and all that is wrong is told then. Coefficients are numbers,
/// [`Tensor`]s, closures of a [`Place`], or types of your own ([`Coefficient`]). Use one consistent set of units: with meters,
/// W/(m K) and °C, sources are in W/m³, film coefficients in W/(m² K), and flows in two dimensions in W per meter
/// of depth.
///
/// ```
/// use hypercircle::{Diffusion, Place, Tolerance};
/// use hypercircle::mesh::{polygon, between, Outline};
///
/// let mut wall = Outline::new(); // meters
/// wall.region("brick", polygon(&[(0.0, 0.0), (0.24, 0.0), (0.24, 1.0), (0.0, 1.0)]))?;
/// wall.region("foam", polygon(&[(0.24, 0.0), (0.36, 0.0), (0.36, 1.0), (0.24, 1.0)]))?;
/// wall.side("room", between((0.0, 0.0), (0.0, 1.0)))?;
/// wall.side("street", between((0.36, 0.0), (0.36, 1.0)))?;
/// let answer = Diffusion::on(wall.mesh(0.2)?)
///     .conductivity("brick", 0.77) // W/(m K)
///     .conductivity("foam", |at: &Place<2>| 0.035 * (1.0 + 0.1 * at.x[1]))
///     .robin("room", 7.69, 20.0) // W/(m² K), °C
///     .robin("street", 25.0, -5.0)
///     .solve_within(Tolerance::Relative(0.01))?;
/// assert!((answer.inflow("room")? - 6.61).abs() < 0.1); // W/m
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone)]
#[must_use = "a statement does nothing until it is solved"]
pub struct Diffusion<const D: usize> {
    mesh: Arc<Mesh<D>>,
    order: usize,
    conductivities: Vec<(Scope, Tensorial<D>)>,
    reactions: Vec<(Scope, Scalar<D>)>,
    sources: Vec<(Scope, Scalar<D>)>,
    conditions: Vec<(String, Condition<D>)>,
}

/// What a coefficient is given for.
#[derive(Debug, Clone, PartialEq)]
enum Scope {
    Everywhere,
    Region(String),
}

impl<const D: usize> std::fmt::Debug for Diffusion<D> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Diffusion")
            .field("cells", &self.mesh.cell_count())
            .field("order", &self.order)
            .field("conditions", &self.conditions)
            .finish_non_exhaustive()
    }
}

impl<const D: usize> Diffusion<D> {
    /// A problem on a mesh, with linear elements until [`Diffusion::order`] says otherwise.
    pub fn on(mesh: impl Into<Arc<Mesh<D>>>) -> Self {
        Self {
            mesh: mesh.into(),
            order: 1,
            conductivities: Vec::new(),
            reactions: Vec::new(),
            sources: Vec::new(),
            conditions: Vec::new(),
        }
    }

    /// The same statement on another mesh, for instance a refined one, that has the names it uses.
    pub fn moved_to(self, mesh: impl Into<Arc<Mesh<D>>>) -> Self {
        Self { mesh: mesh.into(), ..self }
    }

    /// Polynomial degree of the elements.
    pub fn order(mut self, order: usize) -> Self {
        self.order = order;
        self
    }

    /// Conductivity of a region: a number, a [`Tensor`], or anything that gives one at a place.
    pub fn conductivity<C>(mut self, region: &str, conductivity: C) -> Self
    where
        C: Coefficient<D> + 'static,
        C::Value: Into<Tensor<D>>,
    {
        self.conductivities.push((Scope::Region(region.to_owned()), tensorial(conductivity)));
        self
    }

    /// Conductivity of every region that is not given one of its own.
    pub fn conductivity_everywhere<C>(mut self, conductivity: C) -> Self
    where
        C: Coefficient<D> + 'static,
        C::Value: Into<Tensor<D>>,
    {
        self.conductivities.push((Scope::Everywhere, tensorial(conductivity)));
        self
    }

    /// Reaction coefficient c ≥ 0 of a region.
    pub fn reaction(mut self, region: &str, c: impl Coefficient<D, Value = f64> + 'static) -> Self {
        self.reactions.push((Scope::Region(region.to_owned()), Arc::new(c)));
        self
    }

    /// Reaction coefficient of every region that is not given one of its own.
    pub fn reaction_everywhere(mut self, c: impl Coefficient<D, Value = f64> + 'static) -> Self {
        self.reactions.push((Scope::Everywhere, Arc::new(c)));
        self
    }

    /// Source f of a region, per unit of area (length in one dimension).
    pub fn source(mut self, region: &str, f: impl Coefficient<D, Value = f64> + 'static) -> Self {
        self.sources.push((Scope::Region(region.to_owned()), Arc::new(f)));
        self
    }

    /// Source of every region that is not given one of its own.
    pub fn source_everywhere(mut self, f: impl Coefficient<D, Value = f64> + 'static) -> Self {
        self.sources.push((Scope::Everywhere, Arc::new(f)));
        self
    }

    /// u = g on a side.
    pub fn dirichlet(mut self, side: &str, g: impl Coefficient<D, Value = f64> + 'static) -> Self {
        self.conditions.push((side.to_owned(), Condition::Dirichlet(Arc::new(g))));
        self
    }

    /// A∇u·n = t on a side: what flows in through each unit of it.
    pub fn neumann(mut self, side: &str, t: impl Coefficient<D, Value = f64> + 'static) -> Self {
        self.conditions.push((side.to_owned(), Condition::Neumann(Arc::new(t))));
        self
    }

    /// A∇u·n = α (uₑ − u) on a side: film coefficient α ≥ 0 and level uₑ of the surroundings.
    pub fn robin(
        mut self,
        side: &str,
        film: impl Coefficient<D, Value = f64> + 'static,
        surroundings: impl Coefficient<D, Value = f64> + 'static,
    ) -> Self {
        let condition = Condition::Robin { film: Arc::new(film), surroundings: Arc::new(surroundings) };
        self.conditions.push((side.to_owned(), condition));
        self
    }

    /// The mesh it is stated on.
    #[must_use]
    pub fn mesh(&self) -> &Arc<Mesh<D>> {
        &self.mesh
    }

    /// The terms with names resolved, for those who assemble by themselves.
    ///
    /// # Errors
    /// A name that the mesh does not have, a region without conductivity, something given twice.
    pub fn terms(&self) -> Result<Terms<D>, Error> {
        let conductivity = self.by_region("conductivity", &self.conductivities)?;
        let conductivity = PerRegion::new(&self.mesh, "conductivity", conductivity)?;
        let mut terms = Terms::conducting(&self.mesh, Arc::new(conductivity));
        terms.reaction = self.scalar_by_region("reaction coefficient", &self.reactions)?;
        terms.source = self.scalar_by_region("source", &self.sources)?;
        for (i, (name, condition)) in self.conditions.iter().enumerate() {
            if self.conditions[..i].iter().any(|(other, _)| other == name) {
                return Err(Error::GivenTwice { what: "the condition", name: name.clone() });
            }
            terms.set(self.mesh.find_side(name)?, condition.clone());
        }
        Ok(terms)
    }

    /// One entry for each region, from entries for regions and for everywhere.
    fn by_region<C: Clone>(&self, what: &'static str, given: &[(Scope, C)]) -> Result<Vec<Option<C>>, Error> {
        let mut entries: Vec<Option<C>> = vec![None; self.mesh.region_names().len()];
        let mut everywhere = None;
        for (i, (scope, coefficient)) in given.iter().enumerate() {
            if given[..i].iter().any(|(other, _)| other == scope) {
                let name = match scope {
                    Scope::Everywhere => "everywhere".to_owned(),
                    Scope::Region(name) => name.clone(),
                };
                return Err(Error::GivenTwice { what, name });
            }
            match scope {
                Scope::Everywhere => everywhere = Some(coefficient.clone()),
                Scope::Region(name) => entries[self.mesh.find_region(name)?.index()] = Some(coefficient.clone()),
            }
        }
        for entry in &mut entries {
            if entry.is_none() {
                entry.clone_from(&everywhere);
            }
        }
        Ok(entries)
    }

    /// As [`Diffusion::by_region`], zero where nothing is given; `None` if nothing is given at all.
    fn scalar_by_region(&self, what: &'static str, given: &[(Scope, Scalar<D>)]) -> Result<Option<Scalar<D>>, Error> {
        if given.is_empty() {
            return Ok(None);
        }
        let zero: Scalar<D> = Arc::new(0.0);
        let entries = self.by_region(what, given)?;
        let entries = entries.into_iter().map(|entry| Some(entry.unwrap_or_else(|| zero.clone()))).collect();
        Ok(Some(Arc::new(PerRegion::new(&self.mesh, what, entries)?)))
    }

    /// Solves on the mesh as it is.
    ///
    /// # Errors
    /// Whatever is wrong with the statement, with its place.
    pub fn solve(&self) -> Result<Solution<D>, Error> {
        self.solve_with(&mut Automatic::default())
    }

    /// Solves on the mesh as it is, with a linear solver of your choice.
    ///
    /// # Errors
    /// As for [`Diffusion::solve`].
    pub fn solve_with(&self, solver: &mut dyn LinearSolver) -> Result<Solution<D>, Error> {
        let space = Space::new(self.mesh.clone(), self.order)?;
        Solution::new(space, self.terms()?, solver)
    }

    /// Solves, and refines the mesh until the guaranteed bound meets a tolerance.
    ///
    /// # Errors
    /// A tolerance that is not positive; otherwise as for [`Diffusion::solve`].
    pub fn solve_within(&self, tolerance: Tolerance) -> Result<Answer<D>, Error> {
        self.pursue(&Goal::new(tolerance), &mut Automatic::default(), &mut Unwatched)
    }

    /// As [`Diffusion::solve_within`], with a budget, a solver and a watch of your own.
    ///
    /// # Errors
    /// As for [`Diffusion::solve_within`]; a budget of zero.
    pub fn pursue(
        &self,
        goal: &Goal,
        solver: &mut dyn LinearSolver,
        watch: &mut dyn Watch,
    ) -> Result<Answer<D>, Error> {
        crate::refine::pursue(&self.mesh, self.order, &self.terms()?, goal, solver, watch)
    }
}

/// The constant that a coefficient gives in all regions of a mesh, if it does.
pub(crate) fn constant<const D: usize>(coefficient: &Scalar<D>, mesh: &Mesh<D>) -> Option<f64> {
    let first = coefficient.constant_in(RegionId(0))?;
    let same = |r| coefficient.constant_in(RegionId(r)).is_some_and(|v| v.to_bits() == first.to_bits());
    (1..mesh.region_names().len() as u32).all(same).then_some(first)
}

/// The place of the middle of a cell.
pub(crate) fn middle<const D: usize>(mesh: &Mesh<D>, cell: hypercircle_mesh::CellId) -> Place<D> {
    Place { x: mesh.cell_center(cell), region: mesh.region(cell), cell }
}
