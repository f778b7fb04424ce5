//! An oracle too naive to be wrong: a dense scan along the ray says whether there is an acceptable step within the bounds.
//! Where there is, every finder must find one within the default budget.
#![cfg(feature = "alloc")]

mod support;

use std::collections::BTreeMap;
use support::rays::{RandomRay, Stream};
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::{BoxedFinder, BoxedRule, Ending, Limits, Ray, StepSearch};

/// Finders that the search guards: they must never fail.
fn guarded() -> Vec<(&'static str, BoxedFinder<f64>)> {
    support::cast::finders().into()
}

/// Exact minimisers, exempt from the guard: they may end at a minimizer that the rule refuses, and then say so.
fn exempt() -> Vec<(&'static str, BoxedFinder<f64>)> {
    support::cast::EXEMPT
        .map(|name| (name, support::cast::finder(name)))
        .into()
}

/// A rule as plain data, with its inequalities written out once more.
#[derive(Clone, Copy, Debug)]
enum Rule {
    Decrease(f64),
    Weak(f64, f64),
    Strong(f64, f64),
    Goldstein(f64),
}

impl Rule {
    fn boxed(self) -> BoxedRule<f64> {
        let fit = "parameters in range";
        match self {
            Rule::Decrease(c1) => Box::new(SufficientDecrease::new(c1).expect(fit)),
            Rule::Weak(c1, c2) => Box::new(WeakWolfe::new(c1, c2).expect(fit)),
            Rule::Strong(c1, c2) => Box::new(StrongWolfe::new(c1, c2).expect(fit)),
            Rule::Goldstein(c) => Box::new(Goldstein::new(c).expect(fit)),
        }
    }

    fn decrease(self) -> f64 {
        match self {
            Rule::Decrease(c) | Rule::Weak(c, _) | Rule::Strong(c, _) | Rule::Goldstein(c) => c,
        }
    }

    fn holds(self, start: (f64, f64), a: f64, here: (f64, f64)) -> bool {
        let fell = here.0 <= start.0 + self.decrease() * a * start.1;
        fell && match self {
            Rule::Decrease(_) => true,
            Rule::Weak(_, c2) => here.1 >= c2 * start.1,
            Rule::Strong(_, c2) => here.1.abs() <= c2 * start.1.abs(),
            Rule::Goldstein(c) => here.0 >= start.0 + (1.0 - c) * a * start.1,
        }
    }
}

/// A ray to search, in units of its own.
struct Case {
    name: String,
    at: Box<dyn Fn(f64) -> (f64, f64)>,
    scale: f64,
    first: f64,
}

#[test]
fn smooth_rays() {
    let mut tally = Tally::default();
    for seed in 0..1_500 {
        let ray = RandomRay::new(seed);
        let case = Case {
            name: format!("random ray {seed}"),
            scale: ray.scale,
            first: ray.first,
            at: Box::new(move |a| ray.at(a)),
        };
        tally.try_all(&case, &mut Stream::new(seed), true);
    }
    for seed in 0..1_500 {
        let mut random = Stream::new(1_000_000 + seed);
        let case = own(seed, &mut random);
        tally.try_all(&case, &mut random, true);
    }
    tally.verdict(11_000);
}

#[test]
fn kinked_rays() {
    let mut tally = Tally::default();
    for seed in 0..4_000 {
        let mut random = Stream::new(2_000_000 + seed);
        let case = kinked(seed, &mut random);
        tally.try_all(&case, &mut random, false);
    }
    tally.verdict(7_500);
}

