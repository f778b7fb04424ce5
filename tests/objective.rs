//! An objective is asked for no more than is needed, told of every move once, and its errors come back as themselves.
#![cfg(feature = "alloc")]

use std::collections::HashSet;
use std::convert::Infallible;
use std::ops::ControlFlow;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, InterpolatingBacktracking, MoreThuente,
};
use surefoot::{
    Acceptance, BoxedDirection, BoxedFinder, BoxedRule, Cost, Counted, Descent, DescentError,
    Direction, Evaluations, FirstTrial, Given, Objective, Proposal, Ray, Report, RunEnding, Side,
    StepFinder, Stopping, Trial, Want, joint, separate,
};

// ---- Never asked twice, never for nothing ----

#[test]
fn a_joint_objective_is_never_called_twice_for_one_point() {
    for (name, descent) in casts() {
        let mut told = Told::new(Cost::Joint);
        let report = descent.minimize(start(), &mut told).unwrap();
        assert!(report.converged(), "{name}: {:?}", report.ending);
        let mut seen = HashSet::new();
        for event in &told.events {
            if let Event::Asked(want, x) = event {
                assert_eq!(*want, Want::Both, "{name}");
                assert!(seen.insert(x.clone()), "{name}: {x:x?} twice");
            }
        }
        assert!(seen.len() > 10, "{name}");
        assert_eq!(told.asked(Want::Both), report.evaluations.both, "{name}");
    }
}

#[test]
fn a_separate_objective_is_never_asked_the_same_twice() {
    for (name, descent) in casts() {
        let mut told = Told::new(Cost::Separate);
        let report = descent.minimize(start(), &mut told).unwrap();
        assert!(report.converged(), "{name}: {:?}", report.ending);
        let (mut values, mut gradients) = (HashSet::new(), HashSet::new());
        for event in &told.events {
            let Event::Asked(want, x) = event else {
                continue;
            };
            if *want != Want::Gradient {
                assert!(
                    values.insert(x.clone()),
                    "{name}: the value at {x:x?} twice"
                );
            }
            if *want != Want::Value {
                assert!(
                    gradients.insert(x.clone()),
                    "{name}: the gradient at {x:x?} twice"
                );
            }
        }
    }
}

#[test]
fn with_sufficient_decrease_and_backtracking_a_gradient_is_paid_for_each_point_of_the_run_only() {
    let finders: [BoxedFinder<f64>; 2] = [
        Box::new(Backtracking::default()),
        Box::new(InterpolatingBacktracking::new()),
    ];
    for finder in finders {
        let descent = Descent::new(Lbfgs::default(), finder, SufficientDecrease::default());
        let mut told = Told::new(Cost::Separate);
        let report = descent.minimize(start(), &mut told).unwrap();
        assert!(report.converged() && report.refusals.too_long > 0);
        assert_eq!(report.evaluations.all_gradients(), report.iterations + 1);
        assert_eq!(told.gradients(), report.iterations + 1);
    }
}

#[test]
fn with_weak_wolfe_and_bisection_a_gradient_is_paid_for_each_trial_that_fell_enough_only() {
    let (decrease, curvature) = (1e-4, 0.1);
    let rule = WeakWolfe::new(decrease, curvature).unwrap();
    let descent = Descent::new(SteepestDescent, Bisection::new(), rule)
        .with_stopping(Stopping {
            iterations: 100,
            ..Stopping::default()
        })
        .unwrap();
    let mut run = descent.start(start());
    let (mut passed, mut failed, mut gradients) = (0, 0, 0);
    while let Some(request) = run.request() {
        let value = valley(request.point, request.gradient);
        let (want, point) = (request.want, request.point.clone());
        let step = run.search().request().map(|ask| ask.step);
        let given = match want {
            Want::Value => {
                let (ray, step) = (run.search().ray(), step.unwrap());
                let fell = value <= ray.value + decrease * step * ray.slope;
                if fell {
                    passed += 1;
                } else {
                    failed += 1;
                }
                Given::Value(value)
            }
            Want::Gradient => {
                gradients += 1;
                Given::Gradient
            }
            Want::Both => {
                assert_eq!(point, start());
                gradients += 1;
                Given::Both(value)
            }
        };
        run.supply(given).unwrap();
    }
    assert!(failed > 10 && passed > 100, "{failed} {passed}: no test");
    assert_eq!(gradients, passed + 1);
}

