//! Ask, supply, outcome: the protocol of the machine.

use super::support::cast::{AnySearch, finders};
use super::{RULES, valley};
use surefoot::acceptance::{StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::finder::{Backtracking, Bisection, MoreThuente};
use surefoot::search::Fate;
use surefoot::{
    Acceptance, Ask, Cost, Ending, Need, Proposal, Ray, Sample, Side, StepFinder, StepSearch,
    Trial, WrongReply,
};

fn answer(ask: Ask<f64>) -> Sample<f64> {
    let (value, slope) = valley(ask.step);
    match ask.need {
        Need::Value => Sample::Value(value),
        Need::Slope => Sample::Slope(slope),
        Need::Both => Sample::Both(value, slope),
    }
}

fn finish<F: StepFinder<f64>, A: Acceptance<f64>>(
    search: &mut StepSearch<f64, F, A>,
) -> Vec<Ask<f64>> {
    let mut asked = Vec::new();
    while let Some(ask) = search.request() {
        asked.push(ask);
        search.supply(answer(ask)).unwrap();
    }
    asked
}

fn every_search() -> impl Iterator<Item = (String, AnySearch<f64>)> {
    RULES.into_iter().flat_map(|rule| {
        finders().into_iter().map(move |(name, finder)| {
            (
                format!("{name} with {rule:?}"),
                StepSearch::new(finder, rule.boxed()),
            )
        })
    })
}

#[test]
fn nothing_is_asked_before_the_first_search_and_after_the_end() {
    for (name, mut search) in every_search() {
        assert!(
            search.request().is_none() && search.outcome().is_none(),
            "{name}"
        );
        search.begin(Ray::new(0.0, -1.0), 0.013).unwrap();
        while let Some(ask) = search.request() {
            assert!(
                search.outcome().is_none(),
                "{name}: no outcome while under way"
            );
            assert_eq!(
                search.request(),
                Some(ask),
                "{name}: asking twice changes nothing"
            );
            search.supply(answer(ask)).unwrap();
        }
        assert_eq!(search.outcome().unwrap().ending, Ending::Accepted, "{name}");
        assert_eq!(
            search.supply(Sample::Value(0.0)),
            Err(WrongReply::NothingAsked),
            "{name}"
        );
    }
}

#[test]
fn one_machine_serves_many_searches_and_forgets_each() {
    for (name, mut search) in every_search() {
        search.begin(Ray::new(0.0, -1.0), 0.013).unwrap();
        let asked = finish(&mut search);
        let (outcome, log) = (search.outcome(), search.log().clone());
        // Something else in between, given up half-way.
        search.begin(Ray::new(5.0, -3.0), 100.0).unwrap();
        for value in [9.0, 1.0, 4.9] {
            let _ = search.supply(Sample::Both(value, -0.1));
        }
        search.begin(Ray::new(0.0, -1.0), 0.013).unwrap();
        assert!(
            search.best().is_none() && search.log().trials() == 0,
            "{name}"
        );
        assert_eq!(finish(&mut search), asked, "{name}");
        assert_eq!((search.outcome(), search.log()), (outcome, &log), "{name}");
    }
}

#[test]
fn a_search_can_be_copied_at_any_request_and_goes_on_from_there() {
    let mut search = StepSearch::new(MoreThuente::new(), StrongWolfe::new(1e-4, 1e-3).unwrap());
    search.begin(Ray::new(0.0, -1.0), 0.013).unwrap();
    let mut copies = Vec::new();
    while let Some(ask) = search.request() {
        copies.push(search.clone());
        search.supply(answer(ask)).unwrap();
    }
    assert!(copies.len() > 3);
    for mut copy in copies {
        finish(&mut copy);
        assert_eq!(
            (copy.outcome(), copy.log()),
            (search.outcome(), search.log())
        );
    }
}

#[test]
fn joint_and_separate_evaluations_take_the_same_steps() {
    let at_separate = every_search();
    let at_joint = every_search().map(|(_, search)| search.with_cost(Cost::Joint));
    for ((name, mut separate), mut joint) in at_separate.zip(at_joint) {
        for search in [&mut separate, &mut joint] {
            search.begin(Ray::new(0.0, -1.0), 37.0).unwrap();
        }
        finish(&mut separate);
        let asked = finish(&mut joint);
        assert!(asked.iter().all(|ask| ask.need == Need::Both), "{name}");
        assert_eq!(
            asked.len(),
            joint.log().trials() as usize,
            "{name}: one call per trial"
        );
        let steps = |search: &AnySearch<f64>| -> Vec<_> {
            search
                .log()
                .iter()
                .map(|e| (e.trial.step, e.trial.value, e.fate, e.origin))
                .collect()
        };
        assert_eq!(steps(&separate), steps(&joint), "{name}");
    }
}

#[test]
fn slopes_are_asked_for_only_where_somebody_needs_them() {
    let count = |search: &mut AnySearch<f64>| {
        search.begin(Ray::new(0.0, -1.0), 37.0).unwrap();
        let asked = finish(search);
        let slopes = asked.iter().filter(|ask| ask.need == Need::Slope).count();
        (slopes, search.log().trials() as usize)
    };
    for (name, mut search) in every_search() {
        let (slopes, trials) = count(&mut search);
        let reads_slopes = search.rule().uses_slope();
        let decreased = search
            .log()
            .iter()
            .filter(|e| e.trial.value <= -1e-4 * e.trial.step)
            .count();
        let wants_slopes = ["MoreThuente", "BracketZoom", "HagerZhang", "ThreePoint"]
            .iter()
            .any(|finder| name.starts_with(finder));
        // A finder that wants slopes gets those of refused trials; a Wolfe rule reads them where the value fell.
        match (wants_slopes, reads_slopes) {
            (false, false) => assert_eq!(slopes, 0, "{name}"),
            (false, true) => assert_eq!(slopes, decreased, "{name}"),
            (true, false) => assert_eq!(slopes, trials - 1, "{name}"),
            (true, true) => assert_eq!(slopes, trials, "{name}"),
        }
        let known = search
            .log()
            .iter()
            .filter(|entry| entry.trial.slope.is_some())
            .count();
        assert_eq!(known, slopes, "{name}: the log holds what was asked for");
    }
}

#[test]
fn more_than_was_asked_is_welcome() {
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
    search.begin(Ray::new(0.0, -1.0), 1.0).unwrap();
    assert_eq!(search.request().unwrap().need, Need::Value);
    search.supply(Sample::Both(-0.5, 0.0)).unwrap();
    assert_eq!(
        search.outcome().unwrap().accepted().unwrap().slope,
        Some(0.0)
    );
    // Where the slope is asked for, a value besides it is not read: the one that was judged stands.
    search.begin(Ray::new(0.0, -1.0), 1.0).unwrap();
    search.supply(Sample::Value(-0.5)).unwrap();
    search.supply(Sample::Both(77.0, 0.0)).unwrap();
    assert_eq!(search.outcome().unwrap().accepted().unwrap().value, -0.5);
}

#[test]
fn a_caller_who_needs_the_slope_of_the_accepted_trial_gets_it() {
    let rule = SufficientDecrease::new(0.1).unwrap();
    let mut search = StepSearch::new(Backtracking::default(), rule).with_slope_when_accepted();
    search.begin(Ray::new(0.0, -1.0), 4.0).unwrap();
    let asked = finish(&mut search);
    let needs: Vec<(f64, Need)> = asked.iter().map(|ask| (ask.step, ask.need)).collect();
    assert_eq!(
        needs,
        [
            (4.0, Need::Value),
            (2.0, Need::Value),
            (1.0, Need::Value),
            (1.0, Need::Slope)
        ]
    );
    assert_eq!(
        search.outcome().unwrap().accepted().unwrap().slope,
        Some(0.0)
    );

    // A slope that is not finite: the trial is not accepted, and the search goes on below it.
    search.begin(Ray::new(0.0, -1.0), 1.0).unwrap();
    search.supply(Sample::Value(-0.5)).unwrap();
    search.supply(Sample::Slope(f64::NAN)).unwrap();
    assert_eq!(search.log().iter().last().unwrap().fate, Fate::Outside);
    assert!(search.request().unwrap().step < 1.0);
    // None at all: the search says so.
    search.begin(Ray::new(0.0, -1.0), 1.0).unwrap();
    search.supply(Sample::Value(-0.5)).unwrap();
    search.supply(Sample::NoSlope).unwrap();
    assert_eq!(
        search.outcome().unwrap().ending,
        Ending::SlopeMissing { step: 1.0 }
    );
}

#[test]
fn the_best_trial_is_the_first_of_least_value() {
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::new(0.1, 0.1).unwrap());
    search.begin(Ray::new(0.0, -1.0), 8.0).unwrap();
    let mut bests = Vec::new();
    for (value, slope) in [(5.0, 1.0), (3.0, 1.0), (3.0, 1.0), (-1.0, -0.9), (4.0, 1.0)] {
        search.supply(Sample::Both(value, slope)).unwrap();
        bests.push(search.best().unwrap().step);
    }
    assert_eq!(bests, [8.0, 4.0, 4.0, 1.0, 1.0]);
}

