//! Bounds against the true error of problems with known solutions.

use std::f64::consts::PI;
use std::sync::Arc;

use hypercircle_assembly::{Condition, Pattern, Place, Scatter, Space, System, Tensor, Terms, place, tensorial};
use hypercircle_bounds::Certificate;
use hypercircle_element::Rule;
use hypercircle_mesh::{Diagonal, Interval, Mesh, Rectangle};

/// Conjugate gradients, to keep this crate free of any solver.
fn solve(system: &System, tolerance: f64) -> Vec<f64> {
    let reduced = system.constraints.reduce(&system.matrix, &system.load);
    let product = |x: &[f64]| -> Vec<f64> {
        reduced.matrix.outer_iterator().map(|row| row.iter().map(|(j, k)| k * x[j]).sum()).collect()
    };
    let dot = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(x, y)| x * y).sum::<f64>();
    let diagonal: Vec<f64> = (0..reduced.free.len()).map(|i| *reduced.matrix.get(i, i).unwrap()).collect();
    let scale = |r: &[f64]| -> Vec<f64> { r.iter().zip(&diagonal).map(|(r, d)| r / d).collect() };
    let mut x = vec![0.0; reduced.free.len()];
    let mut r = reduced.load.clone();
    let mut z = scale(&r);
    let mut p = z.clone();
    let mut rz = dot(&r, &z);
    let goal = rz * tolerance * tolerance;
    for _ in 0..20 * x.len() {
        if rz <= goal {
            break;
        }
        let ap = product(&p);
        let step = rz / dot(&p, &ap);
        x.iter_mut().zip(&p).for_each(|(x, p)| *x += step * p);
        r.iter_mut().zip(&ap).for_each(|(r, a)| *r -= step * a);
        z = scale(&r);
        let next = dot(&r, &z);
        p.iter_mut().zip(&z).for_each(|(p, z)| *p = z + next / rz * *p);
        rz = next;
    }
    system.constraints.expand(&reduced, &x)
}

/// Energy of the difference to a solution with known gradient: ∫ A∇e·∇e + c e².
fn true_error<const D: usize>(
    space: &Space<D>,
    terms: &Terms<D>,
    u: &[f64],
    exact: impl Fn(&[f64; D]) -> (f64, [f64; D]),
) -> f64 {
    let rule = Rule::of_degree(space.basis().shape(), 2 * space.order() + 8).unwrap();
    let mut sum = 0.0;
    for cell in space.mesh().cells() {
        let scale = space.mesh().cell_measure(cell) / space.basis().shape().measure();
        for (point, w) in rule.points().iter().zip(rule.weights()) {
            let at = std::array::from_fn(|i| point[i]);
            let place = place(space.mesh(), cell, point);
            let (value, slope) = exact(&place.x);
            let gradient = space.gradient(u, cell, &at);
            let e: [f64; D] = std::array::from_fn(|i| slope[i] - gradient[i]);
            let flow = terms.conductivity.at(&place).apply(&e);
            sum += w * scale * (0..D).map(|i| flow[i] * e[i]).sum::<f64>();
            if let Some(c) = &terms.reaction {
                sum += w * scale * c.at(&place) * (value - space.value(u, cell, &at)).powi(2);
            }
        }
    }
    sum.sqrt()
}

fn square(n: usize) -> Mesh<2> {
    Rectangle::new([0.0, 0.0], [1.0, 1.0], [n, n]).diagonal(Diagonal::Alternating).mesh().unwrap()
}

#[test]
fn smooth_square_is_bounded_sharply() {
    for (order, most) in [(1, 1.10), (2, 1.06)] {
        let space = Space::new(square(12).into(), order).unwrap();
        let mut terms = Terms::conducting(space.mesh(), tensorial(1.0));
        terms.source = Some(Arc::new(|at: &Place<2>| 2.0 * PI * PI * (PI * at.x[0]).sin() * (PI * at.x[1]).sin()));
        for side in ["left", "right", "bottom", "top"] {
            terms.set(space.mesh().find_side(side).unwrap(), Condition::Dirichlet(Arc::new(0.0)));
        }
        let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter).unwrap();
        let u = solve(&system, 1e-15);
        let certificate = Certificate::of(&space, &terms, &system, &u).unwrap();
        let error = true_error(&space, &terms, &u, |x| {
            let (s, c) = ([(PI * x[0]).sin(), (PI * x[1]).sin()], [(PI * x[0]).cos(), (PI * x[1]).cos()]);
            (s[0] * s[1], [PI * c[0] * s[1], PI * s[0] * c[1]])
        });
        let index = certificate.bound() / error;
        println!("P{order}: bound/error {index:.4}, algebra {:.1e}", certificate.algebra_part());
        assert!((1.0..most).contains(&index));
    }
}

