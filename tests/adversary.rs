//! The outside world as an adversary: whatever a search or a run is supplied with, it does not panic, ends within its
//! budget, asks for no step that is not finite or out of bounds, and accepts nothing that its rule refuses.
//!
//! `SUREFOOT_SEARCHES` says how many searches are made (default 300,000). `SUREFOOT_SEED` says which.
#![cfg(feature = "alloc")]

mod support;

use support::cast::every_finder as finders;

use std::env;
use std::fmt::LowerExp;
use std::time::Instant;
use surefoot::acceptance::{
    AnyDecrease, AnyFinite, ApproximateWolfe, ForcingDecrease, GeneralisedWolfe, Goldstein,
    StrongWolfe, SufficientDecrease, WeakWolfe, both, rule, value_rule,
};
use surefoot::descent::ReferenceError;
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::{
    BoxedDirection, BoxedFinder, BoxedRule, Cost, Descent, Ending, FirstTrial, Given, Limits, Need,
    Ray, Real, Reference, RunEnding, RunReply, Sample, Side, StepSearch, Stopping, Trial, Verdict,
    Want, WrongReply,
};

/// Every rule of the crate, and closures that misbehave.
fn rules<T: Real>() -> Vec<(&'static str, BoxedRule<T>)> {
    let c = T::of;
    let fit = "parameters in range";
    vec![
        (
            "SufficientDecrease",
            Box::new(SufficientDecrease::new(c(0.1)).expect(fit)),
        ),
        (
            "WeakWolfe",
            Box::new(WeakWolfe::new(c(1e-4), c(0.9)).expect(fit)),
        ),
        (
            "StrongWolfe",
            Box::new(StrongWolfe::new(c(1e-3), c(0.1)).expect(fit)),
        ),
        (
            "StrongWolfe, equal parameters",
            Box::new(StrongWolfe::new(c(0.1), c(0.1)).expect(fit)),
        ),
        (
            "GeneralisedWolfe",
            Box::new(GeneralisedWolfe::new(c(0.01), c(0.5), c(2.0)).expect(fit)),
        ),
        (
            "GeneralisedWolfe, no bound",
            Box::new(GeneralisedWolfe::new(c(0.01), c(0.5), T::infinity()).expect(fit)),
        ),
        ("ApproximateWolfe", Box::new(ApproximateWolfe::default())),
        ("Goldstein", Box::new(Goldstein::default())),
        (
            "ForcingDecrease",
            Box::new(ForcingDecrease::new(c(0.01)).expect(fit)),
        ),
        ("AnyDecrease", Box::new(AnyDecrease)),
        ("AnyFinite", Box::new(AnyFinite)),
        (
            "both",
            Box::new(both(StrongWolfe::default(), Goldstein::default())),
        ),
        (
            "never satisfied with slopes",
            Box::new(rule(|_: &Ray<T>, _: &Trial<T>| Verdict::NeedsSlope)),
        ),
        (
            "always too short",
            Box::new(value_rule(|_: &Ray<T>, _: &Trial<T>| {
                Verdict::Refuse(Side::TooShort)
            })),
        ),
        (
            "sides by the last bit of the value",
            Box::new(value_rule(|_: &Ray<T>, t: &Trial<T>| {
                let odd = t.value.to_double().to_bits() & (1 << 29) != 0;
                Verdict::Refuse(if odd { Side::TooLong } else { Side::TooShort })
            })),
        ),
    ]
}

#[test]
fn no_reply_breaks_a_search() {
    let wanted = wanted();
    let begun = Instant::now();
    let single = wanted / 4;
    let mut tally = Tally::default();
    attack::<f32>(single, f32::from_bits_of, &mut tally);
    attack::<f64>(wanted - single, f64::from_bits_of, &mut tally);
    let seconds = begun.elapsed().as_secs_f64();
    println!(
        "{} searches, {} trials, {} accepted, {} rays refused, in {seconds:.1} s: {:.0} searches a second",
        tally.searches,
        tally.trials,
        tally.accepted,
        tally.refused_rays,
        tally.searches as f64 / seconds
    );
    println!("endings: {:?}", tally.endings);
    assert_eq!(tally.searches, wanted);
    // The adversary is no use if the same thing happens all the time.
    assert!(tally.accepted > wanted / 20 && tally.accepted < wanted * 19 / 20);
    if wanted >= 20_000 {
        let seen = tally.endings.iter().filter(|n| **n > 0).count();
        assert!(
            seen >= 11,
            "only {seen} kinds of endings: {:?}",
            tally.endings
        );
    }
}

