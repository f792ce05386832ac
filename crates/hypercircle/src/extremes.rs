//! Smallest and largest values with their places.

use hypercircle_assembly::place;
use hypercircle_mesh::CellId;

use crate::{Error, Solution};

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

/// Elements of order 2 and more are searched at their nodes and on a lattice of this many steps along each side.
const LATTICE: usize = 4;
/// So many of the best cells are searched more closely: the lattice alone does not tell which of them holds the extreme.
const CLIMBS: usize = 64;

/// Where a search looks in a cell, and along which directions it goes on.
struct Paths {
    points: Vec<[f64; 2]>,
    directions: Vec<[f64; 2]>,
}

/// A value at a reference point of a cell.
#[derive(Debug, Clone, Copy)]
struct Candidate {
    value: f64,
    cell: CellId,
    at: [f64; 2],
    paths: usize,
}

impl<const D: usize> Solution<D> {
    /// Smallest and largest value of the whole field. Exact for linear elements; for higher orders found on a lattice in every
    /// cell and then followed to the extreme nearby.
    #[must_use]
    pub fn extremes(&self) -> Extremes<D> {
        let mut points = self.basis().nodes().to_vec();
        if self.space().order() > 1 {
            let step = 1.0 / LATTICE as f64;
            let rows = if D == 1 { 0 } else { LATTICE };
            points.extend((0..=rows).flat_map(|j| (0..=LATTICE - j).map(move |i| [i as f64 * step, j as f64 * step])));
        }
        let mut directions = vec![[1.0, 0.0], [0.0, 1.0], [1.0, -1.0]];
        directions.truncate(if D == 1 { 1 } else { 3 });
        self.search(&[Paths { points, directions }], self.mesh().cells().map(|cell| (cell, 0)))
    }

    /// Smallest and largest value along all sides of a name.
    ///
    /// # Errors
    /// A name that the mesh does not have or that no side carries.
    pub fn extremes_on(&self, side: &str) -> Result<Extremes<D>, Error> {
        let name = self.mesh().find_side(side)?;
        let shape = self.basis().shape();
        let steps = if self.space().order() > 1 { 2 * LATTICE } else { 1 };
        let paths: Vec<Paths> = (0..shape.vertex_count())
            .map(|local| {
                let ends = shape.side_vertices(local);
                let (a, b) = (shape.vertices()[ends[0]], shape.vertices()[ends[ends.len() - 1]]);
                let direction = [b[0] - a[0], b[1] - a[1]];
                let along = |k: usize| [0, 1].map(|i| a[i] + k as f64 / steps as f64 * direction[i]);
                Paths { points: (0..=steps).map(along).collect(), directions: vec![direction] }
            })
            .collect();
        let sides = self.mesh().named_sides().iter().filter(|s| s.name == name);
        let mut sides = sides.map(|s| (s.cell, usize::from(s.local))).peekable();
        if sides.peek().is_none() {
            return Err(Error::EmptySide { name: side.to_owned() });
        }
        Ok(self.search(&paths, sides))
    }

    /// Searches cells along their paths: on all points first, then from the best ones onwards.
    fn search(&self, paths: &[Paths], cells: impl Iterator<Item = (CellId, usize)>) -> Extremes<D> {
        let tables: Vec<_> = paths.iter().map(|p| self.basis().table(&p.points)).collect();
        let (mut low, mut high) = (Vec::new(), Vec::new());
        for (cell, path) in cells {
            let unknowns = self.space().unknowns(cell);
            let value = |q: usize| -> f64 {
                unknowns.iter().zip(tables[path].values_at(q)).map(|(k, v)| self.values()[*k as usize] * v).sum()
            };
            let candidates = paths[path].points.iter().enumerate().map(|(q, at)| Candidate {
                value: value(q),
                cell,
                at: *at,
                paths: path,
            });
            low.extend(candidates.clone().min_by(|a, b| a.value.total_cmp(&b.value)));
            high.extend(candidates.max_by(|a, b| a.value.total_cmp(&b.value)));
        }
        Extremes { least: self.best(paths, low, -1.0), most: self.best(paths, high, 1.0) }
    }

    /// The best that climbing from the best candidates reaches; `sign` is 1 for the largest value, −1 for the smallest.
    fn best(&self, paths: &[Paths], mut candidates: Vec<Candidate>, sign: f64) -> Extreme<D> {
        let better_first =
            |a: &Candidate, b: &Candidate| (sign * b.value).total_cmp(&(sign * a.value)).then(a.cell.cmp(&b.cell));
        if candidates.len() > CLIMBS {
            candidates.select_nth_unstable_by(CLIMBS - 1, better_first);
            candidates.truncate(CLIMBS);
        }
        let reached = candidates.into_iter().map(|c| self.climb(c, sign, &paths[c.paths].directions));
        let best = reached.min_by(better_first);
        best.map_or(Extreme { value: f64::NAN, at: [f64::NAN; D] }, |best| Extreme {
            value: best.value,
            at: place(self.mesh(), best.cell, &best.at).x,
        })
    }

    /// Walks from a candidate to the extreme value near it in its cell, along the given directions, by halving steps.
    fn climb(&self, mut best: Candidate, sign: f64, directions: &[[f64; 2]]) -> Candidate {
        let shape = self.basis().shape();
        let mut step = if self.space().order() > 1 { 1.0 / LATTICE as f64 } else { 0.0 };
        while step > 1e-8 {
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
        best
    }
}
