//! How close limited-memory directions come to the speed of memory: the time of a direction, and of a whole iteration without
//! its objective, over the time to read the history twice, measured side by side.
//!
//! ```sh
//! cargo run --release --all-features --example memory_speed            # the table, and what threads are worth
//! cargo run --release --all-features --example memory_speed -- --csv   # what,n,m,ratio_to_read,ratio_to_two_loop
//! ```
//!
//! - *Reading* sums up the `2 m` vectors, one after another and four abreast; the faster of both counts.
//! - *Two-loop* is the textbook recursion (Nocedal & Wright 2006, algorithm 7.4) written with nalgebra's `dot` and `axpy`.
//! - A *direction* is what a new gradient costs: its products with the history, its slope and largest component, and the
//!   combination; below 64 variables, where the default is the recursion, that alone.
//! - An *iteration* is everything that a run does between the calls of its objective: direction, step, inner products, stopping test. For
//!   conjugate gradients the read time is that of reading and writing the run's five vectors once each.
//!
//! Times are the least of several rounds in which the contenders of a row take turns, those of iterations the median of 30. One thread,
//! but for the last lines of the table.

#[path = "shared/csv_option.rs"]
mod csv_option;

use std::error::Error;
use std::hint::black_box;
use std::process::ExitCode;
use std::time::{Duration, Instant};

use nalgebra::DVector;
use surefoot::acceptance::WeakWolfe;
use surefoot::direction::{
    ConjugateGradient, Form, History, InitialScale, Lbfgs, Moved, SinglePairs, SteepestDescent,
    Update,
};
use surefoot::finder::ThreePoint;
use surefoot::{Descent, Direction, Given, Stopping};

const MEMORY: usize = 10;

struct Row {
    what: &'static str,
    n: usize,
    /// Time, and what it is measured against; seconds.
    time: f64,
    read: f64,
    two_loop: f64,
}

/// Numbers between -1/2 and 1/2.
fn numbers(n: usize, seed: usize) -> Vec<f64> {
    (0..n)
        .map(|i| ((i * 7 + seed * 13) % 101) as f64 * 0.01 - 0.5)
        .collect()
}

/// The least time of one call of each contender, in rounds in which they take turns.
fn least<const K: usize>(n: usize, mut contenders: [&mut dyn FnMut(); K]) -> [f64; K] {
    let repeats = (1_000_000 / (2 * MEMORY * n).max(1)).clamp(1, 10_000) as u32;
    let mut times = [f64::INFINITY; K];
    for _ in 0..15 {
        for (time, contender) in times.iter_mut().zip(&mut contenders) {
            let start = Instant::now();
            (0..repeats).for_each(|_| contender());
            *time = time.min(start.elapsed().as_secs_f64() / f64::from(repeats));
        }
    }
    times
}

// ---- Reading ----

fn sum_of_one(x: &[f64]) -> f64 {
    let mut sums = [0.0; 32];
    for x in x.as_chunks::<32>().0 {
        for (sum, x) in sums.iter_mut().zip(x) {
            *sum += x;
        }
    }
    sums.iter().sum()
}

fn sum_of_four(x: [&[f64]; 4]) -> f64 {
    let x = x.map(|x| x.as_chunks::<8>().0);
    let mut sums = [0.0; 8];
    for (((a, b), c), d) in x[0].iter().zip(x[1]).zip(x[2]).zip(x[3]) {
        for k in 0..8 {
            sums[k] += (a[k] + b[k]) + (c[k] + d[k]);
        }
    }
    sums.iter().sum()
}

fn read_in_turn(history: &[Vec<f64>]) -> f64 {
    history.iter().map(|x| sum_of_one(x)).sum()
}

fn read_abreast(history: &[Vec<f64>]) -> f64 {
    let (fours, rest) = history.as_chunks::<4>();
    let n = history[0].len();
    let mut sum = 0.0;
    for start in (0..n).step_by(16_384) {
        let end = (start + 16_384).min(n);
        for four in fours {
            sum += sum_of_four([0, 1, 2, 3].map(|i| &four[i][start..end]));
        }
    }
    sum + read_in_turn(rest)
}

/// The time to read `count` vectors once.
fn read_time(n: usize, count: usize) -> f64 {
    let vectors: Vec<_> = (0..count).map(|i| numbers(n, i)).collect();
    let times = least(
        n,
        [
            &mut || {
                black_box(read_in_turn(black_box(&vectors)));
            },
            &mut || {
                black_box(read_abreast(black_box(&vectors)));
            },
        ],
    );
    times[0].min(times[1])
}

/// The time to read and write `count` vectors once each.
fn rewrite_time(n: usize, count: usize) -> f64 {
    let mut vectors: Vec<_> = (0..count).map(|i| numbers(n, i)).collect();
    let [time] = least(
        n,
        [&mut || {
            for v in black_box(&mut vectors) {
                v.iter_mut().for_each(|x| *x = -*x);
            }
        }],
    );
    time
}

// ---- Directions ----

