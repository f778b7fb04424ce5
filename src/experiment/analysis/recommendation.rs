//! Whom to take, on what evidence, in plain words.

use super::{CostTable, HeadToHead, Measure, Score, head_to_head, performance_profile, scores};
use core::fmt;
use std::format;
use std::string::String;
use std::vec::Vec;

/// A sign test below this, divided by the number of pairs of contenders, counts as significant (5 % in the whole, Bonferroni's
/// correction; common practice). The division is there because the winner is picked from the same records.
pub const SIGNIFICANT: f64 = 0.05;

/// Fewer problems than this are called few. Our own convention; with fewer than 6 no sign test can fall below 0.05.
pub const FEW_PROBLEMS: usize = 20;

/// A larger share of instances unsolved than this is called many. Our own convention.
pub const MANY_FAILURES: f64 = 0.2;

/// A recommendation; its `Display` is a few lines of text.
#[derive(Clone, Debug, PartialEq)]
pub struct Recommendation {
    /// The contender with the least [`Score::ratio`]; `None` where nobody solved anything.
    pub contender: Option<String>,
    /// The recommendation as one sentence.
    pub headline: String,
    /// What it rests on, a sentence each.
    pub evidence: Vec<String>,
    /// What speaks against trusting it, a sentence each; empty where nothing was found.
    pub warnings: Vec<String>,
}

impl fmt::Display for Recommendation {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.headline)?;
        for sentence in &self.evidence {
            write!(f, "\n  - {sentence}")?;
        }
        for sentence in &self.warnings {
            write!(f, "\n  ! {sentence}")?;
        }
        Ok(())
    }
}

/// The contender of least [`Score::ratio`] (of equals the one that solved more, then the first), with its evidence.
pub fn recommend(table: &CostTable) -> Recommendation {
    let scores = scores(table);
    let better = |a: usize, b: usize| {
        let order = scores[b].ratio.total_cmp(&scores[a].ratio);
        order.then(scores[a].solved.cmp(&scores[b].solved)).is_gt()
    };
    let best = (0..scores.len()).reduce(|a, b| if better(b, a) { b } else { a });
    match best {
        Some(best) if scores[best].solved > 0 => Judge {
            table,
            scores: &scores,
            best,
        }
        .say(),
        _ => Recommendation {
            contender: None,
            headline: "No recommendation: no contender solved any instance.".into(),
            evidence: Vec::new(),
            warnings: std::vec![format!(
                "The test was: {}. Look at the endings of the runs, allow larger budgets, or ask for less.",
                table.solved().sentence()
            )],
        },
    }
}

struct Judge<'a> {
    table: &'a CostTable,
    scores: &'a [Score],
    best: usize,
}

