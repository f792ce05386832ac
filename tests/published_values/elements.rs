//! Tables of element matrices and quadrature rules.

use std::error::Error;
use std::sync::Arc;

use hypercircle::Diffusion;
use hypercircle::assembly::{Pattern, Scatter, Space, System};
use hypercircle::element::{Rule, Shape};
use hypercircle::mesh::{Interval, Mesh, Outline, polygon};

type Outcome = Result<(), Box<dyn Error>>;

/// Stiffness and mass matrix of a mesh of one cell, between nodes given by their places.
fn matrices<const D: usize>(
    mesh: Mesh<D>,
    order: usize,
    nodes: &[[f64; D]],
) -> Result<[Vec<Vec<f64>>; 2], Box<dyn Error>> {
    assert_eq!(mesh.cell_count(), 1);
    let space = Space::new(Arc::new(mesh), order)?;
    let positions = space.positions();
    let near = |p: &[f64; D], q: &[f64; D]| p.iter().zip(q).all(|(a, b)| (a - b).abs() < 1e-12);
    let number: Vec<usize> =
        nodes.iter().filter_map(|node| positions.iter().position(|place| near(place, node))).collect();
    assert_eq!(number.len(), positions.len());
    let of = |reaction: f64| -> Result<Vec<Vec<f64>>, Box<dyn Error>> {
        let problem = Diffusion::on(space.mesh().clone()).conductivity_everywhere(1.0).reaction_everywhere(reaction);
        let system = System::assemble(&space, &Pattern::new(&space), &problem.terms()?, &Scatter)?;
        let entry = |i: usize, j: usize| system.matrix.get(i, j).copied().unwrap_or(0.0);
        Ok(number.iter().map(|i| number.iter().map(|j| entry(*i, *j)).collect()).collect())
    };
    // Without any reaction the level is undetermined and assembly refuses, so: M = (K + 2M) − (K + M).
    let (once, twice) = (of(1.0)?, of(2.0)?);
    let combined = |a: f64, b: f64| -> Vec<Vec<f64>> {
        let rows = once.iter().zip(&twice);
        rows.map(|(once, twice)| once.iter().zip(twice).map(|(o, t)| a * o + b * t).collect()).collect()
    };
    Ok([combined(2.0, -1.0), combined(-1.0, 1.0)])
}

/// Compares with a table; of a symmetric table only what is on and above the diagonal need be right.
fn assert_table(what: &str, matrix: &[Vec<f64>], table: &[&[f64]]) {
    let mut largest = 0.0_f64;
    for (i, row) in table.iter().enumerate() {
        for (j, value) in row.iter().enumerate() {
            let (i, j) = (i, j + matrix.len() - row.len());
            largest = largest.max((matrix[i][j] - value).abs()).max((matrix[j][i] - value).abs());
        }
    }
    println!("{what}: {largest:e}");
    assert!(largest < 1e-13, "{what}: {matrix:?}");
}

/// Source: G. Strang, G. Fix, An Analysis of the Finite Element Method (1973), chapter 1 (from memory); exact fractions.
#[test]
fn matrices_of_intervals() -> Outcome {
    let mesh = || Interval::uniform(0.0, 0.25, 1).mesh();
    let [stiffness, mass] = matrices(mesh()?, 1, &[[0.0], [0.25]])?;
    assert_table("stiffness, interval, order 1", &stiffness, &[&[4.0, -4.0], &[4.0]]);
    assert_table("mass, interval, order 1", &mass, &[&[1.0 / 12.0, 1.0 / 24.0], &[1.0 / 12.0]]);
    let [stiffness, mass] = matrices(mesh()?, 2, &[[0.0], [0.125], [0.25]])?;
    let third = 1.0 / 3.0;
    let table: [&[f64]; 3] =
        [&[28.0 * third, -32.0 * third, 4.0 * third], &[64.0 * third, -32.0 * third], &[28.0 * third]];
    assert_table("stiffness, interval, order 2", &stiffness, &table);
    let table: [&[f64]; 3] = [&[1.0 / 30.0, 1.0 / 60.0, -1.0 / 120.0], &[2.0 / 15.0, 1.0 / 60.0], &[1.0 / 30.0]];
    assert_table("mass, interval, order 2", &mass, &table);
    Ok(())
}

fn triangle(corners: &[(f64, f64)]) -> Result<Mesh<2>, Box<dyn Error>> {
    let mut outline = Outline::new();
    outline.region("cell", polygon(corners))?;
    Ok(outline.mesh(100.0)?)
}

