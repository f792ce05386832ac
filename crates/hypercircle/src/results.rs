//! What one asks of a solution: integrals, flows, the balance, extremes.

use hypercircle_assembly::{Condition, Place, SideTables, cell_rule, place, side_rule};
use hypercircle_mesh::{CellId, SideNameId};

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

/// A value and where it is taken.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Extreme<const D: usize> {
    /// The value.
    pub value: f64,
    /// Its place.
    pub at: [f64; D],
}

/// Smallest and largest value with their places.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Extremes<const D: usize> {
    /// The smallest.
    pub least: Extreme<D>,
    /// The largest.
    pub most: Extreme<D>,
}

/// A value at a reference point of a cell.
#[derive(Debug, Clone, Copy)]
struct Candidate {
    value: f64,
    cell: CellId,
    at: [f64; 2],
}

/// Elements of order 2 and more are searched at their nodes and on a lattice of this many steps along each side.
const LATTICE: usize = 4;

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

    /// Smallest and largest value of the whole field. Exact for linear elements; for higher orders found on a lattice in every
    /// cell and then followed to the extreme nearby.
    #[must_use]
    pub fn extremes(&self) -> Extremes<D> {
        let shape = self.basis().shape();
        let mut points = self.basis().nodes().to_vec();
        if self.space().order() > 1 {
            let step = 1.0 / LATTICE as f64;
            let rows = if D == 1 { 0 } else { LATTICE };
            points.extend((0..=rows).flat_map(|j| (0..=LATTICE - j).map(move |i| [i as f64 * step, j as f64 * step])));
        }
        debug_assert!(points.iter().all(|p| shape.hats(p).iter().all(|hat| *hat >= -1e-12)));
        let [least, most] = self.search(self.mesh().cells().map(|cell| (cell, points.as_slice())));
        let directions = [[1.0, 0.0], [0.0, 1.0], [1.0, -1.0]];
        let directions = &directions[..if D == 1 { 1 } else { 3 }];
        Extremes { least: self.climb(least, -1.0, directions), most: self.climb(most, 1.0, directions) }
    }

    /// Smallest and largest value along all sides of a name.
    ///
    /// # Errors
    /// A name that the mesh does not have or that no side carries.
    pub fn extremes_on(&self, side: &str) -> Result<Extremes<D>, Error> {
        let name = self.mesh().find_side(side)?;
        let shape = self.basis().shape();
        let steps = if self.space().order() > 1 { 2 * LATTICE } else { 1 };
        let along: Vec<Vec<[f64; 2]>> = (0..shape.vertex_count())
            .map(|local| {
                let ends = shape.side_vertices(local);
                let (a, b) = (shape.vertices()[ends[0]], shape.vertices()[ends[ends.len() - 1]]);
                (0..=steps)
                    .map(|k| {
                        let t = k as f64 / steps as f64;
                        [0, 1].map(|i| a[i] + t * (b[i] - a[i]))
                    })
                    .collect()
            })
            .collect();
        let sides: Vec<_> = self.mesh().named_sides().iter().filter(|s| s.name == name).collect();
        if sides.is_empty() {
            return Err(Error::EmptySide { name: side.to_owned() });
        }
        let [least, most] = self.search(sides.iter().map(|s| (s.cell, along[usize::from(s.local)].as_slice())));
        // The side on which a candidate lies, walked along.
        let direction = |best: &Candidate| {
            let own = sides.iter().filter(|s| s.cell == best.cell).map(|s| &along[usize::from(s.local)]);
            own.filter(|points| points.contains(&best.at))
                .map(|points| [0, 1].map(|i| points[points.len() - 1][i] - points[0][i]))
                .collect::<Vec<_>>()
        };
        let (down, up) = (direction(&least), direction(&most));
        Ok(Extremes { least: self.climb(least, -1.0, &down), most: self.climb(most, 1.0, &up) })
    }

    fn search<'p>(&self, cells: impl Iterator<Item = (CellId, &'p [[f64; 2]])>) -> [Candidate; 2] {
        let mut best =
            [f64::INFINITY, f64::NEG_INFINITY].map(|value| Candidate { value, cell: CellId(0), at: [0.0; 2] });
        let mut tabulated: Option<(&[[f64; 2]], hypercircle_element::Table)> = None;
        for (cell, points) in cells {
            if tabulated.as_ref().is_none_or(|(known, _)| !std::ptr::eq(*known, points)) {
                tabulated = Some((points, self.basis().table(points)));
            }
            let Some((_, table)) = &tabulated else { continue };
            let unknowns = self.space().unknowns(cell);
            for (q, point) in points.iter().enumerate() {
                let u: f64 = unknowns.iter().zip(table.values_at(q)).map(|(k, v)| self.values()[*k as usize] * v).sum();
                let candidate = Candidate { value: u, cell, at: *point };
                if u < best[0].value {
                    best[0] = candidate;
                }
                if u > best[1].value {
                    best[1] = candidate;
                }
            }
        }
        best
    }

    /// Walks from a candidate to the extreme value near it in its cell, along the given directions, by halving steps.
    fn climb(&self, mut best: Candidate, sign: f64, directions: &[[f64; 2]]) -> Extreme<D> {
        let shape = self.basis().shape();
        let mut step = if self.space().order() > 1 { 1.0 / LATTICE as f64 } else { 0.0 };
        while step > 1e-9 {
            let tries =
                directions.iter().flat_map(|d| [step, -step].map(|s| [best.at[0] + s * d[0], best.at[1] + s * d[1]]));
            let inside = tries.filter(|at| shape.hats(at).iter().all(|hat| *hat >= 0.0));
            let better = inside
                .map(|at| (self.space().value(self.values(), best.cell, &std::array::from_fn(|i| at[i])), at))
                .filter(|(value, _)| sign * value > sign * best.value)
                .max_by(|a, b| (sign * a.0).total_cmp(&(sign * b.0)));
            match better {
                Some((value, at)) => best = Candidate { value, at, ..best },
                None => step *= 0.5,
            }
        }
        Extreme { value: best.value, at: place(self.mesh(), best.cell, &best.at).x }
    }
}
