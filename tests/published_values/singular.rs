//! Singular solutions that are known: is the bound ever below the true error, and how far above it?

use std::error::Error;
use std::f64::consts::{FRAC_PI_2, PI};
use std::sync::Arc;

use hypercircle::bounds::mark;
use hypercircle::element::{Rule, Shape};
use hypercircle::mesh::{CellId, Mesh, Outline, polygon, rectangle, rest_of_boundary};
use hypercircle::{Diffusion, Place, Solution};

type Outcome = Result<(), Box<dyn Error>>;

/// A solution with a singularity at the origin.
trait Known: Send + Sync {
    fn gradient(&self, x: [f64; 2]) -> [f64; 2];
}

/// From ∂u/∂r and (1/r) ∂u/∂θ.
fn from_polar(angle: f64, radial: f64, around: f64) -> [f64; 2] {
    let (s, c) = angle.sin_cos();
    [radial * c - around * s, radial * s + around * c]
}

/// The angle in [−π/4, 7π/4): the jump lies off all sides.
fn angle(x: [f64; 2]) -> f64 {
    let angle = x[1].atan2(x[0]);
    if angle < -0.25 * PI { angle + 2.0 * PI } else { angle }
}

/// ∫ A |∇u − ∇u_h|² by quadrature of degree 14; cells at the origin are cut geometrically toward it, so that the part below
/// 2⁻ˡᵃʸᵉʳˢ of the cell is all that is left out (which makes the result smaller, never larger).
fn true_error(solution: &Solution<2>, exact: &dyn Known, layers: i32) -> Result<f64, Box<dyn Error>> {
    let rule = Rule::of_degree(Shape::Triangle, 14)?;
    let mesh = solution.mesh();
    let mut sum = 0.0;
    for cell in mesh.cells() {
        let middle = Place { x: mesh.cell_center(cell), region: mesh.region(cell), cell };
        let conductivity = solution.terms().conductivity.at(&middle);
        let corners = Shape::Triangle.vertices();
        let points: Vec<[f64; 2]> = mesh.cell_vertices(cell).iter().map(|v| mesh.point(*v)).collect();
        let origin = points.iter().position(|p| *p == [0.0, 0.0]);
        // Counted from the vertex at the origin, so that places close to it keep their digits.
        let first = origin.unwrap_or(0);
        let order = [first, (first + 1) % 3, (first + 2) % 3];
        let double_area = 2.0 * mesh.cell_measure(cell);
        for (triangle, share) in pieces(if origin.is_some() { layers } else { 0 }) {
            for (q, w) in rule.points().iter().zip(rule.weights()) {
                let t = inside(&triangle, *q);
                let x = inside(&order.map(|i| points[i]), t);
                let at = inside(&order.map(|i| corners[i]), t);
                let (exact, found) = (exact.gradient(x), solution.space().gradient(solution.values(), cell, &at));
                let e = [exact[0] - found[0], exact[1] - found[1]];
                let flow = conductivity.apply(&e);
                sum += w * double_area * share * (flow[0] * e[0] + flow[1] * e[1]);
            }
        }
    }
    Ok(sum.sqrt())
}

type Triangle = [[f64; 2]; 3];

/// The point of a triangle at coordinates (s, t) counted from its first corner.
fn inside(triangle: &Triangle, [s, t]: [f64; 2]) -> [f64; 2] {
    let [o, a, b] = triangle;
    [0, 1].map(|i| o[i] + s * (a[i] - o[i]) + t * (b[i] - o[i]))
}

/// The triangle (0, 0), (1, 0), (0, 1), or its layers toward the first corner, each piece with its share of the area.
fn pieces(layers: i32) -> Vec<(Triangle, f64)> {
    if layers == 0 {
        return vec![([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]], 1.0)];
    }
    let layer = |k: i32| {
        let (outer, inner) = (0.5_f64.powi(k), 0.5_f64.powi(k + 1));
        let area = outer * outer;
        [
            ([[outer, 0.0], [0.0, outer], [inner, 0.0]], 0.5 * area),
            ([[0.0, outer], [0.0, inner], [inner, 0.0]], 0.25 * area),
        ]
    };
    (0..layers).flat_map(layer).collect()
}

