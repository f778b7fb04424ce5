//! What the tests of the backends share: an objective over plain numbers, and runs of it over any type of vector.
#![allow(dead_code)] // each test uses its own part

use allocation_counter::measure;
use std::convert::Infallible;
use std::fmt::Debug;
use std::ops::ControlFlow;
use surefoot::acceptance::{StrongWolfe, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::finder::ThreePoint;
use surefoot::{
    BoxedDirection, BoxedRule, Descent, DescentError, Fault, FirstTrial, Given, Report, Stopping,
    Vector, Want, joint,
};

/// Number of variables: `4 x 6`, `2 x 3 x 4`, and blocks of 1, 7 and 16.
pub(crate) const N: usize = 24;

/// Moves that are compared.
pub(crate) const MOVES: usize = 50;

/// Those over which rounding has no time to grow.
pub(crate) const FIRST_MOVES: usize = 20;

/// A type of vector under test: how it is made of its components, read, and written in place.
pub(crate) trait Numbers: Vector<Scalar = f64> + Debug + Send + 'static {
    fn of(numbers: &[f64]) -> Self;
    fn read(&self, numbers: &mut [f64]);
    fn write(&mut self, numbers: &[f64]);
}

impl Numbers for Vec<f64> {
    fn of(numbers: &[f64]) -> Self {
        numbers.to_vec()
    }
    fn read(&self, numbers: &mut [f64]) {
        numbers.copy_from_slice(self);
    }
    fn write(&mut self, numbers: &[f64]) {
        self.copy_from_slice(numbers);
    }
}

/// How much steeper the walls of the valley are than its floor, for runs that take long.
pub(crate) const STEEP: f64 = 40.0;

/// The same for runs that hardly magnify rounding, begun with trials of [`FIRST_TRIAL`]. (From far shorter ones, as for want of
/// knowledge at the start of a run, the finder extrapolates a thousandfold, and with them the rounding.)
const GENTLE: f64 = 0.5;
const FIRST_TRIAL: f64 = 0.2;

/// A winding valley: a chain of bends `steepness (x_{i+1} - x_i^2)^2`, and a pull of each variable towards 1 that differs from
/// one to the next. Its minimum 0 lies at the ones.
pub(crate) fn valley(steepness: f64, x: &[f64], g: &mut [f64]) -> f64 {
    let mut value = 0.0;
    for (i, (g, x)) in g.iter_mut().zip(x).enumerate() {
        let (pull, off) = (1.0 + 0.1 * i as f64, x - 1.0);
        value += pull * off * off;
        *g = 2.0 * pull * off;
    }
    for i in 1..x.len() {
        let bend = x[i] - x[i - 1] * x[i - 1];
        value += steepness * bend * bend;
        g[i] += 2.0 * steepness * bend;
        g[i - 1] -= 4.0 * steepness * bend * x[i - 1];
    }
    value
}

pub(crate) fn start() -> [f64; N] {
    std::array::from_fn(|i| if i % 2 == 0 { -1.2 } else { 0.7 } + 0.01 * i as f64)
}

/// The valley over vectors of this type.
fn over<V: Numbers>(steepness: f64, x: &V, g: &mut V) -> f64 {
    let (mut numbers, mut slopes) = ([0.0; N], [0.0; N]);
    x.read(&mut numbers);
    let value = valley(steepness, &numbers, &mut slopes);
    g.write(&slopes);
    value
}

pub(crate) const WAYS: [&str; 4] = [
    "L-BFGS",
    "Polak–Ribière+",
    "Hager–Zhang",
    "steepest descent",
];

type AnyDescent<V> = Descent<BoxedDirection<V>, ThreePoint<f64>, BoxedRule<f64>>;

pub(crate) fn descent<V: Numbers>(way: &str) -> AnyDescent<V> {
    let narrow = || Box::new(StrongWolfe::new(1e-4, 0.1).unwrap()) as BoxedRule<f64>;
    let conjugate = |update| Box::new(ConjugateGradient::new(update)) as BoxedDirection<V>;
    let (direction, rule): (BoxedDirection<V>, _) = match way {
        "L-BFGS" => (
            Box::new(Lbfgs::new(6).unwrap()),
            Box::new(WeakWolfe::default()) as BoxedRule<f64>,
        ),
        "Polak–Ribière+" => (conjugate(Update::PolakRibierePlus), narrow()),
        "Hager–Zhang" => (conjugate(Update::HagerZhang), narrow()),
        "steepest descent" => (Box::new(SteepestDescent), narrow()),
        other => panic!("no way is called {other}"),
    };
    Descent::new(direction, ThreePoint::new(), rule)
        .with_stopping(Stopping {
            gradient: Some(0.0),
            iterations: MOVES as u64,
            ..Stopping::default()
        })
        .unwrap()
}