#[test]
fn no_reply_breaks_a_run() {
    let runs = (wanted() / 20).max(100);
    let begun = Instant::now();
    let (mut calls, mut endings) = (0, [0_u64; 8]);
    for seed in 0..runs {
        let mut random = Stream::new(first_seed() + seed);
        if seed % 4 == 0 {
            attack_run::<f32>(&mut random, f32::from_bits_of, &mut calls, &mut endings);
        } else {
            attack_run::<f64>(&mut random, f64::from_bits_of, &mut calls, &mut endings);
        }
    }
    let seconds = begun.elapsed().as_secs_f64();
    println!("{runs} runs, {calls} calls, in {seconds:.1} s; endings {endings:?}");
    let seen = endings.iter().filter(|n| **n > 0).count();
    assert!(seen >= 5, "only {seen} kinds of endings: {endings:?}");
}

fn wanted() -> u64 {
    let said = env::var("SUREFOOT_SEARCHES").ok();
    said.map_or(300_000, |n| {
        n.parse().expect("SUREFOOT_SEARCHES is a number")
    })
}

fn first_seed() -> u64 {
    let said = env::var("SUREFOOT_SEED").ok();
    said.map_or(1, |n| n.parse().expect("SUREFOOT_SEED is a number"))
}

// ---- The searches ----

#[derive(Default)]
struct Tally {
    searches: u64,
    trials: u64,
    accepted: u64,
    refused_rays: u64,
    endings: [u64; 14],
}

fn attack<T: Number>(searches: u64, bits: fn(u64) -> T, tally: &mut Tally) {
    let names: Vec<_> = finders::<T>().iter().map(|f| f.0).collect();
    let mut machines = Vec::new();
    for (number, _) in rules::<T>().iter().enumerate() {
        for (name, finder) in finders::<T>() {
            let (kind, rule) = rules::<T>().swap_remove(number);
            machines.push((name, kind, Some(StepSearch::new(finder, rule))));
        }
    }
    let until = tally.searches + searches;
    let mut seed = first_seed();
    while tally.searches < until {
        let chosen = (seed % machines.len() as u64) as usize;
        let (name, kind, machine) = &mut machines[chosen];
        let mut random = Stream::new(seed);
        seed += 1;
        // Limits hold from the next search on; the machine is the same.
        let limits = limits(&mut random);
        let cost = *random.pick(&[Cost::Separate, Cost::Joint]);
        let search = machine.take().expect("it is put back each time");
        let search = search.with_limits(limits).with_cost(cost);
        let search = match random.below(3) {
            0 => search.with_slope_when_accepted(),
            _ => search,
        };
        let context = (seed - 1, *name, *kind);
        *machine = Some(one_search(
            search,
            &limits,
            &mut random,
            bits,
            context,
            tally,
        ));
    }
    assert_eq!(names.len() * rules::<T>().len(), machines.len());
}

type Machine<T> = StepSearch<T, BoxedFinder<T>, BoxedRule<T>>;