#[test]
fn what_is_reported_is_what_was_asked() {
    for cost in [Cost::Separate, Cost::Joint] {
        for (name, descent) in casts() {
            let mut counted = Counted::new(Told::new(cost));
            let report = descent.minimize(start(), &mut counted).unwrap();
            let found = report.evaluations;
            assert_eq!(counted.evaluations(), found, "{name}");
            let told = counted.into_inner();
            let own = Evaluations {
                values: told.asked(Want::Value),
                gradients: told.asked(Want::Gradient),
                both: told.asked(Want::Both),
            };
            assert_eq!(own, found, "{name}");
            assert_eq!(found.all_values(), found.values + found.both);
            assert_eq!(found.all_gradients(), found.gradients + found.both);
            assert_eq!(found.calls(), found.values + found.gradients + found.both);
            match cost {
                // The start alone is asked about at once.
                Cost::Separate => assert_eq!(found.both, 1, "{name}"),
                Cost::Joint => assert_eq!((found.values, found.gradients), (0, 0), "{name}"),
            }
        }
    }
}

#[test]
fn trials_refused_and_accepted_add_up_to_the_values_that_were_asked_for() {
    for cost in [Cost::Separate, Cost::Joint] {
        for (name, descent) in casts() {
            let report = descent.minimize(start(), Told::new(cost)).unwrap();
            let r = report.refusals;
            let trials = r.too_long + r.too_short + r.outside + report.iterations;
            assert_eq!(report.evaluations.all_values(), trials + 1, "{name}");
        }
    }
}

#[test]
fn a_sum_may_stop_at_the_ceiling_and_nothing_changes_for_finders_that_read_no_values() {
    // One term of Rosenbrock's sum alone where it exceeds the ceiling already: the second is then not computed.
    struct Lazy {
        terms: u64,
        cut: u64,
    }
    impl Objective<Vec<f64>> for Lazy {
        type Error = Infallible;
        fn value(&mut self, x: &Vec<f64>) -> Result<f64, Infallible> {
            self.value_up_to(x, None)
        }
        fn value_up_to(&mut self, x: &Vec<f64>, ceiling: Option<f64>) -> Result<f64, Infallible> {
            self.terms += 1;
            let (a, b) = (1.0 - x[0], x[1] - x[0] * x[0]);
            let so_far = 100.0 * b * b;
            if ceiling.is_some_and(|c| so_far > c) {
                self.cut += 1;
                return Ok(so_far);
            }
            self.terms += 1;
            Ok(a * a + so_far)
        }
        fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), Infallible> {
            valley(x, g);
            Ok(())
        }
    }
    let rules: [fn() -> BoxedRule<f64>; 4] = [
        || Box::new(SufficientDecrease::default()),
        || Box::new(Goldstein::default()),
        || Box::new(WeakWolfe::default()),
        || Box::new(StrongWolfe::default()),
    ];
    for rule in rules {
        let descent = || {
            Descent::new(Lbfgs::default(), Bisection::new(), rule())
                .with_first_trial(FirstTrial::Unit)
                .unwrap()
        };
        let want = descent()
            .minimize(start(), Told::new(Cost::Separate))
            .unwrap();
        let mut lazy = Lazy { terms: 0, cut: 0 };
        let found = descent().minimize(start(), &mut lazy).unwrap();
        assert!(lazy.cut > 3, "{}", lazy.cut);
        assert_eq!(lazy.terms, 2 * found.evaluations.all_values() - lazy.cut);
        assert_eq!(bits(&found.point), bits(&want.point));
        assert_eq!(found, want);
    }
}

// ---- Told of every move ----

#[test]
fn the_hook_is_called_once_for_each_move_right_after_the_evaluations_there() {
    for cost in [Cost::Separate, Cost::Joint] {
        let mut all = casts();
        all.push(("a finder that goes too far", with_a_polishing_finder()));
        for (name, descent) in all {
            let mut told = Told::new(cost);
            let mut moves = Vec::new();
            let report = descent
                .minimize_watched(start(), &mut told, |run| {
                    moves.push(bits(run.point()));
                    ControlFlow::Continue(())
                })
                .unwrap();
            let mut accepted = Vec::new();
            for pair in told.events.windows(2) {
                if let Event::Accepted(x) = &pair[1] {
                    let Event::Asked(want, asked) = &pair[0] else {
                        panic!("{name}: accepted twice running")
                    };
                    assert_eq!(asked, x, "{name}: another point was evaluated last");
                    assert_ne!(*want, Want::Value, "{name}: the gradient came earlier");
                    accepted.push(x.clone());
                }
            }
            assert_eq!(accepted, moves, "{name}");
            assert_eq!(accepted.len() as u64, report.iterations, "{name}");
        }
    }
}