/// The textbook recursion: `d = -H g`.
fn two_loop(
    s: &[DVector<f64>],
    y: &[DVector<f64>],
    rho: &[f64],
    g: &DVector<f64>,
    d: &mut DVector<f64>,
) {
    let mut alpha = [0.0; MEMORY];
    d.copy_from(g);
    for i in (0..MEMORY).rev() {
        alpha[i] = rho[i] * s[i].dot(d);
        d.axpy(-alpha[i], &y[i], 1.0);
    }
    *d *= 1.0 / (rho[MEMORY - 1] * y[MEMORY - 1].norm_squared());
    for i in 0..MEMORY {
        let beta = rho[i] * y[i].dot(d);
        d.axpy(alpha[i] - beta, &s[i], 1.0);
    }
    d.neg_mut();
}

/// Pairs of a bowl with four curvatures, and the gradient after the last of them.
fn moves(n: usize) -> Vec<(Vec<f64>, Vec<f64>)> {
    let pair = |k| {
        let s = numbers(n, k);
        let y = s.iter().enumerate().map(|(i, s)| s * (1 + i % 4) as f64);
        let y = y.collect();
        (s, y)
    };
    (0..MEMORY).map(pair).collect()
}

/// A direction that has learnt these moves, and the gradients around the last one.
fn taught<D: Direction<Vec<f64>>>(mut direction: D, n: usize) -> (D, [Vec<f64>; 2]) {
    let zero = vec![0.0; n];
    direction.begin(&zero);
    let mut g = numbers(n, 99);
    let mut before = g.clone();
    for (mut s, y) in moves(n) {
        before.clone_from(&g);
        g.iter_mut().zip(&y).for_each(|(g, y)| *g += y);
        let survey = direction.survey(&g, &before, &s);
        let (x_new, mut g_old) = (s.clone(), before.clone());
        direction.moved(Moved::new(
            1.0,
            &mut s,
            (&zero, &x_new),
            (&mut g_old, &g),
            survey,
        ));
    }
    (direction, [before, g])
}

/// With the initial scale of the textbook, so that all of them give the same direction.
fn lbfgs() -> Lbfgs<Vec<f64>> {
    let lbfgs = Lbfgs::new(MEMORY).expect("the memory is positive");
    lbfgs.with_initial_scale(InitialScale::Newest)
}

fn directions(n: usize) -> Vec<Row> {
    let (mut compact, [old, g]) = taught(lbfgs(), n);
    let single = lbfgs();
    let (mut single, _) = taught(single.with_history(SinglePairs::default()), n);
    let recursion = Lbfgs::new(MEMORY)
        .expect("positive")
        .with_form(Form::TwoLoop);
    let (mut recursion, _) = taught(recursion, n);
    let (s, y): (Vec<_>, Vec<_>) = moves(n)
        .into_iter()
        .map(|(s, y)| (DVector::from_vec(s), DVector::from_vec(y)))
        .unzip();
    // Short vectors take the recursion, which needs no products beforehand.
    let compact_form = n >= 64;
    let rho: Vec<_> = s.iter().zip(&y).map(|(s, y)| 1.0 / s.dot(y)).collect();
    let textbook_g = DVector::from_column_slice(&g);
    let mut textbook_d = DVector::zeros(n);
    let mut d = [old.clone(), old.clone(), old.clone()];
    let [d0, d1, d2] = &mut d;
    let vectors: Vec<_> = (0..2 * MEMORY).map(|i| numbers(n, i)).collect();
    let times = least(
        n,
        [
            &mut || {
                black_box(read_in_turn(black_box(&vectors)));
            },
            &mut || {
                black_box(read_abreast(black_box(&vectors)));
            },
            &mut || two_loop(&s, &y, &rho, black_box(&textbook_g), &mut textbook_d),
            &mut || one_direction(compact_form, &mut compact, &old, &g, d0),
            &mut || one_direction(compact_form, &mut single, &old, &g, d1),
            &mut || one_direction(false, &mut recursion, &old, &g, d2),
        ],
    );
    let off = d[0].iter().zip(&textbook_d).map(|(a, b)| (a - b).abs());
    let off = off.fold(0.0, f64::max) / textbook_d.amax();
    assert!(off < 1e-9, "the compact direction is off by {off:e}");
    let (read, two_loop) = (2.0 * times[0].min(times[1]), times[2]);
    let row = |what, time| Row {
        what,
        n,
        time,
        read,
        two_loop,
    };
    vec![
        row("direction", times[3]),
        row("direction_pairs_in_single_precision", times[4]),
        row("direction_two_loop_form", times[5]),
        row("textbook_two_loop", times[2]),
    ]
}

fn one_direction<H: History<Vec<f64>>>(
    surveyed: bool,
    direction: &mut Lbfgs<Vec<f64>, H>,
    old: &Vec<f64>,
    g: &Vec<f64>,
    d: &mut Vec<f64>,
) {
    if surveyed {
        black_box(direction.survey(black_box(g), old, d));
    }
    black_box(direction.direction(old, g, d));
}

// ---- Whole iterations ----

