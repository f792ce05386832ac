//! One dimension: walls, fins, closed forms of variable coefficients, and the textbook properties of linear elements.

use std::error::Error;

use hypercircle::mesh::{Interval, Toward};
use hypercircle::{Diffusion, Place};

type Outcome = Result<(), Box<dyn Error>>;

/// Layers in series with surface resistances. Linear elements are exact, one cell for each layer is enough.
///
/// Method: ISO 6946 (thermal resistances in series); the layers are invented and the figures are arithmetic.
#[test]
fn wall_layers() -> Outcome {
    let layers = [("plaster", 0.015, 0.70), ("brick", 0.175, 0.99), ("wool", 0.14, 0.035), ("facing", 0.115, 0.77)];
    let mut pieces = Vec::new();
    let mut x = 0.0;
    for (name, thickness, _) in layers {
        pieces.push((name, x, x + thickness, 1));
        x += thickness;
    }
    let mesh = Interval::pieces(&pieces).ends("room", "street").mesh()?;
    let mut wall = Diffusion::on(mesh).robin("room", 1.0 / 0.13, 20.0).robin("street", 1.0 / 0.04, -5.0);
    for (name, _, conductivity) in layers {
        wall = wall.conductivity(name, conductivity);
    }
    let solution = wall.solve()?;
    let flux = 25.0 * 0.221_359_074_444_366;
    let interval = solution.exchanged_flow()?;
    println!("wall_layers: {:e} {:e} {interval}", solution.inflow("room")? - flux, solution.inflow("street")? + flux);
    assert!((solution.inflow("room")? - flux).abs() < 1e-12);
    assert!((solution.inflow("street")? + flux).abs() < 1e-12);
    assert!(interval.holds(flux) && interval.width() < 1e-10, "{interval}");
    Ok(())
}

/// The temperatures between the layers too.
///
/// Source: method of ISO 6946:2017, 6.7.1; surface resistances of its table 7 (from memory); the figures are arithmetic.
#[test]
fn wall_with_insulation() -> Outcome {
    let joints = [0.0, 0.015, 0.255, 0.395, 0.415];
    let mesh = Interval::pieces(&[
        ("plaster", joints[0], joints[1], 1),
        ("masonry", joints[1], joints[2], 1),
        ("wool", joints[2], joints[3], 1),
        ("render", joints[3], joints[4], 1),
    ])
    .ends("room", "street")
    .mesh()?;
    let solution = Diffusion::on(mesh)
        .conductivity("plaster", 0.57)
        .conductivity("masonry", 0.50)
        .conductivity("wool", 0.035)
        .conductivity("render", 0.87)
        .robin("room", 1.0 / 0.13, 20.0)
        .robin("street", 1.0 / 0.04, -5.0)
        .solve()?;
    assert!((solution.inflow("room")? - 5.319_936_405_357_9).abs() < 1e-12);
    let temperatures =
        [19.308_408_267_303, 19.168_409_940_847, 16.614_840_466_275, -4.664_905_155_156_8, -4.787_202_543_785_7];
    for (x, temperature) in joints.iter().zip(temperatures) {
        let difference = solution.value(&[*x])? - temperature;
        println!("wall_with_insulation: at {x} m {difference:e}");
        assert!(difference.abs() < 1e-11);
    }
    Ok(())
}

/// Heat made inside a plane wall with films of different size: a parabola, exact with order 2.
///
/// Source: F. P. Incropera, D. P. DeWitt, Fundamentals of Heat and Mass Transfer, section 3.5 (closed form, from memory).
#[test]
fn wall_with_source_and_two_films() -> Outcome {
    let solution = Diffusion::on(Interval::uniform(0.0, 0.3, 3).mesh()?)
        .conductivity_everywhere(1.5)
        .source_everywhere(5000.0)
        .robin("start", 10.0, 20.0)
        .robin("end", 25.0, 0.0)
        .order(2)
        .solve()?;
    assert!((solution.value(&[0.0])? - 75.882_352_941_176).abs() < 1e-10);
    assert!((solution.value(&[0.3])? - 37.647_058_823_529).abs() < 1e-10);
    assert!((solution.inflow("start")? + 558.823_529_411_76).abs() < 1e-9);
    assert!((solution.inflow("end")? + 941.176_470_588_24).abs() < 1e-9);
    assert!((solution.value(&[0.111_764_705_882_35])? - 96.701_268_742_791).abs() < 1e-10);
    assert!(solution.gradient(&[0.111_764_705_882_35])?[0].abs() < 1e-9);
    // The extremes are searched on a lattice: close to the parabola's top, never above it.
    let most = solution.extremes().most;
    println!(
        "wall_with_source_and_two_films: {} at {} m, bound {:e}",
        most.value,
        most.at[0],
        solution.certificate()?.bound()
    );
    assert!(most.value <= 96.701_268_742_792 && most.value > 96.4);
    assert!(solution.certificate()?.bound() < 1e-6);
    Ok(())
}

