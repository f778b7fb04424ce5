//! What limited-memory and conjugate gradient drivers spend on the large functions of the textbooks: function and gradient
//! evaluations until `max|g| <= 1e-5 (1 + |f|)`.
//!
//! ```sh
//! cargo run --release --features problems --example limited_memory_costs            # a table
//! cargo run --release --features problems --example limited_memory_costs -- --csv   # problem,n,driver,memory,iterations,evaluations,reference
//! ```
//!
//! A single run is luck: moving the start by 1e-12 moves the count of EIGENALS with 3 pairs between 633 and 1,123. So each figure
//! is the median over 31 starts `x0_i (1 + 1e-12 u_i)`, `u_i` uniform in [-1, 1] from a fixed seed. One default setting serves all:
//! the three-point finder, the weak Wolfe rule with 1e-4 and 0.9 for L-BFGS, the strong Wolfe rule with 1e-4 and 0.1 for
//! conjugate gradients.
//!
//! `reference` is the median of a general-purpose reference library's limited-memory solver on the same functions, starts and
//! stopping test (measured once, for this comparison; the functions are those of J. Nocedal & S. J. Wright, Numerical Optimization, 2nd
//! ed. 2006, table 7.1). It is there to be beaten, not to be met.

#[path = "shared/csv_option.rs"]
mod csv_option;

use std::error::Error;
use std::process::ExitCode;

use surefoot::acceptance::{StrongWolfe, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, Update};
use surefoot::finder::ThreePoint;
use surefoot::problems::{Problem, large};
use surefoot::{Acceptance, Descent, Direction, Stopping};

/// Number of starts.
const STARTS: usize = 31;
const MEMORIES: [usize; 4] = [3, 5, 17, 29];

/// A row of the table: medians.
struct Row {
    problem: String,
    n: usize,
    driver: &'static str,
    memory: Option<usize>,
    iterations: u64,
    evaluations: u64,
    reference: Option<u64>,
    /// Runs of the 31 that did not meet the test.
    short: usize,
}

/// Uniform in [-1, 1): a linear congruence (D. E. Knuth's MMIX multiplier, recalled from memory), its upper 53 bits.
fn uniform(state: &mut u64) -> f64 {
    *state = state
        .wrapping_mul(6_364_136_223_846_793_005)
        .wrapping_add(1_442_695_040_888_963_407);
    (*state >> 11) as f64 / 2f64.powi(52) - 1.0
}

/// The starts: the published one, with its last digits moved.
fn starts(problem: &Problem) -> Vec<Vec<f64>> {
    let mut state = 1;
    let mut moved = |x: &f64| x * (1.0 + 1e-12 * uniform(&mut state));
    (0..STARTS)
        .map(|_| problem.start().iter().map(&mut moved).collect())
        .collect()
}

fn median(mut counts: Vec<u64>) -> u64 {
    counts.sort_unstable();
    counts[counts.len() / 2]
}

fn row<D, A>(
    problem: &Problem,
    driver: &'static str,
    (memory, reference): (Option<usize>, Option<u64>),
    direction: impl Fn() -> D,
    rule: A,
) -> Result<Row, Box<dyn Error>>
where
    D: Direction<Vec<f64>>,
    A: Acceptance<f64> + Copy,
{
    let (mut iterations, mut evaluations, mut short) = (Vec::new(), Vec::new(), 0);
    for start in starts(problem) {
        let stopping = Stopping {
            gradient: Some(1e-5),
            gradient_by_value: 1e-5,
            ..Stopping::default()
        };
        let report = Descent::new(direction(), ThreePoint::new(), rule)
            .with_stopping(stopping)?
            .minimize(start, problem.clone())?;
        short += usize::from(!report.converged());
        iterations.push(report.iterations);
        evaluations.push(report.evaluations.calls());
    }
    Ok(Row {
        problem: problem.name().into(),
        n: problem.dim(),
        driver,
        memory,
        iterations: median(iterations),
        evaluations: median(evaluations),
        reference,
        short,
    })
}

fn print(csv: bool, row: &Row) {
    let Row {
        problem,
        n,
        driver,
        memory,
        iterations,
        evaluations,
        reference,
        short,
    } = row;
    let memory = memory.map_or(String::new(), |m| m.to_string());
    let reference = reference.map_or(String::new(), |r| r.to_string());
    if csv {
        println!("{problem},{n},{driver},{memory},{iterations},{evaluations},{reference}");
    } else {
        let note = if *short > 0 {
            format!("  {short} of {STARTS} fell short")
        } else {
            String::new()
        };
        println!(
            "{problem:<28} {n:>5} {driver:<16} {memory:>3} {iterations:>6} {evaluations:>6} {reference:>6}{note}"
        );
    }
}

fn run(csv: bool) -> Result<(), Box<dyn Error>> {
    if csv {
        println!("problem,n,driver,memory,iterations,evaluations,reference");
    } else {
        println!(
            "{:<28} {:>5} {:<16} {:>3} {:>6} {:>6} {:>6}",
            "", "n", "driver", "m", "moves", "calls", "ref."
        );
    }
    let dixmaan_l = large::dixmaan(large::DixmaanVariant::L, 1500)?;
    let (eigenals, freuroth) = (large::eigenals(110)?, large::freuroth(1000)?);
    let tridia = large::tridia(1000)?;
    let table = [
        (&dixmaan_l, [107, 95, 93, 82]),
        (&eigenals, [932, 615, 378, 144]),
        (&freuroth, [31, 34, 32, 32]),
        (&tridia, [1059, 679, 539, 480]),
    ];
    let (mut sum, mut reference_sum) = (0, 0);
    for (problem, references) in table {
        for (memory, reference) in MEMORIES.into_iter().zip(references) {
            let direction = || Lbfgs::new(memory).expect("memories are positive");
            let against = (Some(memory), Some(reference));
            let row = row(problem, "L-BFGS", against, direction, WeakWolfe::default())?;
            print(csv, &row);
            sum += row.evaluations;
            reference_sum += reference;
        }
    }
    let others = [
        &large::extended_powell_singular(1000)?,
        &large::trigonometric(1000)?,
        &large::chained_rosenbrock(1000)?,
    ];
    for problem in table.iter().map(|(problem, _)| *problem).chain(others) {
        for (name, update) in [
            ("Polak-Ribiere+", Update::PolakRibierePlus),
            ("Hager-Zhang", Update::HagerZhang),
        ] {
            let direction = || ConjugateGradient::new(update);
            let rule = StrongWolfe::new(1e-4, 0.1)?;
            print(csv, &row(problem, name, (None, None), direction, rule)?);
        }
    }
    if !csv {
        println!(
            "L-BFGS: {sum} evaluations in all, {reference_sum} of the reference: {:.3}",
            sum as f64 / reference_sum as f64
        );
    }
    Ok(())
}

fn main() -> ExitCode {
    csv_option::main("limited_memory_costs", run)
}
