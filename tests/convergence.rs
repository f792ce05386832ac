//! Observed orders, sharpness of the bound, and rates of adaptive refinement, all printed.

use std::f64::consts::{FRAC_PI_2, PI};
use std::sync::Arc;

use hypercircle::assembly::place;
use hypercircle::element::Rule;
use hypercircle::mesh::{Diagonal, Interval, Mesh, Outline, Rectangle, polygon, rest_of_boundary};
use hypercircle::solve::Automatic;
use hypercircle::{Budget, Diffusion, Goal, Guarantee, Place, Solution, Tolerance, Unwatched};

/// ‖∇e‖ and ‖e‖ for conductivity one.
fn errors<const D: usize>(solution: &Solution<D>, exact: impl Fn(&[f64; D]) -> (f64, [f64; D])) -> [f64; 2] {
    let (space, mesh) = (solution.space(), solution.mesh());
    let rule = Rule::of_degree(space.basis().shape(), 2 * space.order() + 8).unwrap();
    let mut sums = [0.0; 2];
    for cell in mesh.cells() {
        let scale = mesh.cell_measure(cell) / space.basis().shape().measure();
        for (point, w) in rule.points().iter().zip(rule.weights()) {
            let (x, at) = (place(mesh, cell, point).x, std::array::from_fn(|i| point[i]));
            let (value, slope) = exact(&x);
            let gradient = space.gradient(solution.values(), cell, &at);
            sums[0] += w * scale * (0..D).map(|i| (slope[i] - gradient[i]).powi(2)).sum::<f64>();
            sums[1] += w * scale * (value - space.value(solution.values(), cell, &at)).powi(2);
        }
    }
    sums.map(f64::sqrt)
}

/// Checks the observed orders between two errors on meshes of halved size.
fn check_orders(label: &str, order: usize, coarse: [f64; 2], fine: [f64; 2]) {
    let observed = [0, 1].map(|i| (coarse[i] / fine[i]).log2());
    println!("{label}, order {order}: energy {:.3}, L² {:.3}", observed[0], observed[1]);
    assert!(observed[0] > order as f64 - 0.15 && observed[1] > order as f64 + 1.0 - 0.15);
}

#[test]
fn orders_in_one_dimension() {
    for order in 1..=5 {
        let solve = |n: usize| {
            let mesh = Interval::uniform(0.0, 1.0, n).mesh().unwrap();
            let solution = Diffusion::on(mesh)
                .conductivity_everywhere(1.0)
                .reaction_everywhere(2.0)
                .source_everywhere(|at: &Place<1>| 11.0 * (3.0 * at.x[0]).sin())
                .dirichlet("start", 0.0)
                .neumann("end", 3.0 * 3.0_f64.cos())
                .order(order)
                .solve()
                .unwrap();
            errors(&solution, |x| ((3.0 * x[0]).sin(), [3.0 * (3.0 * x[0]).cos()]))
        };
        check_orders("interval", order, solve(8), solve(16));
    }
}

fn product(x: &[f64; 2]) -> (f64, [f64; 2]) {
    let (s, c) = (x.map(|x| (PI * x).sin()), x.map(|x| (PI * x).cos()));
    (s[0] * s[1], [PI * c[0] * s[1], PI * s[0] * c[1]])
}

fn smooth_square(n: usize, order: usize) -> Solution<2> {
    let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [n, n]).diagonal(Diagonal::Alternating).mesh().unwrap();
    let mut problem = Diffusion::on(mesh)
        .conductivity_everywhere(1.0)
        .source_everywhere(|at: &Place<2>| 2.0 * PI * PI * product(&at.x).0)
        .order(order);
    for side in ["left", "right", "bottom", "top"] {
        problem = problem.dirichlet(side, 0.0);
    }
    problem.solve().unwrap()
}

#[test]
fn orders_and_sharpness_on_the_square() {
    for order in 1..=4 {
        let (coarse, fine) = (smooth_square(8, order), smooth_square(16, order));
        let fine_errors = errors(&fine, product);
        check_orders("square", order, errors(&coarse, product), fine_errors);
        let certificate = fine.certificate().unwrap();
        let index = certificate.bound() / fine_errors[0];
        println!("  bound over true error {index:.4}");
        let most = if order == 1 { 1.10 } else { 1.06 };
        assert!((1.0 - 1e-9..=most).contains(&index));
    }
}

