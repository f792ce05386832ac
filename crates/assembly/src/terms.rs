//! The balance that is solved: −div(A∇u) + c u = f with conditions on named sides.

use std::fmt;

use hypercircle_element::Rule;
use hypercircle_mesh::{CellId, Mesh, SideNameId};

use crate::{AssemblyError, Coefficient, Place, Scalar, Space, Tensorial, check};

/// What holds on a side. A side without a condition is insulated: A∇u·n = 0.
#[derive(Clone)]
pub enum Condition<const D: usize> {
    /// u = g.
    Dirichlet(Scalar<D>),
    /// A∇u·n = t: what flows in through each unit of the side.
    Neumann(Scalar<D>),
    /// A∇u·n = α (uₑ − u): exchange with surroundings.
    Robin {
        /// α ≥ 0, the film coefficient.
        film: Scalar<D>,
        /// uₑ, the level of the surroundings.
        surroundings: Scalar<D>,
    },
}

impl<const D: usize> fmt::Debug for Condition<D> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Dirichlet(_) => "Dirichlet",
            Self::Neumann(_) => "Neumann",
            Self::Robin { .. } => "Robin",
        })
    }
}

/// The terms of a balance −div(A∇u) + c u = f, with a condition for each side name.
///
/// ```
/// use std::sync::Arc;
/// use hypercircle_assembly::{tensorial, Condition, Terms};
/// use hypercircle_mesh::Interval;
/// let mesh = Interval::uniform(0.0, 1.0, 8).mesh()?;
/// let mut terms = Terms::conducting(&mesh, tensorial(1.0));
/// terms.source = Some(Arc::new(3.0));
/// terms.set(mesh.find_side("start")?, Condition::Dirichlet(Arc::new(0.0)));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone)]
pub struct Terms<const D: usize> {
    /// A, symmetric positive definite.
    pub conductivity: Tensorial<D>,
    /// c ≥ 0, if there is a reaction.
    pub reaction: Option<Scalar<D>>,
    /// f, if there is a source.
    pub source: Option<Scalar<D>>,
    /// Conditions by [`SideNameId`].
    conditions: Vec<Option<Condition<D>>>,
}

impl<const D: usize> fmt::Debug for Terms<D> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Terms")
            .field("reaction", &self.reaction.is_some())
            .field("source", &self.source.is_some())
            .field("conditions", &self.conditions)
            .finish_non_exhaustive()
    }
}

/// A side of the boundary with its condition.
#[derive(Debug, Clone, Copy)]
pub struct ConditionSide<'a, const D: usize> {
    /// The cell.
    pub cell: CellId,
    /// The side's number in the cell.
    pub local: u8,
    /// The side's name.
    pub name: SideNameId,
    /// What holds there.
    pub condition: &'a Condition<D>,
}

impl<const D: usize> Terms<D> {
    /// Conduction alone, all sides insulated.
    #[must_use]
    pub fn conducting(mesh: &Mesh<D>, conductivity: Tensorial<D>) -> Self {
        let conditions = vec![None; mesh.side_names().len()];
        Self { conductivity, reaction: None, source: None, conditions }
    }

    /// Sets the condition of a side name; a later one replaces an earlier one.
    pub fn set(&mut self, name: SideNameId, condition: Condition<D>) {
        if self.conditions.len() <= name.index() {
            self.conditions.resize(name.index() + 1, None);
        }
        self.conditions[name.index()] = Some(condition);
    }

    /// The condition of a side name.
    #[must_use]
    pub fn condition(&self, name: SideNameId) -> Option<&Condition<D>> {
        self.conditions.get(name.index())?.as_ref()
    }

    /// All sides with a condition, in the order of their cells.
    pub fn condition_sides<'a>(&'a self, mesh: &'a Mesh<D>) -> impl Iterator<Item = ConditionSide<'a, D>> {
        mesh.named_sides().iter().filter_map(|side| {
            let condition = self.condition(side.name)?;
            Some(ConditionSide { cell: side.cell, local: side.local, name: side.name, condition })
        })
    }