/// Source: as for intervals; P. G. Ciarlet, The Finite Element Method for Elliptic Problems (1978) (from memory).
#[test]
fn matrices_of_triangles() -> Outcome {
    let corners = [[0.0, 0.0], [4.0, 0.0], [1.0, 3.0]];
    let [stiffness, mass] = matrices(triangle(&corners.map(|[x, y]| (x, y)))?, 1, &corners)?;
    let table: [&[f64]; 3] = [&[0.75, -0.25, -0.5], &[5.0 / 12.0, -1.0 / 6.0], &[2.0 / 3.0]];
    assert_table("stiffness, triangle, order 1", &stiffness, &table);
    assert_table("mass, triangle, order 1", &mass, &[&[1.0, 0.5, 0.5], &[1.0, 0.5], &[1.0]]);
    // The reference triangle: vertices, then the middles of the sides 0–1, 1–2, 2–0.
    let nodes = [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [0.5, 0.0], [0.5, 0.5], [0.0, 0.5]];
    let [stiffness, mass] = matrices(triangle(&[(0.0, 0.0), (1.0, 0.0), (0.0, 1.0)])?, 2, &nodes)?;
    let (a, b, c) = (1.0 / 6.0, 2.0 / 3.0, 4.0 / 3.0);
    let table: [&[f64]; 6] = [
        &[1.0, a, a, -b, 0.0, -b],
        &[0.5, 0.0, -b, 0.0, 0.0],
        &[0.5, 0.0, 0.0, -b],
        &[2.0 * c, -c, 0.0],
        &[2.0 * c, -c],
        &[2.0 * c],
    ];
    assert_table("stiffness, triangle, order 2", &stiffness, &table);
    let (a, b, c, d, e) = (1.0 / 60.0, -1.0 / 360.0, -1.0 / 90.0, 4.0 / 45.0, 2.0 / 45.0);
    let table: [&[f64]; 6] =
        [&[a, b, b, 0.0, c, 0.0], &[a, b, 0.0, 0.0, c], &[a, c, 0.0, 0.0], &[d, e, e], &[d, e], &[d]];
    assert_table("mass, triangle, order 2", &mass, &table);
    Ok(())
}

/// Nodes z ≥ 0 and weights on [−1, 1] for n points, outermost last.
///
/// Source: NIST Digital Library of Mathematical Functions, tables 3.5.1 and 3.5.2 (5 and 10 points); M. Abramowitz,
/// I. Stegun, Handbook of Mathematical Functions (1964), table 25.4.
const GAUSS: [(usize, &[(f64, f64)]); 5] = [
    (2, &[(0.577_350_269_189_625_8, 1.0)]),
    (3, &[(0.0, 0.888_888_888_888_889), (0.774_596_669_241_483_4, 0.555_555_555_555_555_6)]),
    (4, &[(0.339_981_043_584_856_26, 0.652_145_154_862_546_1), (0.861_136_311_594_052_6, 0.347_854_845_137_453_86)]),
    (
        5,
        &[
            (0.0, 0.568_888_888_888_889),
            (0.538_469_310_105_683_1, 0.478_628_670_499_366_5),
            (0.906_179_845_938_664, 0.236_926_885_056_189_1),
        ],
    ),
    (
        10,
        &[
            (0.148_874_338_981_631_2, 0.295_524_224_714_752_87),
            (0.433_395_394_129_247_2, 0.269_266_719_309_996_35),
            (0.679_409_568_299_024_4, 0.219_086_362_515_982_04),
            (0.865_063_366_688_984_5, 0.149_451_349_150_580_6),
            (0.973_906_528_517_171_7, 0.066_671_344_308_688_14),
        ],
    ),
];

#[test]
fn gauss_rules() -> Outcome {
    for (n, table) in GAUSS {
        let rule = Rule::of_degree(Shape::Interval, 2 * n - 1)?;
        assert_eq!(rule.len(), n);
        let mut found: Vec<(f64, f64)> =
            rule.points().iter().zip(rule.weights()).map(|(t, w)| (2.0 * t[0] - 1.0, 2.0 * w)).collect();
        found.sort_by(|a, b| a.0.total_cmp(&b.0));
        for (i, (z, w)) in table.iter().rev().enumerate() {
            let (left, right) = (found[i], found[n - 1 - i]);
            assert!((left.0 + z).abs() < 1e-15 && (right.0 - z).abs() < 1e-15, "{n} points: {found:?}");
            assert!((left.1 - w).abs() < 1e-15 && (right.1 - w).abs() < 1e-15, "{n} points: {found:?}");
        }
    }
    Ok(())
}

/// ∫ xⁱ yʲ = i! j!/(i + j + 2)! on the reference triangle.
///
/// Source: A. H. Stroud, Approximate Calculation of Multiple Integrals (1971); the listed ones are exact fractions.
#[test]
fn monomials_on_the_triangle() -> Outcome {
    let fractions = [
        ((0, 0), 2.0),
        ((1, 0), 6.0),
        ((1, 1), 24.0),
        ((2, 0), 12.0),
        ((2, 1), 60.0),
        ((2, 2), 180.0),
        ((3, 0), 20.0),
        ((3, 1), 120.0),
        ((3, 2), 420.0),
        ((3, 3), 1120.0),
        ((5, 3), 5040.0),
    ];
    for ((i, j), denominator) in fractions {
        for degree in i + j..=26 {
            let rule = Rule::of_degree(Shape::Triangle, degree as usize)?;
            for (i, j) in [(i, j), (j, i)] {
                let at = |x: &[f64; 2]| x[0].powi(i) * x[1].powi(j);
                let sum: f64 = rule.points().iter().zip(rule.weights()).map(|(x, w)| w * at(x)).sum();
                assert!((sum * denominator - 1.0).abs() < 1e-13, "degree {degree}, x^{i} y^{j}: {sum}");
            }
        }
    }
    Ok(())
}