/// A fin that tapers to an edge: the conductance vanishes at the tip.
///
/// Source: K. A. Gardner, Trans. ASME 67 (1945) 621; Incropera and DeWitt, table 3.5 (from memory); θ = I₀(2m√(Lx))/I₀(2mL).
#[test]
fn fin_triangular() -> Outcome {
    let solution = Diffusion::on(Interval::uniform(0.0, 0.05, 10).ends("tip", "base").mesh()?)
        .conductivity_everywhere(|at: &Place<1>| 200.0 * 0.006 * at.x[0] / 0.05)
        .reaction_everywhere(100.0)
        .source_everywhere(100.0 * 20.0)
        .dirichlet("base", 100.0)
        .order(4)
        .solve()?;
    let off = [
        solution.value(&[0.0])? - 85.603_964_492_719,
        solution.value(&[0.025])? - 92.617_746_150_184,
        solution.inflow("base")? - 363.395_781_783_31,
    ];
    println!("fin_triangular: {off:?}, bound {:e}", solution.certificate()?.bound());
    assert!(off.iter().all(|off| off.abs() < 1e-8));
    Ok(())
}

/// −u″ + m² u = 0, u(0) = 1, u′(1) = 0, m = 3.
///
/// Source: Incropera and DeWitt, fins with an insulated tip (closed form): u(1) = 1/cosh m, flux at 0 = m tanh m.
#[test]
fn fin_tip_insulated() -> Outcome {
    let (tip, flux) = (0.099_327_927_419_433_2, 2.985_164_261_060_19);
    // Linear elements meet two limits: cells of size h leave an error of about h², and rounding of the sum 2/h + (2/3) m² h
    // one of about 10⁻¹⁶/h². In between, 10⁻⁸ is what there is.
    for (order, cells, tolerance) in [(1, 8192, 3e-8), (2, 400, 1e-9), (3, 60, 1e-9), (4, 20, 1e-9)] {
        let solution = Diffusion::on(Interval::uniform(0.0, 1.0, cells).mesh()?)
            .conductivity_everywhere(1.0)
            .reaction_everywhere(9.0)
            .dirichlet("start", 1.0)
            .order(order)
            .solve()?;
        let off = [solution.value(&[1.0])? - tip, solution.inflow("start")? - flux];
        println!("fin_tip_insulated: order {order}, {cells} cells: tip {:e}, flux {:e}", off[0], off[1]);
        assert!(off.iter().all(|off| off.abs() < tolerance), "order {order}: {off:?}");
    }
    Ok(())
}

/// A straight fin of constant thickness in real units.
///
/// Source: Incropera and DeWitt, table 3.4 case B (closed form, from memory).
#[test]
fn fin_straight() -> Outcome {
    let solution = Diffusion::on(Interval::uniform(0.0, 0.05, 20).ends("base", "tip").mesh()?)
        .conductivity_everywhere(200.0 * 0.003)
        .reaction_everywhere(2.0 * 50.0)
        .source_everywhere(2.0 * 50.0 * 20.0)
        .dirichlet("base", 100.0)
        .order(3)
        .solve()?;
    assert!((solution.value(&[0.05])? - 85.807_421_899_013).abs() < 1e-9);
    assert!((solution.value(&[0.025])? - 89.264_747_631_518).abs() < 1e-9);
    assert!((solution.inflow("base")? - 352.367_696_278_08).abs() < 1e-8);
    assert!(solution.balance()?.defect().abs() < 1e-8);
    Ok(())
}