/// u = e^{x/2} cos y with a tensor, a reaction, and one condition of each kind, one side of each kind with varying data.
#[test]
fn mixed_conditions_tensor_and_reaction_are_bounded() {
    let a = Tensor::symmetric([[2.0, 0.5], [0.0, 1.0]]);
    let value = move |x: &[f64; 2]| (0.5 * x[0]).exp() * x[1].cos();
    let slope = move |x: &[f64; 2]| [0.5 * value(x), -(0.5 * x[0]).exp() * x[1].sin()];
    let source = move |at: &Place<2>| {
        let u = value(&at.x);
        let mixed = -0.5 * (0.5 * at.x[0]).exp() * at.x[1].sin();
        -(2.0 * 0.25 * u + 2.0 * 0.5 * mixed - u) + 3.0 * u
    };
    let flow = move |x: &[f64; 2], n: [f64; 2]| {
        let f = a.apply(&slope(x));
        f[0] * n[0] + f[1] * n[1]
    };
    for order in [1, 2, 3] {
        let space = Space::new(square(6).into(), order).unwrap();
        let mut terms = Terms::conducting(space.mesh(), tensorial(a));
        terms.reaction = Some(Arc::new(3.0));
        terms.source = Some(Arc::new(source));
        let side = |name| space.mesh().find_side(name).unwrap();
        terms.set(side("left"), Condition::Dirichlet(Arc::new(move |at: &Place<2>| value(&at.x))));
        terms.set(side("top"), Condition::Neumann(Arc::new(move |at: &Place<2>| flow(&at.x, [0.0, 1.0]))));
        let level = move |at: &Place<2>| value(&at.x) + flow(&at.x, [1.0, 0.0]) / 50.0;
        terms.set(side("right"), Condition::Robin { film: Arc::new(50.0), surroundings: Arc::new(level) });
        terms.set(side("bottom"), Condition::Neumann(Arc::new(move |at: &Place<2>| flow(&at.x, [0.0, -1.0]))));
        let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter).unwrap();
        for tolerance in [1e-15, 1e-3] {
            let u = solve(&system, tolerance);
            let certificate = Certificate::of(&space, &terms, &system, &u).unwrap();
            let error = true_error(&space, &terms, &u, |x| (value(x), slope(x)));
            println!(
                "P{order} to {tolerance:e}: bound/error {:.4} (flux {:.3e}, data {:.3e}, algebra {:.3e})",
                certificate.bound() / error,
                certificate.flux_part(),
                certificate.data_part(),
                certificate.algebra_part()
            );
            assert!(certificate.bound() >= error && (certificate.bound() < 1.4 * error || tolerance > 1e-4));
        }
    }
}

#[test]
fn one_dimension_is_bounded_sharply() {
    for (order, reaction) in [(1, 0.0), (1, 40.0), (2, 0.0), (2, 40.0), (3, 5.0)] {
        let space = Space::new(Interval::uniform(0.0, 1.0, 9).mesh().unwrap().into(), order).unwrap();
        let value = |x: f64| (2.0 * x).sin();
        let slope = |x: f64| 2.0 * (2.0 * x).cos();
        let conductivity = |x: f64| 1.0 + x;
        let source = move |at: &Place<1>| {
            let x = at.x[0];
            -(slope(x) - 4.0 * conductivity(x) * value(x)) + reaction * value(x)
        };
        let mut terms = Terms::conducting(space.mesh(), tensorial(move |at: &Place<1>| conductivity(at.x[0])));
        terms.source = Some(Arc::new(source));
        terms.reaction = Some(Arc::new(reaction));
        let [start, end] = ["start", "end"].map(|name| space.mesh().find_side(name).unwrap());
        terms.set(start, Condition::Dirichlet(Arc::new(0.0)));
        let level = value(1.0) + conductivity(1.0) * slope(1.0) / 3.0;
        terms.set(end, Condition::Robin { film: Arc::new(3.0), surroundings: Arc::new(level) });
        let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter).unwrap();
        let u = solve(&system, 1e-15);
        let certificate = Certificate::of(&space, &terms, &system, &u).unwrap();
        let inside = true_error(&space, &terms, &u, |x| (value(x[0]), [slope(x[0])]));
        let at_end = 3.0_f64.sqrt() * (value(1.0) - u[9]);
        let index = certificate.bound() / inside.hypot(at_end);
        println!("1D P{order}, c = {reaction}: bound/error {index:.5}");
        assert!((1.0..1.06).contains(&index));
    }
}

