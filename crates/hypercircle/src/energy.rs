//! Guaranteed intervals for energy-type results.
//!
//! Let P(v) = ∫ A∇v·∇v + ∫ c v² + ∫ α (v − uₑ)² − 2 ∫ f v − 2 ∫ t v. The solution makes P smallest among all functions with its
//! Dirichlet data, and P(v) − P(u) = |||v − u|||². With the guaranteed bound η of the error the true P(u) lies between
//! P(u_h) − η² and P(u_h): the width goes with the square of the error of the field.

use hypercircle_assembly::{Condition, SideTables, cell_rule, place, side_rule};
use hypercircle_bounds::{Enclosure, Guarantee};
use hypercircle_mesh::SideNameId;

use crate::diffusion::constant;
use crate::{Error, Solution};

/// Rounding of the sums behind an energy, as a share of the sum of their sizes.
const ROUNDING: f64 = 1e-13;

/// The parts of P(u_h).
#[derive(Debug, Clone, Copy, Default)]
struct Energies {
    /// ∫ A∇u·∇u + ∫ c u² + ∫ α (u − uₑ)².
    dissipation: f64,
    /// ∫ f u + ∫ t u.
    work: f64,
    /// Sum of the sizes of all terms.
    size: f64,
}

impl<const D: usize> Solution<D> {
    /// √(∫ A∇u·∇u + ∫ c u² + ∫ α (u − uₑ)²), the size against which relative tolerances are meant. It does not
    /// depend on where the scale of u has its zero.
    ///
    /// # Errors
    /// None that assembly has not already told.
    pub fn energy_norm(&self) -> Result<f64, Error> {
        Ok(self.energies()?.dissipation.max(0.0).sqrt())
    }

    /// The bound of the certificate relative to the energy norm of the true solution, which is at least that of u_h less the
    /// bound; infinite while the bound is the larger one.
    ///
    /// # Errors
    /// As for [`Solution::certificate`].
    pub fn relative_bound(&self) -> Result<f64, Error> {
        let bound = self.certificate()?.bound();
        if bound == 0.0 {
            return Ok(0.0);
        }
        let least = self.energy_norm()? - bound;
        Ok(if least > 0.0 { bound / least } else { f64::INFINITY })
    }

    /// The smallest value P(u) of the potential, with its guaranteed interval [P(u_h) − η², P(u_h)].
    ///
    /// # Errors
    /// [`Error::NoInterval`] where prescribed values lie outside the trial space or there is no bound.
    pub fn potential(&self) -> Result<Enclosure, Error> {
        self.enclosed("the potential")
    }

    fn enclosed(&self, result: &'static str) -> Result<Enclosure, Error> {
        let certificate = self.certificate()?;
        let missing = |why: &str| Error::NoInterval { result, why: why.to_owned() };
        if let Guarantee::None(why) = certificate.guarantee() {
            return Err(missing(why));
        }
        if certificate.is_lifted() {
            return Err(missing(
                "prescribed values lie outside the trial space; prescribe polynomials of the order of the elements",
            ));
        }
        let energies = self.energies()?;
        let upper = energies.dissipation - 2.0 * energies.work;
        let slack = ROUNDING * energies.size;
        let square = certificate.bound().powi(2);
        let (lower, upper) = (upper - square - slack, upper + slack);
        Ok(Enclosure::new(0.5 * (lower + upper), lower, upper, certificate.guarantee().clone()))
    }

    /// ∫ f u + ∫ t u, the work of the loads when all prescribed levels are zero: the torsional constant for f = 2, the compliance, …
    ///
    /// # Errors
    /// [`Error::NoInterval`] where a prescribed value or a level of surroundings is not zero, or there is no bound.
    pub fn load_work(&self) -> Result<Enclosure, Error> {
        const RESULT: &str = "the work of the loads";
        let zero = |level: Option<f64>| level == Some(0.0);
        let grounded = self.conditions().all(|condition| match condition {
            Condition::Dirichlet(value) => zero(constant(value, self.mesh())),
            Condition::Neumann(_) => true,
            Condition::Robin { surroundings, .. } => zero(constant(surroundings, self.mesh())),
        });
        if !grounded {
            let why = "it equals an energy only when every prescribed level is the number zero; ask for the potential";
            return Err(Error::NoInterval { result: RESULT, why: why.to_owned() });
        }
        // F(u) = a(u, u) = −P(u).
        Ok(self.enclosed(RESULT)?.scaled(-1.0))
    }