// ---- Errors of the caller's own ----

/// Neither `Display` nor `Error`: any type will do.
#[derive(Debug, PartialEq, Eq)]
struct Broken {
    at: usize,
}

/// Fails at the call of this number, counting values, gradients, both and the hook.
struct FailsAt {
    cost: Cost,
    call: usize,
    calls: usize,
    /// The least value among the last point moved to and the trials after it, and where.
    least: (f64, Vec<f64>),
    kind: &'static str,
}

impl FailsAt {
    fn next(&mut self, kind: &'static str) -> Result<(), Broken> {
        self.calls += 1;
        if self.calls == self.call {
            self.kind = kind;
            return Err(Broken { at: self.call });
        }
        Ok(())
    }

    fn note(&mut self, x: &[f64], value: f64) -> f64 {
        if value < self.least.0 {
            self.least = (value, x.to_vec());
        }
        value
    }
}

impl Objective<Vec<f64>> for FailsAt {
    type Error = Broken;
    fn cost(&self) -> Cost {
        self.cost
    }
    fn value(&mut self, x: &Vec<f64>) -> Result<f64, Broken> {
        self.next("value")?;
        Ok(self.note(x, valley(x, &mut [0.0; 2])))
    }
    fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), Broken> {
        self.next("gradient")?;
        valley(x, g);
        Ok(())
    }
    fn value_and_gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<f64, Broken> {
        self.next("both")?;
        let value = valley(x, g);
        Ok(self.note(x, value))
    }
    fn accepted(&mut self, x: &Vec<f64>) -> Result<(), Broken> {
        self.least = (valley(x, &mut [0.0; 2]), x.clone());
        self.next("accepted")
    }
}

#[test]
fn an_error_comes_back_as_itself_with_the_best_point_so_far() {
    let mut kinds = HashSet::new();
    let mut lost = Vec::new();
    for cost in [Cost::Separate, Cost::Joint] {
        for (name, _) in casts() {
            for call in 1..60 {
                let least = (f64::INFINITY, Vec::new());
                let mut objective = FailsAt {
                    cost,
                    call,
                    calls: 0,
                    least,
                    kind: "",
                };
                let ended = named(name).minimize(start(), &mut objective);
                let Err(DescentError::Caller { error, report }) = ended else {
                    panic!("{name}: call {call} failed, and nobody was told")
                };
                kinds.insert(objective.kind);
                assert_eq!(error, Broken { at: call });
                assert_eq!(
                    objective.calls, call,
                    "{name}: it was called again after its error"
                );
                assert_eq!(report.ending, RunEnding::Stopped);
                let (value, point) = objective.least;
                if call == 1 {
                    assert!(report.value.is_nan());
                    assert_eq!(report.point, start());
                } else if report.value != value || report.point != point {
                    lost.push(format!(
                        "{name}, call {call} ({}): {value:e} was found, {:e} comes back",
                        objective.kind, report.value
                    ));
                }
            }
        }
    }
    assert_eq!(
        kinds,
        HashSet::from(["value", "gradient", "both", "accepted"])
    );
    assert!(
        lost.is_empty(),
        "{} of them, the first: {}",
        lost.len(),
        lost[0]
    );
}

// ---- What a closure may be ----

#[test]
fn closures_need_no_annotations_in_minimize_fn() {
    let plain = strong().minimize_fn(start(), |x, g| {
        g[0] = 2.0 * x[0];
        g[1] = 2.0 * x[1];
        x[0] * x[0] + x[1] * x[1]
    });
    assert!(plain.unwrap().converged());
    let mut left = 3;
    let fallible = strong().minimize_fn(start(), |x, g| {
        left -= 1;
        if left == 0 {
            return Err(Broken { at: 3 });
        }
        Ok(valley(x, g))
    });
    match fallible {
        Err(DescentError::Caller { error, report }) => {
            assert_eq!(error, Broken { at: 3 });
            assert!(report.value < 24.2);
        }
        other => panic!("{other:?}"),
    }
    // Single precision, and arrays.
    let single = Descent::new(
        SteepestDescent,
        Bisection::new(),
        WeakWolfe::<f32>::default(),
    );
    let report = single.minimize_fn([3.0_f32], |x, g| {
        g[0] = x[0];
        0.5 * x[0] * x[0]
    });
    assert!(report.unwrap().converged());
}