/// Six more kinds of continuously differentiable rays, bounded below.
fn own(seed: u64, random: &mut Stream) -> Case {
    let scale = 10_f64.powf(random.between(-6.0, 6.0));
    let first = scale * 10_f64.powf(random.between(-4.0, 3.0));
    let kind = seed % 6;
    let (p, q, n) = (
        random.next(),
        random.next(),
        1 + (random.next() * 9.0) as i32,
    );
    let unit: Box<dyn Fn(f64) -> (f64, f64)> = match kind {
        // Falls for ever towards a floor.
        0 => Box::new(move |u| {
            let below = 1.0 + u;
            (below.powi(-n), -f64::from(n) * below.powi(-n - 1))
        }),
        // A gentle fall before a wall.
        1 => Box::new(move |u| {
            let far = 1.0 + 10.0 * p;
            let power = 2 * (n + 1);
            let wall = (u / far).powi(power - 1);
            (wall * (u / far) - u, f64::from(power) / far * wall - 1.0)
        }),
        // Rounded |u - 1| of Huber's kind: a parabola between two straight lines.
        2 => Box::new(move |u| {
            let (radius, t) = (1e-4 + p, u - 1.0);
            if t.abs() <= radius {
                (t * t / (2.0 * radius), t / radius)
            } else {
                (t.abs() - radius / 2.0, t.signum())
            }
        }),
        // A rational well: slopes vanish far out.
        3 => Box::new(move |u| {
            let b = 0.1 + 3.0 * p;
            let below = u * u + b;
            (-u / below, (u * u - b) / (below * below))
        }),
        // Waves on a bowl, of two lengths.
        4 => Box::new(move |u| {
            let (k, l) = (3.0 + 10.0 * p, 20.0 + 30.0 * q);
            let waves = 0.3 * (k * u).sin() / k + 0.15 * (l * u).sin() / l;
            let slope = 0.3 * (k * u).cos() + 0.15 * (l * u).cos();
            (0.5 * u * u - u + waves, u - 1.0 + slope)
        }),
        // A logarithmic barrier without its edge: log cosh about 1, tilted.
        _ => Box::new(move |u| {
            let (t, tilt) = ((u - 1.0) * (1.0 + 5.0 * q), 0.5 * p);
            let k = 1.0 + 5.0 * q;
            // log cosh t without overflow
            let value = t.abs() + (-2.0 * t.abs()).exp().ln_1p();
            (value / k + tilt * u, t.tanh() + tilt)
        }),
    };
    let at = move |a: f64| {
        let (value, slope) = unit(a / scale);
        (value, slope / scale)
    };
    Case {
        name: format!("kind {kind}, seed {seed}"),
        at: Box::new(at),
        scale,
        first,
    }
}

/// Piecewise linear and piecewise quadratic rays, with up to six kinks that open upwards or downwards, bounded below.
fn kinked(seed: u64, random: &mut Stream) -> Case {
    let scale = 10_f64.powf(random.between(-4.0, 4.0));
    let first = scale * 10_f64.powf(random.between(-3.0, 2.0));
    let count = 1 + (random.next() * 6.0) as usize;
    let kinks: Vec<(f64, f64)> = (0..count)
        .map(|_| (random.between(0.05, 4.0), random.between(-0.5, 1.5)))
        .collect();
    let bend = if random.next() < 0.5 {
        0.0
    } else {
        random.between(0.01, 1.0)
    };
    // The slope far out is at least 1/2, and the slope at 0 at most -1/10.
    let rise: f64 = kinks.iter().map(|k| k.1).sum();
    let far = (0.5 - rise).max(0.0) + random.next();
    let kinks: Vec<_> = kinks
        .into_iter()
        .chain([(random.between(0.5, 5.0), far)])
        .collect();
    let rise: f64 = kinks.iter().map(|k| k.1).sum();
    let tilt = -(0.1 + random.next() * rise.max(0.2));
    let tilt = tilt.min(-0.1).max(-(rise - 0.05).max(0.1));
    let unit = move |u: f64| {
        // The slope on the right of a kink, where a step hits one.
        let mut both = (tilt * u + 0.5 * bend * u * u, tilt + bend * u);
        for (at, weight) in &kinks {
            if u >= *at {
                both = (both.0 + weight * (u - at), both.1 + weight);
            }
        }
        both
    };
    let at = move |a: f64| {
        let (value, slope) = unit(a / scale);
        (value, slope / scale)
    };
    Case {
        name: format!("kinked, seed {seed}"),
        at: Box::new(at),
        scale,
        first,
    }
}

#[derive(Default)]
struct Tally {
    /// Per finder: searches where the scan found an acceptable step, of these found, trials, longest.
    finders: BTreeMap<&'static str, (u64, u64, u64, u32)>,
    bounds_hit: u64,
    faults: Vec<String>,
    /// Of the exempt ones.
    excused: BTreeMap<String, u64>,
}

impl Tally {
    fn try_all(&mut self, case: &Case, random: &mut Stream, smooth: bool) {
        let start = (case.at)(0.0);
        assert!(start.1 < 0.0, "{} does not descend", case.name);
        let upper = match random.below(3) {
            0 => case.scale * 10_f64.powf(random.between(-2.0, 1.0)),
            _ => f64::INFINITY,
        };
        let scanned = scan(case, upper);
        for rule in rules(random, smooth) {
            let acceptable = |(a, here): &(f64, (f64, f64))| rule.holds(start, *a, *here);
            let last = scanned.last().expect("a scan has steps");
            let bound_will_do = upper.is_finite() && fell(rule, start, last);
            if !scanned.iter().any(acceptable) && !bound_will_do {
                continue;
            }
            for (name, finder) in guarded() {
                let fault = self.search(case, rule, upper, (name, finder), start);
                if let Some(fault) = fault {
                    self.faults
                        .push(format!("{name} with {rule:?} on {}: {fault}", case.name));
                }
            }
            for (name, finder) in exempt() {
                if let Some(fault) = self.search(case, rule, upper, (name, finder), start) {
                    let kind = fault.split([' ', ':']).next().unwrap_or_default();
                    *self.excused.entry(format!("{name}: {kind}")).or_default() += 1;
                }
            }
        }
    }

