//! Smooth solutions that are hard because they vary fast: known from their formula, with sources to match.

use std::error::Error;

use hypercircle::mesh::Rectangle;
use hypercircle::{Answer, Diffusion, Place, Tolerance};

type Outcome = Result<(), Box<dyn Error>>;

/// −Δu = f on the unit square with u given on its rim, until the bound is a ten-thousandth of the energy norm.
fn solved(
    f: impl Fn([f64; 2]) -> f64 + Send + Sync + 'static,
    u: impl Fn([f64; 2]) -> f64 + Send + Sync + 'static,
    cells: usize,
) -> Result<Answer<2>, Box<dyn Error>> {
    let answer = Diffusion::on(Rectangle::new([0.0, 0.0], [1.0, 1.0], [cells; 2]).sides(["rim"; 4]).mesh()?)
        .conductivity_everywhere(1.0)
        .source_everywhere(move |at: &Place<2>| f(at.x))
        .dirichlet("rim", move |at: &Place<2>| u(at.x))
        .order(4)
        .solve_within(Tolerance::Relative(1e-4))?;
    assert!(answer.is_met(), "{:?}", answer.ending());
    Ok(answer)
}

/// The energy norm is off by no more than the bound.
fn assert_norm(what: &str, answer: &Answer<2>, exact: f64) -> Outcome {
    let (norm, bound) = (answer.energy_norm()?, answer.certificate()?.bound());
    println!(
        "{what}: norm {exact} {:e}, bound {bound:e}, {} unknowns, {} rounds",
        norm - exact,
        answer.unknown_count(),
        answer.rounds().len()
    );
    assert!((norm - exact).abs() <= bound);
    Ok(())
}

/// u = 2⁴⁰ x¹⁰ (1 − x)¹⁰ y¹⁰ (1 − y)¹⁰.
///
/// Source: W. F. Mitchell, A collection of 2D elliptic problems for testing adaptive grid refinement algorithms, Appl. Math.
/// Comput. 220 (2013), analytic solution (formula from memory); norms by the beta function.
#[test]
fn polynomial_of_high_degree() -> Outcome {
    // p(t) = (4 t (1 − t))¹⁰ and its second derivative.
    let p = |t: f64| (4.0 * t * (1.0 - t)).powi(10);
    let curved = |t: f64| {
        let s = 4.0 * t * (1.0 - t);
        let slope = 4.0 - 8.0 * t;
        90.0 * s.powi(8) * slope * slope - 80.0 * s.powi(9)
    };
    let f = move |[x, y]: [f64; 2]| -curved(x) * p(y) - p(x) * curved(y);
    assert!((f([0.5, 0.5]) / 160.0 - 1.0).abs() < 1e-12);
    let answer = solved(f, |_| 0.0, 8)?;
    assert_norm("polynomial_of_high_degree", &answer, 1.807_445_700_295_0)?;
    println!("polynomial_of_high_degree: top {:e}", answer.value(&[0.5, 0.5])? - 1.0);
    assert!((answer.value(&[0.5, 0.5])? - 1.0).abs() < 1e-5);
    Ok(())
}

/// u = exp(−1000 |x − m|²) around the middle m.
///
/// Source: Mitchell 2013, exponential peak (parameters from memory); ‖∇u‖ = √π but for 10⁻³⁰.
#[test]
fn peak() -> Outcome {
    let square = |[x, y]: [f64; 2]| (x - 0.5).powi(2) + (y - 0.5).powi(2);
    let u = move |x: [f64; 2]| (-1000.0 * square(x)).exp();
    let f = move |x: [f64; 2]| (4000.0 - 4e6 * square(x)) * u(x);
    assert!((f([0.52, 0.5]) / 1_608.768_110_485_5 - 1.0).abs() < 1e-12);
    let answer = solved(f, u, 8)?;
    assert_norm("peak", &answer, std::f64::consts::PI.sqrt())?;
    println!("peak: top {:e}", answer.value(&[0.5, 0.5])? - 1.0);
    assert!((answer.value(&[0.5, 0.5])? - 1.0).abs() < 1e-5);
    Ok(())
}

/// u = arctan(20 (r − 0.7)), r the distance from (−0.05, −0.05).
///
/// Source: Mitchell 2013, wave front, mild (parameters from memory).
#[test]
fn wave_front() -> Outcome {
    let distance = |[x, y]: [f64; 2]| (x + 0.05).hypot(y + 0.05);
    let u = move |x: [f64; 2]| (20.0 * (distance(x) - 0.7)).atan();
    // u″ + u′/r with z = 20 (r − 0.7): u′ = 20/(1 + z²), u″ = −800 z/(1 + z²)².
    let f = move |x: [f64; 2]| {
        let z = 20.0 * (distance(x) - 0.7);
        let slope = 20.0 / (1.0 + z * z);
        2.0 * z * slope * slope - slope / distance(x)
    };
    assert!((f([0.5, 0.5]) / 98.798_025_252_275 - 1.0).abs() < 1e-12);
    assert!((f([0.4, 0.4]) / -160.461_471_052_41 - 1.0).abs() < 1e-12);
    let answer = solved(f, u, 8)?;
    println!("wave_front: {} unknowns, bound {:e}", answer.unknown_count(), answer.certificate()?.bound());
    for (at, value) in [([0.5, 0.5], 0.999_690_835_679_66), ([0.4, 0.4], -0.904_579_158_137_60)] {
        let difference = answer.value(&at)? - value;
        println!("wave_front: at {at:?} {difference:e}");
        assert!(difference.abs() < 1e-5);
    }
    Ok(())
}