/// Solve, mark, bisect, so many times; judges the solution of every so many rounds and the last one.
fn adapt(
    mut mesh: Arc<Mesh<2>>,
    rounds: usize,
    state: impl Fn(Arc<Mesh<2>>) -> Diffusion<2>,
    every: usize,
    mut judge: impl FnMut(&Solution<2>) -> Outcome,
) -> Outcome {
    for round in 0..rounds {
        let solution = state(mesh.clone()).solve()?;
        if round % every == 0 || round + 1 == rounds {
            judge(&solution)?;
        }
        if round + 1 < rounds {
            let marked: Vec<CellId> = mark(solution.certificate()?.shares(), 0.5);
            mesh = Arc::new(mesh.bisect(&marked)?.0);
        }
    }
    Ok(())
}

/// u = r^(2/3) sin(2θ/3) on the L-shape.
struct Reentrant;

impl Reentrant {
    fn value(x: [f64; 2]) -> f64 {
        x[0].hypot(x[1]).powf(2.0 / 3.0) * (2.0 * angle(x) / 3.0).sin()
    }
}

impl Known for Reentrant {
    fn gradient(&self, x: [f64; 2]) -> [f64; 2] {
        let (size, t) = (2.0 / 3.0 * x[0].hypot(x[1]).powf(-1.0 / 3.0), angle(x));
        from_polar(t, size * (2.0 * t / 3.0).sin(), size * (2.0 * t / 3.0).cos())
    }
}

/// Source: W. F. Mitchell, A collection of 2D elliptic problems for testing adaptive grid refinement algorithms, Appl. Math.
/// Comput. 220 (2013), re-entrant corner; energy 2 ∫ sec^(4/3) t dt over [0, π/4].
#[test]
fn lshape_singular() -> Outcome {
    const ENERGY: f64 = 1.836_226_661_875_16;
    let mut outline = Outline::new();
    outline.region("plate", polygon(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (-1.0, 1.0), (-1.0, -1.0), (0.0, -1.0)]))?;
    outline.side("rim", rest_of_boundary())?;
    let mesh = Arc::new(outline.mesh(0.4)?);
    for (order, rounds) in [(1, 14), (2, 18), (3, 22)] {
        let state = |mesh: Arc<Mesh<2>>| {
            Diffusion::on(mesh)
                .conductivity_everywhere(1.0)
                .dirichlet("rim", |at: &Place<2>| Reentrant::value(at.x))
                .order(order)
        };
        let mut last = f64::INFINITY;
        adapt(mesh.clone(), rounds, state, 1, |solution| {
            let bound = solution.certificate()?.bound();
            let error = true_error(solution, &Reentrant, 60)?;
            let norm = solution.energy_norm()?;
            println!(
                "lshape_singular: order {order}, {} unknowns, error {error:.3e}, effectivity {:.3}, energy {:.9}",
                solution.unknown_count(),
                bound / error,
                norm * norm
            );
            assert!(bound >= error, "{bound} < {error}");
            assert!(order > 2 || bound <= 1.30 * error, "{bound} > 1.3 × {error}");
            assert!((norm - ENERGY.sqrt()).abs() <= bound);
            last = bound;
            Ok(())
        })?;
        assert!(last < [0.05, 0.005, 0.002][order - 1], "order {order}: {last}");
    }
    Ok(())
}

/// u = r^γ μ(θ) where four conductors of two kinds meet.
struct Crossing;

impl Crossing {
    const GAMMA: f64 = 0.1;
    const RHO: f64 = 0.25 * PI;
    const SIGMA: f64 = -14.922_565_104_551_52;
    const STRONG: f64 = 161.447_638_797_588_1;

    /// μ and its derivative in a quadrant, counted from 0.
    fn around(quadrant: usize, t: f64) -> [f64; 2] {
        let (g, rho, sigma) = (Self::GAMMA, Self::RHO, Self::SIGMA);
        let (factor, shift) = match quadrant {
            0 => (((FRAC_PI_2 - sigma) * g).cos(), rho - FRAC_PI_2),
            1 => ((rho * g).cos(), sigma - PI),
            2 => ((sigma * g).cos(), -PI - rho),
            _ => (((FRAC_PI_2 - rho) * g).cos(), -3.0 * FRAC_PI_2 - sigma),
        };
        let (s, c) = ((t + shift) * g).sin_cos();
        [factor * c, -factor * g * s]
    }

