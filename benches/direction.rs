//! The kernels beside nalgebra's own for the same job, and a limited-memory direction in both of its forms.
//!
//! Ratios within one run are what counts: `cargo bench --bench direction`. How close the direction comes to the speed of memory is
//! told by `examples/memory_speed.rs`.

use criterion::{BenchmarkId, Criterion, criterion_group, criterion_main};
use nalgebra::DVector;
use std::hint::black_box;
use std::time::Duration;
use surefoot::direction::{Form, Lbfgs, Moved};
use surefoot::vector::kernels;
use surefoot::{Direction, Vector};

const MEMORY: usize = 10;

fn numbers(n: usize, seed: usize) -> Vec<f64> {
    (0..n)
        .map(|i| ((i * 7 + seed * 13) % 101) as f64 * 0.01 - 0.5)
        .collect()
}

fn sizes() -> &'static [usize] {
    &[10, 1_000, 10_000, 1_000_000]
}

fn kernels_beside_nalgebra(c: &mut Criterion) {
    for &n in sizes() {
        let (x, y) = (numbers(n, 1), numbers(n, 2));
        let (nx, ny) = (DVector::from_vec(x.clone()), DVector::from_vec(y.clone()));
        let (mut to, mut nto) = (y.clone(), ny.clone());
        let vectors: Vec<_> = (0..2 * MEMORY).map(|i| numbers(n, i)).collect();
        let nvectors: Vec<_> = vectors.iter().cloned().map(DVector::from_vec).collect();
        let mut out = [0.0; 2 * MEMORY];
        let mut pair = |name: &str, ours: &mut dyn FnMut(), theirs: &mut dyn FnMut()| {
            let mut group = c.benchmark_group(name);
            group.bench_function(BenchmarkId::new("surefoot", n), |b| b.iter(&mut *ours));
            group.bench_function(BenchmarkId::new("nalgebra", n), |b| b.iter(&mut *theirs));
            group.finish();
        };
        pair(
            "dot",
            &mut || {
                black_box(kernels::dot(black_box(&x), &y));
            },
            &mut || {
                black_box(black_box(&nx).dot(&ny));
            },
        );
        pair(
            "twenty dots",
            &mut || {
                kernels::dots(|i| &vectors[i], black_box(&y), &mut out);
                black_box(&out);
            },
            &mut || {
                for v in &nvectors {
                    black_box(v.dot(black_box(&ny)));
                }
            },
        );
        pair(
            "add scaled",
            &mut || kernels::add_scaled(black_box(&mut to), 1e-9, &x),
            &mut || black_box(&mut nto).axpy(1e-9, &nx, 1.0),
        );
        let c20 = [1e-3; 2 * MEMORY];
        pair(
            "combination of twenty",
            &mut || kernels::combine(black_box(&mut to), -1.0, &x, &c20, |i| &vectors[i]),
            &mut || {
                nto.copy_from(&nx);
                nto.neg_mut();
                for v in &nvectors {
                    nto.axpy(1e-3, v, 1.0);
                }
                black_box(&nto);
            },
        );
        pair(
            "step",
            &mut || kernels::step_from(black_box(&mut to), &x, 0.5, &y),
            &mut || {
                nto.copy_from(&nx);
                nto.axpy(0.5, &ny, 1.0);
                black_box(&nto);
            },
        );
        pair(
            "max abs",
            &mut || {
                black_box(kernels::max_abs(black_box(&x)));
            },
            &mut || {
                black_box(black_box(&nx).amax());
            },
        );
        pair(
            "norm",
            &mut || {
                black_box(kernels::norm(black_box(&x)));
            },
            &mut || {
                black_box(black_box(&nx).norm());
            },
        );
    }
}

fn directions(c: &mut Criterion) {
    let mut group = c.benchmark_group("direction");
    for &n in sizes() {
        for form in [Form::Compact, Form::TwoLoop] {
            let mut lbfgs: Lbfgs<Vec<f64>> = Lbfgs::new(MEMORY).expect("positive").with_form(form);
            let zero = vec![0.0; n];
            lbfgs.begin(&zero);
            let (mut old, mut g) = (zero.clone(), numbers(n, 99));
            for k in 0..MEMORY {
                let mut s = numbers(n, k);
                old.assign(&g);
                g.iter_mut()
                    .zip(&s)
                    .enumerate()
                    .for_each(|(i, (g, s))| *g += s * (1 + i % 4) as f64);
                let survey = lbfgs.survey(&g, &old, &s);
                let (x, mut g_old) = (s.clone(), old.clone());
                lbfgs.moved(Moved::new(
                    1.0,
                    &mut s,
                    (&zero, &x),
                    (&mut g_old, &g),
                    survey,
                ));
            }
            let mut d = g.clone();
            group.bench_function(BenchmarkId::new(format!("{form:?}"), n), |b| {
                b.iter(|| {
                    black_box(lbfgs.survey(black_box(&g), &old, &d));
                    black_box(lbfgs.direction(&old, &g, &mut d));
                });
            });
        }
    }
    group.finish();
}

criterion_group! {
    name = benches;
    config = Criterion::default().sample_size(20).warm_up_time(Duration::from_millis(200)).measurement_time(Duration::from_millis(600));
    targets = kernels_beside_nalgebra, directions
}
criterion_main!(benches);
