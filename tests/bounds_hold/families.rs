//! Families of random problems with known solutions.

use std::f64::consts::TAU;
use std::sync::Arc;

use hypercircle::mesh::{Interval, Outline, Toward, between, polygon, rectangle, regular_polygon};
use hypercircle::{Diffusion, Place, Tensor};

use crate::random::Random;

/// A solution with its gradient.
pub(crate) type Exact<const D: usize> = Arc<dyn Fn(&[f64; D]) -> (f64, [f64; D]) + Send + Sync>;

/// A problem and what solves it.
pub(crate) struct Known<const D: usize> {
    pub(crate) problem: Diffusion<D>,
    pub(crate) exact: Exact<D>,
}

/// Gives a straight side a random condition that the solution meets; tells whether it holds the level.
fn condition(
    problem: Diffusion<2>,
    random: &mut Random,
    side: &str,
    normal: [f64; 2],
    exact: &Exact<2>,
    flow: impl Fn(&[f64; 2]) -> [f64; 2] + Send + Sync + Clone + 'static,
) -> (Diffusion<2>, bool) {
    let u = exact.clone();
    let inflow = move |x: &[f64; 2]| {
        let f = flow(x);
        f[0] * normal[0] + f[1] * normal[1]
    };
    match random.below(3) {
        0 => (problem.dirichlet(side, move |at: &Place<2>| u(&at.x).0), true),
        1 => (problem.neumann(side, move |at: &Place<2>| inflow(&at.x)), false),
        _ => {
            let film = random.magnitude(-1.0, 6.0);
            (problem.robin(side, film, move |at: &Place<2>| u(&at.x).0 + inflow(&at.x) / film), true)
        }
    }
}

fn outward(a: (f64, f64), b: (f64, f64)) -> [f64; 2] {
    let (dx, dy) = (b.0 - a.0, b.1 - a.1);
    let length = dx.hypot(dy);
    [dy / length, -dx / length]
}

/// A star-shaped outline with counterclockwise corners.
fn star(random: &mut Random) -> Vec<(f64, f64)> {
    let count = 4 + random.below(5);
    (0..count)
        .map(|k| {
            let angle = TAU * (k as f64 + random.between(-0.3, 0.3)) / count as f64;
            let radius = random.between(0.6, 1.4);
            (radius * angle.cos(), radius * angle.sin())
        })
        .collect()
}

/// A smooth solution on a random outline, perhaps with a hole; constant tensor, reaction, all kinds of conditions.
pub(crate) fn smooth(random: &mut Random, order: usize) -> Known<2> {
    let corners = star(random);
    let mut outline = Outline::new();
    outline.region("body", polygon(&corners)).unwrap();
    let hole = random.once_in(2);
    if hole {
        outline.hole("hole", regular_polygon((0.0, 0.0), random.between(0.1, 0.25), 4 + random.below(5))).unwrap();
    }
    let names: Vec<String> = (0..corners.len()).map(|k| format!("side {k}")).collect();
    for (k, name) in names.iter().enumerate() {
        outline.side(name, between(corners[k], corners[(k + 1) % corners.len()])).unwrap();
    }
    let mesh = outline.mesh(random.between(0.25, 0.6)).unwrap();
    // A with principal values 1 and up to 30, turned.
    let (turn, ratio, scale) = (random.between(0.0, TAU), random.magnitude(0.0, 1.5), random.magnitude(-3.0, 3.0));
    let (c, s) = (turn.cos(), turn.sin());
    let off = scale * (ratio - 1.0) * c * s;
    let a = Tensor::symmetric([[scale * (ratio * c * c + s * s), off], [off, scale * (ratio * s * s + c * c)]]);
    let reaction = if random.once_in(2) { scale * random.magnitude(0.0, 3.0) } else { 0.0 };
    // u = e^{px} cos(qy + d) + b·(x², xy, y)
    let [p, q, d] = [random.between(-2.0, 2.0), random.between(-3.0, 3.0), random.between(0.0, TAU)];
    let b = [random.between(-1.0, 1.0), random.between(-1.0, 1.0), random.between(-1.0, 1.0)];
    let exact: Exact<2> = Arc::new(move |x: &[f64; 2]| {
        let (e, angle) = ((p * x[0]).exp(), q * x[1] + d);
        let value = e * angle.cos() + b[0] * x[0] * x[0] + b[1] * x[0] * x[1] + b[2] * x[1];
        let slope = [p * e * angle.cos() + 2.0 * b[0] * x[0] + b[1] * x[1], -q * e * angle.sin() + b[1] * x[0] + b[2]];
        (value, slope)
    });
    let u = exact.clone();
    let source = move |at: &Place<2>| {
        let x = &at.x;
        let (e, angle) = ((p * x[0]).exp(), q * x[1] + d);
        let (xx, xy, yy) =
            (p * p * e * angle.cos() + 2.0 * b[0], -p * q * e * angle.sin() + b[1], -q * q * e * angle.cos());
        let k = a.entries();
        -(k[0][0] * xx + 2.0 * k[0][1] * xy + k[1][1] * yy) + reaction * u(x).0
    };
    let mut problem = Diffusion::on(mesh).conductivity_everywhere(a).source_everywhere(source).order(order);
    let mut held = reaction > 0.0;
    if held {
        problem = problem.reaction_everywhere(reaction);
    }
    let u = exact.clone();
    let flow = move |x: &[f64; 2]| a.apply(&u(x).1);
    for (k, name) in names.iter().enumerate() {
        let normal = outward(corners[k], corners[(k + 1) % corners.len()]);
        let holds;
        (problem, holds) = condition(problem, random, name, normal, &exact, flow.clone());
        held |= holds;
    }
    if hole {
        let u = exact.clone();
        problem = problem.dirichlet("hole", move |at: &Place<2>| u(&at.x).0);
        held = true;
    }
    if held { Known { problem, exact } } else { smooth(random, order) }
}

