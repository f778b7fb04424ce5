//! Invented records of runs, for tests and benches of what is done with them.

#![allow(dead_code)] // each test uses its own part

use surefoot::experiment::{Ending, Record};

/// A run of one move that converged, with everything else at 0.
pub(crate) fn record(problem: &str, n: usize, contender: &str, start: u32) -> Record {
    let mut record = Record::new(problem, n, contender);
    record.start = start;
    (record.ending, record.note) = (Ending::Converged, "converged: the gradient is small".into());
    record.iterations = 1;
    (
        record.start_value,
        record.value,
        record.gradient_max,
        record.seconds,
    ) = (1.0, 0.0, 0.0, 1.0);
    record
}

/// The same at a cost of `calls`; `None`: it did not converge.
pub(crate) fn paid(problem: &str, n: usize, contender: &str, calls: Option<u64>) -> Record {
    let mut record = record(problem, n, contender, 0);
    record.both = calls.unwrap_or(1000);
    if calls.is_none() {
        record.ending = Ending::SearchFailed;
        record.note = "no acceptable step was found".into();
    }
    record
}

/// A stream of numbers in `0..1` (Knuth's 64-bit multiplicative congruence, TAOCP vol. 2, 3.3.4, table 1, line 26).
pub(crate) struct Numbers(pub(crate) u64);

impl Numbers {
    pub(crate) fn next(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6364136223846793005)
            .wrapping_add(1442695040888963407);
        (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }

    pub(crate) fn below(&mut self, limit: u64) -> u64 {
        (self.next() * limit as f64) as u64
    }
}

/// Runs of `contenders` on `problems` of `starts` starts each, `repetitions` times; about one in twelve fails.
pub(crate) fn invented(
    contenders: u64,
    problems: u64,
    starts: u32,
    repetitions: u32,
    seed: u64,
) -> Vec<Record> {
    let mut numbers = Numbers(seed);
    let template = record("", 1, "", 0);
    let mut records =
        Vec::with_capacity((contenders * problems) as usize * (starts * repetitions) as usize);
    for problem in 0..problems {
        let n = 2 + numbers.below(40) as usize;
        for start in 0..starts {
            let hardness = 10.0 + 300.0 * numbers.next();
            for contender in 0..contenders {
                for repetition in 0..repetitions {
                    let mut run = template.clone();
                    run.problem = format!("chamber {problem}");
                    run.contender = format!("contender {contender}");
                    (run.n, run.start, run.repetition) = (n, start, repetition);
                    let factor = 1.0 + 0.12 * contender as f64 + numbers.next();
                    run.both = (hardness * factor) as u64;
                    run.iterations = 1 + run.both * 3 / 4;
                    run.too_long = run.both / 8;
                    run.too_short = numbers.below(1 + run.both / 8);
                    run.seconds = 1e-6 * hardness * factor;
                    run.start_value = hardness;
                    run.value = hardness * 1e-9 * numbers.next();
                    run.gradient_max = 1e-7 * numbers.next();
                    run.correct_digits = Some(12.0 * numbers.next());
                    if numbers.below(12) == 0 {
                        run.ending = Ending::EvaluationsSpent;
                        run.note = "the limit on evaluations was reached".into();
                        run.value = hardness * numbers.next();
                        run.gradient_max = 1.0 + numbers.next();
                    }
                    records.push(run);
                }
            }
        }
    }
    records
}
