//! Heat conduction in two dimensions.

use std::error::Error;
use std::sync::Arc;

use hypercircle::mesh::{CellId, Mesh, Outline, Rectangle, VertexId, between, polygon, rectangle};
use hypercircle::{Diffusion, Guarantee, Place, Tensor, Tolerance};

type Outcome = Result<(), Box<dyn Error>>;

/// Half of a square column, insulated on its plane of symmetry x = 1.
///
/// Source: ISO 10211:2007 and 2017, annex with validation cases, case 1 (0.1 K asked; table from memory). Here the series
/// T = (80/π) Σ sin(nπx/2) sinh(nπy/2)/(n sinh(nπ)), n odd, to 12 digits, which rounds to that table.
#[test]
fn iso10211_case1() -> Outcome {
    let rows = [
        [9.658_187_769_56, 13.379_055_322_8, 14.728_918_426_1, 15.085_379_907_1],
        [5.251_737_796_79, 8.640_566_637_74, 10.315_548_446_8, 10.810_584_365_2],
        [3.188_684_317_73, 5.608_999_328_24, 7.014_152_966_27, 7.465_122_012_59],
        [2.014_152_966_27, 3.640_566_637_74, 4.658_187_769_56, 5.0],
        [1.262_466_685_2, 2.308_603_415_59, 2.985_847_033_73, 3.218_502_448_29],
        [0.739_647_314_506, 1.359_433_362_26, 1.766_848_809_41, 1.908_282_359_33],
        [0.341_812_230_437, 0.629_559_565_933, 0.819_930_570_973, 0.886_314_160_355],
    ];
    let mesh = Rectangle::new([0.0, 0.0], [1.0, 2.0], [32, 64]).mesh()?;
    let mesh = Arc::new(bisected_toward(mesh, &[[0.0, 2.0]], 40)?);
    for (order, tolerance) in [(1, 0.005), (2, 1e-5), (4, 1e-7)] {
        let column = Diffusion::on(mesh.clone()).conductivity_everywhere(1.0).order(order);
        let solution = column.dirichlet("top", 20.0).dirichlet("left", 0.0).dirichlet("bottom", 0.0).solve()?;
        let mut largest = 0.0_f64;
        for (j, row) in rows.iter().enumerate() {
            for (i, temperature) in row.iter().enumerate() {
                let at = [0.25 * (i + 1) as f64, 2.0 - 0.25 * (j + 1) as f64];
                largest = largest.max((solution.value(&at)? - temperature).abs());
            }
        }
        println!("iso10211_case1: order {order}, {} unknowns, {largest:e} K", solution.unknown_count());
        assert!(largest < tolerance, "order {order}: {largest:e}");
        // At the jump the mean is taken.
        assert!((solution.value(&[0.0, 2.0])? - 10.0).abs() < 1e-12);
        // Data that jump have no finite energy: there can be no bound, and it is said so.
        assert!(matches!(solution.certificate()?.guarantee(), Guarantee::None(_)));
    }
    Ok(())
}

/// Cells at some points bisected again and again.
fn bisected_toward(mut mesh: Mesh<2>, points: &[[f64; 2]], times: usize) -> Result<Mesh<2>, Box<dyn Error>> {
    for _ in 0..times {
        let touches = |v: &VertexId| points.contains(&mesh.point(*v));
        let marked: Vec<CellId> = mesh.cells().filter(|c| mesh.cell_vertices(*c).iter().any(touches)).collect();
        mesh = mesh.bisect(&marked)?.0;
    }
    Ok(mesh)
}

/// A section of four materials: a thin aluminum angle in insulation.
///
/// Source: ISO 10211:2007 and 2017, annex with validation cases, case 2 (0.1 K and 0.1 W/m asked; published figures from
/// memory; a finite-volume computation on graded grids gives 9.4915 W/m).
#[test]
fn iso10211_case2() -> Outcome {
    let (width, height) = (0.5, 0.0475);
    let mut section = Outline::new();
    section.region("insulation", rectangle((0.0, 0.006), (width, 0.046)))?;
    section.region("layer", rectangle((0.0, 0.0), (width, 0.006)))?;
    section.region("block", rectangle((0.0, 0.006), (0.015, 0.011)))?;
    let metal = [
        (0.0, 0.011),
        (0.015, 0.011),
        (0.015, 0.0125),
        (0.0015, 0.0125),
        (0.0015, 0.046),
        (width, 0.046),
        (width, height),
        (0.0, height),
    ];
    section.region("metal", polygon(&metal))?;
    section.side("outside", between((0.0, 0.0), (width, 0.0)))?;
    section.side("inside", between((0.0, height), (width, height)))?;
    let problem = Diffusion::on(section.mesh(0.01)?)
        .conductivity("layer", 1.15)
        .conductivity("block", 0.12)
        .conductivity("insulation", 0.029)
        .conductivity("metal", 230.0)
        .robin("outside", 1.0 / 0.06, 0.0)
        .robin("inside", 1.0 / 0.11, 20.0)
        .order(2);
    let answer = problem.solve_within(Tolerance::FlowAbsolute(0.004))?;
    assert!(answer.is_met());
    let flow = answer.exchanged_flow()?;
    println!(
        "iso10211_case2: {flow} [{}, {}] W/m, {} unknowns, {} rounds",
        flow.lower,
        flow.upper,
        answer.unknown_count(),
        answer.rounds().len()
    );
    assert!(flow.width() <= 0.004 && flow.guarantee == Guarantee::Full);
    assert!(flow.lower <= 9.4915 + 0.002 && flow.upper >= 9.4915 - 0.002, "{flow:?}");
    assert!((flow.value - 9.5).abs() < 0.1);
    assert!((answer.inflow("inside")? - flow.value).abs() < flow.width());
    let published = [
        ("A", [0.0, 0.0], 7.1),
        ("B", [width, 0.0], 0.8),
        ("C", [0.0, 0.006], 7.9),
        ("D", [0.015, 0.006], 6.3),
        ("E", [width, 0.006], 0.8),
        ("F", [0.0, 0.011], 16.4),
        ("G", [0.015, 0.011], 16.3),
        ("H", [0.0, height], 16.8),
        ("I", [width, height], 18.3),
    ];
    for (name, at, temperature) in published {
        let value = answer.value(&at)?;
        println!("iso10211_case2: {name} {value:.4} °C, published {temperature}");
        assert!((value - temperature).abs() < 0.1, "{name}: {value}");
    }
    Ok(())
}

