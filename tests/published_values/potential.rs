//! Capacitances, conductances and seepage: the flow between two levels as an interval.

use std::error::Error;

use hypercircle::mesh::{Mesh, Outline, Rectangle, between, rectangle, rest_of_boundary};
use hypercircle::{Answer, Diffusion, Enclosure, Guarantee, Place, Tolerance};

type Outcome = Result<(), Box<dyn Error>>;

fn between_levels(mesh: Mesh<2>, low: &str, high: &str, width: f64) -> Result<Answer<2>, Box<dyn Error>> {
    let problem = Diffusion::on(mesh).conductivity_everywhere(1.0).dirichlet(low, 0.0).dirichlet(high, 1.0).order(2);
    let answer = problem.solve_within(Tolerance::FlowRelative(width))?;
    assert!(answer.is_met(), "{:?}", answer.ending());
    Ok(answer)
}

fn assert_holds(what: &str, interval: &Enclosure, published: f64, answer: &Answer<2>) {
    println!(
        "{what}: {published} in {interval:.8}, relative width {:.1e}, {} unknowns, {} rounds",
        interval.relative_width(),
        answer.unknown_count(),
        answer.rounds().len()
    );
    assert_eq!(interval.guarantee, Guarantee::Full);
    assert!(interval.holds(published), "{what}: {published} is not in {interval:?}");
}

/// Capacitance between concentric parallel squares of half widths a and 1.
///
/// Source: F. Bowman, Notes on two-dimensional electric field problems, Proc. London Math. Soc. 39 (1935); H. Hakula,
/// A. Rasila, M. Vuorinen, SIAM J. Sci. Comput. 33 (2011) (10.2340925693681, from memory); closed form with elliptic integrals.
#[test]
fn square_in_square() -> Outcome {
    for (a, published) in [(0.2, 4.134_487_024_234_1), (0.5, 10.234_092_569_368), (0.8, 34.234_915_198_773)] {
        let mut gap = Outline::new();
        gap.region("gap", rectangle((-1.0, -1.0), (1.0, 1.0)))?;
        gap.hole("inner", rectangle((-a, -a), (a, a)))?;
        gap.side("outer", rest_of_boundary())?;
        let answer = between_levels(gap.mesh(0.2)?, "outer", "inner", 1e-4)?;
        assert_holds(&format!("square_in_square {a}"), &answer.exchanged_flow()?, published, &answer);
    }
    Ok(())
}

/// A checkerboard of conductivities 1 and k: one period, quartered by symmetry, conducts √k.
///
/// Source: J. B. Keller, J. Math. Phys. 5 (1964) 548; A. M. Dykhne, Sov. Phys. JETP 32 (1971) 63.
#[test]
fn checkerboard_effective() -> Outcome {
    for (k, width) in [(4.0, 1e-4), (9.0, 1e-4), (10.0, 1e-4), (100.0, 1e-3)] {
        let mut quarter = Outline::new();
        quarter.region("poor", rectangle((0.0, 0.0), (0.5, 0.5)))?;
        quarter.region("good", rectangle((0.5, 0.0), (1.0, 0.5)))?;
        quarter.region("poor", rectangle((0.5, 0.5), (1.0, 1.0)))?;
        quarter.region("good", rectangle((0.0, 0.5), (0.5, 1.0)))?;
        quarter.side("left", between((0.0, 0.0), (0.0, 1.0)))?;
        quarter.side("right", between((1.0, 0.0), (1.0, 1.0)))?;
        let answer = Diffusion::on(quarter.mesh(0.25)?)
            .conductivity("poor", 1.0)
            .conductivity("good", k)
            .dirichlet("left", 0.0)
            .dirichlet("right", 1.0)
            .order(2)
            .solve_within(Tolerance::FlowRelative(width))?;
        assert!(answer.is_met(), "{:?}", answer.ending());
        assert_holds(&format!("checkerboard_effective {k}"), &answer.exchanged_flow()?, k.sqrt(), &answer);
    }
    Ok(())
}

/// A thin strip between two earthed planes, spacing 1: C = 4 K(k)/K(k′), k = tanh(πw/2), from a quarter.
///
/// Source: S. B. Cohn, IRE Trans. MTT-2 (1954) 52 (from memory); conformal map. The quarter is cut at x = 5, which changes less
/// than 10⁻¹⁰.
#[test]
fn stripline_capacitance() -> Outcome {
    for (w, published) in [(0.5, 3.751_081_555_047_2), (1.0, 5.764_489_924_280_5), (2.0, 9.765_083_691_164_1)] {
        let mut quarter = Outline::new();
        quarter.region("air", rectangle((0.0, 0.0), (5.0, 0.5)))?;
        quarter.side("strip", between((0.0, 0.0), (0.5 * w, 0.0)))?;
        quarter.side("earth", between((0.0, 0.5), (5.0, 0.5)))?;
        let answer = between_levels(quarter.mesh(0.2)?, "earth", "strip", 1e-4)?;
        let capacitance = answer.exchanged_flow()?.scaled(4.0);
        assert_holds(&format!("stripline_capacitance {w}"), &capacitance, published, &answer);
    }
    Ok(())
}

