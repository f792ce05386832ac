//! What one asks of a solution: integrals, flows, the balance.

use hypercircle_assembly::{Condition, Place, SideTables, cell_rule, place, side_rule};
use hypercircle_mesh::SideNameId;

use crate::{Error, Solution};

/// Integral and mean of the solution over a region.
#[derive(Debug, Clone, Copy, PartialEq)]
#[must_use]
pub struct RegionResult {
    /// ∫ u over the region.
    pub integral: f64,
    /// Length or area of the region.
    pub measure: f64,
}

impl RegionResult {
    /// The mean of u.
    #[must_use]
    pub fn mean(&self) -> f64 {
        self.integral / self.measure
    }
}

/// The overall balance: everything that flows in, is made inside, and is used up inside.
#[derive(Debug, Clone, PartialEq)]
#[must_use]
pub struct Balance {
    /// Inflow through each named side with a condition, in the order of the names.
    pub inflows: Vec<(String, f64)>,
    /// ∫ f.
    pub source: f64,
    /// ∫ c u.
    pub reaction: f64,
}

impl Balance {
    /// What is missing: Σ inflows + ∫ f − ∫ c u, zero but for rounding and the residual of the linear system.
    #[must_use]
    pub fn defect(&self) -> f64 {
        self.inflows.iter().map(|(_, flow)| flow).sum::<f64>() + self.source - self.reaction
    }

    /// The largest of the terms: the defect is to be seen against it.
    #[must_use]
    pub fn size(&self) -> f64 {
        self.inflows.iter().map(|(_, flow)| flow.abs()).fold(self.source.abs().max(self.reaction.abs()), f64::max)
    }
}

impl<const D: usize> Solution<D> {
    /// Integral and mean over a region.
    ///
    /// # Errors
    /// A region that the mesh does not have.
    pub fn over_region(&self, region: &str) -> Result<RegionResult, Error> {
        let region = self.mesh().find_region(region)?;
        let rule = cell_rule(self.space())?;
        let table = self.basis().table(rule.points());
        let mut result = RegionResult { integral: 0.0, measure: 0.0 };
        for cell in self.mesh().cells().filter(|c| self.mesh().region(*c) == region) {
            let scale = self.mesh().cell_measure(cell) / self.basis().shape().measure();
            let unknowns = self.space().unknowns(cell);
            for (q, w) in rule.weights().iter().enumerate() {
                let u: f64 = unknowns.iter().zip(table.values_at(q)).map(|(k, v)| self.values()[*k as usize] * v).sum();
                result.integral += w * scale * u;
            }
            result.measure += self.mesh().cell_measure(cell);
        }
        Ok(result)
    }

    /// Flow into the domain through all sides of a name, by the balanced formula: through Dirichlet sides it is the residual of
    /// the full system at their unknowns, which is far more accurate than a derivative of u and closes the overall balance; through Robin
    /// sides ∫ α(uₑ − u), through Neumann sides ∫ t. An unknown between two Dirichlet sides counts for both in the ratio
    /// of their lengths there.
    ///
    /// # Errors
    /// A name that the mesh does not have, or that has no side on the boundary.
    pub fn inflow(&self, side: &str) -> Result<f64, Error> {
        let name = self.mesh().find_side(side)?;
        let on_boundary = |s: &&hypercircle_mesh::NamedSide| {
            s.name == name && self.mesh().topology().neighbor(s.cell, s.local).is_none()
        };
        if self.mesh().named_sides().iter().find(on_boundary).is_none() {
            return Err(Error::EmptySide { name: side.to_owned() });
        }
        Ok(self.inflows()?[name.index()])
    }

    /// Inflow by side name; zero for insulated ones.
    fn inflows(&self) -> Result<Vec<f64>, Error> {
        let mesh = self.mesh();
        let mut flows = vec![0.0; mesh.side_names().len()];
        let shape = self.basis().shape();
        let sides = SideTables::new(self.space(), side_rule(self.space())?);
        // Prescribed unknowns of each side with the length that they stand for.
        let mut held: Vec<(u32, SideNameId, f64)> = Vec::new();
        for side in self.terms().condition_sides(mesh) {
            let (local, length) = (usize::from(side.local), mesh.side_measure(side.cell, side.local));
            let unknowns = self.space().unknowns(side.cell);
            let u = |q: usize| -> f64 {
                let values = sides.table(side.local).values_at(q);
                unknowns.iter().zip(values).map(|(k, v)| self.values()[*k as usize] * v).sum()
            };
            let places = sides.points(side.local).iter().map(|point| place(mesh, side.cell, point));
            let weights = sides.rule().weights().iter().map(|w| w * length);
            match side.condition {
                Condition::Dirichlet(_) => {
                    let corners = shape.side_vertices(local);
                    let inner = if D == 1 { 0 } else { self.space().order() - 1 };
                    let along = shape.vertex_count() + local * inner;
                    held.extend(
                        corners.iter().copied().chain(along..along + inner).map(|k| (unknowns[k], side.name, length)),
                    );
                }
                Condition::Neumann(inflow) => {
                    flows[side.name.index()] += places.zip(weights).map(|(at, w)| w * inflow.at(&at)).sum::<f64>();
                }
                Condition::Robin { film, surroundings } => {
                    flows[side.name.index()] += places
                        .zip(weights)
                        .enumerate()
                        .map(|(q, (at, w))| w * film.at(&at) * (surroundings.at(&at) - u(q)))
                        .sum::<f64>();
                }
            }
        }
        held.sort_by_key(|(unknown, name, _)| (*unknown, *name));
        let residual = self.system().residual(self.values())?;
        for group in held.chunk_by(|a, b| a.0 == b.0) {
            let total: f64 = group.iter().map(|entry| entry.2).sum();
            for (unknown, name, length) in group {
                flows[name.index()] -= residual[*unknown as usize] * length / total;
            }
        }
        Ok(flows)
    }

    /// The overall balance.
    ///
    /// # Errors
    /// None that assembly has not already told.
    pub fn balance(&self) -> Result<Balance, Error> {
        let mesh = self.mesh();
        let flows = self.inflows()?;
        let names = (0..mesh.side_names().len() as u32).map(SideNameId);
        let inflows = names
            .filter(|name| self.terms().condition(*name).is_some())
            .map(|name| (mesh.side_name(name).to_owned(), flows[name.index()]))
            .collect();
        let mut balance = Balance { inflows, source: 0.0, reaction: 0.0 };
        self.integrate(|place, u, w| {
            if let Some(f) = &self.terms().source {
                balance.source += w * f.at(place);
            }
            if let Some(c) = &self.terms().reaction {
                balance.reaction += w * c.at(place) * u;
            }
        })?;
        Ok(balance)
    }

    /// Visits all quadrature points with the value of u and the integration weight.
    pub(crate) fn integrate(&self, mut visit: impl FnMut(&Place<D>, f64, f64)) -> Result<(), Error> {
        let rule = cell_rule(self.space())?;
        let table = self.basis().table(rule.points());
        for cell in self.mesh().cells() {
            let scale = self.mesh().cell_measure(cell) / self.basis().shape().measure();
            let unknowns = self.space().unknowns(cell);
            for (q, (point, w)) in rule.points().iter().zip(rule.weights()).enumerate() {
                let u = unknowns.iter().zip(table.values_at(q)).map(|(k, v)| self.values()[*k as usize] * v).sum();
                visit(&place(self.mesh(), cell, point), u, w * scale);
            }
        }
        Ok(())
    }
}