/// The divergence of the equilibrated flux is the projected source in every cell.
#[test]
fn the_flux_balances_in_every_cell() {
    for order in 1..=3 {
        let solution = smooth_square(12, order);
        let certificate = solution.certificate().unwrap();
        assert_eq!(certificate.guarantee(), &Guarantee::Sampled);
        // The certificate looks at sampled data with a rule six degrees finer than that of assembly.
        let rule = Rule::of_degree(solution.basis().shape(), 2 * order + 8).unwrap();
        let (mesh, source) = (solution.mesh(), solution.terms().source.as_ref().unwrap());
        let defect = certificate
            .flux()
            .balance_defect(&rule, |cell, q| source.at(&place(mesh, cell, &rule.points()[q])))
            .unwrap();
        println!("order {order}: largest defect of the balance {defect:.1e}");
        assert!(defect < 1e-10);
    }
}

/// r^(2/3) sin(2θ/3), harmonic on the L-shape (W. F. Mitchell, Appl. Math. Comput. 220, 2013).
fn corner(x: &[f64; 2]) -> (f64, [f64; 2]) {
    let r = x[0].hypot(x[1]);
    if r == 0.0 {
        return (0.0, [0.0; 2]);
    }
    let theta = x[1].atan2(x[0]);
    let theta = if theta < -1e-12 { theta + 4.0 * FRAC_PI_2 } else { theta.max(0.0) };
    let (a, k) = (2.0 / 3.0 * theta, 2.0 / 3.0 * r.powf(-1.0 / 3.0));
    (r.powf(2.0 / 3.0) * a.sin(), [k * (a - theta).sin(), k * (a - theta).cos()])
}

fn l_shape(size: f64) -> Mesh<2> {
    let mut outline = Outline::new();
    let corners = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (-1.0, 1.0), (-1.0, -1.0), (0.0, -1.0)];
    outline.region("l", polygon(&corners)).unwrap();
    outline.side("rim", rest_of_boundary()).unwrap();
    outline.mesh(size).unwrap()
}

fn l_problem(mesh: impl Into<Arc<Mesh<2>>>, order: usize) -> Diffusion<2> {
    Diffusion::on(mesh).conductivity_everywhere(1.0).dirichlet("rim", |at: &Place<2>| corner(&at.x).0).order(order)
}

/// Square of the energy norm (recomputed by quadrature).
const L_ENERGY: f64 = 1.836_226_661_875_16;

#[test]
fn adaptive_refinement_is_optimal_and_uniform_is_not() {
    for order in [1, 2] {
        let budget = Budget::none().unknowns(40_000);
        let goal = Goal::new(Tolerance::Absolute(1e-9)).within(budget);
        let answer = l_problem(l_shape(0.4), order).pursue(&goal, &mut Automatic::default(), &mut Unwatched).unwrap();
        let rounds = answer.rounds();
        // Slope of log(bound) over log(unknowns) from 2,000 unknowns on, by least squares.
        let points: Vec<[f64; 2]> =
            rounds.iter().filter(|r| r.unknowns > 2_000).map(|r| [(r.unknowns as f64).ln(), r.bound.ln()]).collect();
        let mean = [0, 1].map(|i| points.iter().map(|p| p[i]).sum::<f64>() / points.len() as f64);
        let slope = points.iter().map(|p| (p[0] - mean[0]) * (p[1] - mean[1])).sum::<f64>()
            / points.iter().map(|p| (p[0] - mean[0]).powi(2)).sum::<f64>();
        let index = rounds[rounds.len() - 1].bound / errors(answer.solution(), corner)[0];
        println!("L-shape, order {order}: bound falls like N^{slope:.3}, bound over true error {index:.3}");
        assert!((slope / (-0.5 * order as f64) - 1.0).abs() < 0.1);
        assert!((1.0..1.30).contains(&index));
        let relative = answer.energy_norm().unwrap() / L_ENERGY.sqrt();
        assert!((relative - 1.0).abs() < 1e-3);
    }
    let mut mesh = l_shape(0.4);
    let mut bounds = Vec::new();
    for _ in 0..4 {
        mesh = mesh.refine_uniformly().unwrap().0;
        let solution = l_problem(mesh.clone(), 1).solve().unwrap();
        bounds.push((solution.unknown_count() as f64, solution.certificate().unwrap().bound()));
    }
    let (coarse, fine) = (bounds[2], bounds[3]);
    let slope = (fine.1 / coarse.1).ln() / (fine.0 / coarse.0).ln();
    println!("L-shape, uniform: bound falls like N^{slope:.3}");
    assert!((slope + 1.0 / 3.0).abs() < 0.04);
}