impl Judge<'_> {
    fn say(&self) -> Recommendation {
        let name = &self.table.contenders()[self.best];
        let others = (0..self.scores.len()).filter(|&other| other != self.best);
        let games: Vec<HeadToHead> = others
            .filter_map(|other| head_to_head(self.table, self.best, other))
            .collect();
        let headline = if games.is_empty() {
            format!("{name} was the only contender: there is nothing to compare it with.")
        } else if self.undecided(&games).is_empty() {
            format!(
                "Take {name}: it was the cheapest in {} overall, against every other contender beyond chance.",
                self.table.measure().name()
            )
        } else {
            format!(
                "Lean towards {name}: it was the cheapest in {} overall, but not beyond chance against all others.",
                self.table.measure().name()
            )
        };
        Recommendation {
            contender: Some(name.clone()),
            headline,
            evidence: self.evidence(&games),
            warnings: self.warnings(&games),
        }
    }

    fn evidence(&self, games: &[HeadToHead]) -> Vec<String> {
        let (score, instances) = (self.scores[self.best], self.table.instances().len());
        let mut said = std::vec![format!(
            "It solved {} of {} (solved: {}).",
            score.solved,
            counted(instances, "instance"),
            self.table.solved().sentence()
        )];
        if games.is_empty() {
            return said;
        }
        let within_twice = performance_profile(self.table).share(self.best, 2.0);
        said.push(format!(
            "Nobody was cheaper on {} of them, and {:.0} % it solved at no more than twice the least cost.",
            score.cheapest,
            100.0 * within_twice
        ));
        said.push(format!(
            "On average (geometric) it cost {:.2} times the cheapest contender of each instance; an unsolved one counts as {}.",
            score.ratio,
            super::CAP
        ));
        if let Some(next) = games.iter().reduce(|a, b| {
            let nearer = self.scores[b.second].ratio < self.scores[a.second].ratio;
            if nearer { b } else { a }
        }) {
            let ratio = next.ratio.map_or(String::new(), |ratio| {
                format!(" Where both solved, its cost was {ratio:.2} times the other's.")
            });
            said.push(format!(
                "Next comes {} at {:.2} times: problem by problem it won {}, lost {} and tied {} against it (two-sided sign test: p = {}).{ratio}",
                self.table.contenders()[next.second],
                self.scores[next.second].ratio,
                next.wins,
                next.losses,
                next.ties,
                probability(next.p)
            ));
        }
        said
    }

    fn warnings(&self, games: &[HeadToHead]) -> Vec<String> {
        let (table, mine) = (self.table, self.scores[self.best]);
        let (problems, instances) = (table.problems(), table.instances().len());
        let mut said = Vec::new();
        if problems < 6 {
            said.push(format!(
                "Only {}: with fewer than 6 no sign test can tell a difference from chance.",
                counted(problems, "problem")
            ));
        } else if problems < FEW_PROBLEMS {
            said.push(format!(
                "Few problems ({problems}): add some that are like yours."
            ));
        }
        let undecided = self.undecided(games);
        if !undecided.is_empty() {
            said.push(format!(
                "Not told from chance (sign test above {} / {} pairs): {}.",
                SIGNIFICANT,
                self.pairs(),
                listed(&undecided)
            ));
        }
        let failed = instances - mine.solved;
        if failed as f64 > MANY_FAILURES * instances as f64 {
            said.push(format!(
                "Many failures: it left {failed} of {} unsolved.",
                counted(instances, "instance")
            ));
        }
        let more: Vec<&str> = (0..self.scores.len())
            .filter(|&other| self.scores[other].solved > mine.solved)
            .map(|other| table.contenders()[other].as_str())
            .collect();
        if !more.is_empty() {
            said.push(format!(
                "Others solved more instances: {}. Take one of them where a failure is dear.",
                listed(&more)
            ));
        }
        if table.incomplete() > 0 {
            said.push(format!(
                "Left out: {} without a run of every contender.",
                counted(table.incomplete(), "instance")
            ));
        }
        if table.measure() == Measure::Seconds {
            said.push(
                "Seconds depend on the machine and on what else it did: compare calls, too.".into(),
            );
        }
        said
    }

    /// Those whom the sign test does not put behind the best.
    fn undecided(&self, games: &[HeadToHead]) -> Vec<&str> {
        let limit = SIGNIFICANT / self.pairs() as f64;
        games
            .iter()
            .filter(|game| !(game.wins > game.losses && game.p <= limit))
            .map(|game| self.table.contenders()[game.second].as_str())
            .collect()
    }

    fn pairs(&self) -> usize {
        let width = self.scores.len();
        (width * (width - 1) / 2).max(1)
    }
}

fn counted(number: usize, noun: &str) -> String {
    format!("{number} {noun}{}", if number == 1 { "" } else { "s" })
}

/// At most six names, and how many more there are.
fn listed(names: &[&str]) -> String {
    const MOST: usize = 6;
    let shown = names[..names.len().min(MOST)].join("; ");
    match names.len().saturating_sub(MOST) {
        0 => shown,
        more => format!("{shown} and {more} more"),
    }
}

fn probability(p: f64) -> String {
    if p >= 0.001 {
        format!("{p:.3}")
    } else {
        format!("{p:.0e}")
    }
}
