//! What does a mesh cost? Cells per second of generation from an outline, of bisection, and points per second of location.

use std::hint::black_box;
use std::sync::Arc;

use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};
use hypercircle::mesh::{CellId, Locator, Outline, polygon};

fn l_shape() -> Outline {
    let mut outline = Outline::new();
    let corners = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (-1.0, 1.0), (-1.0, -1.0), (0.0, -1.0)];
    // The corners are sound: nothing can go wrong.
    outline.region("l", polygon(&corners)).map(|_| ()).expect("a sound outline");
    outline
}

fn generation(c: &mut Criterion) {
    let outline = l_shape();
    let mut group = c.benchmark_group("outline");
    group.sample_size(10);
    for size in [0.02, 0.005] {
        let cells = outline.mesh(size).expect("a sound outline").cell_count() as u64;
        group.throughput(Throughput::Elements(cells));
        group.bench_with_input(BenchmarkId::from_parameter(cells), &size, |b, size| b.iter(|| outline.mesh(*size)));
    }
    group.finish();
}

fn refinement(c: &mut Criterion) {
    let mesh = l_shape().mesh(0.01).expect("a sound outline");
    let _ = mesh.topology();
    let every_fifth: Vec<CellId> = mesh.cells().step_by(5).collect();
    let mut group = c.benchmark_group("bisect");
    group.throughput(Throughput::Elements(mesh.cell_count() as u64));
    group.bench_function("every fifth cell", |b| b.iter(|| mesh.bisect(black_box(&every_fifth))));
    group.finish();
}

fn location(c: &mut Criterion) {
    let mesh = Arc::new(l_shape().mesh(0.01).expect("a sound outline"));
    let locator = Locator::new(mesh.clone());
    let points: Vec<[f64; 2]> = mesh.cells().step_by(7).map(|cell| mesh.cell_center(cell)).collect();
    let mut group = c.benchmark_group("locate");
    group.throughput(Throughput::Elements(points.len() as u64));
    group.bench_function("cell centers", |b| b.iter(|| points.iter().filter(|x| locator.find(x).is_ok()).count()));
    group.finish();
}

criterion_group!(benches, generation, refinement, location);
criterion_main!(benches);
