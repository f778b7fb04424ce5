//! No trial of a search and no iteration of a run allocates. The counter is tried on an allocation first.
#![cfg(feature = "alloc")]

use allocation_counter::measure;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Form, Lbfgs, SinglePairs, SteepestDescent, Update};
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, InterpolatingBacktracking, MoreThuente,
};
use surefoot::{
    Acceptance, BoxedDirection, BoxedFinder, BoxedRule, Cost, Descent, Direction, FirstTrial,
    Given, Need, Proposal, Ray, Run, RunEnding, Sample, Side, StepFinder, StepSearch, Stopping,
    Trial, Vector, Want,
};

const N: usize = 20;

#[test]
fn the_counter_notices_one_allocation_in_a_trial_and_in_an_iteration() {
    /// Bisection that allocates each time it is asked.
    #[derive(Default)]
    struct Wasteful(Bisection);
    impl StepFinder<f64> for Wasteful {
        fn begin(&mut self, ray: &Ray<f64>, first: f64) -> f64 {
            self.0.begin(ray, first)
        }
        fn next(&mut self, ray: &Ray<f64>, refused: &Trial<f64>, side: Side) -> Proposal<f64> {
            std::hint::black_box(Box::new(refused.step));
            self.0.next(ray, refused, side)
        }
    }
    let mut search = StepSearch::new(Wasteful::default(), narrow());
    let counted = measure(|| serve_search(&mut search, 1e-3)).count_total;
    assert_eq!(counted, u64::from(search.log().trials()) - 1);
    let mut run = Descent::new(SteepestDescent, Wasteful::default(), narrow()).start(start_vec());
    assert!(measure(|| serve(&mut run)).count_total > 0);
}

#[test]
fn no_trial_of_a_search_allocates() {
    for (name, rule) in rules() {
        let mut search = StepSearch::new(MoreThuente::new(), &rule);
        none(
            name,
            measure(|| serve_search(&mut search, 1e-3)).count_total,
        );
        let mut search = StepSearch::new(BracketZoom::new(), &rule);
        none(
            name,
            measure(|| serve_search(&mut search, 1e-3)).count_total,
        );
        let mut search = StepSearch::new(Bisection::new(), &rule);
        none(
            name,
            measure(|| serve_search(&mut search, 1e-3)).count_total,
        );
        let mut search = StepSearch::new(Backtracking::default(), &rule);
        none(name, measure(|| serve_search(&mut search, 1e3)).count_total);
        let mut search = StepSearch::new(InterpolatingBacktracking::new(), &rule);
        none(name, measure(|| serve_search(&mut search, 1e3)).count_total);
    }
    for (name, finder) in finders() {
        // Several searches of one machine, near and far, and along an edge of the domain.
        let mut search = StepSearch::new(finder, Box::new(narrow()) as BoxedRule<f64>);
        let counted = measure(|| {
            for first in [1e-6, 1.0, 1e6, 1e300] {
                serve_search(&mut search, first);
            }
            let outcome = search.along(Ray::new(1.0, -1.0), 4.0, |a: f64| {
                (a - a.sqrt(), 1.0 - 0.5 / a.sqrt())
            });
            assert!(outcome.is_ok());
            let outcome = search.along(Ray::new(0.0, -1.0), 4.0, |a: f64| {
                if a > 1.5 {
                    Sample::OutsideDomain
                } else {
                    Sample::Both(-a, -1.0)
                }
            });
            assert!(outcome.is_ok());
        });
        none(name, counted.count_total);
    }
}

#[test]
fn no_iteration_of_a_run_allocates_over_vectors() {
    for cost in [Cost::Separate, Cost::Joint] {
        for (finder_name, _) in finders() {
            for (rule_name, _) in rules() {
                for (way, _) in directions::<Vec<f64>>() {
                    let mut run = descent::<Vec<f64>>(way, finder_name, rule_name)
                        .with_cost(cost)
                        .start(start_vec());
                    let counted = measure(|| serve(&mut run));
                    none(
                        &format!("{way}, {finder_name}, {rule_name}"),
                        counted.count_total,
                    );
                    assert!(run.iterations() >= 10);
                }
            }
        }
    }
}

#[test]
fn no_iteration_of_a_run_allocates_over_arrays() {
    for (finder_name, _) in finders() {
        for (way, _) in directions::<[f64; N]>() {
            let mut run = descent::<[f64; N]>(way, finder_name, "strong Wolfe").start(start());
            let counted = measure(|| serve(&mut run));
            none(&format!("{way}, {finder_name}"), counted.count_total);
            assert!(run.iterations() >= 10);
        }
    }
}