fn one_search<T: Number>(
    mut search: Machine<T>,
    limits: &Limits<T>,
    random: &mut Stream,
    bits: fn(u64) -> T,
    context: (u64, &str, &str),
    tally: &mut Tally,
) -> Machine<T> {
    let world = *random.pick(&WORLDS);
    let ray = ray(random, bits);
    let first = match random.below(8) {
        0 => bits(random.next()),
        _ => T::of(10_f64.powi(random.below(31) as i32 - 15)),
    };
    if search.begin(ray, first).is_err() {
        tally.refused_rays += 1;
        assert!(search.request().is_none() && search.outcome().is_none());
        assert_eq!(
            search.supply(Sample::Value(T::one())),
            Err(WrongReply::NothingAsked)
        );
        return search;
    }
    tally.searches += 1;
    let mut supplied = 0;
    while let Some(ask) = search.request() {
        let step = ask.step;
        assert!(
            step.is_finite() && step > T::zero(),
            "{context:?} asks for {step:?}"
        );
        assert!(
            limits.lower() <= step && step <= limits.upper(),
            "{context:?} asks for {step:?} outside of {limits:?}"
        );
        supplied += 1;
        assert!(
            supplied <= 2 * limits.trials(),
            "{context:?} goes on after {supplied} replies"
        );
        if let Some(ceiling) = search.ceiling() {
            assert!(
                !(ceiling < ray.value),
                "{context:?}: a ceiling of {ceiling:?}"
            );
        }
        if random.below(8) == 0 {
            // A reply of the wrong kind: it is named, and the request stands.
            let wrong = match ask.need {
                Need::Slope => [Sample::Value(T::one()), Sample::Value(T::nan())],
                Need::Value | Need::Both => [Sample::Slope(T::one()), Sample::NoSlope],
            };
            let wrong = *random.pick(&wrong);
            assert!(search.supply(wrong).is_err(), "{context:?}: {wrong:?}");
            assert_eq!(search.request(), Some(ask), "{context:?}");
        }
        let (value, slope) = (
            world.value(random, bits, &ray, step),
            world.slope(random, bits, &ray, step),
        );
        let sample = match (random.below(40), ask.need) {
            (0, _) => Sample::OutsideDomain,
            (1, Need::Slope) => Sample::NoSlope,
            (2..8, _) | (_, Need::Both) => Sample::Both(value, slope),
            (_, Need::Value) => Sample::Value(value),
            (_, Need::Slope) => Sample::Slope(slope),
        };
        assert_eq!(search.supply(sample), Ok(()), "{context:?}");
    }
    let outcome = search.outcome().expect("nothing is asked for any more");
    tally.trials += u64::from(outcome.trials);
    tally.endings[kind_of(&outcome.ending)] += 1;
    assert!(
        (1..=limits.trials()).contains(&outcome.trials),
        "{context:?}: {} trials of {}",
        outcome.trials,
        limits.trials()
    );
    assert_eq!(
        outcome.accepted().is_some(),
        outcome.ending == Ending::Accepted,
        "{context:?}: {:?}",
        outcome.ending
    );
    if let Some(trial) = outcome.accepted() {
        tally.accepted += 1;
        let finite = trial.value.is_finite() && trial.slope.is_none_or(T::is_finite);
        assert!(finite, "{context:?} accepts {trial:?}");
        let again = search.rule().as_ref_judge(search.ray(), &trial);
        assert_eq!(again, Verdict::Accept, "{context:?} accepts {trial:?}");
    }
    if let Some(best) = outcome.best {
        assert!(best.value.is_finite(), "{context:?}: best {best:?}");
        let lower = search.log().iter().find(|e| e.trial.value < best.value);
        let undefined = |e: &surefoot::search::Entry<T>| e.fate == surefoot::search::Fate::Outside;
        assert!(
            lower.is_none_or(undefined),
            "{context:?}: {lower:?} beats {best:?}"
        );
    }
    // Whatever stands in it, it can be told.
    let mut told = 0;
    let entries: Vec<_> = search.log().iter().copied().collect();
    for entry in &entries {
        search.explain(entry, &mut |condition| told += condition.name.len());
    }
    assert!(!outcome.ending.to_string().is_empty());
    assert_eq!(
        search.supply(Sample::Value(T::one())),
        Err(WrongReply::NothingAsked)
    );
    search
}

/// The rule's own verdict, by name, so that a box in a box is not asked by mistake.
trait Judges<T> {
    fn as_ref_judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict;
}

impl<T> Judges<T> for BoxedRule<T> {
    fn as_ref_judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        surefoot::Acceptance::judge(self.as_ref(), ray, trial)
    }
}

