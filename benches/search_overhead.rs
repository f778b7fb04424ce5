//! What the step machine costs beyond the caller's function, per trial.
//!
//! The same bisection with the same weak Wolfe conditions on the same cheap function, five ways: a loop written by hand; the
//! step machine with static types; the same machine with finder and rule in boxes; and both machines through the closure
//! form. Every run is 24 searches of 4 to 25 trials; criterion shows the time of one trial as the inverse of the
//! throughput, and the last lines print the differences that the promise is about, as medians of alternating rounds:
//! at most 25 ns per trial beyond the loop by hand, at most 10 ns more in boxes.

use criterion::{Criterion, Throughput, criterion_group};
use std::hint::black_box;
use std::time::Instant;
use surefoot::acceptance::WeakWolfe;
use surefoot::finder::Bisection;
use surefoot::{Acceptance, BoxedFinder, BoxedRule, Ray, Sample, StepFinder, StepSearch};

const DECREASE: f64 = 1e-4;
const CURVATURE: f64 = 1e-3;

/// A parabola with minimizer `at`, and its slope.
fn phi(at: f64, a: f64) -> (f64, f64) {
    (0.5 * (a - at) * (a - at), a - at)
}

/// Minimizers that a search from the step 1 has to look for.
fn minimizers() -> impl Iterator<Item = f64> {
    (0..24).map(|i| 1.618_f64.powi(i - 8) * 1.1)
}

fn by_hand(at: f64) -> (f64, u32) {
    let (value, slope) = phi(at, 0.0);
    let (mut short, mut long, mut step, mut trials) = (0.0, None, 1.0, 0);
    loop {
        let (v, s) = phi(at, step);
        trials += 1;
        let too_long = !(v <= value + DECREASE * step * slope);
        if !too_long && s >= CURVATURE * slope {
            return (step, trials);
        }
        if too_long {
            long = Some(step);
        } else {
            short = step;
        }
        step = match long {
            Some(long) => 0.5 * (short + long),
            None => 2.0 * step,
        };
        if trials >= 100 {
            return (step, trials);
        }
    }
}

fn by_machine<F: StepFinder<f64>, A: Acceptance<f64>>(
    search: &mut StepSearch<f64, F, A>,
    at: f64,
) -> (f64, u32) {
    let (value, slope) = phi(at, 0.0);
    search
        .begin(Ray::new(value, slope), 1.0)
        .expect("the ray descends");
    while let Some(ask) = search.request() {
        let (value, slope) = phi(at, ask.step);
        search
            .supply(Sample::Both(value, slope))
            .expect("it was asked for");
    }
    let outcome = search.outcome().expect("it has ended");
    (
        outcome.accepted().map_or(f64::NAN, |t| t.step),
        outcome.trials,
    )
}

fn by_closure<F: StepFinder<f64>, A: Acceptance<f64>>(
    search: &mut StepSearch<f64, F, A>,
    at: f64,
) -> (f64, u32) {
    let (value, slope) = phi(at, 0.0);
    let found = search.along(Ray::new(value, slope), 1.0, |a| phi(at, a));
    let outcome = found.expect("the ray descends").outcome;
    (
        outcome.accepted().map_or(f64::NAN, |t| t.step),
        outcome.trials,
    )
}

fn rule() -> WeakWolfe<f64> {
    WeakWolfe::new(DECREASE, CURVATURE).expect("usual parameters")
}

fn static_search() -> StepSearch<f64, Bisection, WeakWolfe<f64>> {
    StepSearch::new(Bisection::new(), rule())
}

fn boxed_search() -> StepSearch<f64, BoxedFinder<f64>, BoxedRule<f64>> {
    // `black_box` keeps the compiler from seeing through the boxes.
    let finder: BoxedFinder<f64> = black_box(Box::new(Bisection::new()));
    let rule: BoxedRule<f64> = black_box(Box::new(rule()));
    StepSearch::new(finder, rule)
}

/// All searches of one run; the number of trials.
fn run(mut search: impl FnMut(f64) -> (f64, u32)) -> u32 {
    minimizers()
        .map(|at| {
            let (step, trials) = search(black_box(at));
            black_box(step);
            trials
        })
        .sum()
}

fn bench(c: &mut Criterion) {
    let trials = run(by_hand);
    let mut group = c.benchmark_group("trial");
    group.throughput(Throughput::Elements(u64::from(trials)));
    group.bench_function("by hand", |b| b.iter(|| run(by_hand)));
    let mut search = static_search();
    assert_eq!(
        run(|at| by_machine(&mut search, at)),
        trials,
        "the same trials"
    );
    group.bench_function("machine", |b| {
        b.iter(|| run(|at| by_machine(&mut search, at)));
    });
    group.bench_function("closure", |b| {
        b.iter(|| run(|at| by_closure(&mut search, at)));
    });
    let mut search = boxed_search();
    group.bench_function("boxed machine", |b| {
        b.iter(|| run(|at| by_machine(&mut search, at)));
    });
    group.finish();
}

/// Nanoseconds per trial of each way, medians over alternating rounds, so that a drifting clock hits all alike.
fn differences() {
    const ROUNDS: usize = 301;
    const REPEATS: u32 = 100;
    let trials = f64::from(run(by_hand) * REPEATS);
    let (mut fixed, mut boxed) = (static_search(), boxed_search());
    let mut times: [Vec<f64>; 4] = Default::default();
    for _ in 0..ROUNDS {
        let mut clock = |way: usize, work: &mut dyn FnMut() -> u32| {
            let begun = Instant::now();
            (0..REPEATS).for_each(|_| {
                black_box(work());
            });
            times[way].push(begun.elapsed().as_secs_f64() * 1e9 / trials);
        };
        clock(0, &mut || run(by_hand));
        clock(1, &mut || run(|at| by_machine(&mut fixed, at)));
        clock(2, &mut || run(|at| by_closure(&mut fixed, at)));
        clock(3, &mut || run(|at| by_machine(&mut boxed, at)));
    }
    let median = |way: &mut Vec<f64>| {
        way.sort_by(f64::total_cmp);
        way[way.len() / 2]
    };
    let [hand, machine, closure, boxed] = times.each_mut().map(median);
    println!(
        "nanoseconds per trial: by hand {hand:.2}, machine {machine:.2}, closure {closure:.2}, boxed {boxed:.2}"
    );
    println!(
        "machine beyond the loop by hand: {:.2} ns (promised: at most 25)",
        machine - hand
    );
    println!(
        "closure beyond the loop by hand: {:.2} ns (promised: at most 25)",
        closure - hand
    );
    println!(
        "boxed beyond static: {:.2} ns (promised: at most 10)",
        boxed - machine
    );
}

criterion_group!(benches, bench);

fn main() {
    benches();
    Criterion::default().configure_from_args().final_summary();
    if std::env::args().any(|argument| argument == "--bench") {
        differences();
    }
}
