//! The same bits on one, two and three threads, and types that may cross threads.

use hypercircle::mesh::{Outline, between, polygon, rectangle, rest_of_boundary};
use hypercircle::solve::{ConjugateGradients, LinearSolver};
use hypercircle::{Answer, Certificate, Diffusion, Error, Goal, Place, Solution, Tolerance, Unwatched};

/// Everything that a run yields, as bits.
fn bits(answer: &Answer<2>) -> Vec<u64> {
    let certificate = answer.certificate().unwrap();
    let mut bits: Vec<u64> = answer.values().iter().map(|v| v.to_bits()).collect();
    bits.extend(answer.mesh().points().iter().flatten().map(|v| v.to_bits()));
    bits.extend(answer.mesh().connectivity().iter().map(|v| u64::from(v.0)));
    bits.extend(answer.system().matrix.data().iter().map(|v| v.to_bits()));
    bits.extend(certificate.shares().iter().map(|v| v.to_bits()));
    bits.extend(answer.mesh().cells().flat_map(|c| certificate.flux().moments(c).to_vec()).map(f64::to_bits));
    bits.extend([certificate.bound(), answer.inflow("warm").unwrap()].map(f64::to_bits));
    bits.extend(answer.rounds().iter().map(|r| r.bound.to_bits()));
    bits
}

fn run(solver: &mut dyn LinearSolver) -> Vec<u64> {
    let mut outline = Outline::new();
    outline
        .region("plate", polygon(&[(0.0, 0.0), (3.0, 0.0), (3.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0)]))
        .unwrap();
    outline.region("insert", rectangle((1.2, 0.2), (2.1, 0.7))).unwrap();
    outline.hole("bore", rectangle((0.3, 1.3), (0.6, 1.6))).unwrap();
    outline.side("warm", between((0.0, 2.0), (1.0, 2.0))).unwrap();
    outline.side("rest", rest_of_boundary()).unwrap();
    let problem = Diffusion::on(outline.mesh(0.02).unwrap())
        .conductivity("plate", |at: &Place<2>| 1.0 + 0.5 * (3.0 * at.x[0]).sin() * at.x[1].cos())
        .conductivity("insert", 300.0)
        .source("insert", 2.0)
        .reaction("plate", 0.5)
        .dirichlet("warm", |at: &Place<2>| at.x[0].exp())
        .robin("rest", 4.0, 1.0)
        .neumann("bore", 0.3)
        .order(2);
    bits(&problem.pursue(&Goal::new(Tolerance::Relative(3e-3)), solver, &mut Unwatched).unwrap())
}

#[test]
fn threads_leave_no_trace() {
    let on = |threads: usize, work: &(dyn Fn() -> Vec<u64> + Sync)| {
        rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap().install(work)
    };
    let direct = || run(&mut hypercircle::solve::Automatic::default());
    let iterative = || run(&mut ConjugateGradients { relative_tolerance: 1e-9, ..Default::default() });
    let works: [&(dyn Fn() -> Vec<u64> + Sync); 2] = [&direct, &iterative];
    for work in works {
        let alone = on(1, work);
        assert!(alone.len() > 100_000);
        for threads in [2, 3] {
            assert!(on(threads, work) == alone, "{threads} threads give other bits");
        }
    }
}

#[test]
fn public_types_cross_threads() {
    fn crosses<T: Send + Sync>() {}
    crosses::<Diffusion<2>>();
    crosses::<Solution<2>>();
    crosses::<Answer<1>>();
    crosses::<Certificate<2>>();
    crosses::<Error>();
    crosses::<hypercircle::mesh::Locator<2>>();
}