#[test]
fn decrease_is_measured_from_the_reference_and_relaxed_by_twice_the_noise() {
    let accepts = |ray: Ray<f64>, value: f64| {
        let mut search = StepSearch::new(Bisection::new(), SufficientDecrease::new(0.5).unwrap());
        search.begin(ray, 1.0).unwrap();
        search.supply(Sample::Value(value)).unwrap();
        search.outcome().is_some()
    };
    let ray = Ray::new(10.0, -2.0); // the line of sufficient decrease passes 9 at step 1
    assert!(accepts(ray, 9.0) && !accepts(ray, 9.25));
    assert!(
        accepts(ray.with_value_noise(0.125), 9.25) && !accepts(ray.with_value_noise(0.125), 9.5)
    );
    assert!(accepts(ray.with_reference(14.0), 13.0) && !accepts(ray.with_reference(14.0), 13.25));
}

#[test]
fn a_value_above_the_ceiling_is_certain_to_be_refused() {
    for (name, mut search) in every_search() {
        assert_eq!(search.ceiling(), None, "{name}: nothing is asked yet");
        for reference in [3.0, 8.0] {
            let ray = Ray::new(3.0, -2.0).with_reference(reference);
            search.begin(ray, 0.75).unwrap();
            let ceiling = search.ceiling().expect("these rules have one");
            // A sum of terms may stop there, and must not pass for a value lower than the one at the start.
            assert!(ceiling >= 3.0, "{name}");
            let limit = search.rule().ceiling(search.ray(), 0.75).unwrap();
            assert_eq!(ceiling, limit.max(3.0), "{name}");
            search.supply(Sample::Both(ceiling.next_up(), 0.0)).unwrap();
            let fate = search.log().iter().last().unwrap().fate;
            assert_eq!(fate, Fate::Refused(Side::TooLong), "{name}");
            // The rule's own limit is exact: what lies on it is not refused for its value.
            search.begin(ray, 0.75).unwrap();
            search.supply(Sample::Both(limit, 0.0)).unwrap();
            assert_eq!(
                search.log().iter().last().unwrap().fate,
                Fate::Accepted,
                "{name}"
            );
            // Expansion minimises on where its first trial was accepted.
            let goes_on = name.starts_with("Expansion");
            assert_eq!(search.ceiling().is_some(), goes_on, "{name}");
        }
    }
}

