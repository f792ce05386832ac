//! The assembled system of a balance.

use crate::pattern::{Pattern, SparseMatrix};
use crate::terms::FilmLoad;
use crate::{
    AssemblyError, Block, Condition, Constraints, Diffusion, Load, Mass, MatrixKernel, SideTables, Space, Strategy,
    Terms, VectorKernel, cell_rule, side_rule,
};

/// Matrix and load of all unknowns, Dirichlet conditions beside them ([`Constraints`]): K u − b is then the balance of
/// every unknown, zero at free ones and the flow into the domain at prescribed ones.
///
/// ```
/// use std::sync::Arc;
/// use hypercircle_assembly::{tensorial, Condition, Pattern, Scatter, Space, System, Terms};
/// use hypercircle_mesh::Interval;
/// let space = Space::new(Interval::uniform(0.0, 1.0, 8).mesh()?.into(), 1)?;
/// let mut terms = Terms::conducting(space.mesh(), tensorial(1.0));
/// terms.set(space.mesh().find_side("start")?, Condition::Dirichlet(Arc::new(0.0)));
/// let pattern = Pattern::new(&space);
/// let system = System::assemble(&space, &pattern, &terms, &Scatter)?;
/// let diagonal = system.matrix.get(3, 3).copied().unwrap_or(0.0);
/// assert!((diagonal - 16.0).abs() < 1e-13); // 2 / h
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
pub struct System {
    /// K, symmetric, with all unknowns.
    pub matrix: SparseMatrix,
    /// b.
    pub load: Vec<f64>,
    /// What Dirichlet sides prescribe.
    pub constraints: Constraints,
}

impl System {
    /// Checks the terms and assembles their system.
    ///
    /// # Errors
    /// What [`Terms::check`] finds, and coefficients that are not finite, not positive definite or negative, with their
    /// place.
    pub fn assemble<const D: usize>(
        space: &Space<D>,
        pattern: &Pattern,
        terms: &Terms<D>,
        strategy: &dyn Strategy<D>,
    ) -> Result<Self, AssemblyError> {
        terms.check(space)?;
        let constraints = Constraints::dirichlet(space, terms)?;
        let mut system = Self { matrix: pattern.zero_matrix(), load: vec![0.0; space.unknown_count()], constraints };
        system.fill(space, pattern, terms, strategy)?;
        Ok(system)
    }

    /// Fills in the values again in place: for other coefficients on the same space.
    ///
    /// # Errors
    /// As for [`System::assemble`].
    pub fn refill<const D: usize>(
        &mut self,
        space: &Space<D>,
        pattern: &Pattern,
        terms: &Terms<D>,
        strategy: &dyn Strategy<D>,
    ) -> Result<(), AssemblyError> {
        terms.check(space)?;
        self.constraints = Constraints::dirichlet(space, terms)?;
        self.matrix.data_mut().fill(0.0);
        self.load.fill(0.0);
        self.fill(space, pattern, terms, strategy)
    }

    fn fill<const D: usize>(
        &mut self,
        space: &Space<D>,
        pattern: &Pattern,
        terms: &Terms<D>,
        strategy: &dyn Strategy<D>,
    ) -> Result<(), AssemblyError> {
        let rule = cell_rule(space)?;
        let mesh = space.mesh();
        let conduction = Diffusion::new(mesh, terms.conductivity.as_ref());
        strategy.add_matrices(space, pattern, &rule, &conduction, self.matrix.data_mut())?;
        if let Some(c) = &terms.reaction {
            let reaction = Mass::new(mesh, "reaction coefficient", c.as_ref());
            strategy.add_matrices(space, pattern, &rule, &reaction, self.matrix.data_mut())?;
        }
        if let Some(f) = &terms.source {
            strategy.add_vectors(space, &rule, &Load::new(mesh, "source", f.as_ref()), &mut self.load)?;
        }
        self.fill_sides(space, pattern, terms)
    }

    fn fill_sides<const D: usize>(
        &mut self,
        space: &Space<D>,
        pattern: &Pattern,
        terms: &Terms<D>,
    ) -> Result<(), AssemblyError> {
        let mesh = space.mesh();
        let sides = SideTables::new(space, side_rule(space)?);
        let n = space.basis().nodes().len();
        let (mut matrix, mut vector) = (vec![0.0; n * n], vec![0.0; n]);
        for side in terms.condition_sides(mesh) {
            let cell = [side.cell];
            let block = Block::of_side(space, &cell, side.local, &sides);
            matrix.fill(0.0);
            vector.fill(0.0);
            match side.condition {
                Condition::Dirichlet(_) => continue,
                Condition::Neumann(inflow) => {
                    Load::new(mesh, "inflow", inflow.as_ref()).block(&block, &mut vector)?;
                }
                Condition::Robin { film, surroundings } => {
                    Mass::new(mesh, "film coefficient", film.as_ref()).block(&block, &mut matrix)?;
                    let density = FilmLoad { film, surroundings };
                    Load::new(mesh, "exchange with the surroundings", &density).block(&block, &mut vector)?;
                }
            }
            for (slot, value) in pattern.slots(side.cell).iter().zip(&matrix) {
                self.matrix.data_mut()[*slot as usize] += value;
            }
            for (unknown, value) in space.unknowns(side.cell).iter().zip(&vector) {
                self.load[*unknown as usize] += value;
            }
        }
        Ok(())
    }

