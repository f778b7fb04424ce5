//! Two contenders, problem by problem.

use super::{CostTable, sign_test};
use std::vec::Vec;

/// The score of one contender against another.
///
/// A *problem* (a name and a size) is one game, since its starts do not tell independent stories: it is won by whoever was
/// cheaper from more of its starts. An unsolved instance counts as infinitely dear; equal costs, and instances that neither
/// solved, are ties.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HeadToHead {
    /// Number of the first contender in the table.
    pub first: usize,
    /// Number of the second.
    pub second: usize,
    /// Problems won by the first.
    pub wins: u64,
    /// Problems won by the second.
    pub losses: u64,
    /// Problems won by neither.
    pub ties: u64,
    /// Instances that both solved.
    pub both_solved: u64,
    /// Geometric mean, over those, of the first's cost over the second's: below 1 the first is cheaper. `None` without any.
    pub ratio: Option<f64>,
    /// [`sign_test()`] of wins and losses.
    pub p: f64,
}

/// The first contender against the second, by their numbers in the table; `None` for a number past the last.
pub fn head_to_head(table: &CostTable, first: usize, second: usize) -> Option<HeadToHead> {
    let width = table.contenders().len();
    if first.max(second) >= width {
        return None;
    }
    let mut lead = std::vec![0_i64; table.problems()];
    let (mut both_solved, mut logs) = (0_u64, 0.0);
    for (row, &problem) in table.rows().zip(table.problem_of()) {
        let (a, b) = (row[first], row[second]);
        lead[problem] += i64::from(a < b) - i64::from(b < a);
        if a.is_finite() && b.is_finite() {
            both_solved += 1;
            logs += (a / b).ln();
        }
    }
    let count = |holds: fn(&i64) -> bool| lead.iter().filter(|lead| holds(lead)).count() as u64;
    let (wins, losses) = (count(|&lead| lead > 0), count(|&lead| lead < 0));
    Some(HeadToHead {
        first,
        second,
        wins,
        losses,
        ties: count(|&lead| lead == 0),
        both_solved,
        ratio: (both_solved > 0).then(|| (logs / both_solved as f64).exp()),
        p: sign_test(wins, losses),
    })
}

/// Every pair once, the lower number first.
pub fn all_pairs(table: &CostTable) -> Vec<HeadToHead> {
    let width = table.contenders().len();
    (0..width)
        .flat_map(|first| (first + 1..width).map(move |second| (first, second)))
        .filter_map(|(first, second)| head_to_head(table, first, second))
        .collect()
}
