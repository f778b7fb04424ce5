//! The same fit under different acceptance rules and step finders, with an account of every refused trial.

use crate::estimates::Estimates;
use crate::fit::Fit;
use crate::model::PRICE_OF_GRADIENT;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::Lbfgs;
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, InterpolatingBacktracking, MoreThuente, ThreePoint,
};
use surefoot::search::{Entry, Fate};
use surefoot::{BoxedFinder, BoxedRule, Condition, Descent, Given, Report, Run, Stopping};

/// How far each run goes: `max|g| <= TOLERANCE`, gradient of the mean loss by the fit's coordinates.
pub(crate) const TOLERANCE: f64 = 1e-6;
/// A run that needs more moves is given up.
const MOST_MOVES: u64 = 2_000;

type Search = Run<Vec<f64>, Lbfgs<Vec<f64>>, BoxedFinder<f64>, BoxedRule<f64>>;

/// One run of the fit.
#[derive(Clone, Debug)]
pub(crate) struct Account {
    /// What was varied: the rule's name, or the finder's.
    pub(crate) label: &'static str,
    pub(crate) report: Report<Vec<f64>>,
    /// Moves whose first trial was taken.
    pub(crate) at_once: u64,
    /// Refused trials by the condition that failed, in the order of first appearance.
    pub(crate) reasons: Vec<Reason>,
    /// How many refused trials are in there: one may fail two conditions.
    explained: u64,
    /// Moves along which the slope did not rise, so that L-BFGS learnt nothing from them.
    pub(crate) useless_pairs: u64,
}

impl Account {
    /// What it cost, in runs of the model without sensitivities.
    pub(crate) fn work(&self) -> u64 {
        let e = self.report.evaluations;
        e.values + PRICE_OF_GRADIENT * e.all_gradients()
    }

    /// Refused trials whose reason was gone before it could be read: a run that goes on after a failed search begins
    /// the next one in the same reply, with an empty log.
    pub(crate) fn lost(&self) -> u64 {
        let refused = self.report.refusals;
        refused.too_long + refused.too_short + refused.outside - self.explained
    }
}

/// A condition that refused trials.
#[derive(Clone, Debug)]
pub(crate) struct Reason {
    pub(crate) name: &'static str,
    pub(crate) count: u64,
    /// The first trial it refused.
    pub(crate) example: Example,
}

/// One refused trial.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Example {
    /// Number of the move it was tried for, from 1, and of the trial within that search.
    pub(crate) moves: u64,
    pub(crate) trial: u32,
    pub(crate) step: f64,
    /// What was found and what the limit was; `None` outside of the domain.
    pub(crate) condition: Option<Condition<f64>>,
}

/// How far runs ended from one another.
#[derive(Clone, Debug)]
pub(crate) struct Agreement {
    /// Labels of the runs that did not reach the lowest minimum.
    pub(crate) apart: Vec<&'static str>,
    /// Largest distance of a final loss from the lowest, as a share of it, among those that did.
    pub(crate) loss: f64,
    /// Largest distance of an estimate, in standard errors, among those that did.
    pub(crate) estimate: f64,
}

/// A run has reached the minimum if its loss lies within this share of the lowest one.
const SAME: f64 = 1e-8;

/// The run with the lowest loss.
pub(crate) fn lowest<'a>(accounts: impl IntoIterator<Item = &'a Account>) -> Option<&'a Account> {
    let finite = accounts.into_iter().filter(|a| a.report.value.is_finite());
    finite.min_by(|a, b| a.report.value.total_cmp(&b.report.value))
}

/// How far the runs ended from the lowest of them, whose estimates these are.
pub(crate) fn agreement(
    fit: &Fit<'_>,
    accounts: &[Account],
    lowest: &Account,
    estimates: &Estimates,
) -> Agreement {
    let (mut apart, mut loss, mut estimate) = (Vec::new(), 0.0_f64, 0.0_f64);
    for account in accounts {
        let above = (account.report.value - lowest.report.value)
            / lowest.report.value.max(f64::MIN_POSITIVE);
        if !(above <= SAME) {
            apart.push(account.label);
            continue;
        }
        loss = loss.max(above);
        let found = fit.parameters(&account.report.point);
        for ((a, b), error) in found
            .iter()
            .zip(&estimates.parameters)
            .zip(&estimates.errors)
        {
            estimate = estimate.max(error.map_or(0.0, |error| (a - b).abs() / error));
        }
    }
    Agreement {
        apart,
        loss,
        estimate,
    }
}

/// The rules, with parameters in common use. The last is the one that all finders share.
fn rules() -> Vec<(&'static str, BoxedRule<f64>)> {
    vec![
        (
            "sufficient decrease",
            Box::new(SufficientDecrease::default()),
        ),
        ("Goldstein 0.25", Box::new(Goldstein::default())),
        ("weak Wolfe 0.9", Box::new(WeakWolfe::default())),
        ("strong Wolfe 0.9", Box::new(StrongWolfe::default())),
        (COMMON_RULE, common_rule()),
    ]
}