/// ∫ (1 + s x)/k over strips of width one with the conductivities k, beginning at a constant.
fn potential(strips: &[f64], slope: f64, start: f64, x: f64) -> f64 {
    let upto = |i: usize, x: f64| {
        let (low, high) = (i as f64, x.clamp(i as f64, i as f64 + 1.0));
        (high - low) + 0.5 * slope * (high * high - low * low)
    };
    start + strips.iter().enumerate().map(|(i, k)| upto(i, x) / k).sum::<f64>()
}

/// The strip a coordinate lies in.
fn strip(strips: &[f64], x: f64) -> f64 {
    strips[(x.max(0.0) as usize).min(strips.len() - 1)]
}

/// A = α(x) β(y) on crossing strips, contrast to 10⁶: u = F(x) G(y) with F′ = φ/α, G′ = ψ/β has the continuous flux
/// A∇u = (βφG, αψF) and the source −(βφ′G + αψ′F); φ = 1 + sx and ψ = 1 + ty.
pub(crate) fn strips(random: &mut Random, order: usize) -> Known<2> {
    let mut draw = |count: usize| -> Vec<f64> { (0..count).map(|_| random.magnitude(-1.5, 1.5)).collect() };
    let (alpha, beta) = (draw(3), draw(2));
    let (s, t) = (random.between(-2.0, 2.0), random.between(-2.0, 2.0));
    let mut outline = Outline::new();
    for i in 0..alpha.len() {
        for j in 0..beta.len() {
            let corner = (i as f64, j as f64);
            outline.region(&format!("{i} {j}"), rectangle(corner, (corner.0 + 1.0, corner.1 + 1.0))).unwrap();
        }
    }
    let corners = [(0.0, 0.0), (3.0, 0.0), (3.0, 2.0), (0.0, 2.0)];
    let names = ["bottom", "right", "top", "left"];
    for (k, name) in names.iter().enumerate() {
        outline.side(name, between(corners[k], corners[(k + 1) % 4])).unwrap();
    }
    let mesh = outline.mesh(random.between(0.4, 1.0)).unwrap();
    let (f0, g0) = (random.between(-1.0, 1.0), random.between(-1.0, 1.0));
    let (a, b) = (alpha.clone(), beta.clone());
    let factors = move |x: &[f64; 2]| (potential(&a, s, f0, x[0]), potential(&b, t, g0, x[1]));
    let (a, b, fg) = (alpha.clone(), beta.clone(), factors.clone());
    let exact: Exact<2> = Arc::new(move |x: &[f64; 2]| {
        let (f, g) = fg(x);
        (f * g, [(1.0 + s * x[0]) * g / strip(&a, x[0]), (1.0 + t * x[1]) * f / strip(&b, x[1])])
    });
    let (a, b, fg) = (alpha.clone(), beta.clone(), factors.clone());
    let flow = move |x: &[f64; 2]| {
        let (f, g) = fg(x);
        [strip(&b, x[1]) * (1.0 + s * x[0]) * g, strip(&a, x[0]) * (1.0 + t * x[1]) * f]
    };
    let (a, b) = (alpha.clone(), beta.clone());
    let source = move |at: &Place<2>| {
        let (f, g) = factors(&at.x);
        -(strip(&b, at.x[1]) * s * g + strip(&a, at.x[0]) * t * f)
    };
    let mut problem = Diffusion::on(mesh).source_everywhere(source).order(order);
    for (i, a) in alpha.iter().enumerate() {
        for (j, b) in beta.iter().enumerate() {
            problem = problem.conductivity(&format!("{i} {j}"), a * b);
        }
    }
    let mut held = false;
    for (k, name) in names.iter().enumerate() {
        let holds;
        let normal = outward(corners[k], corners[(k + 1) % 4]);
        (problem, holds) = condition(problem, random, name, normal, &exact, flow.clone());
        held |= holds;
    }
    if held { Known { problem, exact } } else { strips(random, order) }
}

