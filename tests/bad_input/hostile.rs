//! Arbitrary numbers as replies and as proposals: a search always ends within its budget, asks for no step out of its
//! bounds, accepts nothing that is not finite and nothing that breaks its rule.

use super::support::cast::{AnySearch, Rule, finders};
use super::{INFINITY, NAN};
use proptest::prelude::*;
use surefoot::acceptance::{
    AnyDecrease, AnyFinite, ApproximateWolfe, ForcingDecrease, GeneralisedWolfe,
};
use surefoot::finder::{BrentSlopes, BrentValues, Expansion, GoldenSection};
use surefoot::{
    Acceptance, BoxedFinder, BoxedRule, Cost, Ending, Limits, Need, Proposal, Ray, Real, Sample,
    Side, StepFinder, StepSearch, Trial, Verdict,
};

/// What the hostile world replies at one request.
#[derive(Clone, Copy, Debug)]
struct Reply<T> {
    kind: u8,
    value: T,
    slope: T,
}

impl<T: Real> Reply<T> {
    fn sample(self) -> Sample<T> {
        match self.kind {
            0..=3 => Sample::Both(self.value, self.slope),
            4 | 5 => Sample::Value(self.value),
            6 | 7 => Sample::Slope(self.slope),
            8 => Sample::NoSlope,
            _ => Sample::OutsideDomain,
        }
    }
}

/// A rule: one of those with known inequalities, or another of the crate.
#[derive(Clone, Copy, Debug)]
enum Judge {
    Known(Rule),
    Approximate,
    Generalised,
    Forcing,
    AnyDecrease,
    AnyFinite,
}

impl Judge {
    fn boxed<T: Real>(self) -> BoxedRule<T> {
        let of = T::of;
        match self {
            Judge::Known(rule) => rule.boxed(),
            Judge::Approximate => Box::new(ApproximateWolfe::default()),
            Judge::Generalised => {
                Box::new(GeneralisedWolfe::new(of(0.1), of(0.2), of(0.0)).expect("in range"))
            }
            Judge::Forcing => Box::new(ForcingDecrease::new(of(0.5)).expect("in range")),
            Judge::AnyDecrease => Box::new(AnyDecrease),
            Judge::AnyFinite => Box::new(AnyFinite),
        }
    }
}

fn judges() -> impl Strategy<Value = Judge> {
    let judges = [
        Judge::Known(Rule::SufficientDecrease { decrease: 1e-4 }),
        Judge::Known(Rule::WeakWolfe {
            decrease: 1e-4,
            curvature: 0.9,
        }),
        Judge::Known(Rule::StrongWolfe {
            decrease: 0.1,
            curvature: 0.1,
        }),
        Judge::Known(Rule::Goldstein { share: 0.25 }),
        Judge::Approximate,
        Judge::Generalised,
        Judge::Forcing,
        Judge::AnyDecrease,
        Judge::AnyFinite,
    ];
    prop::sample::select(judges.to_vec())
}

/// Every finder of the crate.
fn all_finders<T: Real>() -> Vec<BoxedFinder<T>> {
    let guarded = finders().into_iter().map(|(_, finder)| finder);
    let others: [BoxedFinder<T>; 4] = [
        Box::new(Expansion::default()),
        Box::new(BrentSlopes::default()),
        Box::new(BrentValues::default()),
        Box::new(GoldenSection::default()),
    ];
    guarded.chain(others).collect()
}

/// Settings and replies of one hostile search.
#[derive(Clone, Debug)]
struct Hostile<T> {
    ray: Ray<T>,
    first: T,
    limits: Limits<T>,
    rule: Judge,
    joint: bool,
    slope_when_accepted: bool,
    replies: Vec<Reply<T>>,
}

