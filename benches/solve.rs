//! What does a solve cost? Direct and iterative, by number of unknowns.

use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};
use hypercircle::Diffusion;
use hypercircle::assembly::{Pattern, Reduced, Scatter, Space, System};
use hypercircle::mesh::Rectangle;
use hypercircle::solve::{ConjugateGradients, Coordinates, CsrView, Direct, LinearSolver, LinearSystem};

/// The system of the unit square and the places of its unknowns.
fn square(n: usize) -> (Reduced, Vec<f64>) {
    let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [n, n]).mesh().expect("a sound rectangle");
    let problem = Diffusion::on(mesh).conductivity_everywhere(1.0).source_everywhere(1.0).dirichlet("left", 0.0);
    let terms = problem.terms().expect("sound terms");
    let space = Space::new(problem.mesh().clone(), 1).expect("a sound space");
    let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter).expect("a sound system");
    let reduced = system.constraints.reduce(&system.matrix, &system.load);
    let positions = space.positions();
    let places = reduced.free.iter().flat_map(|unknown| positions[*unknown as usize]).collect();
    (reduced, places)
}

fn solve(c: &mut Criterion) {
    let mut group = c.benchmark_group("solve");
    group.sample_size(10);
    for n in [100, 300] {
        let (reduced, places) = square(n);
        let system = LinearSystem {
            matrix: CsrView::try_from(&reduced.matrix).expect("a sound matrix"),
            load: &reduced.load,
            coordinates: Coordinates::new(2, &places).ok(),
        };
        let unknowns = reduced.free.len();
        group.throughput(Throughput::Elements(unknowns as u64));
        let mut x = vec![0.0; unknowns];
        group.bench_function(BenchmarkId::new("direct, first", unknowns), |b| {
            b.iter(|| Direct::default().solve(&system, &mut x));
        });
        let mut kept = Direct::default();
        group.bench_function(BenchmarkId::new("direct, factor kept", unknowns), |b| {
            b.iter(|| kept.solve(&system, &mut x))
        });
        group.bench_function(BenchmarkId::new("conjugate gradients", unknowns), |b| {
            b.iter(|| {
                x.fill(0.0);
                ConjugateGradients::default().solve(&system, &mut x)
            });
        });
    }
    group.finish();
}

criterion_group!(benches, solve);
criterion_main!(benches);