/// A plate with one hot side that loses heat to air on two others.
///
/// Source: NAFEMS, The Standard NAFEMS Benchmarks (1990), test T4: 18.3 °C at (0.6, 0.2) (from memory). Here the eigenfunction
/// series to 12 digits.
#[test]
fn plate_with_convection() -> Outcome {
    let plate = Rectangle::new([0.0, 0.0], [0.6, 1.0], [6, 10]).mesh()?;
    let answer = Diffusion::on(plate)
        .conductivity_everywhere(52.0)
        .dirichlet("bottom", 100.0)
        .robin("right", 750.0, 0.0)
        .robin("top", 750.0, 0.0)
        .order(2)
        .solve_within(Tolerance::Relative(1e-4))?;
    assert!(answer.is_met());
    let published = [
        ([0.6, 0.2], 18.253_756_537_1),
        ([0.0, 0.2], 70.060_663_088_215),
        ([0.3, 0.5], 28.319_959_743_478),
        ([0.6, 0.5], 6.387_122_055_212_8),
    ];
    println!("plate_with_convection: {} unknowns, {} rounds", answer.unknown_count(), answer.rounds().len());
    for (at, temperature) in published {
        let difference = answer.value(&at)? - temperature;
        println!("plate_with_convection: at {at:?} {difference:e} K");
        assert!(difference.abs() < 1e-4, "{at:?}: {difference:e}");
    }
    Ok(())
}

/// An orthotropic square with one hot side; the data jump at two corners.
///
/// Source: Carslaw and Jaeger, Conduction of Heat in Solids (1959), sections 1.17–1.20 (from memory); series
/// Σ 4/(nπ) sin(nπx) sinh(2nπy)/sinh(2nπ), n odd.
#[test]
fn anisotropic_square() -> Outcome {
    let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [32, 32]).mesh()?;
    let mesh = bisected_toward(mesh, &[[0.0, 1.0], [1.0, 1.0]], 40)?;
    let solution = Diffusion::on(mesh)
        .conductivity_everywhere(Tensor::diagonal([4.0, 1.0]))
        .dirichlet("top", 1.0)
        .dirichlet("left", 0.0)
        .dirichlet("right", 0.0)
        .dirichlet("bottom", 0.0)
        .order(4)
        .solve()?;
    let values =
        [([0.5, 0.5], 0.054_884_899_707_104), ([0.25, 0.75], 0.189_766_874_206_28), ([0.5, 0.9], 0.623_980_486_666_97)];
    for (at, value) in values {
        let difference = solution.value(&at)? - value;
        println!("anisotropic_square: at {at:?} {difference:e}");
        assert!(difference.abs() < 1e-8);
    }
    Ok(())
}

/// A full conductivity tensor: u = sin(πx) eʸ, A = [[3, 1], [1, 2]], the inflow prescribed on y = 1.
///
/// Method: manufactured solutions (P. J. Roache, J. Fluids Eng. 124 (2002) 4); energy from the closed form.
#[test]
fn full_tensor() -> Outcome {
    use std::f64::consts::{E, PI};
    let u = |at: &Place<2>| (PI * at.x[0]).sin() * at.x[1].exp();
    let f = |x: f64, y: f64| y.exp() * ((3.0 * PI * PI - 2.0) * (PI * x).sin() - 2.0 * PI * (PI * x).cos());
    assert!((f(0.3, 0.4) / 27.811_842_306_14 - 1.0).abs() < 1e-12);
    let solution = Diffusion::on(Rectangle::new([0.0, 0.0], [1.0, 1.0], [12, 12]).mesh()?)
        .conductivity_everywhere(Tensor::symmetric([[3.0, 1.0], [1.0, 2.0]]))
        .source_everywhere(move |at: &Place<2>| f(at.x[0], at.x[1]))
        .dirichlet("left", 0.0)
        .dirichlet("right", 0.0)
        .dirichlet("bottom", u)
        .neumann("top", |at: &Place<2>| PI * (PI * at.x[0]).cos() * E + 2.0 * E * (PI * at.x[0]).sin())
        .order(4)
        .solve()?;
    let off = solution.value(&[0.3, 1.0])? - 2.199_136_194_724_0;
    let (norm, bound) = (solution.energy_norm()?, solution.certificate()?.bound());
    let exact = 50.487_620_194_075_f64.sqrt();
    println!("full_tensor: u(0.3, 1) {off:e}, energy norm {:e}, bound {bound:e}", norm - exact);
    assert!(off.abs() < 1e-6);
    assert!((norm - exact).abs() <= bound && bound < 1e-3);
    Ok(())
}