#[test]
fn a_run_over_arrays_allocates_nothing_at_all_unless_its_direction_does() {
    let counted = measure(|| {
        let way = ConjugateGradient::new(Update::HagerZhang);
        let descent = Descent::new(way, MoreThuente::new(), narrow());
        let report = descent.minimize_fn(start(), |x, g| bowl(x, g)).unwrap();
        assert!(report.converged());
    });
    assert_eq!(counted.count_total, 0);
}

#[test]
fn failed_searches_resets_and_the_edge_of_the_domain_allocate_nothing() {
    // x - ln x, whose gradient's sign is wrong from 2 on: searches fail there, and the remedies take their turns.
    let descent = Descent::new(
        Lbfgs::new(4).unwrap(),
        MoreThuente::new(),
        StrongWolfe::default(),
    )
    .with_first_trial(FirstTrial::Fixed(30.0))
    .unwrap();
    let mut run = descent.start(vec![1.9_f64]);
    let counted = measure(|| {
        while let Some(request) = run.request() {
            let x: f64 = request.point[0];
            let sign = if x > 0.3 { 1.0 } else { -1.0 };
            request.gradient[0] = sign * (1.0 - 1.0 / x);
            let given = match request.want {
                _ if x <= 0.0 => Given::OutsideDomain,
                Want::Value => Given::Value(x - x.ln()),
                Want::Gradient => Given::Gradient,
                Want::Both => Given::Both(x - x.ln()),
            };
            run.supply(given).unwrap();
        }
    });
    assert_eq!(counted.count_total, 0, "{:?}", run.ending());
    let (_, report) = run.finish();
    assert!(report.refusals.outside > 0);
}

#[test]
fn a_run_that_ends_in_rounding_allocates_nothing() {
    // Down to the last digit, where no search can succeed any more.
    let mut endings = Vec::new();
    for (finder_name, _) in finders() {
        for (way, _) in directions::<Vec<f64>>() {
            let descent = descent::<Vec<f64>>(way, finder_name, "strong Wolfe")
                .with_stopping(Stopping {
                    gradient: Some(1e-30),
                    iterations: 2000,
                    ..Stopping::default()
                })
                .unwrap();
            let mut run = descent.start(start_vec());
            let mut off = [0.0; N];
            let counted = measure(|| {
                while let Some(request) = run.request() {
                    for (i, (off, x)) in off.iter_mut().zip(request.point).enumerate() {
                        *off = x - 1.0 / (i + 3) as f64;
                    }
                    let value = 1e3 + bowl(&off, request.gradient);
                    run.supply(Given::Both(value)).unwrap();
                }
            });
            none(
                &format!("{way}, {finder_name}: {:?}", run.ending()),
                counted.count_total,
            );
            endings.push(run.ending().unwrap());
        }
    }
    let converged = |e: &&RunEnding<f64>| matches!(e, RunEnding::Converged(_));
    let by_chance = endings.iter().filter(converged).count();
    assert!(by_chance < endings.len() / 4, "{endings:?}");
}

// ---- What is served ----

/// Memory that a run holds, in vectors of its own length.
fn vectors_held(direction: impl Direction<Vec<f64>>) -> f64 {
    const LONG: usize = 200_000;
    let descent = Descent::new(direction, MoreThuente::new(), WeakWolfe::default());
    let start = vec![1.0; LONG];
    let counted = measure(|| {
        let mut run = descent.start(start);
        for _ in 0..60 {
            let Some(request) = run.request() else { break };
            for (i, (g, x)) in request.gradient.iter_mut().zip(request.point).enumerate() {
                *g = x * (1.0 + (i % 50) as f64);
            }
            let value = 0.5 * request.gradient.dot(request.point);
            run.supply(Given::Both(value)).unwrap();
        }
        assert!(run.iterations() > 20);
    });
    // The start itself was allocated before.
    1.0 + counted.bytes_max as f64 / (8 * LONG) as f64
}

#[test]
fn a_run_holds_no_more_vectors_than_it_says() {
    // The few small buffers of a run are far below a hundredth of a vector here.
    let at_most = |name: &str, held: f64, vectors: usize| {
        assert!(held <= vectors as f64 + 0.01, "{name} holds {held} vectors");
        assert!(
            held > vectors as f64 - 1.5,
            "{name} holds {held}: is anything counted?"
        );
    };
    at_most("steepest descent", vectors_held(SteepestDescent), 5);
    for update in [Update::PolakRibierePlus, Update::HagerZhang] {
        let held = vectors_held(ConjugateGradient::new(update));
        at_most("conjugate gradients", held, 6);
    }
    for pairs in [1, 3, 10] {
        for form in [Form::Compact, Form::TwoLoop] {
            let lbfgs = Lbfgs::new(pairs).unwrap().with_form(form);
            at_most("L-BFGS", vectors_held(lbfgs), 2 * pairs + 6);
        }
        let single = Lbfgs::new(pairs)
            .unwrap()
            .with_history(SinglePairs::default());
        at_most("L-BFGS, single precision", vectors_held(single), pairs + 6);
    }
}

