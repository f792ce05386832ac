//! Torsion of bars: −Δφ = 2, φ = 0 around; torsional constant J = 2 ∫ φ, largest stress where |∇φ| is largest.

use std::error::Error;

use hypercircle::mesh::{Mesh, Outline, Rectangle, polygon, rest_of_boundary};
use hypercircle::{Answer, Diffusion, Guarantee, Tolerance};

type Outcome = Result<(), Box<dyn Error>>;

fn polygon_bar(corners: &[(f64, f64)], size: f64) -> Result<Mesh<2>, Box<dyn Error>> {
    let mut bar = Outline::new();
    bar.region("bar", polygon(corners))?;
    bar.side("surface", rest_of_boundary())?;
    Ok(bar.mesh(size)?)
}

fn twisted(mesh: Mesh<2>, load: f64, order: usize, tolerance: f64) -> Result<Answer<2>, Box<dyn Error>> {
    let answer = Diffusion::on(mesh)
        .conductivity_everywhere(1.0)
        .source_everywhere(load)
        .dirichlet("surface", 0.0)
        .order(order)
        .solve_within(Tolerance::Relative(tolerance))?;
    assert!(answer.is_met(), "{:?}", answer.ending());
    Ok(answer)
}

fn steepness(answer: &Answer<2>, at: [f64; 2]) -> Result<f64, Box<dyn Error>> {
    let [x, y] = answer.gradient(&at)?;
    Ok(x.hypot(y))
}

/// Rectangles a × 1: J = k₁ a, largest |∇φ| = k in the middle of the long side.
///
/// Source: S. Timoshenko, J. N. Goodier, Theory of Elasticity, table of constants for torsion of a rectangular bar (three
/// digits); here the series to 12 digits.
#[test]
fn torsion_rectangle() -> Outcome {
    let table = [
        (1.0, 0.675_314_483_314, 0.140_577_014_955),
        (1.2, 0.758_764_080_982, 0.166_118_910_079),
        (1.5, 0.847_562_232_733, 0.195_760_708_876),
        (2.0, 0.930_060_269_797, 0.228_681_677_12),
        (2.5, 0.968_069_922_299, 0.249_365_074_708),
        (3.0, 0.985_437_881_691, 0.263_316_931_002),
        (4.0, 0.996_972_625_257, 0.280_812_958_308),
        (5.0, 0.999_370_668_754, 0.291_316_754_188),
        (10.0, 0.999_999_755_692, 0.312_325_037_457),
    ];
    for (a, steepest, constant) in table {
        let counts = [(6.0 * a) as usize, 6];
        let mesh = Rectangle::new([0.0, 0.0], [a, 1.0], counts).sides(["surface"; 4]).mesh()?;
        let answer = twisted(mesh, 2.0, 4, 2e-4)?;
        let interval = answer.load_work()?;
        // The closed form has 12 digits.
        let published = constant * a;
        let slope = steepness(&answer, [0.5 * a, 0.0])? - steepest;
        println!(
            "torsion_rectangle {a}: {interval:.9}, relative width {:e}, k {slope:e}, {} unknowns",
            interval.relative_width(),
            answer.unknown_count()
        );
        assert!(interval.lower <= published + 1e-11 && interval.upper >= published - 1e-11, "{a}: {interval:?}");
        assert!(interval.relative_width() < 1e-7 && interval.guarantee == Guarantee::Full, "{a}: {interval:?}");
        assert!(slope.abs() < 1e-4, "{a}: {slope:e}");
    }
    Ok(())
}

/// The membrane over the unit square.
///
/// Source: Timoshenko and Goodier, sections 108 and 109 (0.07367 and 0.03514, from memory); the series.
#[test]
fn square_membrane() -> Outcome {
    let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [8, 8]).sides(["surface"; 4]).mesh()?;
    let answer = twisted(mesh, 1.0, 4, 1e-4)?;
    let work = answer.load_work()?;
    let middle = answer.value(&[0.5, 0.5])? - 0.073_671_353_281_514;
    let slope = steepness(&answer, [0.5, 0.0])? - 0.337_657_241_656_78;
    println!("square_membrane: {work:.10}, middle {middle:e}, slope {slope:e}");
    assert!(work.holds(0.035_144_253_738_788) && work.relative_width() < 1e-7, "{work:?}");
    assert!(middle.abs() < 1e-7);
    assert!(slope.abs() < 1e-4);
    Ok(())
}

/// The L-shape of three unit squares under the load 1.
///
/// Source: 0.21407580 is the energy quoted in papers on adaptive methods (from memory); here a harmonic expansion with the
/// powers of the corner, to 12 digits.
#[test]
fn lshape_membrane() -> Outcome {
    let corners = [(-1.0, 0.0), (0.0, 0.0), (0.0, -1.0), (1.0, -1.0), (1.0, 1.0), (-1.0, 1.0)];
    let answer = twisted(polygon_bar(&corners, 0.25)?, 1.0, 3, 1e-3)?;
    let work = answer.load_work()?;
    println!("lshape_membrane: {work:.9}, {} unknowns, {} rounds", answer.unknown_count(), answer.rounds().len());
    assert!(work.holds(0.214_075_802_687) && work.relative_width() < 2e-6, "{work:?}");
    let values = [([0.5, 0.5], 0.131_052_962_03), ([-0.5, 0.5], 0.102_362_157_66), ([0.25, 0.25], 0.144_145_837_38)];
    for (at, value) in values {
        let difference = answer.value(&at)? - value;
        println!("lshape_membrane: at {at:?} {difference:e}");
        assert!(difference.abs() < 4e-6);
    }
    Ok(())
}

/// An equilateral triangle: φ is a polynomial of degree 3, so that order 3 is exact on any mesh.
///
/// Source: A. Saint-Venant (1855); Timoshenko and Goodier, section 105: φ = (4/√3) h₁ h₂ h₃, J = √3/80 for sides of 1.
#[test]
fn torsion_equilateral() -> Outcome {
    let height = 0.75_f64.sqrt();
    let corners = [(0.0, 0.0), (1.0, 0.0), (0.5, height)];
    let answer = twisted(polygon_bar(&corners, 0.3)?, 2.0, 3, 1e-6)?;
    let constant = answer.load_work()?;
    println!(
        "torsion_equilateral: {constant:.12}, width {:e}, bound {:e}",
        constant.width(),
        answer.certificate()?.bound()
    );
    assert_eq!(answer.rounds().len(), 1);
    assert!(constant.holds(3.0_f64.sqrt() / 80.0) && constant.width() < 1e-13, "{constant:?}");
    assert!((answer.value(&[0.5, height / 3.0])? - 1.0 / 18.0).abs() < 1e-14);
    assert!((steepness(&answer, [0.5, 0.0])? - 3.0_f64.sqrt() / 4.0).abs() < 1e-13);
    Ok(())
}

/// A right isosceles triangle, 0 < y < x < 1.
///
/// Source: R. J. Roark, W. C. Young, Formulas for Stress and Strain, table of torsion (0.0261, from memory); series
/// J = 1/12 − 16 Σ coth(nπ/2)/(nπ)⁵, n odd.
#[test]
fn torsion_right_isosceles() -> Outcome {
    let answer = twisted(polygon_bar(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0)], 0.15)?, 2.0, 4, 1e-4)?;
    let constant = answer.load_work()?;
    println!("torsion_right_isosceles: {constant:.12}, relative width {:e}", constant.relative_width());
    assert!(constant.holds(0.026_089_651_711_513) && constant.relative_width() < 1e-7, "{constant:?}");
    Ok(())
}