/// The finders. The first is the one that all rules share.
fn finders() -> Vec<(&'static str, BoxedFinder<f64>)> {
    let short = Backtracking::new(0.3).expect("0 < 0.3 < 1");
    vec![
        (COMMON_FINDER, common_finder()),
        ("backtracking by 0.3", Box::new(short)),
        (
            "interpolating backtr.",
            Box::new(InterpolatingBacktracking::default()),
        ),
        ("bracket and zoom", Box::new(BracketZoom::default())),
        ("Moré–Thuente", Box::new(MoreThuente::default())),
        ("three-point", Box::new(ThreePoint::default())),
    ]
}

pub(crate) const COMMON_RULE: &str = "strong Wolfe 0.1";
pub(crate) const COMMON_FINDER: &str = "bisection";

fn common_rule() -> BoxedRule<f64> {
    Box::new(StrongWolfe::new(1e-4, 0.1).expect("0 < 1e-4 <= 0.1 < 1"))
}

/// Bisection reads neither values nor slopes: what a refused trial costs is the rule's doing alone.
fn common_finder() -> BoxedFinder<f64> {
    Box::new(Bisection::default())
}

/// The fit under each rule with one finder, until `max|g| <= tolerance`.
pub(crate) fn by_rule(fit: &Fit<'_>, tolerance: f64) -> Vec<Account> {
    let runs = rules().into_iter();
    runs.map(|(label, rule)| run(label, fit, common_finder(), rule, tolerance))
        .collect()
}

/// The fit with each finder under one rule, until `max|g| <= tolerance`.
pub(crate) fn by_finder(fit: &Fit<'_>, tolerance: f64) -> Vec<Account> {
    let runs = finders().into_iter();
    runs.map(|(label, finder)| run(label, fit, finder, common_rule(), tolerance))
        .collect()
}

/// The fit with this finder under this rule, until `max|g| <= tolerance`.
pub(crate) fn run(
    label: &'static str,
    fit: &Fit<'_>,
    finder: BoxedFinder<f64>,
    rule: BoxedRule<f64>,
    tolerance: f64,
) -> Account {
    let stopping = Stopping {
        gradient: Some(tolerance),
        iterations: MOST_MOVES,
        ..Stopping::default()
    };
    let descent = Descent::new(Lbfgs::default(), finder, rule)
        .with_stopping(stopping)
        .expect("the tolerance is a positive constant");
    let (mut run, mut objective) = (descent.start(fit.origin()), fit.clone());
    let mut tally = Tally::default();
    // The machine form: each reply is supplied by hand, so that every trial can be looked at as it is judged.
    while let Some(given) = evaluate(&mut run, &mut objective) {
        let (moves, tried) = (run.iterations(), run.search().log().trials());
        run.supply(given).expect("what was wanted was given");
        tally.look(&run, moves, tried);
    }
    let useless_pairs = run.direction().skipped();
    let (_, report) = run.finish();
    Account {
        label,
        report,
        at_once: tally.at_once,
        reasons: tally.reasons,
        explained: tally.explained,
        useless_pairs,
    }
}

/// What the run asks for next.
fn evaluate(run: &mut Search, fit: &mut Fit<'_>) -> Option<Given<f64>> {
    let request = run.request()?;
    match request.answer(fit) {
        Ok(given) => Some(given),
        Err(never) => match never {},
    }
}

#[derive(Default)]
struct Tally {
    at_once: u64,
    refused_here: bool,
    reasons: Vec<Reason>,
    explained: u64,
}

impl Tally {
    /// Looks at what became of the last reply. `moves` and `tried` are the counts before it.
    fn look(&mut self, run: &Search, moves: u64, tried: u32) {
        let log = run.search().log();
        if log.trials() > tried
            && let Some(entry) = log.latest()
            && matches!(entry.fate, Fate::Refused(_) | Fate::Outside)
        {
            self.refused_here = true;
            self.explained += 1;
            self.note(run, entry);
        }
        if run.iterations() > moves {
            self.at_once += u64::from(!self.refused_here);
            self.refused_here = false;
        }
    }

    fn note(&mut self, run: &Search, entry: &Entry<f64>) {
        let example = |condition| Example {
            moves: run.iterations() + 1,
            trial: entry.number,
            step: entry.trial.step,
            condition,
        };
        if entry.fate == Fate::Outside {
            self.count("the loss is a number", example(None));
        }
        run.search().explain(entry, &mut |condition| {
            if !condition.holds {
                self.count(condition.name, example(Some(condition)));
            }
        });
    }

    fn count(&mut self, name: &'static str, example: Example) {
        match self.reasons.iter_mut().find(|reason| reason.name == name) {
            Some(reason) => reason.count += 1,
            None => self.reasons.push(Reason {
                name,
                count: 1,
                example,
            }),
        }
    }
}