/// One dimension: two materials, reaction, a smooth source between them, graded meshes.
pub(crate) fn line(random: &mut Random, order: usize) -> Known<1> {
    let (k, ratio) = ([random.magnitude(-3.0, 3.0), random.magnitude(-3.0, 3.0)], random.magnitude(0.0, 3.0));
    let toward = [Toward::Start, Toward::End, Toward::Both][random.below(3)];
    let mesh = Interval::graded(-1.0, 1.0, 3 + random.below(30), toward, ratio)
        .region("low", -1.0, 0.0)
        .region("high", 0.0, 1.0)
        .mesh()
        .unwrap();
    let (q, d) = (random.between(0.5, 6.0), random.between(0.0, TAU));
    let c = if random.once_in(2) { random.magnitude(-2.0, 3.0) } else { 0.0 };
    // k u′ = cos(qx + d) everywhere, so the flux is continuous.
    let side = move |x: f64| k[usize::from(x > 0.0)];
    let u = move |x: f64| ((q * x + d).sin() - d.sin()) / (q * side(x)) + 1.0;
    let exact: Exact<1> = Arc::new(move |x: &[f64; 1]| (u(x[0]), [(q * x[0] + d).cos() / side(x[0])]));
    let source = move |at: &Place<1>| q * (q * at.x[0] + d).sin() + c * u(at.x[0]);
    let mut problem = Diffusion::on(mesh)
        .conductivity("low", k[0])
        .conductivity("high", k[1])
        .source_everywhere(source)
        .reaction_everywhere(c)
        .order(order);
    let mut held = c > 0.0;
    for (name, x, normal) in [("start", -1.0, -1.0), ("end", 1.0, 1.0)] {
        let inflow = normal * (q * x + d).cos();
        problem = match random.below(3) {
            0 => problem.dirichlet(name, u(x)),
            1 => problem.neumann(name, inflow),
            _ => {
                let film = random.magnitude(-1.0, 6.0);
                problem.robin(name, film, u(x) + inflow / film)
            }
        };
        held |= problem_holds(&problem, name);
    }
    if held { Known { problem, exact } } else { line(random, order) }
}

fn problem_holds(problem: &Diffusion<1>, name: &str) -> bool {
    let terms = problem.terms().unwrap();
    let side = problem.mesh().find_side(name).unwrap();
    !matches!(terms.condition(side), None | Some(hypercircle::assembly::Condition::Neumann(_)))
}

/// Constant data on a random outline with a random inclusion: no closed form.
pub(crate) fn unknown(random: &mut Random, order: usize) -> Diffusion<2> {
    let corners = star(random);
    let mut outline = Outline::new();
    outline.region("body", polygon(&corners)).unwrap();
    outline.region("core", regular_polygon((0.0, 0.0), random.between(0.15, 0.3), 3 + random.below(5))).unwrap();
    for k in 0..corners.len() {
        outline.side(&format!("side {k}"), between(corners[k], corners[(k + 1) % corners.len()])).unwrap();
    }
    let mesh = outline.mesh(random.between(0.3, 0.7)).unwrap();
    let mut problem = Diffusion::on(mesh)
        .conductivity("body", random.magnitude(-3.0, 3.0))
        .conductivity("core", random.magnitude(-3.0, 3.0))
        .source("core", random.between(-1.0, 1.0))
        .order(order)
        .dirichlet("side 0", 1.0);
    for k in 2..corners.len() {
        let name = format!("side {k}");
        problem = match random.below(3) {
            0 => problem.neumann(&name, random.between(-1.0, 1.0)),
            1 => problem.robin(&name, random.magnitude(-1.0, 6.0), random.between(-1.0, 1.0)),
            _ => problem,
        };
    }
    problem
}