fn limits<T: Real>(random: &mut Stream) -> Limits<T> {
    let trials = 1 + random.below(40) as u32;
    let magnitude = |random: &mut Stream| T::of(10_f64.powi(random.below(25) as i32 - 12));
    let (a, b) = (magnitude(random), magnitude(random));
    let (lower, upper) = match random.below(4) {
        0 => (a.min(b), a.max(b)),
        1 => (T::zero(), a),
        2 => (a, T::infinity()),
        _ => (T::zero(), T::infinity()),
    };
    Limits::new(lower, upper, trials).expect("lower <= upper")
}

fn ray<T: Real>(random: &mut Stream, bits: fn(u64) -> T) -> Ray<T> {
    let tame = |random: &mut Stream| T::of(random.uniform() * 4.0 - 2.0);
    let value = match random.below(6) {
        0 => bits(random.next()),
        1 => T::zero(),
        2 => T::of(1e30),
        _ => tame(random),
    };
    let slope = match random.below(8) {
        0 => bits(random.next()),
        1 => T::zero(),
        2 => -T::min_positive_value(),
        3 => -T::max_value(),
        _ => -T::of(10_f64.powi(random.below(21) as i32 - 10)),
    };
    let mut ray = Ray::new(value, slope);
    if random.below(4) == 0 {
        ray = ray.with_reference(value + tame(random).abs());
    }
    if random.below(4) == 0 {
        ray = ray.with_value_noise(T::of(1e-3) * value.abs());
    }
    if random.below(4) == 0 {
        ray = ray.with_slack(T::of(1e-6) * value.abs());
    }
    if random.below(50) == 0 {
        ray = ray.with_value_noise(bits(random.next()));
    }
    ray
}

/// Where the numbers come from.
#[derive(Clone, Copy, Debug)]
enum World {
    /// Any bit pattern: payloads of NaN, infinities, subnormals, all.
    Bits,
    /// Numbers that break formulas.
    Special,
    /// Always the same.
    Constant,
    /// As the slope promised at the start, and more.
    Falling,
    /// Lower or higher by turns.
    Turning,
    /// The largest numbers there are.
    Huge,
    /// A parabola.
    Bowl,
    /// A parabola whose numbers now and then come from one of the above.
    Mixed,
    /// Defined up to a step only.
    Fenced,
    /// A parabola whose slope has the wrong sign.
    Reversed,
}

const WORLDS: [World; 10] = [
    World::Bits,
    World::Special,
    World::Constant,
    World::Falling,
    World::Turning,
    World::Huge,
    World::Bowl,
    World::Mixed,
    World::Fenced,
    World::Reversed,
];

impl World {
    fn value<T: Real>(self, random: &mut Stream, bits: fn(u64) -> T, ray: &Ray<T>, a: T) -> T {
        let bowl = ray.value + a * ray.slope + T::of(0.5) * a * a * ray.slope.abs();
        match self {
            World::Bits => bits(random.next()),
            World::Special => special(random),
            World::Constant => ray.value,
            World::Falling => ray.value + T::of(2.0) * a * ray.slope,
            World::Turning if random.below(2) == 0 => ray.value + a * ray.slope,
            World::Turning => ray.value - a * ray.slope,
            World::Huge if random.below(2) == 0 => T::max_value(),
            World::Huge => -T::max_value(),
            World::Mixed if random.below(5) == 0 => special(random),
            World::Fenced if a > T::of(1e-3) => T::nan(),
            World::Fenced => ray.value + T::of(2.0) * a * ray.slope,
            World::Bowl | World::Mixed | World::Reversed => bowl,
        }
    }

    fn slope<T: Real>(self, random: &mut Stream, bits: fn(u64) -> T, ray: &Ray<T>, a: T) -> T {
        let bowl = ray.slope + a * ray.slope.abs();
        match self {
            World::Bits => bits(random.next()),
            World::Special => special(random),
            World::Constant => T::zero(),
            World::Falling | World::Fenced => T::of(2.0) * ray.slope,
            World::Turning if random.below(2) == 0 => ray.slope,
            World::Turning => -ray.slope,
            World::Huge if random.below(2) == 0 => T::max_value(),
            World::Huge => -T::max_value(),
            World::Mixed if random.below(5) == 0 => special(random),
            World::Reversed => -bowl,
            World::Bowl | World::Mixed => bowl,
        }
    }
}

