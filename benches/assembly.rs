//! What does a matrix cost? Numbering, pattern and values, and a refill, by order and kind of coefficient.

use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};
use hypercircle::assembly::{Pattern, Scatter, Space, System};
use hypercircle::mesh::Rectangle;
use hypercircle::{Diffusion, Place};

/// The unit square with about 130,000 unknowns; a number or a closure as conductivity.
fn square(order: usize, closure: bool) -> Diffusion<2> {
    let n = 360 / order;
    let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [n, n]).mesh().expect("a sound rectangle");
    let problem = Diffusion::on(mesh).source_everywhere(1.0).dirichlet("left", 0.0).order(order);
    if closure {
        problem.conductivity_everywhere(|at: &Place<2>| 1.0 + 0.5 * (3.0 * at.x[0]).sin() * (5.0 * at.x[1]).cos())
    } else {
        problem.conductivity_everywhere(1.0)
    }
}

fn assembly(c: &mut Criterion) {
    let mut group = c.benchmark_group("assembly");
    group.sample_size(10);
    for (order, closure) in [(1, false), (1, true), (2, false), (2, true)] {
        let problem = square(order, closure);
        let terms = problem.terms().expect("sound terms");
        let space = Space::new(problem.mesh().clone(), order).expect("a sound space");
        let label = format!("order {order}, {}", if closure { "closure" } else { "number" });
        group.throughput(Throughput::Elements(space.unknown_count() as u64));
        group.bench_function(BenchmarkId::new("first", &label), |b| {
            b.iter(|| {
                let space = Space::new(problem.mesh().clone(), order).expect("a sound space");
                System::assemble(&space, &Pattern::new(&space), &terms, &Scatter)
            });
        });
        let pattern = Pattern::new(&space);
        let mut system = System::assemble(&space, &pattern, &terms, &Scatter).expect("a sound system");
        group.bench_function(BenchmarkId::new("refill", &label), |b| {
            b.iter(|| system.refill(&space, &pattern, &terms, &Scatter));
        });
    }
    group.finish();
}

criterion_group!(benches, assembly);
criterion_main!(benches);