    /// The balance b − K u of every unknown.
    ///
    /// # Errors
    /// [`AssemblyError::WrongLength`].
    pub fn residual(&self, u: &[f64]) -> Result<Vec<f64>, AssemblyError> {
        if u.len() != self.load.len() {
            let (given, expected) = (u.len(), self.load.len());
            return Err(AssemblyError::WrongLength { what: "vector of unknowns", given, expected });
        }
        Ok(self
            .matrix
            .outer_iterator()
            .zip(&self.load)
            .map(|(row, b)| b - row.iter().map(|(j, k)| k * u[j]).sum::<f64>())
            .collect())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Place, Scatter, tensorial};
    use hypercircle_mesh::{Interval, Rectangle};
    use std::sync::Arc;

    /// Stiffness of the linear triangle with legs 1: ½ [[2, −1, −1], [−1, 1, 0], [−1, 0, 1]] (textbook).
    #[test]
    fn linear_triangle_has_the_textbook_stiffness() {
        let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [1, 1]).mesh().unwrap();
        let space = Space::new(mesh.into(), 1).unwrap();
        let pattern = Pattern::new(&space);
        let mut terms = Terms::conducting(space.mesh(), tensorial(1.0));
        terms.set(space.mesh().find_side("left").unwrap(), Condition::Dirichlet(Arc::new(0.0)));
        let system = System::assemble(&space, &pattern, &terms, &Scatter).unwrap();
        // The square of two such triangles: 1 on the diagonal, −1/2 along sides, 0 across.
        for i in 0..4 {
            assert!((system.matrix.get(i, i).unwrap() - 1.0).abs() < 1e-15);
        }
        assert!((system.matrix.get(0, 1).unwrap() + 0.5).abs() < 1e-15);
    }

    #[test]
    fn refilling_gives_the_same_values() {
        let space = Space::new(Interval::uniform(0.0, 1.0, 6).mesh().unwrap().into(), 2).unwrap();
        let pattern = Pattern::new(&space);
        let mut terms = Terms::conducting(space.mesh(), tensorial(|at: &Place<1>| 1.0 + at.x[0]));
        terms.source = Some(Arc::new(1.0));
        terms.set(
            space.mesh().find_side("end").unwrap(),
            Condition::Robin { film: Arc::new(2.0), surroundings: Arc::new(1.0) },
        );
        let system = System::assemble(&space, &pattern, &terms, &Scatter).unwrap();
        let mut again = system.clone();
        again.refill(&space, &pattern, &terms, &Scatter).unwrap();
        assert_eq!(system.matrix.data(), again.matrix.data());
        assert_eq!(system.load, again.load);
        assert!((system.load.iter().sum::<f64>() - 3.0).abs() < 1e-14);
    }

    #[test]
    fn faults_are_told_with_their_place() {
        let space = Space::new(Interval::uniform(0.0, 1.0, 4).mesh().unwrap().into(), 1).unwrap();
        let pattern = Pattern::new(&space);
        let end = space.mesh().find_side("end").unwrap();
        let assemble = |terms: &Terms<1>| System::assemble(&space, &pattern, terms, &Scatter).unwrap_err();
        let free = Terms::conducting(space.mesh(), tensorial(1.0));
        assert!(matches!(assemble(&free), AssemblyError::LevelUndetermined { .. }));
        let mut terms = Terms::conducting(space.mesh(), tensorial(|at: &Place<1>| at.x[0] - 0.5));
        terms.set(end, Condition::Dirichlet(Arc::new(0.0)));
        assert!(matches!(assemble(&terms), AssemblyError::NotPositiveDefinite { at, .. } if at[0] < 0.5));
        terms.conductivity = tensorial(f64::NAN);
        assert!(matches!(assemble(&terms), AssemblyError::NotFinite { what: "conductivity", .. }));
        terms.conductivity = tensorial(1.0);
        terms.source = Some(Arc::new(|at: &Place<1>| if at.x[0] > 0.9 { f64::INFINITY } else { 0.0 }));
        assert!(matches!(assemble(&terms), AssemblyError::NotFinite { what: "source", at, .. } if at[0] > 0.9));
        terms.source = None;
        terms.reaction = Some(Arc::new(-1.0));
        assert!(matches!(assemble(&terms), AssemblyError::Negative { what: "reaction coefficient", .. }));
        terms.reaction = None;
        terms.set(end, Condition::Robin { film: Arc::new(-2.0), surroundings: Arc::new(0.0) });
        assert!(matches!(assemble(&terms), AssemblyError::Negative { what: "film coefficient", .. }));
        terms.set(end, Condition::Dirichlet(Arc::new(f64::NAN)));
        assert!(matches!(assemble(&terms), AssemblyError::NotFinite { what: "prescribed value", .. }));
    }
}