/// Goes on to the minimizer of the valley by halving the distance, after the first acceptance.
#[derive(Clone, Copy, Debug)]
struct Polisher {
    left: u32,
}

impl StepFinder<f64> for Polisher {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        first
    }
    fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, _: Side) -> Proposal<f64> {
        Proposal::Try(0.5 * refused.step)
    }
    fn polish(&mut self, _: &Ray<f64>, accepted: &Trial<f64>) -> Proposal<f64> {
        if self.left == 0 {
            return Proposal::Spent;
        }
        self.left -= 1;
        // The last proposal leads away again.
        Proposal::Try(if self.left == 0 {
            1.9
        } else {
            0.5 * (1.0 + accepted.step)
        })
    }
}

#[test]
fn a_finder_may_go_on_after_an_acceptance_and_the_best_accepted_trial_wins() {
    let mut search = StepSearch::new(Polisher { left: 4 }, SufficientDecrease::default());
    search.begin(Ray::new(0.0, -1.0), 3.0).unwrap();
    let steps: Vec<f64> = finish(&mut search).iter().map(|ask| ask.step).collect();
    assert_eq!(steps, [3.0, 1.5, 1.25, 1.125, 1.0625, 1.9]);
    let outcome = search.outcome().unwrap();
    assert_eq!(outcome.ending, Ending::Accepted);
    assert_eq!(outcome.accepted().unwrap().step, 1.0625);
    assert_eq!(outcome.best, outcome.accepted());
}

#[test]
fn rules_and_finders_come_back_out() {
    let rule = StrongWolfe::new(0.1, 0.2).unwrap();
    let search = StepSearch::new(Bisection::new(), rule);
    assert_eq!(search.rule(), &rule);
    assert_eq!(search.into_parts(), (Bisection::new(), rule));
}