    fn search(
        &mut self,
        case: &Case,
        rule: Rule,
        upper: f64,
        (name, finder): (&'static str, BoxedFinder<f64>),
        start: (f64, f64),
    ) -> Option<String> {
        let limits = Limits::new(0.0, upper, 100).expect("an upper bound above 0");
        let mut search = StepSearch::new(finder, rule.boxed()).with_limits(limits);
        let found = search.along(Ray::new(start.0, start.1), case.first, |a| (case.at)(a));
        let outcome = found.expect("a ray fit for a search").outcome;
        let (fault, bound) = match (outcome.accepted(), outcome.ending) {
            (Some(t), _) if !rule.holds(start, t.step, (case.at)(t.step)) => {
                (Some(format!("BrokenRule: accepted {:e}", t.step)), false)
            }
            (Some(t), _) if t.step > upper => {
                (Some(format!("OutOfBounds: accepted {:e}", t.step)), false)
            }
            (Some(_), _) => (None, false),
            (None, Ending::UpperBound { bound })
                if fell(rule, start, &(bound, (case.at)(bound))) =>
            {
                (None, true)
            }
            (None, ending) => (Some(format!("{ending:?} (upper bound {upper:e})")), false),
        };
        let row = self.finders.entry(name).or_default();
        row.0 += 1;
        row.1 += u64::from(fault.is_none());
        row.2 += u64::from(outcome.trials);
        row.3 = row.3.max(outcome.trials);
        self.bounds_hit += u64::from(bound);
        fault
    }

    fn verdict(self, least: u64) {
        for (name, (all, found, trials, longest)) in &self.finders {
            println!(
                "{name:26} found a step in {found} of {all} searches ({:.3} %), {:.2} trials each, at most {longest}",
                100.0 * *found as f64 / *all as f64,
                *trials as f64 / *all as f64
            );
            assert!(*all >= least, "{name}: only {all} searches");
        }
        println!(
            "{} ended at a bound with sufficient decrease",
            self.bounds_hit
        );
        for (kind, count) in &self.excused {
            println!("exempt from the guard: {kind} in {count}");
        }
        assert!(self.bounds_hit > 0, "no bound was ever hit");
        let count = self.faults.len();
        let such = &self.faults[..count.min(12)];
        assert!(
            count == 0,
            "{count} searches fail, such as\n{}",
            such.join("\n")
        );
        // What they promise instead: that they have nothing more to propose, or that they went on to the end.
        let excused =
            |kind: &&String| kind.ends_with("FinderSpent") || kind.ends_with("BudgetSpent");
        let other: Vec<_> = self
            .excused
            .iter()
            .filter(|(kind, _)| !excused(kind))
            .collect();
        assert!(other.is_empty(), "{other:?}");
    }
}

fn fell(rule: Rule, start: (f64, f64), (a, here): &(f64, (f64, f64))) -> bool {
    here.0 <= start.0 + rule.decrease() * a * start.1
}

/// Rules with random parameters, from strict to lax.
fn rules(random: &mut Stream, smooth: bool) -> Vec<Rule> {
    let c1 = 10_f64.powf(random.between(-5.0, -0.35));
    let c2 = c1 + (0.99 - c1) * random.between(0.02, 1.0);
    let share = random.between(0.01, 0.49);
    let mut rules = vec![
        Rule::Decrease(10_f64.powf(random.between(-5.0, -0.1))),
        Rule::Weak(c1, c2),
    ];
    if smooth {
        rules.extend([Rule::Strong(c1, c2), Rule::Goldstein(share)]);
    }
    rules
}

/// Steps from a millionth to ten thousand units, and the bound itself last, each with value and slope.
fn scan(case: &Case, upper: f64) -> Vec<(f64, (f64, f64))> {
    let steps = (0..2_000).map(|i| case.scale * 10_f64.powf(f64::from(i) / 200.0 - 6.0));
    let within = steps.filter(|a| *a <= upper);
    let last = upper.is_finite().then_some(upper);
    within.chain(last).map(|a| (a, (case.at)(a))).collect()
}

impl Stream {
    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.next()
    }

    fn below(&mut self, count: u64) -> u64 {
        (self.next() * count as f64) as u64
    }
}