fn special<T: Real>(random: &mut Stream) -> T {
    let (zero, one, tiny, most) = (T::zero(), T::one(), T::min_positive_value(), T::max_value());
    let least = tiny * T::epsilon();
    let list = [
        zero,
        -zero,
        one,
        -one,
        tiny,
        -tiny,
        least,
        -least,
        most,
        -most,
        T::epsilon(),
        -T::epsilon(),
        one + T::epsilon(),
        T::nan(),
        T::infinity(),
        T::neg_infinity(),
    ];
    *random.pick(&list)
}

fn kind_of<T: Real>(ending: &Ending<T>) -> usize {
    match ending {
        Ending::Accepted => 0,
        Ending::BudgetSpent { .. } => 1,
        Ending::UpperBound { .. } => 2,
        Ending::LowerBound { .. } => 3,
        Ending::Edge { .. } => 4,
        Ending::Endless { .. } => 5,
        Ending::Flat { .. } => 6,
        Ending::WrongSlope { .. } => 7,
        Ending::BelowRounding { .. } => 8,
        Ending::Narrow { .. } => 9,
        Ending::FinderSpent => 10,
        Ending::SlopeMissing { .. } => 11,
        Ending::RuleUndecided { .. } => 12,
        _ => 13,
    }
}

// ---- The runs ----

fn attack_run<T: Number>(
    random: &mut Stream,
    bits: fn(u64) -> T,
    calls: &mut u64,
    endings: &mut [u64; 8],
) where
    Vec<T>: surefoot::Vector<Scalar = T>,
{
    let evaluations = 1 + random.below(300);
    let iterations = random.below(40);
    let finder = random.pick_of(finders::<T>()).1;
    let rule = random.pick_of(rules::<T>()).1;
    let stopping = Stopping {
        gradient: Some(0.0),
        iterations,
        evaluations,
        ..Stopping::default()
    };
    let reference = *random.pick(&[
        Reference::Current,
        Reference::LargestOfLast { values: 3 },
        Reference::WeightedAverage { eta: 0.85 },
    ]);
    let first_trial = *random.pick(&[
        FirstTrial::ByDirection,
        FirstTrial::Unit,
        FirstTrial::Fixed(1e-3),
        FirstTrial::SameChange,
        FirstTrial::BarzilaiBorweinLong,
        FirstTrial::BarzilaiBorweinShort,
        FirstTrial::HagerZhang,
        FirstTrial::HagerZhangQuadratic,
        FirstTrial::Diminishing { first: 1.0 },
        FirstTrial::LastDecrease,
    ]);
    let limits = Limits::new(0.0, f64::INFINITY, 1 + random.below(20) as u32);
    let cost = *random.pick(&[Cost::Separate, Cost::Joint]);
    let descent = Descent::new(direction::<T>(random), finder, rule)
        .with_limits(limits.expect("at least one trial"))
        .with_stopping(stopping)
        .expect("tolerances in range")
        .with_first_trial(first_trial)
        .expect("positive steps")
        .with_cost(cost);
    let descent: Result<_, ReferenceError> = descent.with_reference(reference);
    let mut descent = descent.expect("parameters in range");
    if random.below(3) == 0 {
        descent = descent.with_longest_move(0.5).expect("positive");
    }
    let dim = 1 + random.below(4) as usize;
    let x0: Vec<T> = (0..dim)
        .map(|_| T::of(random.uniform() * 6.0 - 3.0))
        .collect();
    let world = *random.pick(&WORLDS);
    let mut run = descent.start(x0);
    let mut asked: u64 = 0;
    while let Some(request) = run.request() {
        asked += 1;
        assert!(
            asked <= evaluations,
            "{asked} calls where {evaluations} are allowed"
        );
        let want = request.want;
        let x = request.point.clone();
        assert!(
            x.iter().all(|x| x.is_finite()),
            "asks about {x:?} in {world:?}"
        );
        // Half an honest bowl, so that runs get somewhere; numbers from the world between.
        let bowl: T = x.iter().fold(T::zero(), |sum, x| sum + *x * *x);
        for (g, x) in request.gradient.iter_mut().zip(&x) {
            *g = *x + *x;
        }
        let unit = Ray::new(T::one(), -T::one());
        let mut value = bowl;
        if asked > 1 && random.below(3) == 0 {
            let step = T::of(random.uniform());
            value = world.value(random, bits, &unit, step);
        }
        if asked > 1 && random.below(3) == 0 {
            let at = random.below(dim as u64) as usize;
            let step = T::of(random.uniform());
            request.gradient[at] = world.slope(random, bits, &unit, step);
        }
        if asked > 1 && random.below(300) == 0 {
            request.gradient.push(T::one());
        }
        if random.below(8) == 0 {
            let (wrong, name) = match want {
                Want::Gradient => (Given::Value(T::one()), RunReply::GradientWanted),
                Want::Value | Want::Both => (Given::NoGradient, RunReply::ValueWanted),
            };
            assert_eq!(run.supply(wrong), Err(name));
        }
        let given = match (random.below(40), want) {
            (0, _) if asked > 1 => Given::OutsideDomain,
            (1, Want::Gradient) => Given::NoGradient,
            (2..8, _) | (_, Want::Both) => Given::Both(value),
            (_, Want::Value) => Given::Value(value),
            (_, Want::Gradient) => Given::Gradient,
        };
        assert_eq!(run.supply(given), Ok(()));
    }
    assert_eq!(
        run.supply(Given::OutsideDomain),
        Err(RunReply::NothingWanted)
    );
    assert!(run.iterations() <= iterations);
    let (_, report) = run.finish();
    *calls += asked;
    assert_eq!(report.evaluations.calls(), asked);
    assert!(!report.ending.to_string().is_empty());
    assert_eq!(report.point.len(), dim);
    let kind = match report.ending {
        RunEnding::Converged(_) => 0,
        RunEnding::IterationsSpent => 1,
        RunEnding::EvaluationsSpent => 2,
        RunEnding::SearchFailed(_) => 3,
        RunEnding::NotDescent { .. } => 4,
        RunEnding::AtRounding => 5,
        RunEnding::Fault(_) => 6,
        _ => 7,
    };
    endings[kind] += 1;
}