    fn quadrant(x: [f64; 2]) -> usize {
        match (x[0] >= 0.0, x[1] >= 0.0) {
            (true, true) => 0,
            (false, true) => 1,
            (false, false) => 2,
            (true, false) => 3,
        }
    }

    /// The angle, within the quadrant's own quarter of [0, 2π].
    fn turn(x: [f64; 2]) -> f64 {
        let quadrant = Self::quadrant(x) as f64;
        (angle(x) + if Self::quadrant(x) == 3 && angle(x) < 1.0 { 2.0 * PI } else { 0.0 })
            .clamp(FRAC_PI_2 * quadrant, FRAC_PI_2 * (quadrant + 1.0))
    }

    fn value(x: [f64; 2]) -> f64 {
        x[0].hypot(x[1]).powf(Self::GAMMA) * Self::around(Self::quadrant(x), Self::turn(x))[0]
    }
}

impl Known for Crossing {
    fn gradient(&self, x: [f64; 2]) -> [f64; 2] {
        let (size, t) = (x[0].hypot(x[1]).powf(Self::GAMMA - 1.0), Self::turn(x));
        let [value, slope] = Self::around(Self::quadrant(x), t);
        from_polar(t, Self::GAMMA * size * value, size * slope)
    }
}

/// Source: R. B. Kellogg, Appl. Anal. 4 (1974); parameters of P. Morin, R. H. Nochetto, K. G. Siebert, SIAM J. Numer. Anal. 38
/// (2000) (from memory, checked here first); Mitchell 2013, intersecting interfaces. Energy by a closed form.
#[test]
fn kellogg_interface() -> Outcome {
    const ENERGY: f64 = 0.319_238_044_578_54;
    // u and the flux are continuous across the four interfaces.
    for i in 0..4 {
        let (here, next) = (i, (i + 1) % 4);
        let t = FRAC_PI_2 * (i as f64 + 1.0);
        let k = |quadrant: usize| if quadrant.is_multiple_of(2) { Crossing::STRONG } else { 1.0 };
        let (a, b) = (Crossing::around(here, t), Crossing::around(next, if next == 0 { 0.0 } else { t }));
        println!("kellogg_interface: jumps at {i}: {:e} {:e}", a[0] - b[0], k(here) * a[1] - k(next) * b[1]);
        assert!((a[0] - b[0]).abs() < 1e-12 && (k(here) * a[1] - k(next) * b[1]).abs() < 1e-12);
    }
    let mut outline = Outline::new();
    outline.region("strong", rectangle((0.0, 0.0), (1.0, 1.0)))?;
    outline.region("weak", rectangle((-1.0, 0.0), (0.0, 1.0)))?;
    outline.region("strong", rectangle((-1.0, -1.0), (0.0, 0.0)))?;
    outline.region("weak", rectangle((0.0, -1.0), (1.0, 0.0)))?;
    outline.side("rim", rest_of_boundary())?;
    let mesh = Arc::new(outline.mesh(0.5)?);
    let state = |mesh: Arc<Mesh<2>>| {
        Diffusion::on(mesh)
            .conductivity("strong", Crossing::STRONG)
            .conductivity("weak", 1.0)
            .dirichlet("rim", |at: &Place<2>| Crossing::value(at.x))
            .order(1)
    };
    let mut last = f64::INFINITY;
    adapt(mesh, 121, state, 6, |solution| {
        let bound = solution.certificate()?.bound();
        let error = true_error(solution, &Crossing, 160)?;
        println!(
            "kellogg_interface: {} unknowns, error {error:.4}, bound {bound:.4}, effectivity {:.3}, norm {:.4}",
            solution.unknown_count(),
            bound / error,
            solution.energy_norm()?
        );
        assert!(bound >= error, "{bound} < {error}");
        let norm = solution.energy_norm()?;
        assert!((norm - ENERGY.sqrt()).abs() <= bound);
        last = bound;
        Ok(())
    })?;
    assert!(last < 0.08, "{last}");
    Ok(())
}
