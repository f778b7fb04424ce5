//! Which public types can be sent, shared, cloned, compared and printed; and that finders and rules chosen at run time
//! make a search like any other.
#![cfg(feature = "alloc")]

use std::fmt::Debug;
use surefoot::acceptance::{
    AnyFinite, Goldstein, GoldsteinError, StrongWolfe, SufficientDecrease, SufficientDecreaseError,
    WeakWolfe, WolfeError,
};
use surefoot::finder::interpolation::Point;
use surefoot::finder::{
    Backtracking, BacktrackingError, Bisection, BracketZoom, InterpolatingBacktracking, MoreThuente,
};
use surefoot::search::{Entry, Fate, Log, Origin};
use surefoot::vector::conformance::Broken;
use surefoot::{
    Acceptance, Ask, BeginError, BoxedFinder, BoxedRule, Condition, Cost, Ending, Evaluations,
    Found, Limits, LimitsError, Need, Outcome, Probe, Proposal, Ray, RayFault, Relation, Sample,
    SearchError, Side, StepFinder, StepSearch, Trial, Verdict, WrongReply,
};

fn thread_safe<T: Send + Sync + Unpin + 'static>() {}
fn data<T: Copy + Debug + PartialEq + Send + Sync + Unpin + 'static>() {}
fn error<E: std::error::Error + Copy + Eq + Send + Sync + 'static>() {}

#[test]
fn words_requests_and_results_are_plain_data() {
    data::<Ray<f64>>();
    data::<Trial<f64>>();
    data::<Side>();
    data::<Verdict>();
    data::<Relation>();
    data::<Condition<f64>>();
    data::<Ask<f64>>();
    data::<Need>();
    data::<Sample<f64>>();
    data::<Limits<f64>>();
    data::<Ending<f64>>();
    data::<Outcome<f64>>();
    data::<Found<f64>>();
    data::<Found<f64, [f64; 3]>>();
    data::<Probe<f64>>();
    data::<Proposal<f64>>();
    data::<Entry<f64>>();
    data::<Fate>();
    data::<Origin>();
    data::<Cost>();
    data::<Evaluations>();
    data::<Point<f64>>();
    data::<Ray<f32>>();
    data::<Outcome<f32>>();
}

#[test]
fn rules_and_finders_are_plain_data() {
    data::<SufficientDecrease<f64>>();
    data::<Goldstein<f64>>();
    data::<WeakWolfe<f64>>();
    data::<StrongWolfe<f64>>();
    data::<Bisection>();
    data::<Backtracking>();
    data::<InterpolatingBacktracking>();
    data::<BracketZoom>();
    data::<MoreThuente>();
    data::<MoreThuente<f32>>();
}

#[test]
fn errors_are_small_comparable_and_travel() {
    error::<RayFault>();
    error::<BeginError>();
    error::<WrongReply>();
    error::<LimitsError>();
    error::<SufficientDecreaseError>();
    error::<GoldsteinError>();
    error::<WolfeError>();
    error::<BacktrackingError>();
    error::<Broken>();
    error::<SearchError<std::convert::Infallible>>();
    error::<SearchError<std::fmt::Error>>();
}

#[test]
fn machines_and_logs_can_be_cloned_sent_and_printed() {
    fn machine<T: Clone + Debug + Send + Sync + Unpin + 'static>() {}
    machine::<StepSearch<f64, MoreThuente, StrongWolfe<f64>>>();
    machine::<StepSearch<f32, Bisection<f32>, WeakWolfe<f32>>>();
    machine::<Log<f64>>();
}

#[test]
fn searches_of_boxes_can_be_sent() {
    fn sent<T: Send + Unpin + 'static>() {}
    thread_safe::<BoxedRule<f64>>();
    sent::<BoxedFinder<f64>>();
    sent::<StepSearch<f64, BoxedFinder<f64>, BoxedRule<f64>>>();
    // A box that promises less is still a finder or a rule.
    fn finder<F: StepFinder<f64>>() {}
    fn rule<A: Acceptance<f64>>() {}
    finder::<Box<dyn StepFinder<f64>>>();
    finder::<&mut dyn StepFinder<f64>>();
    rule::<Box<dyn Acceptance<f64>>>();
    rule::<&dyn Acceptance<f64>>();
}

