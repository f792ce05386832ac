//! Turned, mirrored, scaled and renumbered models give the same answers.

use hypercircle::mesh::{Arrays, Mesh, Outline, VertexId, polygon, rectangle, rest_of_boundary};
use hypercircle::{Diffusion, Solution};

/// A plate with an insert: its mesh as arrays.
fn model() -> Mesh<2> {
    let mut outline = Outline::new();
    outline
        .region("plate", polygon(&[(0.0, 0.0), (3.0, 0.0), (3.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0)]))
        .unwrap();
    outline.region("insert", rectangle((1.2, 0.2), (2.1, 0.7))).unwrap();
    outline.side("surface", rest_of_boundary()).unwrap();
    outline.mesh(0.15).unwrap()
}

/// The same mesh with moved points, vertices in another order and, for mirror images, cells walked backwards.
fn moved(mesh: &Mesh<2>, order: &[usize], place: impl Fn([f64; 2]) -> [f64; 2], mirrored: bool) -> Mesh<2> {
    let mut number = vec![0; order.len()];
    order.iter().enumerate().for_each(|(new, old)| number[*old] = new as u32);
    let points = order.iter().map(|old| place(mesh.point(VertexId(*old as u32)))).collect();
    let cells: Vec<[u32; 3]> = mesh
        .cells()
        .map(|cell| {
            let v = mesh.cell_vertices(cell);
            let [a, b, c] = [0, 1, 2].map(|i| number[v[i].index()]);
            if mirrored { [a, c, b] } else { [a, b, c] }
        })
        .collect();
    let names: Vec<&str> = mesh.cells().map(|cell| mesh.region_name(mesh.region(cell))).collect();
    let surface: Vec<[u32; 2]> = mesh
        .named_sides()
        .iter()
        .map(|side| mesh.side_vertices(side.cell, side.local).map(|v| number[v.index()]))
        .collect();
    Arrays::new(points, &cells).region_of_each_cell(&names).side("surface", &surface).mesh().unwrap()
}

/// Conductivities are per meter, so a model in millimeters has film coefficients of a thousandth and sources of a millionth.
fn solve(mesh: Mesh<2>, scale: f64, order: usize) -> Solution<2> {
    Diffusion::on(mesh)
        .conductivity("plate", 1.5)
        .conductivity("insert", 200.0)
        .source("insert", 3.0 / (scale * scale))
        .robin("surface", 8.0 / scale, -4.0)
        .order(order)
        .solve()
        .unwrap()
}

#[test]
fn answers_do_not_depend_on_the_frame() {
    let mesh = model();
    let natural: Vec<usize> = (0..mesh.vertex_count()).collect();
    // Any permutation: multiply by a number without common divisor.
    let step = (2..).find(|k| gcd(*k, natural.len()) == 1 && *k > natural.len() / 3).unwrap();
    let shuffled: Vec<usize> = natural.iter().map(|k| k * step % natural.len()).collect();
    let (c, s) = (0.8, 0.6);
    for order in [1, 2] {
        let reference = solve(moved(&mesh, &natural, |x| x, false), 1.0, order);
        let others = [
            (
                "turned",
                solve(moved(&mesh, &natural, |x| [c * x[0] - s * x[1], s * x[0] + c * x[1]], false), 1.0, order),
            ),
            ("mirrored", solve(moved(&mesh, &natural, |x| [-x[0], x[1]], true), 1.0, order)),
            ("in millimeters", solve(moved(&mesh, &natural, |x| x.map(|x| 1000.0 * x), false), 1000.0, order)),
            ("far away", solve(moved(&mesh, &natural, |x| [x[0] + 64.0, x[1] - 32.0], false), 1.0, order)),
            ("renumbered", solve(moved(&mesh, &shuffled, |x| x, false), 1.0, order)),
        ];
        let figures = |solution: &Solution<2>| {
            let bound = solution.certificate().unwrap().bound();
            [
                bound,
                solution.extremes().most.value,
                solution.inflow("surface").unwrap(),
                solution.energy_norm().unwrap(),
            ]
        };
        let expected = figures(&reference);
        for (label, other) in &others {
            for (x, y) in figures(other).iter().zip(&expected) {
                assert!((x / y - 1.0).abs() < 1e-11, "{label}, order {order}: {x} for {y}");
            }
        }
    }
}

fn gcd(a: usize, b: usize) -> usize {
    if b == 0 { a } else { gcd(b, a % b) }
}

/// Polynomials of the order are reproduced for any tensor, and the bound sees it.
#[test]
fn polynomials_of_the_order_are_exact() {
    use hypercircle::{Place, Tensor};
    let a = Tensor::symmetric([[2.0, 0.7], [0.0, 1.0]]);
    for order in 1..=4 {
        let n = order as i32;
        let u = move |x: &[f64; 2]| (x[0] + 2.0 * x[1]).powi(n);
        let source = move |at: &Place<2>| {
            // −A : ∇∇u with ∇∇u = n (n − 1) s^{n−2} [[1, 2], [2, 4]]
            let s = at.x[0] + 2.0 * at.x[1];
            if n < 2 { 0.0 } else { -f64::from(n * (n - 1)) * s.powi(n - 2) * (2.0 + 4.0 * 0.7 + 4.0) }
        };
        let solution = Diffusion::on(model())
            .conductivity_everywhere(a)
            .source_everywhere(source)
            .dirichlet("surface", move |at: &Place<2>| u(&at.x))
            .order(order)
            .solve()
            .unwrap();
        let relative = solution.relative_bound().unwrap();
        println!("order {order}: relative bound {relative:.1e}");
        assert!(relative < 1e-10);
        assert!((solution.value(&[0.4, 0.3]).unwrap() - u(&[0.4, 0.3])).abs() < 1e-11);
    }
}
