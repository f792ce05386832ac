//! What does a guarantee cost, beside the solution it is for?

use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};
use hypercircle::bounds::Certificate;
use hypercircle::mesh::Rectangle;
use hypercircle::{Diffusion, Place};

fn certificate(c: &mut Criterion) {
    let mut group = c.benchmark_group("certificate");
    group.sample_size(10);
    for (order, closure) in [(1, false), (1, true), (2, false)] {
        let n = 240 / order;
        let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [n, n]).mesh().expect("a sound rectangle");
        let problem = Diffusion::on(mesh).source_everywhere(1.0).dirichlet("left", 0.0).order(order);
        let problem = if closure {
            problem.conductivity_everywhere(|at: &Place<2>| 1.0 + 0.5 * (3.0 * at.x[0]).sin() * (5.0 * at.x[1]).cos())
        } else {
            problem.conductivity_everywhere(1.0)
        };
        let solution = problem.solve().expect("a sound problem");
        let label = format!("order {order}, {}", if closure { "closure" } else { "number" });
        group.throughput(Throughput::Elements(solution.unknown_count() as u64));
        group.bench_function(BenchmarkId::new("solution", &label), |b| b.iter(|| problem.solve()));
        group.bench_function(BenchmarkId::new("certificate", &label), |b| {
            b.iter(|| Certificate::of(solution.space(), solution.terms(), solution.system(), solution.values()));
        });
    }
    group.finish();
}

criterion_group!(benches, certificate);
criterion_main!(benches);