fn hostile<T: Real>(number: BoxedStrategy<T>) -> impl Strategy<Value = Hostile<T>> {
    let finite = number
        .clone()
        .prop_filter("finite", |x| x.is_finite())
        .boxed();
    let positive = finite
        .clone()
        .prop_map(T::abs)
        .prop_filter("positive", |x| *x > T::zero())
        .boxed();
    let bound = prop_oneof![Just(T::infinity()), positive.clone()];
    let lower = prop_oneof![3 => Just(T::zero()), 1 => positive.clone()];
    let limits = (lower, bound, 1_u32..120)
        .prop_map(|(a, b, trials)| {
            let (a, b) = if a <= b { (a, b) } else { (b, a) };
            Limits::new(a, b, trials)
        })
        .prop_filter_map("some step is left", Result::ok);
    // Half of the replies are a value with a slope, or a search would rarely get far.
    let kind = prop_oneof![Just(0_u8), 0_u8..10];
    let reply = (kind, number.clone(), number).prop_map(|(kind, value, slope)| Reply {
        kind,
        value,
        slope,
    });
    let slack = prop_oneof![Just(None), positive.clone().prop_map(Some)];
    let ray = (finite, positive.clone(), slack).prop_map(|(value, slope, slack)| {
        let ray = Ray::new(value, -slope);
        slack.map_or(ray, |slack| ray.with_slack(slack))
    });
    (
        ray,
        positive,
        limits,
        judges(),
        any::<(bool, bool)>(),
        prop::collection::vec(reply, 1..40),
    )
        .prop_map(
            |(ray, first, limits, rule, (joint, slope_when_accepted), replies)| Hostile {
                ray,
                first,
                limits,
                rule,
                joint,
                slope_when_accepted,
                replies,
            },
        )
}

fn survives<T: Real>(world: &Hostile<T>, finder: BoxedFinder<T>) -> Result<(), TestCaseError> {
    let limits = world.limits;
    let cost = if world.joint {
        Cost::Joint
    } else {
        Cost::Separate
    };
    let mut search: AnySearch<T> = StepSearch::new(finder, world.rule.boxed())
        .with_limits(limits)
        .with_cost(cost);
    if world.slope_when_accepted {
        search = search.with_slope_when_accepted();
    }
    search
        .begin(world.ray, world.first)
        .map_err(|e| TestCaseError::fail(e.to_string()))?;
    let mut replies = world.replies.iter().cycle();
    let mut least = T::infinity();
    let (mut fitting, mut value) = (0, T::nan());
    while let Some(ask) = search.request() {
        prop_assert!(
            ask.step > T::zero() && ask.step.is_finite(),
            "asks for {}",
            ask.step
        );
        prop_assert!(
            limits.lower() <= ask.step && ask.step <= limits.upper(),
            "asks for {}",
            ask.step
        );
        let mut sample = replies.next().expect("endless").sample();
        if search.supply(sample).is_err() {
            prop_assert_eq!(search.request(), Some(ask));
            sample = if ask.need == Need::Slope {
                Sample::NoSlope
            } else {
                Sample::OutsideDomain
            };
            prop_assert_eq!(search.supply(sample), Ok(()));
        }
        fitting += 1;
        prop_assert!(
            fitting <= 2 * limits.trials(),
            "more than value and slope of each trial"
        );
        prop_assert!(search.log().trials() <= limits.trials());
        if let Sample::Value(v) | Sample::Both(v, _) = sample {
            value = if ask.need == Need::Slope { value } else { v };
        }
        least = if value < least {
            least.min(value)
        } else {
            least
        };
    }
    let outcome = search.outcome();
    let Some(outcome) = outcome else {
        return Err(TestCaseError::fail("it ended without an outcome"));
    };
    prop_assert!(outcome.trials >= 1 && outcome.trials <= limits.trials());
    prop_assert_eq!(
        outcome.accepted().is_some(),
        outcome.ending == Ending::Accepted
    );
    if let Some(best) = outcome.best {
        prop_assert!(best.value.is_finite() && best.value >= least);
        prop_assert!(best.slope.is_none_or(T::is_finite));
    }
    if let Some(trial) = outcome.accepted() {
        prop_assert!(outcome.best.is_some_and(|best| best.value <= trial.value));
        let slope = trial.slope.unwrap_or(T::zero());
        prop_assert!(trial.value.is_finite() && slope.is_finite());
        prop_assert!(trial.slope.is_some() || !world.slope_when_accepted);
        prop_assert_eq!(search.rule().judge(search.ray(), &trial), Verdict::Accept);
        if let Judge::Known(rule) = world.rule {
            let start = (world.ray.value, world.ray.slope);
            prop_assert!(rule.holds(start, trial.step, (trial.value, slope)));
        }
    }
    Ok(())
}

