//! Any number of threads gives the same bits.
#![cfg(feature = "rayon")]

use surefoot::acceptance::WeakWolfe;
use surefoot::direction::{Lbfgs, SinglePairs};
use surefoot::finder::ThreePoint;
use surefoot::vector::kernels;
use surefoot::{Descent, Direction, Stopping};

fn numbers(n: usize, seed: u64) -> Vec<f64> {
    let mut state = seed;
    (0..n)
        .map(|_| {
            state = state
                .wrapping_mul(6_364_136_223_846_793_005)
                .wrapping_add(1_442_695_040_888_963_407);
            (state >> 11) as f64 / 2f64.powi(53) - 0.5
        })
        .collect()
}

fn with_threads<T: Send>(threads: usize, run: impl FnOnce() -> T + Send) -> T {
    let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build();
    pool.unwrap().install(run)
}

#[test]
fn kernels_give_the_same_bits_with_any_number_of_threads() {
    // Long enough to be shared: more than one wave of 64 blocks, and a last block that is not full.
    let n = 70 * 16_384 + 77;
    let [x, y, d] = [1, 2, 3].map(|seed| numbers(n, seed));
    let vectors: Vec<_> = (10..36).map(|seed| numbers(n, seed)).collect();
    let coefficients = numbers(vectors.len(), 4);
    let look = || {
        let mut out = vec![0.0; vectors.len()];
        let survey = kernels::survey(&x, &y, &d, |i| &vectors[i], &mut out);
        let mut to = vec![0.0; n];
        kernels::combine(&mut to, -0.3, &x, &coefficients, |i| &vectors[i]);
        kernels::add_scaled(&mut to, 0.1, &y);
        assert!(kernels::finite_step_from(&mut out.clone(), &x, 1.0, &d));
        (
            survey,
            out,
            kernels::dot(&x, &y),
            kernels::norm(&d),
            kernels::max_abs(&y),
            to,
        )
    };
    let one = with_threads(1, look);
    for threads in [2, 3, 7] {
        assert!(one == with_threads(threads, look), "{threads} threads");
    }
}

#[test]
fn a_run_is_the_same_with_any_number_of_threads() {
    let n = 300_001;
    fn run(n: usize, direction: impl Direction<Vec<f64>>) -> (Vec<f64>, u64) {
        let stopping = Stopping {
            gradient: Some(1e-6),
            ..Stopping::default()
        };
        let descent = Descent::new(direction, ThreePoint::new(), WeakWolfe::default());
        let report = descent
            .with_stopping(stopping)
            .unwrap()
            .minimize_fn(vec![1.0; n], |x, g| {
                let mut value = 0.0;
                for (i, (x, g)) in x.iter().zip(g).enumerate() {
                    let c = 1.0 + (i % 97) as f64;
                    *g = c * x + x * x * x;
                    value += 0.5 * c * x * x + 0.25 * x * x * x * x;
                }
                value
            })
            .unwrap();
        assert!(report.converged());
        (report.point, report.evaluations.calls())
    }
    let lbfgs = || Lbfgs::new(7).unwrap();
    let one = with_threads(1, || run(n, lbfgs()));
    assert!(one == with_threads(2, || run(n, lbfgs())));
    let single = || lbfgs().with_history(SinglePairs::default());
    let one = with_threads(1, || run(n, single()));
    assert!(one == with_threads(3, || run(n, single())));
}