fn direction<T: Real>(random: &mut Stream) -> BoxedDirection<Vec<T>>
where
    Vec<T>: surefoot::Vector<Scalar = T>,
{
    match random.below(7) {
        0 => Box::new(SteepestDescent),
        1 => Box::new(ConjugateGradient::new(Update::FletcherReeves)),
        2 => Box::new(ConjugateGradient::new(Update::PolakRibierePlus)),
        3 => Box::new(ConjugateGradient::new(Update::HestenesStiefelPlus)),
        4 => Box::new(ConjugateGradient::new(Update::DaiYuan)),
        5 => Box::new(ConjugateGradient::new(Update::HagerZhang)),
        _ => Box::new(Lbfgs::new(1 + random.below(4) as usize).expect("at least one pair")),
    }
}

// ---- Chance ----

trait Number: Real + LowerExp {
    fn from_bits_of(bits: u64) -> Self;
}

impl Number for f32 {
    fn from_bits_of(bits: u64) -> f32 {
        f32::from_bits((bits >> 32) as u32)
    }
}

impl Number for f64 {
    fn from_bits_of(bits: u64) -> f64 {
        f64::from_bits(bits)
    }
}

/// G. Marsaglia, "Xorshift RNGs", J. Stat. Software 8 (2003) issue 14, triple (13, 7, 17).
struct Stream(u64);

impl Stream {
    fn new(seed: u64) -> Self {
        let mut stream = Stream(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1);
        stream.next();
        stream
    }

    fn next(&mut self) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0
    }

    fn uniform(&mut self) -> f64 {
        (self.next() >> 11) as f64 / (1_u64 << 53) as f64
    }

    fn below(&mut self, count: u64) -> u64 {
        (self.next() >> 16) % count
    }

    fn pick<'a, X>(&mut self, list: &'a [X]) -> &'a X {
        &list[self.below(list.len() as u64) as usize]
    }

    fn pick_of<X>(&mut self, mut list: Vec<X>) -> X {
        let at = self.below(list.len() as u64) as usize;
        list.swap_remove(at)
    }
}