fn none(name: &str, allocations: u64) {
    assert_eq!(allocations, 0, "{name}");
}

fn narrow() -> StrongWolfe<f64> {
    StrongWolfe::new(1e-4, 1e-3).unwrap()
}

/// `(a - 2)^4` from the step `first`.
fn serve_search<F: StepFinder<f64>, A: Acceptance<f64>>(
    search: &mut StepSearch<f64, F, A>,
    first: f64,
) {
    search.begin(Ray::new(16.0, -32.0), first).unwrap();
    while let Some(ask) = search.request() {
        let (value, slope) = ((ask.step - 2.0).powi(4), 4.0 * (ask.step - 2.0).powi(3));
        let sample = match ask.need {
            Need::Value => Sample::Value(value),
            Need::Slope => Sample::Slope(slope),
            Need::Both => Sample::Both(value, slope),
        };
        search.supply(sample).unwrap();
    }
    assert!(search.outcome().is_some());
}

/// `sum (i + 1) x_i^2 / 2`.
fn bowl(x: &[f64], g: &mut [f64]) -> f64 {
    let mut value = 0.0;
    for (i, (x, g)) in x.iter().zip(g).enumerate() {
        *g = (i + 1) as f64 * x;
        value += 0.5 * *g * x;
    }
    value
}

fn start() -> [f64; N] {
    std::array::from_fn(|i| 1.0 + (i % 3) as f64)
}

fn start_vec() -> Vec<f64> {
    start().to_vec()
}

fn serve<V, D, F, A>(run: &mut Run<V, D, F, A>)
where
    V: Vector<Scalar = f64> + AsRef<[f64]> + AsMut<[f64]>,
    D: Direction<V>,
    F: StepFinder<f64>,
    A: Acceptance<f64>,
{
    let mut scratch = [0.0; N];
    while let Some(request) = run.request() {
        let point = request.point.as_ref();
        let given = match request.want {
            Want::Value => Given::Value(bowl(point, &mut scratch)),
            Want::Gradient => {
                bowl(point, request.gradient.as_mut());
                Given::Gradient
            }
            Want::Both => Given::Both(bowl(point, request.gradient.as_mut())),
        };
        run.supply(given).unwrap();
    }
}

// ---- Who plays ----

fn finders() -> [(&'static str, BoxedFinder<f64>); 5] {
    [
        ("Moré–Thuente", Box::new(MoreThuente::new())),
        ("zoom", Box::new(BracketZoom::new())),
        ("bisection", Box::new(Bisection::new())),
        ("backtracking", Box::new(Backtracking::default())),
        (
            "interpolating backtracking",
            Box::new(InterpolatingBacktracking::new()),
        ),
    ]
}

fn rules() -> [(&'static str, BoxedRule<f64>); 4] {
    [
        (
            "sufficient decrease",
            Box::new(SufficientDecrease::default()),
        ),
        ("Goldstein", Box::new(Goldstein::default())),
        ("weak Wolfe", Box::new(WeakWolfe::default())),
        ("strong Wolfe", Box::new(narrow())),
    ]
}

fn directions<V: Vector + Send + 'static>() -> Vec<(&'static str, BoxedDirection<V>)> {
    let conjugate = |update| Box::new(ConjugateGradient::new(update));
    vec![
        ("steepest descent", Box::new(SteepestDescent)),
        ("Fletcher–Reeves", conjugate(Update::FletcherReeves)),
        ("Polak–Ribière+", conjugate(Update::PolakRibierePlus)),
        ("Hestenes–Stiefel+", conjugate(Update::HestenesStiefelPlus)),
        ("Dai–Yuan", conjugate(Update::DaiYuan)),
        ("Hager–Zhang", conjugate(Update::HagerZhang)),
        ("L-BFGS", Box::new(Lbfgs::new(7).unwrap())),
    ]
}

fn descent<V: Vector<Scalar = f64> + Send + 'static>(
    way: &str,
    finder: &str,
    rule: &str,
) -> Descent<BoxedDirection<V>, BoxedFinder<f64>, BoxedRule<f64>> {
    let direction = directions()
        .into_iter()
        .find(|(name, _)| *name == way)
        .unwrap()
        .1;
    let finder = finders()
        .into_iter()
        .find(|(name, _)| *name == finder)
        .unwrap()
        .1;
    let rule = rules()
        .into_iter()
        .find(|(name, _)| *name == rule)
        .unwrap()
        .1;
    Descent::new(direction, finder, rule)
        .with_stopping(Stopping {
            iterations: 60,
            gradient: Some(1e-9),
            ..Stopping::default()
        })
        .unwrap()
}
