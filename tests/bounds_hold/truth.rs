//! The true error of a vector when the solution is known.

use hypercircle::Solution;
use hypercircle::assembly::{Condition, SideTables, place};
use hypercircle::element::{Rule, Shape};

use crate::families::Exact;

/// √(∫ A∇e·∇e + ∫ c e² + ∫ α e² on Robin sides) for e = u − u_h, by quadrature eight degrees above the elements.
pub(crate) fn error<const D: usize>(solution: &Solution<D>, values: &[f64], exact: &Exact<D>) -> f64 {
    let (space, terms, mesh) = (solution.space(), solution.terms(), solution.mesh());
    let shape = space.basis().shape();
    let rule = Rule::of_degree(shape, 2 * space.order() + 8).unwrap();
    let mut sum = 0.0;
    for cell in mesh.cells() {
        let scale = mesh.cell_measure(cell) / shape.measure();
        for (point, w) in rule.points().iter().zip(rule.weights()) {
            let (at, reference) = (place(mesh, cell, point), std::array::from_fn(|i| point[i]));
            let (value, slope) = exact(&at.x);
            let gradient = space.gradient(values, cell, &reference);
            let e: [f64; D] = std::array::from_fn(|i| slope[i] - gradient[i]);
            let flow = terms.conductivity.at(&at).apply(&e);
            sum += w * scale * (0..D).map(|i| flow[i] * e[i]).sum::<f64>();
            if let Some(c) = &terms.reaction {
                sum += w * scale * c.at(&at) * (value - space.value(values, cell, &reference)).powi(2);
            }
        }
    }
    let line = Rule::of_degree(Shape::Interval, if D == 1 { 0 } else { 2 * space.order() + 8 }).unwrap();
    let sides = SideTables::new(space, line);
    for side in terms.condition_sides(mesh) {
        let Condition::Robin { film, .. } = side.condition else { continue };
        let length = mesh.side_measure(side.cell, side.local);
        for (point, w) in sides.points(side.local).iter().zip(sides.rule().weights()) {
            let (at, reference) = (place(mesh, side.cell, point), std::array::from_fn(|i| point[i]));
            let e = exact(&at.x).0 - space.value(values, side.cell, &reference);
            sum += w * length * film.at(&at) * e * e;
        }
    }
    sum.sqrt()
}