/// A bowl with a thousand curvatures between 1 and 1,000.
fn bowl(x: &[f64], g: &mut [f64]) -> f64 {
    let mut value = 0.0;
    for (x, g) in x.chunks(1000).zip(g.chunks_mut(1000)) {
        for (i, (x, g)) in x.iter().zip(g).enumerate() {
            *g = x * (i + 1) as f64;
            value += 0.5 * x * *g;
        }
    }
    value
}

/// The median time of an iteration, without the objective.
fn iteration(n: usize, direction: impl Direction<Vec<f64>>) -> Result<f64, Box<dyn Error>> {
    let stopping = Stopping {
        gradient: Some(0.0),
        ..Stopping::default()
    };
    let descent = Descent::new(direction, ThreePoint::new(), WeakWolfe::default());
    let mut run = descent.with_stopping(stopping)?.start(vec![1.0; n]);
    let mut times = Vec::new();
    let mut outside = Duration::ZERO;
    let mut since = Instant::now();
    while let Some(request) = run.request() {
        let (asked, moves) = (Instant::now(), times.len());
        let value = bowl(request.point, request.gradient);
        let answered = Instant::now();
        outside += answered - asked;
        let before = run.iterations();
        run.supply(Given::Both(value))?;
        if run.iterations() > before {
            let now = Instant::now();
            times.push((now - since).saturating_sub(outside).as_secs_f64());
            (since, outside) = (now, Duration::ZERO);
            if moves == 3 * MEMORY + 30 {
                break;
            }
        }
    }
    // The first ones fill the history.
    let mut times = times.split_off((2 * MEMORY).min(times.len() - 1));
    times.sort_by(f64::total_cmp);
    Ok(times[times.len() / 2])
}

fn iterations(n: usize) -> Result<Vec<Row>, Box<dyn Error>> {
    let read = 2.0 * read_time(n, 2 * MEMORY);
    let time = iteration(n, Lbfgs::new(MEMORY)?)?;
    let read = read.min(2.0 * read_time(n, 2 * MEMORY));
    let rewrite = rewrite_time(n, 5);
    let row = |what, time, read| Row {
        what,
        n,
        time,
        read,
        two_loop: f64::NAN,
    };
    Ok(vec![
        row("iteration", time, read),
        row(
            "iteration_conjugate_gradient",
            iteration(n, ConjugateGradient::new(Update::PolakRibierePlus))?,
            rewrite,
        ),
        row(
            "iteration_steepest_descent",
            iteration(n, SteepestDescent)?,
            rewrite,
        ),
    ])
}

// ---- Threads ----

/// Runs it in a pool with so many threads.
#[cfg(feature = "rayon")]
fn with_threads<T: Send>(
    threads: usize,
    run: impl FnOnce() -> T + Send,
) -> Result<T, Box<dyn Error>> {
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(threads)
        .build()?;
    Ok(pool.install(run))
}
#[cfg(not(feature = "rayon"))]
fn with_threads<T: Send>(_: usize, run: impl FnOnce() -> T + Send) -> Result<T, Box<dyn Error>> {
    Ok(run())
}

fn rows(csv: bool) -> Result<Vec<Row>, Box<dyn Error>> {
    let mut rows = Vec::new();
    let mut add = |more: Vec<Row>| {
        for row in &more {
            print(csv, row);
        }
        rows.extend(more);
    };
    for n in [10, 1_000, 10_000, 100_000, 1_000_000, 4_000_000] {
        add(with_threads(1, || directions(n))?);
    }
    for n in [1_000, 10_000, 100_000, 1_000_000, 4_000_000, 10_000_000] {
        add(with_threads(1, || {
            iterations(n).map_err(|e| e.to_string())
        })??);
    }
    Ok(rows)
}

fn print(csv: bool, row: &Row) {
    let Row {
        what,
        n,
        time,
        read,
        two_loop,
    } = row;
    let (to_read, to_two_loop) = (time / read, time / two_loop);
    if csv {
        let last = if to_two_loop.is_nan() {
            String::new()
        } else {
            format!("{to_two_loop:.3}")
        };
        println!("{what},{n},{MEMORY},{to_read:.3},{last}");
    } else {
        let last = if to_two_loop.is_nan() {
            "–".into()
        } else {
            format!("{to_two_loop:.2}")
        };
        println!(
            "{what:<36} {n:>9} {:>12.1} {to_read:>8.2} {last:>9}",
            time * 1e6
        );
    }
}

fn run(csv: bool) -> Result<(), Box<dyn Error>> {
    if csv {
        println!("what,n,m,ratio_to_read,ratio_to_two_loop");
    } else {
        println!(
            "{:<36} {:>9} {:>12} {:>8} {:>9}",
            "", "n", "time [us]", "/ read", "/ 2-loop"
        );
    }
    let rows = rows(csv)?;
    if !csv && cfg!(feature = "rayon") {
        let n = 4_000_000;
        let two = with_threads(2, || directions(n))?;
        for (one, two) in rows.iter().filter(|r| r.n == n).zip(&two).take(2) {
            println!(
                "two threads, {}: {:.2} times as fast",
                two.what,
                one.time / two.time
            );
        }
    }
    Ok(())
}

fn main() -> ExitCode {
    csv_option::main("memory_speed", run)
}
