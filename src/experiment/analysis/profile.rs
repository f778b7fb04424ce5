//! Performance profiles and data profiles: the share of instances solved, against what was allowed for it.

use super::CostTable;
use std::string::String;
use std::vec::Vec;

/// What a profile is drawn over.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum ProfileKind {
    /// Cost as a multiple of the cheapest contender's on the same instance; 1 and above.
    Ratio,
    /// Cost itself, in units of the measure.
    Cost,
    /// Cost over `n + 1`: with calls, in simplex gradients.
    SimplexGradients,
}

/// For each contender the share of instances solved within an allowance, as a staircase.
#[derive(Clone, Debug, PartialEq)]
pub struct Profile {
    kind: ProfileKind,
    contenders: Vec<String>,
    /// By contender: where an instance becomes solved, ascending, finite.
    jumps: Vec<Vec<f64>>,
    instances: usize,
}

/// The performance profile: `rho(tau)`, the share of instances that a contender solved at no more than `tau` times the cost of
/// the cheapest contender on that instance. At `tau = 1` it is the share of wins, shared ones included; far to the right the
/// share solved at all. Instances that nobody solved stay in the count.
///
/// It compares with the best of those present: leaving a contender out can turn the order of two others (N. Gould & J. Scott,
/// ACM Trans. Math. Software 43 (2016) 15, doi:10.1145/2950048). Read it together with [`head_to_head`](super::head_to_head()).
///
/// Source: E. D. Dolan & J. J. Moré, Math. Program. 91 (2002) 201-213, doi:10.1007/s101070100263, section 2.
pub fn performance_profile(table: &CostTable) -> Profile {
    by_row(table, ProfileKind::Ratio, |_, row| {
        row.iter().copied().fold(f64::INFINITY, f64::min)
    })
}

/// The data profile: the share of instances that a contender solved at a cost of no more than `kappa (n + 1)`, or, with
/// `simplex_gradients` false, no more than `kappa`. It does not depend on who else takes part.
///
/// Source: J. J. Moré & S. M. Wild, SIAM J. Optim. 20 (2009) 172-191, doi:10.1137/080724083, equation (2.4).
pub fn data_profile(table: &CostTable, simplex_gradients: bool) -> Profile {
    if simplex_gradients {
        by_row(table, ProfileKind::SimplexGradients, |instance, _| {
            table.instances()[instance].n as f64 + 1.0
        })
    } else {
        by_row(table, ProfileKind::Cost, |_, _| 1.0)
    }
}

fn by_row(table: &CostTable, kind: ProfileKind, unit: impl Fn(usize, &[f64]) -> f64) -> Profile {
    let mut jumps = std::vec![Vec::new(); table.contenders().len()];
    for (instance, row) in table.rows().enumerate() {
        let unit = unit(instance, row);
        for (jumps, &cost) in jumps.iter_mut().zip(row) {
            if cost.is_finite() {
                jumps.push(cost / unit);
            }
        }
    }
    for jumps in &mut jumps {
        jumps.sort_unstable_by(f64::total_cmp);
    }
    Profile {
        kind,
        contenders: table.contenders().to_vec(),
        jumps,
        instances: table.instances().len(),
    }
}

impl Profile {
    /// What it is drawn over.
    pub fn kind(&self) -> ProfileKind {
        self.kind
    }

    /// Names of the contenders.
    pub fn contenders(&self) -> &[String] {
        &self.contenders
    }

    /// Number of instances; a share is a multiple of its inverse.
    pub fn instances(&self) -> usize {
        self.instances
    }

    /// Share of instances that the contender solved within the allowance, 0 to 1; 0 for a number past the last.
    pub fn share(&self, contender: usize, allowance: f64) -> f64 {
        let jumps = self.jumps.get(contender).map_or(&[][..], Vec::as_slice);
        jumps.partition_point(|&jump| jump <= allowance) as f64 / self.instances as f64
    }

    /// The staircase of a contender: allowances where the share rises, each with the share from there on, ascending.
    pub fn steps(&self, contender: usize) -> impl Iterator<Item = (f64, f64)> {
        let jumps = self.jumps.get(contender).map_or(&[][..], Vec::as_slice);
        let mut solved = 0;
        jumps.chunk_by(|a, b| a == b).map(move |same| {
            solved += same.len();
            (same[0], solved as f64 / self.instances as f64)
        })
    }

    /// The smallest and the largest allowance at which any share rises; `None` if nothing was solved.
    pub fn range(&self) -> Option<(f64, f64)> {
        let firsts = self.jumps.iter().filter_map(|jumps| jumps.first());
        let lasts = self.jumps.iter().filter_map(|jumps| jumps.last());
        let first = firsts.copied().reduce(f64::min)?;
        Some((first, lasts.copied().reduce(f64::max)?))
    }
}