#[test]
fn closures_become_objectives_plain_and_fallible() {
    let want = strong()
        .minimize(start(), Told::new(Cost::Separate))
        .unwrap();
    let value = |x: &Vec<f64>| valley(x, &mut [0.0; 2]);
    let gradient = |x: &Vec<f64>, g: &mut Vec<f64>| {
        valley(x, g);
    };
    let plain = strong()
        .minimize(start(), separate(value, gradient))
        .unwrap();
    assert_eq!(plain, want);
    let fallible = separate(
        |x: &Vec<f64>| Ok::<_, Broken>(value(x)),
        |x: &Vec<f64>, g: &mut Vec<f64>| {
            gradient(x, g);
            Ok(())
        },
    );
    assert_eq!(strong().minimize(start(), fallible).unwrap(), want);
    let want = strong().minimize(start(), Told::new(Cost::Joint)).unwrap();
    let plain = joint(|x: &Vec<f64>, g: &mut Vec<f64>| valley(x, g));
    assert_eq!(strong().minimize(start(), plain).unwrap(), want);
    let fallible = joint(|x: &Vec<f64>, g: &mut Vec<f64>| Ok::<_, Broken>(valley(x, g)));
    assert_eq!(strong().minimize(start(), fallible).unwrap(), want);
    // A joint closure still answers the single questions.
    let mut both = joint(|x: &Vec<f64>, g: &mut Vec<f64>| valley(x, g));
    let mut g = vec![0.0; 2];
    let mut want = vec![0.0; 2];
    assert_eq!(both.value(&start()), Ok(valley(&start(), &mut want)));
    assert_eq!(both.gradient(&start(), &mut g), Ok(()));
    assert_eq!(g, want);
}

#[test]
fn objectives_can_be_borrowed_and_boxed() {
    let want = strong().minimize(start(), Told::new(Cost::Joint)).unwrap();
    let mut told = Told::new(Cost::Joint);
    let mut boxed: Box<dyn Objective<Vec<f64>, Error = Infallible> + '_> = Box::new(&mut told);
    assert_eq!(boxed.cost(), Cost::Joint);
    let found: Report<Vec<f64>> = strong().minimize(start(), &mut boxed).unwrap();
    assert_eq!(found, want);
    drop(boxed);
    let accepted = told
        .events
        .iter()
        .filter(|e| matches!(e, Event::Accepted(_)))
        .count();
    assert_eq!(
        accepted as u64, want.iterations,
        "the hook is forwarded too"
    );
}

#[test]
fn both_at_once_is_one_after_the_other_unless_told_otherwise() {
    struct Plain;
    impl Objective<Vec<f64>> for Plain {
        type Error = Infallible;
        fn value(&mut self, x: &Vec<f64>) -> Result<f64, Infallible> {
            Ok(valley(x, &mut [0.0; 2]))
        }
        fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), Infallible> {
            valley(x, g);
            Ok(())
        }
    }
    let want = strong()
        .minimize(start(), Told::new(Cost::Separate))
        .unwrap();
    assert_eq!(Objective::<Vec<f64>>::cost(&Plain), Cost::Separate);
    assert_eq!(strong().minimize(start(), Plain).unwrap(), want);
}

// ---- Who plays ----

#[derive(Clone, Debug, PartialEq, Eq)]
enum Event {
    Asked(Want, Vec<u64>),
    Accepted(Vec<u64>),
}

/// Rosenbrock's function, with an account of everything it was asked and told.
struct Told {
    cost: Cost,
    events: Vec<Event>,
}

impl Told {
    fn new(cost: Cost) -> Self {
        Told {
            cost,
            events: Vec::new(),
        }
    }

    fn asked(&self, want: Want) -> u64 {
        let fits = |e: &&Event| matches!(e, Event::Asked(w, _) if *w == want);
        self.events.iter().filter(fits).count() as u64
    }

    fn gradients(&self) -> u64 {
        self.asked(Want::Gradient) + self.asked(Want::Both)
    }
}