/// Seepage under a flat dam of base width 2b on a layer of depth 1: q = K(m′)/(2 K(m)), m = tanh(πb/2).
///
/// Source: P. Ya. Polubarinova-Kochina, Theory of Ground Water Movement; M. E. Harr, Groundwater and Seepage (1962) (both from
/// memory); elliptic integrals. The layer is cut 6 depths beyond the dam, which changes less than 10⁻⁷.
#[test]
fn dam_with_flat_base() -> Outcome {
    let cases = [
        (0.25, 0.742_797_138_130_84),
        (0.5, 0.533_179_556_522_55),
        (1.0, 0.346_951_773_057_29),
        (2.0, 0.204_811_352_698_36),
    ];
    for (b, published) in cases {
        let far = b + 6.0;
        let mut soil = Outline::new();
        soil.region("soil", rectangle((-far, -1.0), (far, 0.0)))?;
        soil.side("upstream", between((-far, 0.0), (-b, 0.0)))?;
        soil.side("downstream", between((b, 0.0), (far, 0.0)))?;
        let answer = between_levels(soil.mesh(0.5)?, "downstream", "upstream", 1e-5)?;
        assert_holds(&format!("dam_with_flat_base {b}"), &answer.exchanged_flow()?, published, &answer);
        if b == 0.5 {
            for (x, head) in [(-0.25, 0.672_924_171_568_58), (0.0, 0.5), (0.25, 0.327_075_828_431_42)] {
                let difference = answer.value(&[x, 0.0])? - head;
                println!("dam_with_flat_base: head at {x} {difference:e}");
                assert!(difference.abs() < 1e-5);
            }
            for (x, gradient) in [(0.75, 0.487_573_831_452_70), (1.0, 0.271_369_016_767_89)] {
                let difference = -answer.gradient(&[x, 0.0])?[1] - gradient;
                println!("dam_with_flat_base: exit gradient at {x} {difference:e}");
                assert!(difference.abs() < 0.005 * gradient);
            }
        }
    }
    Ok(())
}

/// Regional groundwater flow under a water table that rises linearly, z₀ + c x, from a valley to a divide.
///
/// Source: J. Tóth, J. Geophys. Res. 67 (1962) 4375; his Fourier series.
#[test]
fn regional_flow() -> Outcome {
    let basin = Rectangle::new([0.0, 0.0], [2.0, 1.0], [8, 4]).mesh()?;
    let answer = Diffusion::on(basin)
        .conductivity_everywhere(1.0)
        .dirichlet("top", |at: &Place<2>| 1.0 + 0.05 * at.x[0])
        .order(3)
        .solve_within(Tolerance::Relative(1e-4))?;
    assert!(answer.is_met(), "{:?}", answer.ending());
    let heads =
        [([0.0, 0.0], 1.033_765_724_165_7), ([0.5, 0.5], 1.035_195_738_769_1), ([0.0, 0.75], 1.019_591_958_317_8)];
    println!("regional_flow: {} unknowns, {} rounds", answer.unknown_count(), answer.rounds().len());
    for (at, head) in heads {
        let difference = answer.value(&at)? - head;
        println!("regional_flow: at {at:?} {difference:e}");
        assert!(difference.abs() < 1e-7);
    }
    // What flows in on one half flows out on the other.
    println!("regional_flow: net {:e}, potential {:e}", answer.inflow("top")?, answer.potential()?.relative_width());
    assert!(answer.inflow("top")?.abs() < 1e-10);
    // The table is in the trial space, so that there is an interval for the potential.
    assert!(answer.potential()?.relative_width() < 1e-7);
    Ok(())
}

/// The problem of Motz: a condition that changes in the middle of a straight side.
///
/// Source: H. Motz, Quart. Appl. Math. 4 (1946) 371; values from a harmonic expansion whose coefficients agree with those that
/// have been published since (from memory); flux by elliptic integrals.
#[test]
fn motz() -> Outcome {
    let mut plate = Outline::new();
    plate.region("plate", rectangle((-1.0, 0.0), (1.0, 1.0)))?;
    plate.side("cold", between((-1.0, 0.0), (0.0, 0.0)))?;
    plate.side("hot", between((1.0, 0.0), (1.0, 1.0)))?;
    let answer = Diffusion::on(plate.mesh(0.25)?)
        .conductivity_everywhere(1.0)
        .dirichlet("cold", 0.0)
        .dirichlet("hot", 500.0)
        .order(3)
        .solve_within(Tolerance::FlowRelative(1e-6))?;
    assert!(answer.is_met(), "{:?}", answer.ending());
    assert_holds("motz", &answer.exchanged_flow()?, 340.317_086_529_96, &answer);
    let values = [
        ([0.0, 0.5], 176.045_447_21),
        ([0.5, 0.0], 317.063_247_70),
        ([0.25, 0.25], 227.120_229_43),
        ([-0.5, 0.5], 88.454_799_647),
    ];
    for (at, value) in values {
        let difference = answer.value(&at)? - value;
        println!("motz: at {at:?} {difference:e}");
        assert!(difference.abs() < 1e-3);
    }
    Ok(())
}

/// One dimension in two: an exact field has an interval of no width.
///
/// Common practice: conductances of layers in series.
#[test]
fn layers_in_series_have_an_interval_of_no_width() -> Outcome {
    let mesh = Rectangle::new([0.0, 0.0], [2.0, 1.0], [8, 4]).mesh()?;
    let answer = between_levels(mesh, "left", "right", 1e-9)?;
    let flow = answer.exchanged_flow()?;
    assert!(flow.holds(0.5) && flow.width() < 1e-11, "{flow:?}");
    Ok(())
}