/// The point and the value after each move of a run.
pub(crate) fn iterates<V: Numbers>(way: &str, steepness: f64) -> Vec<([f64; N], f64)> {
    let mut all = Vec::new();
    let objective = joint(|x: &V, g: &mut V| over(steepness, x, g));
    let mut descent = descent::<V>(way);
    if steepness == GENTLE {
        let first = FirstTrial::Fixed(FIRST_TRIAL);
        descent = descent.with_first_trial(first).unwrap();
    }
    let report = descent.minimize_watched(V::of(&start()), objective, |run| {
        let mut point = [0.0; N];
        run.point().read(&mut point);
        all.push((point, run.value()));
        ControlFlow::Continue(())
    });
    let report = report.unwrap();
    assert_eq!(report.iterations, all.len() as u64, "{way}");
    all
}

/// Runs over `V` take the same points, to the last bit, as runs over `Vec<f64>`.
pub(crate) fn same_bits<V: Numbers>() {
    for way in WAYS {
        let expected = iterates::<Vec<f64>>(way, STEEP);
        let found = iterates::<V>(way, STEEP);
        assert_eq!((found.len(), expected.len()), (MOVES, MOVES), "{way}");
        for (k, (found, expected)) in found.iter().zip(&expected).enumerate() {
            assert_eq!(
                found.0.map(f64::to_bits),
                expected.0.map(f64::to_bits),
                "{way}, move {k}: {found:?} instead of {expected:?}"
            );
            assert_eq!(found.1.to_bits(), expected.1.to_bits(), "{way}, move {k}");
        }
    }
}

/// Runs over `V` take the same points as runs over `Vec<f64>` to 1e-12 of their size, over the first moves.
pub(crate) fn same_to_rounding<V: Numbers>() {
    for way in WAYS {
        let expected = iterates::<Vec<f64>>(way, GENTLE);
        let found = iterates::<V>(way, GENTLE);
        assert!(found.len().min(expected.len()) >= FIRST_MOVES, "{way}");
        let both = found.iter().zip(&expected).take(FIRST_MOVES).enumerate();
        for (k, (found, expected)) in both {
            let size = expected.0.iter().fold(0.0_f64, |m, x| m.max(x.abs()));
            for (x, y) in found.0.iter().zip(expected.0) {
                let off = (x - y).abs() / size;
                assert!(off <= 1e-12, "{way}, move {k}: off by {off:e}");
            }
        }
    }
}

/// Allocations during the iterations of a run, from its start to its end.
pub(crate) fn allocations<V: Numbers>(way: &str) -> u64 {
    let mut run = descent::<V>(way).start(V::of(&start()));
    let counted = measure(|| {
        let (mut x, mut g) = ([0.0; N], [0.0; N]);
        while let Some(request) = run.request() {
            request.point.read(&mut x);
            let value = valley(STEEP, &x, &mut g);
            let given = match request.want {
                Want::Value => Given::Value(value),
                Want::Gradient => Given::Gradient,
                Want::Both => Given::Both(value),
            };
            if request.want != Want::Value {
                request.gradient.write(&g);
            }
            run.supply(given).unwrap();
        }
    });
    assert_eq!(run.iterations(), MOVES as u64, "{way}");
    counted.count_total
}

pub(crate) fn none_allocates<V: Numbers>() {
    for way in WAYS {
        assert_eq!(allocations::<V>(way), 0, "{way}");
    }
}

/// The end of a run whose objective replaces the gradient by `bad` from its call number `from` on, counted from 0.
pub(crate) fn replaced<V: Numbers>(
    way: &str,
    bad: &V,
    from: usize,
) -> Result<Report<V>, DescentError<V, Infallible>> {
    let mut calls = 0;
    descent::<V>(way).minimize_fn(V::of(&start()), |x, g| {
        calls += 1;
        if calls > from {
            g.clone_from(bad);
            let mut numbers = [0.0; N];
            x.read(&mut numbers);
            valley(STEEP, &numbers, &mut [0.0; N])
        } else {
            over(STEEP, x, g)
        }
    })
}

/// A gradient of another length ends a run with the fault that says so, at the start and later.
pub(crate) fn another_length_is_named<V: Numbers>(other: &V) {
    assert_ne!(other.dim(), N);
    let due = Fault::LengthChanged {
        expected: N,
        found: other.dim(),
    };
    for way in WAYS {
        for from in [0, 1, 9] {
            match replaced(way, other, from) {
                Err(DescentError::Input { fault, report }) => {
                    assert_eq!(fault, due, "{way}, from {from}");
                    assert_eq!(report.point.dim(), N);
                }
                _ => panic!("{way}, from {from}: {due:?} was due"),
            }
        }
    }
}

/// A gradient of the same length but another structure never makes a run move, nor lets it look converged.
pub(crate) fn another_structure_moves_nothing<V: Numbers>(other: &V) {
    assert_eq!(other.dim(), N);
    for way in WAYS {
        for from in [0, 1, 9] {
            let ended = replaced(way, other, from);
            let report = match &ended {
                Ok(report) => report,
                Err(error) => error.report(),
            };
            assert!(!report.converged(), "{way}, from {from}");
            // One move at most for each good gradient but the first.
            let good = from.saturating_sub(1) as u64;
            assert!(report.iterations <= good, "{way}, from {from}");
            let (mut point, begun) = ([0.0; N], start());
            report.point.read(&mut point);
            assert!(from > 1 || point == begun, "{way}, from {from}");
        }
    }
}