/// A pin fin that loses heat through its tip too.
///
/// Source: Incropera and DeWitt, table 3.4 case A (closed form, from memory).
#[test]
fn fin_pin_with_film_at_the_tip() -> Outcome {
    let diameter = 0.005;
    let (area, rim) = (std::f64::consts::PI * diameter * diameter / 4.0, std::f64::consts::PI * diameter);
    let solution = Diffusion::on(Interval::uniform(0.0, 0.08, 20).ends("base", "tip").mesh()?)
        .conductivity_everywhere(398.0 * area)
        .reaction_everywhere(100.0 * rim)
        .source_everywhere(100.0 * rim * 25.0)
        .dirichlet("base", 100.0)
        .robin("tip", 100.0 * area, 25.0)
        .order(4)
        .solve()?;
    assert!((solution.value(&[0.08])? - 68.106_115_863_716).abs() < 1e-9);
    assert!((solution.value(&[0.04])? - 75.682_353_246_288).abs() < 1e-9);
    assert!((solution.inflow("base")? - 6.800_486_118_564_6).abs() < 1e-10);
    Ok(())
}

/// Hat functions: the entries of the matrix, and values at the nodes that are exact for a constant load.
///
/// Common practice: stiffness 2/h on the diagonal and −1/h beside it; u = q x (1 − x)/2 at the nodes for any number of them.
#[test]
fn hat_stiffness() -> Outcome {
    for inner in [1, 2, 7, 30] {
        let solution = Diffusion::on(Interval::uniform(0.0, 1.0, inner + 1).mesh()?)
            .conductivity_everywhere(1.0)
            .source_everywhere(3.0)
            .dirichlet("start", 0.0)
            .dirichlet("end", 0.0)
            .solve()?;
        for (i, x) in solution.mesh().points().iter().enumerate() {
            assert!((solution.values()[i] - 1.5 * x[0] * (1.0 - x[0])).abs() < 1e-13, "{inner} inner nodes, at {x:?}");
        }
        let inverse_h = inner as f64 + 1.0;
        for i in 1..=inner {
            for j in 1..=inner {
                let expected = [2.0 * inverse_h, -inverse_h].get(i.abs_diff(j)).copied().unwrap_or(0.0);
                let entry = solution.system().matrix.get(i, j).copied().unwrap_or(0.0);
                assert!((entry - expected).abs() < 1e-13 * inverse_h.max(1.0), "{inner} inner nodes: {i} {j} {entry}");
            }
        }
        // The error has the slope q (x − middle) in every cell: ∫ e′² = q² h²/12. The bound is exact, for the flux is.
        let error = 3.0 / (inverse_h * 12.0_f64.sqrt());
        assert!((solution.certificate()?.bound() / error - 1.0).abs() < 1e-9);
        if inner == 7 {
            assert!((solution.value(&[0.5])? - 0.375).abs() < 1e-13);
        }
    }
    Ok(())
}

/// −u″ = eˣ on uneven cells: linear elements hit u = 1 + (e − 1) x − eˣ at every node when the load is integrated exactly.
///
/// Source: G. Strang, G. Fix, An Analysis of the Finite Element Method (1973), section 1.6; P. Tong, AIAA J. 7 (1969) 178 (both
/// from memory).
#[test]
fn nodal_exactness() -> Outcome {
    let nodes = [0.0, 0.1, 0.35, 0.6, 0.85, 1.0];
    let exact = [0.0, 0.066_657_264_770_257, 0.182_331_091_367_41, 0.208_850_296_684_92, 0.120_892_702_264_20, 0.0];
    // The closure is integrated by quadrature of a degree that grows with the order: for order 1 its error shows.
    for (order, tolerance) in [(1, 1e-9), (2, 1e-12), (3, 1e-13), (4, 1e-13)] {
        let solution = Diffusion::on(Interval::from_nodes(&nodes).mesh()?)
            .conductivity_everywhere(1.0)
            .source_everywhere(|at: &Place<1>| at.x[0].exp())
            .dirichlet("start", 0.0)
            .dirichlet("end", 0.0)
            .order(order)
            .solve()?;
        let off = solution.values().iter().zip(exact).map(|(u, e)| (u - e).abs()).fold(0.0, f64::max);
        println!("nodal_exactness: order {order}: {off:e}");
        assert!(off < tolerance, "order {order}: {off:e}");
    }
    Ok(())
}