#[test]
fn a_search_of_boxes_runs_on_another_thread_as_it_does_here() {
    let valley = |a: f64| (0.5 * a * a - a, a - 1.0);
    let ray = Ray::new(0.0, -1.0);
    let rule = StrongWolfe::new(0.1, 0.1).unwrap();
    let mut plain = StepSearch::new(MoreThuente::new(), rule);
    let here = plain.along(ray, 0.01, valley).unwrap();
    let (finder, rule): (BoxedFinder<f64>, BoxedRule<f64>) =
        (Box::new(MoreThuente::new()), Box::new(rule));
    let mut boxed = StepSearch::new(finder, rule);
    let (there, log) = std::thread::spawn(move || {
        let found = boxed.along(ray, 0.01, valley).unwrap();
        (found, boxed.log().clone())
    })
    .join()
    .unwrap();
    assert_eq!(there, here);
    assert_eq!(&log, plain.log());
}

/// Boxes and references forward the provided methods, too: a forgotten one would fall back to the default.
#[test]
fn boxes_and_references_forward_every_method() {
    let (ray, trial) = (
        Ray::new(0.0, -1.0),
        Trial {
            step: 1.0,
            value: -0.5,
            slope: Some(0.0),
        },
    );
    let rule = Goldstein::new(0.25).unwrap();
    let boxed: Box<dyn Acceptance<f64>> = Box::new(rule);
    let borrowed: &dyn Acceptance<f64> = &rule;
    for forwarded in [&boxed as &dyn Acceptance<f64>, &borrowed] {
        assert_eq!(forwarded.judge(&ray, &trial), Verdict::Accept);
        assert_eq!(forwarded.decrease(), Some(0.25));
        assert_eq!(forwarded.ceiling(&ray, 2.0), Some(-0.5));
        assert!(!forwarded.uses_slope());
        let mut names = Vec::new();
        forwarded.explain(&ray, &trial, &mut |condition| names.push(condition.name));
        assert_eq!(names, ["sufficient decrease", "not too short"]);
    }
    assert!(Box::new(WeakWolfe::<f64>::default()).uses_slope());
    assert!(Acceptance::<f64>::uses_start_slope(&Box::new(rule)));
    assert!(!Acceptance::<f64>::uses_start_slope(&Box::new(AnyFinite)));
    assert!(!Acceptance::<f64>::uses_start_slope(&&AnyFinite));

    let mut polisher = Polisher;
    let mut borrowed = &mut polisher;
    let mut boxed: Box<dyn StepFinder<f64>> = Box::new(Polisher);
    for forwarded in [&mut boxed as &mut dyn StepFinder<f64>, &mut borrowed] {
        assert_eq!(forwarded.begin(&ray, 3.0), 6.0);
        assert_eq!(
            forwarded.next(&ray, &trial, Side::TooLong),
            Proposal::Try(0.25)
        );
        assert_eq!(forwarded.polish(&ray, &trial), Proposal::Try(0.75));
        assert!(forwarded.wants_slope() && !forwarded.wants_guard());
        assert!(!forwarded.wants_guard());
    }
}

struct Polisher;
impl StepFinder<f64> for Polisher {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        2.0 * first
    }
    fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, _: Side) -> Proposal<f64> {
        Proposal::Try(0.25 * refused.step)
    }
    fn polish(&mut self, _: &Ray<f64>, accepted: &Trial<f64>) -> Proposal<f64> {
        Proposal::Try(0.75 * accepted.step)
    }
    fn wants_slope(&self) -> bool {
        true
    }
    fn wants_guard(&self) -> bool {
        false
    }
}