/// What every rule promises about one finite trial, first without its slope, then with it.
fn keeps_its_word(
    judge: Judge,
    ray: Ray<f64>,
    step: f64,
    value: f64,
    slope: f64,
) -> Result<(), TestCaseError> {
    let rule = judge.boxed::<f64>();
    let bare = Trial {
        step,
        value,
        slope: None,
    };
    let full = Trial {
        slope: Some(slope),
        ..bare
    };
    let (without, with) = (rule.judge(&ray, &bare), rule.judge(&ray, &full));
    prop_assert_eq!(
        rule.judge(&ray, &full),
        with,
        "the same trial, the same verdict"
    );
    prop_assert_ne!(with, Verdict::NeedsSlope, "the slope is known");
    if without == Verdict::NeedsSlope {
        prop_assert!(rule.uses_slope());
    } else {
        prop_assert_eq!(without, with, "a verdict settled by the value stands");
    }
    if rule
        .ceiling(&ray, step)
        .is_some_and(|ceiling| value > ceiling)
    {
        prop_assert_eq!(with, Verdict::Refuse(Side::TooLong), "above the ceiling");
    }
    Ok(())
}

/// Bit patterns as they come, some ordinary numbers, and the corners.
fn doubles() -> BoxedStrategy<f64> {
    let corners = [
        NAN,
        INFINITY,
        -INFINITY,
        0.0,
        -0.0,
        f64::MAX,
        -f64::MAX,
        f64::MIN_POSITIVE,
    ];
    let corners = prop::sample::select(corners.to_vec());
    prop_oneof![any::<u64>().prop_map(f64::from_bits), -2.0..2.0, corners].boxed()
}

fn singles() -> BoxedStrategy<f32> {
    let corners = [
        f32::NAN,
        f32::INFINITY,
        0.0,
        -0.0,
        f32::MAX,
        f32::MIN_POSITIVE,
        f32::from_bits(1),
    ];
    let corners = prop::sample::select(corners.to_vec());
    prop_oneof![
        any::<u32>().prop_map(f32::from_bits),
        -2.0_f32..2.0,
        corners
    ]
    .boxed()
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 1000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn rules_keep_their_word(world in hostile(doubles()), step in doubles(), value in doubles(), slope in doubles()) {
        if [step, value, slope].iter().all(|number| number.is_finite()) && step > 0.0 {
            keeps_its_word(world.rule, world.ray, step, value, slope)?;
        }
    }

    #[test]
    fn a_search_survives_any_world_in_f64(world in hostile(doubles())) {
        for finder in all_finders() {
            survives(&world, finder)?;
        }
    }

    #[test]
    fn a_search_survives_any_world_in_f32(world in hostile(singles())) {
        for finder in all_finders() {
            survives(&world, finder)?;
        }
    }

    #[test]
    fn a_search_survives_any_finder(world in hostile(doubles()), proposals in prop::collection::vec(doubles(), 1..20)) {
        survives(&world, Box::new(Wild { proposals, next: 0 }))?;
    }
}

/// Proposes whatever it was given, also for polishing.
#[derive(Clone, Debug)]
struct Wild {
    proposals: Vec<f64>,
    next: usize,
}

impl Wild {
    fn propose(&mut self) -> f64 {
        self.next += 1;
        self.proposals[self.next % self.proposals.len()]
    }
}

impl StepFinder<f64> for Wild {
    fn begin(&mut self, _: &Ray<f64>, _: f64) -> f64 {
        self.propose()
    }
    fn next(&mut self, _: &Ray<f64>, _: &Trial<f64>, _: Side) -> Proposal<f64> {
        Proposal::Try(self.propose())
    }
    fn polish(&mut self, _: &Ray<f64>, _: &Trial<f64>) -> Proposal<f64> {
        Proposal::Try(self.propose())
    }
    fn wants_slope(&self) -> bool {
        self.proposals.len().is_multiple_of(2)
    }
}