/// −ε² u″ + u = 1 with layers at both ends.
///
/// Source: H.-G. Roos, M. Stynes, L. Tobiska, Robust Numerical Methods for Singularly Perturbed Differential Equations (2008),
/// the model problem (closed form, from memory): u = 1 − cosh((x − ½)/ε)/cosh(1/(2ε)).
#[test]
fn reaction_with_two_layers() -> Outcome {
    let cases = [
        (0.1, [0.393_422_027_054_85, 0.917_365_668_598_79, 0.986_524_717_778_70], 0.800_018_159_147_48),
        (0.02, [0.917_915_001_376_10, 0.999_996_273_346_83, 0.999_999_999_972_22], 0.960_000_000_000_00),
    ];
    for (epsilon, values, integral) in cases {
        let solution = Diffusion::on(Interval::graded(0.0, 1.0, 80, Toward::Both, 8.0).mesh()?)
            .conductivity_everywhere(epsilon * epsilon)
            .reaction_everywhere(1.0)
            .source_everywhere(1.0)
            .dirichlet("start", 0.0)
            .dirichlet("end", 0.0)
            .order(5)
            .solve()?;
        for (x, value) in [0.05, 0.25, 0.5].into_iter().zip(values) {
            let difference = solution.value(&[x])? - value;
            println!("reaction_with_two_layers: ε = {epsilon}, x = {x}: {difference:e}");
            assert!(difference.abs() < 1e-9);
        }
        assert!((solution.over_region("domain")?.integral - integral).abs() < 1e-11);
        // ∫ u is the work of the load.
        let work = solution.load_work()?;
        println!("reaction_with_two_layers: ∫ u = {work}, width {:e}", work.width());
        assert!(work.holds(integral) && work.width() < 1e-9, "{work:?}");
    }
    Ok(())
}

/// −((1 + x) u′)′ = 0 and = 1.
///
/// Source: H. S. Carslaw, J. C. Jaeger, Conduction of Heat in Solids (1959), section 1.6 (closed form, from memory).
#[test]
fn conductivity_that_rises() -> Outcome {
    let rod = || {
        let mesh = Interval::uniform(0.0, 1.0, 40).mesh()?;
        let rising = |at: &Place<1>| 1.0 + at.x[0];
        Ok::<_, Box<dyn Error>>(Diffusion::on(mesh).conductivity_everywhere(rising).order(3))
    };
    let a = rod()?.dirichlet("start", 0.0).dirichlet("end", 1.0).solve()?;
    let flux = std::f64::consts::LOG2_E; // 1/ln 2
    println!("conductivity_that_rises: (a) {:e}, {}", a.value(&[0.5])? - 0.584_962_500_721_16, a.exchanged_flow()?);
    assert!((a.value(&[0.5])? - 0.584_962_500_721_16).abs() < 1e-11);
    assert!((a.inflow("end")? - flux).abs() < 1e-11);
    assert!(a.exchanged_flow()?.holds(flux));
    let b = rod()?.source_everywhere(1.0).dirichlet("start", 0.0).dirichlet("end", 0.0).solve()?;
    let work = b.load_work()?;
    println!("conductivity_that_rises: (b) {:e}, {work}", b.value(&[0.5])? - 0.084_962_500_721_156);
    assert!((b.value(&[0.5])? - 0.084_962_500_721_156).abs() < 1e-11);
    assert!((b.over_region("domain")?.integral - 0.057_304_959_111_037).abs() < 1e-12);
    assert!((b.energy_norm()?.powi(2) - 0.057_304_959_111_037).abs() < 1e-12);
    assert!(work.holds(0.057_304_959_111_037) && work.width() < 1e-9, "{work:?}");
    Ok(())
}

/// −(eˣ u′)′ = 1, u(0) = u(1) = 0: u = (x + 1 − C) e⁻ˣ + C − 1 with C = (e − 2)/(e − 1).
///
/// Common practice: integrated twice.
#[test]
fn conductivity_of_an_exponential() -> Outcome {
    let solution = Diffusion::on(Interval::uniform(0.0, 1.0, 40).mesh()?)
        .conductivity_everywhere(|at: &Place<1>| at.x[0].exp())
        .source_everywhere(1.0)
        .dirichlet("start", 0.0)
        .dirichlet("end", 0.0)
        .order(3)
        .solve()?;
    assert!((solution.value(&[0.25])? - 0.065_967_403_937_674).abs() < 1e-11);
    assert!((solution.value(&[0.5])? - 0.074_275_338_941_829).abs() < 1e-11);
    // What flows in at the start is −eˣ u′.
    assert!((solution.inflow("start")? + 0.418_023_293_130_67).abs() < 1e-11);
    let (work, energy) = (solution.load_work()?, 0.050_143_851_959_231);
    println!("conductivity_of_an_exponential: {work}, width {:e}", work.width());
    assert!(work.holds(energy) && work.width() < 1e-9, "{work:?}");
    Ok(())
}