impl Objective<Vec<f64>> for Told {
    type Error = Infallible;
    fn cost(&self) -> Cost {
        self.cost
    }
    fn value(&mut self, x: &Vec<f64>) -> Result<f64, Infallible> {
        self.events.push(Event::Asked(Want::Value, bits(x)));
        Ok(valley(x, &mut [0.0; 2]))
    }
    fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), Infallible> {
        self.events.push(Event::Asked(Want::Gradient, bits(x)));
        valley(x, g);
        Ok(())
    }
    fn value_and_gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<f64, Infallible> {
        self.events.push(Event::Asked(Want::Both, bits(x)));
        Ok(valley(x, g))
    }
    fn accepted(&mut self, x: &Vec<f64>) -> Result<(), Infallible> {
        self.events.push(Event::Accepted(bits(x)));
        Ok(())
    }
}

type AnyDescent = Descent<BoxedDirection<Vec<f64>>, BoxedFinder<f64>, BoxedRule<f64>>;

fn boxed(
    direction: impl Direction<Vec<f64>> + Send + 'static,
    finder: impl StepFinder<f64> + Send + 'static,
    rule: impl Acceptance<f64> + Send + Sync + 'static,
) -> AnyDescent {
    Descent::new(Box::new(direction), Box::new(finder), Box::new(rule))
}

fn casts() -> Vec<(&'static str, AnyDescent)> {
    let memory = |m| Lbfgs::new(m).unwrap();
    let strict = StrongWolfe::new(1e-4, 0.1).unwrap();
    let polak_ribiere = ConjugateGradient::new(Update::PolakRibierePlus);
    let hager_zhang = ConjugateGradient::new(Update::HagerZhang);
    vec![
        (
            "L-BFGS, Moré–Thuente, strong Wolfe",
            boxed(memory(10), MoreThuente::new(), StrongWolfe::default()),
        ),
        (
            "L-BFGS, bisection, weak Wolfe",
            boxed(memory(3), Bisection::new(), WeakWolfe::default()),
        ),
        (
            "L-BFGS, backtracking, sufficient decrease",
            boxed(
                memory(5),
                Backtracking::default(),
                SufficientDecrease::default(),
            ),
        ),
        (
            "L-BFGS, zoom, Goldstein",
            boxed(memory(10), BracketZoom::new(), Goldstein::default()),
        ),
        (
            "PR+, Moré–Thuente, strong Wolfe",
            boxed(polak_ribiere, MoreThuente::new(), strict),
        ),
        (
            "Hager–Zhang, zoom, strong Wolfe",
            boxed(hager_zhang, BracketZoom::new(), strict),
        ),
    ]
}

fn named(name: &str) -> AnyDescent {
    casts().into_iter().find(|(n, _)| *n == name).unwrap().1
}

fn strong() -> Descent<Lbfgs<Vec<f64>>, MoreThuente, StrongWolfe<f64>> {
    Descent::new(
        Lbfgs::new(5).unwrap(),
        MoreThuente::new(),
        StrongWolfe::default(),
    )
}

/// Minimises on after each acceptance, once, far too far: the run must go back to the accepted trial.
#[derive(Clone, Debug, Default)]
struct TooFar {
    inner: Bisection,
    went: bool,
}

impl StepFinder<f64> for TooFar {
    fn begin(&mut self, ray: &Ray<f64>, first: f64) -> f64 {
        self.went = false;
        self.inner.begin(ray, first)
    }
    fn next(&mut self, ray: &Ray<f64>, refused: &Trial<f64>, side: Side) -> Proposal<f64> {
        if self.went {
            Proposal::Spent
        } else {
            self.inner.next(ray, refused, side)
        }
    }
    fn polish(&mut self, _: &Ray<f64>, accepted: &Trial<f64>) -> Proposal<f64> {
        if std::mem::replace(&mut self.went, true) {
            return Proposal::Spent;
        }
        Proposal::Try(50.0 * accepted.step)
    }
}

fn with_a_polishing_finder() -> AnyDescent {
    let descent = boxed(
        SteepestDescent,
        TooFar::default(),
        SufficientDecrease::default(),
    );
    descent
        .with_stopping(Stopping {
            iterations: 40,
            ..Stopping::default()
        })
        .unwrap()
        .with_first_trial(FirstTrial::Fixed(1e-2))
        .unwrap()
}

fn start() -> Vec<f64> {
    vec![-1.2, 1.0]
}

/// Rosenbrock's function.
fn valley(x: &[f64], g: &mut [f64]) -> f64 {
    let (a, b) = (1.0 - x[0], x[1] - x[0] * x[0]);
    g[0] = -2.0 * a - 400.0 * x[0] * b;
    g[1] = 200.0 * b;
    a * a + 100.0 * b * b
}

fn bits(x: &[f64]) -> Vec<u64> {
    x.iter().map(|x| x.to_bits()).collect()
}