/// An inflow that is orthogonal to all moments of the flux: only the oscillation of the data pays for it. −Δu = 0 with u = 0 below,
/// ∂u/∂n = cos(kx) above, insulated left and right: u = cos(kx) sinh(ky) / (k cosh k).
#[test]
fn an_inflow_that_the_flux_cannot_see_is_paid_for() {
    for (order, m) in [(1, 2.0), (1, 4.0), (2, 2.0), (2, 4.0)] {
        let k = m * PI;
        let space = Space::new(square(1).into(), order).unwrap();
        let mut terms = Terms::conducting(space.mesh(), tensorial(1.0));
        let side = |name| space.mesh().find_side(name).unwrap();
        terms.set(side("bottom"), Condition::Dirichlet(Arc::new(0.0)));
        terms.set(side("top"), Condition::Neumann(Arc::new(move |at: &Place<2>| (k * at.x[0]).cos())));
        let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter).unwrap();
        let u = solve(&system, 1e-15);
        let certificate = Certificate::of(&space, &terms, &system, &u).unwrap();
        let finer =
            space.mesh().refine_uniformly().unwrap().0.refine_uniformly().unwrap().0.refine_uniformly().unwrap().0;
        // The true error by quadrature on a finer mesh: the exact solution is steep.
        let rule = Rule::of_degree(space.basis().shape(), 20).unwrap();
        let mut square_error = 0.0;
        for cell in finer.cells() {
            for (point, w) in rule.points().iter().zip(rule.weights()) {
                let x = place(&finer, cell, point).x;
                let coarse = space.mesh().cells().find_map(|c| {
                    let v = space.mesh().cell_vertices(c).iter().map(|v| space.mesh().point(*v)).collect::<Vec<_>>();
                    let j = space.mesh().jacobian(c);
                    let d = j[0][0] * j[1][1] - j[0][1] * j[1][0];
                    let (dx, dy) = (x[0] - v[0][0], x[1] - v[0][1]);
                    let at = [(j[1][1] * dx - j[0][1] * dy) / d, (j[0][0] * dy - j[1][0] * dx) / d];
                    (at[0] >= 0.0 && at[1] >= 0.0 && at[0] + at[1] <= 1.0).then_some((c, at))
                });
                let (c, at) = coarse.unwrap();
                let g = space.gradient(&u, c, &at);
                let slope =
                    [-(k * x[0]).sin() * (k * x[1]).sinh() / k.cosh(), (k * x[0]).cos() * (k * x[1]).cosh() / k.cosh()];
                let e = [slope[0] - g[0], slope[1] - g[1]];
                square_error += w * 2.0 * finer.cell_measure(cell) * (e[0] * e[0] + e[1] * e[1]);
            }
        }
        let index = certificate.bound() / square_error.sqrt();
        println!("P{order}, inflow cos({m}πx): bound/error {index:.3}");
        assert!(index >= 1.0);
    }
}

/// A vector that misses a Dirichlet value, however little above rounding, has no finite bound.
#[test]
fn a_missed_prescribed_value_has_no_bound() {
    let space = Space::new(Interval::uniform(0.0, 1.0, 1).mesh().unwrap().into(), 1).unwrap();
    let mut terms = Terms::conducting(space.mesh(), tensorial(1.0));
    for (name, value) in [("start", 293.15), ("end", 294.15)] {
        terms.set(space.mesh().find_side(name).unwrap(), Condition::Dirichlet(Arc::new(value)));
    }
    let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter).unwrap();
    let missed = Certificate::of(&space, &terms, &system, &[293.15 * (1.0 + 9e-10), 294.15]).unwrap();
    assert!(missed.bound().is_infinite());
    let met = Certificate::of(&space, &terms, &system, &[293.15, 294.15]).unwrap();
    assert!(met.bound() < 1e-12);
}