    /// The flow from the higher to the lower of two levels, with its guaranteed interval: heat flow between two surroundings,
    /// charge between two electrodes, seepage between two heads.
    ///
    /// The flow Q times the difference of the levels is the energy that is dissipated, so Q = P(u) / (θ₁ − θ₀).
    ///
    /// # Errors
    /// [`Error::NoInterval`] unless the Dirichlet values and levels of surroundings are numbers of exactly two sizes, without sources, reaction or inflows.
    pub fn exchanged_flow(&self) -> Result<Enclosure, Error> {
        const RESULT: &str = "the flow between two levels";
        let missing = |why: String| Error::NoInterval { result: RESULT, why };
        if self.terms().source.is_some() || self.terms().reaction.is_some() {
            return Err(missing("sources or reactions make inflow and outflow differ; remove them".to_owned()));
        }
        let mut levels: Vec<f64> = Vec::new();
        for condition in self.conditions() {
            let level = match condition {
                Condition::Dirichlet(value) => constant(value, self.mesh()),
                Condition::Robin { surroundings, .. } => constant(surroundings, self.mesh()),
                Condition::Neumann(inflow) if constant(inflow, self.mesh()) == Some(0.0) => continue,
                Condition::Neumann(_) => {
                    return Err(missing("a Neumann side adds a flow of its own; insulate it".to_owned()));
                }
            };
            let why = "a prescribed value or level of surroundings is not a number; give numbers";
            levels.push(level.ok_or_else(|| missing(why.to_owned()))?);
        }
        levels.sort_by(f64::total_cmp);
        levels.dedup();
        let &[low, high] = levels.as_slice() else {
            return Err(missing(format!("the levels are {levels:?}; it takes exactly two")));
        };
        Ok(self.enclosed(RESULT)?.scaled(1.0 / (high - low)))
    }

    /// The conditions that some boundary side of the mesh has.
    fn conditions(&self) -> impl Iterator<Item = &Condition<D>> {
        (0..self.mesh().side_names().len() as u32).filter_map(|name| self.terms().condition(SideNameId(name)))
    }

    fn energies(&self) -> Result<Energies, Error> {
        let mesh = self.mesh();
        let mut sum = Energies::default();
        let rule = cell_rule(self.space())?;
        let table = self.basis().table(rule.points());
        for cell in mesh.cells() {
            let scale = mesh.cell_measure(cell) / self.basis().shape().measure();
            let unknowns = self.space().unknowns(cell);
            for (q, (point, w)) in rule.points().iter().zip(rule.weights()).enumerate() {
                let at = place(mesh, cell, point);
                let (mut u, mut slope) = (0.0, [0.0; D]);
                for ((k, value), gradient) in unknowns.iter().zip(table.values_at(q)).zip(table.gradients_at(q)) {
                    u += self.values()[*k as usize] * value;
                    for i in 0..D {
                        slope[i] += self.values()[*k as usize] * gradient[i];
                    }
                }
                let gradient = self.space().real_gradient(cell, &slope);
                let flow = self.terms().conductivity.at(&at).apply(&gradient);
                let conducted: f64 = (0..D).map(|i| flow[i] * gradient[i]).sum();
                let reacted = self.terms().reaction.as_ref().map_or(0.0, |c| c.at(&at) * u * u);
                let work = self.terms().source.as_ref().map_or(0.0, |f| f.at(&at) * u);
                sum.add(w * scale, conducted + reacted, work);
            }
        }
        self.add_sides(&mut sum)?;
        Ok(sum)
    }

    fn add_sides(&self, sum: &mut Energies) -> Result<(), Error> {
        let mesh = self.mesh();
        let sides = SideTables::new(self.space(), side_rule(self.space())?);
        for side in self.terms().condition_sides(mesh) {
            let length = mesh.side_measure(side.cell, side.local);
            for (q, (point, w)) in sides.points(side.local).iter().zip(sides.rule().weights()).enumerate() {
                let at = place(mesh, side.cell, point);
                let unknowns = self.space().unknowns(side.cell).iter();
                let u: f64 = unknowns
                    .zip(sides.table(side.local).values_at(q))
                    .map(|(k, v)| self.values()[*k as usize] * v)
                    .sum();
                match side.condition {
                    Condition::Dirichlet(_) => {}
                    Condition::Neumann(inflow) => sum.add(w * length, 0.0, inflow.at(&at) * u),
                    Condition::Robin { film, surroundings } => {
                        sum.add(w * length, film.at(&at) * (u - surroundings.at(&at)).powi(2), 0.0);
                    }
                }
            }
        }
        Ok(())
    }
}

impl Energies {
    fn add(&mut self, weight: f64, dissipation: f64, work: f64) {
        self.dissipation += weight * dissipation;
        self.work += weight * work;
        self.size += weight * (dissipation.abs() + 2.0 * work.abs());
    }
}