    /// Checks that conditions lie on the boundary and that each connected part is held by a Dirichlet side, a Robin
    /// side or a reaction.
    ///
    /// # Errors
    /// [`AssemblyError::InnerCondition`], [`AssemblyError::LevelUndetermined`], or a coefficient that is out of range.
    pub fn check(&self, space: &Space<D>) -> Result<(), AssemblyError> {
        let mesh = space.mesh();
        let topology = mesh.topology();
        let mut holds = vec![false; mesh.cell_count()];
        let rule = side_rule(space)?;
        for side in self.condition_sides(mesh) {
            if topology.neighbor(side.cell, side.local).is_some() {
                let ends = mesh.side_vertices(side.cell, side.local).map(|v| mesh.point(v));
                let at = (0..D).map(|i| ends.iter().map(|p| p[i]).sum::<f64>() / D as f64).collect();
                return Err(AssemblyError::InnerCondition { name: mesh.side_name(side.name).to_owned(), at });
            }
            holds[side.cell.index()] |= match side.condition {
                Condition::Dirichlet(_) => true,
                Condition::Neumann(_) => false,
                Condition::Robin { film, .. } => {
                    let mut positive = false;
                    for point in crate::block::side_points(space.basis().shape(), side.local, &rule) {
                        let at = place(mesh, side.cell, &point);
                        let value = film.at(&at);
                        check::not_negative(mesh, "film coefficient", &at, value)?;
                        positive |= value > 0.0;
                    }
                    positive
                }
            };
        }
        if let Some(reaction) = &self.reaction {
            for cell in mesh.cells().filter(|c| !holds[c.index()]).collect::<Vec<_>>() {
                let at = Place { x: mesh.cell_center(cell), region: mesh.region(cell), cell };
                holds[cell.index()] = reaction.at(&at) > 0.0;
            }
        }
        // Flood from the cells that are held; whatever stays dry hangs in the air.
        let mut wet: Vec<CellId> = mesh.cells().filter(|c| holds[c.index()]).collect();
        while let Some(cell) = wet.pop() {
            for local in 0..topology.cell_sides(cell).len() as u8 {
                if let Some((other, _)) = topology.neighbor(cell, local)
                    && !holds[other.index()]
                {
                    holds[other.index()] = true;
                    wet.push(other);
                }
            }
        }
        match mesh.cells().find(|c| !holds[c.index()]) {
            None => Ok(()),
            Some(cell) => Err(AssemblyError::LevelUndetermined {
                at: mesh.cell_center(cell).to_vec(),
                region: mesh.region_name(mesh.region(cell)).to_owned(),
            }),
        }
    }
}

/// α uₑ, the load of a Robin side.
pub(crate) struct FilmLoad<'a, const D: usize> {
    pub(crate) film: &'a Scalar<D>,
    pub(crate) surroundings: &'a Scalar<D>,
}

impl<const D: usize> Coefficient<D> for FilmLoad<'_, D> {
    type Value = f64;
    fn at(&self, place: &Place<D>) -> f64 {
        self.film.at(place) * self.surroundings.at(place)
    }
}

/// The place of a reference point (two coordinates, as the element crate has them) of a cell.
#[must_use]
pub fn place<const D: usize>(mesh: &Mesh<D>, cell: CellId, point: &[f64; 2]) -> Place<D> {
    Place { x: mesh.place(cell, &crate::space::clip(point)), region: mesh.region(cell), cell }
}

/// The rule used in cells for all terms: exact up to the degree 2p + 2, so that coefficients and sources that are quadratic
/// in a cell are integrated exactly.
///
/// # Errors
/// As [`Rule::of_degree`].
pub fn cell_rule<const D: usize>(space: &Space<D>) -> Result<Rule, AssemblyError> {
    Ok(Rule::of_degree(space.basis().shape(), 2 * space.order() + 2)?)
}

/// The rule used on sides for all terms; a single point of weight one for the ends of intervals.
///
/// # Errors
/// As [`Rule::of_degree`].
pub fn side_rule<const D: usize>(space: &Space<D>) -> Result<Rule, AssemblyError> {
    let degree = if D == 1 { 0 } else { 2 * space.order() + 2 };
    Ok(Rule::of_degree(hypercircle_element::Shape::Interval, degree)?)
}
