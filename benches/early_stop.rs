//! What it saves to stop adding a costly sum at the ceiling of a rule.
//!
//! A robust curve fit with many residuals, minimised by steepest descent with backtracking from a long first step, so that
//! many trials are too long: once with whole sums, once with sums that stop as soon as the trial is certain to be refused.
//! Both runs make the same moves. The last line prints the share of the terms that were added.

use criterion::{Criterion, criterion_group};
use std::cell::Cell;
use std::convert::Infallible;
use std::hint::black_box;
use surefoot::acceptance::SufficientDecrease;
use surefoot::direction::SteepestDescent;
use surefoot::finder::Backtracking;
use surefoot::{Descent, FirstTrial, Objective, Report, Stopping};

const TERMS: usize = 20_000;

/// `sum (exp(-r t) cos(w t) - y)^2 / TERMS` over the rate `r` and the frequency `w` of a decaying oscillation.
struct Oscillation<'a> {
    early: bool,
    /// Terms added in values on their own.
    added: &'a Cell<u64>,
}

/// Time and reading number `i`: the oscillation with rate 0.3 and frequency 2, and a ripple that no parameter explains.
fn reading(i: usize) -> (f64, f64) {
    let t = 10.0 * i as f64 / TERMS as f64;
    (
        t,
        (-0.3 * t).exp() * (2.0 * t).cos() + 0.05 * (37.0 * t).sin(),
    )
}

impl Oscillation<'_> {
    fn sum(&self, x: &[f64; 2], ceiling: f64) -> f64 {
        let mut sum = 0.0;
        let mut added = 0;
        for i in 0..TERMS {
            let (t, y) = reading(i);
            let residual = (-x[0] * t).exp() * (x[1] * t).cos() - y;
            sum += residual * residual / TERMS as f64;
            added += 1;
            if sum > ceiling {
                break;
            }
        }
        self.added.set(self.added.get() + added);
        sum
    }
}

impl Objective<[f64; 2]> for Oscillation<'_> {
    type Error = Infallible;
    fn value(&mut self, x: &[f64; 2]) -> Result<f64, Infallible> {
        Ok(self.sum(x, f64::INFINITY))
    }
    fn value_up_to(&mut self, x: &[f64; 2], ceiling: Option<f64>) -> Result<f64, Infallible> {
        let ceiling = ceiling.filter(|_| self.early).unwrap_or(f64::INFINITY);
        Ok(self.sum(x, ceiling))
    }
    fn gradient(&mut self, x: &[f64; 2], g: &mut [f64; 2]) -> Result<(), Infallible> {
        *g = [0.0; 2];
        for i in 0..TERMS {
            let (t, y) = reading(i);
            let (decay, (sine, cosine)) = ((-x[0] * t).exp(), (x[1] * t).sin_cos());
            let twice = 2.0 * (decay * cosine - y) / TERMS as f64;
            g[0] -= twice * t * decay * cosine;
            g[1] -= twice * t * decay * sine;
        }
        Ok(())
    }
}

fn fit(early: bool, added: &Cell<u64>) -> Report<[f64; 2]> {
    let stopping = Stopping {
        iterations: 12,
        ..Stopping::default()
    };
    Descent::new(
        SteepestDescent,
        Backtracking::default(),
        SufficientDecrease::default(),
    )
    .with_first_trial(FirstTrial::Fixed(500.0))
    .and_then(|d| d.with_stopping(stopping))
    .expect("settings in range")
    .minimize([0.6, 1.6], Oscillation { early, added })
    .expect("the objective does not fail")
}

fn bench(c: &mut Criterion) {
    let added = Cell::new(0);
    let mut group = c.benchmark_group("curve fit");
    group.sample_size(10);
    group.bench_function("whole sums", |b| b.iter(|| black_box(fit(false, &added))));
    group.bench_function("sums that stop early", |b| {
        b.iter(|| black_box(fit(true, &added)));
    });
    group.finish();
}

fn shares() {
    let (whole, early) = (Cell::new(0), Cell::new(0));
    let (a, b) = (fit(false, &whole), fit(true, &early));
    assert_eq!(a.point, b.point, "the same moves");
    println!(
        "{} moves, {} trials refused: {} of {} terms added in values, {:.1} %",
        a.iterations,
        a.refusals.too_long,
        early.get(),
        whole.get(),
        100.0 * early.get() as f64 / whole.get() as f64
    );
}

criterion_group!(benches, bench);

fn main() {
    benches();
    Criterion::default().configure_from_args().final_summary();
    shares();
}
