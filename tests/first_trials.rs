//! The first trial of each search against its formula, recomputed from the points and gradients that the run visited; the
//! cap on the length of a move; values with noise.
#![cfg(feature = "alloc")]

use surefoot::acceptance::{AnyFinite, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, Expansion, GoldenSection, HagerZhang, MoreThuente,
};
use surefoot::{
    BoxedDirection, BoxedFinder, BoxedRule, Descent, FirstTrial, Given, Limits, Reference, Report,
    RunEnding, SettingError, Stopping, Want,
};

type X = [f64; 3];
type Function = fn(&X) -> (f64, X);

/// A bowl with curvatures 1, 5 and 30, and a quartic part.
fn bowl(x: &X) -> (f64, X) {
    let w = [1.0, 5.0, 30.0];
    let part = |i: usize| 0.5 * w[i] * x[i] * x[i] + 0.1 * x[i].powi(4);
    let value = part(0) + part(1) + part(2);
    (value, [0, 1, 2].map(|i| w[i] * x[i] + 0.4 * x[i].powi(3)))
}

/// Concave about the origin, where the inner product of moves and changes of the gradient is negative.
fn hill(x: &X) -> (f64, X) {
    let part = |x: f64| -0.5 * x * x + 0.05 * x.powi(4);
    let value = part(x[0]) + part(x[1]) + part(x[2]);
    (value, x.map(|x| -x + 0.2 * x.powi(3)))
}

fn dot(a: &X, b: &X) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

fn minus(a: &X, b: &X) -> X {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}

/// Where a search of steepest descent began, and the first step that it tried.
#[derive(Clone, Copy, Debug)]
struct Begun {
    x: X,
    value: f64,
    g: X,
    first: f64,
}

/// The searches of a run of steepest descent.
fn searches(
    f: Function,
    x0: X,
    first: FirstTrial,
    rule: BoxedRule<f64>,
    how: Reference,
) -> Vec<Begun> {
    let descent = Descent::new(SteepestDescent, Backtracking::<f64>::default(), rule)
        .with_first_trial(first)
        .unwrap()
        .with_reference(how)
        .unwrap()
        .with_stopping(Stopping {
            gradient: Some(1e-5),
            iterations: 40,
            ..Stopping::default()
        })
        .unwrap();
    let mut run = descent.start(x0);
    let (mut seen, mut known) = (Vec::new(), None);
    while let Some(request) = run.request() {
        let (want, point) = (request.want, *request.point);
        let (value, gradient) = f(&point);
        *request.gradient = gradient;
        // The first point asked about after a move is that of the first trial.
        if let Some(&g) = run.gradient()
            && known != Some(run.iterations())
        {
            known = Some(run.iterations());
            let x = *run.point();
            let first = -dot(&minus(&point, &x), &g) / dot(&g, &g);
            let value = run.value();
            seen.push(Begun { x, value, g, first });
        }
        let given = match want {
            Want::Value => Given::Value(value),
            Want::Gradient => Given::Gradient,
            Want::Both => Given::Both(value),
        };
        run.supply(given).unwrap();
    }
    seen
}

/// Along `d = -g` the step of a move from one search to the next.
fn step(from: &Begun, to: &Begun) -> f64 {
    -dot(&minus(&to.x, &from.x), &from.g) / dot(&from.g, &from.g)
}

fn close(found: f64, wanted: f64, what: &str) {
    // The step is read from the points, which are rounded.
    assert!(
        (found - wanted).abs() <= 1e-6 * wanted.abs(),
        "{what}: {found:e}, not {wanted:e}"
    );
}

fn armijo() -> BoxedRule<f64> {
    Box::new(SufficientDecrease::new(1e-4).unwrap())
}

const START: X = [3.0, -2.0, 1.0];

/// Nocedal & Wright 2006, eq. 3.60: `2 (f - f_last) / slope`; where the value did not fall, the same first-order change.
fn last_decrease(before: &Begun, now: &Begun) -> f64 {
    let fell = 2.0 * (before.value - now.value) / dot(&now.g, &now.g);
    if fell > 0.0 {
        fell
    } else {
        same_change(before, now)
    }
}

fn same_change(before: &Begun, now: &Begun) -> f64 {
    step(before, now) * (dot(&before.g, &before.g) / dot(&now.g, &now.g))
}

/// J. Barzilai & J. M. Borwein, IMA J. Numer. Anal. 8 (1988) 141-148, eq. 5 and 6, with the safeguard.
fn barzilai_borwein(before: &Begun, now: &Begun, long: bool) -> (f64, bool) {
    let (s, y) = (minus(&now.x, &before.x), minus(&now.g, &before.g));
    let s_y = dot(&s, &y);
    let ratio = if long {
        dot(&s, &s) / s_y
    } else {
        s_y / dot(&y, &y)
    };
    if s_y > 0.0 {
        (ratio, false)
    } else {
        (last_decrease(before, now), true)
    }
}

#[test]
fn barzilai_and_borwein() {
    let mut safeguarded = 0;
    for (long, first) in [
        (true, FirstTrial::BarzilaiBorweinLong),
        (false, FirstTrial::BarzilaiBorweinShort),
    ] {
        for (f, x0) in [(bowl as Function, START), (hill, [0.01, -0.02, 0.015])] {
            let seen = searches(
                f,
                x0,
                first,
                armijo(),
                Reference::LargestOfLast { values: 10 },
            );
            assert!(seen.len() >= 6, "only {} searches", seen.len());
            for (k, pair) in seen
                .windows(2)
                .enumerate()
                .filter(|(_, p)| p[1].g != p[0].g)
            {
                let (wanted, safeguard) = barzilai_borwein(&pair[0], &pair[1], long);
                safeguarded += u32::from(safeguard);
                close(
                    pair[1].first,
                    wanted,
                    &format!("{first:?}, search {}", k + 2),
                );
            }
        }
    }
    assert!(
        safeguarded >= 4,
        "the safeguard was used {safeguarded} times"
    );
}

#[test]
fn steps_that_follow_the_last_one() {
    for (f, x0) in [(bowl as Function, START), (hill, [0.01, -0.02, 0.015])] {
        for (first, formula) in [
            (
                FirstTrial::LastDecrease,
                last_decrease as fn(&Begun, &Begun) -> f64,
            ),
            (FirstTrial::ByDirection, last_decrease),
            (FirstTrial::SameChange, same_change),
            // ACM Trans. Math. Software 32 (2006) 113-137, step I2 with psi_2 = 2.
            (FirstTrial::HagerZhang, |before, now| {
                2.0 * step(before, now)
            }),
        ] {
            let seen = searches(f, x0, first, armijo(), Reference::Current);
            assert!(seen.len() >= 6, "{first:?}: only {} searches", seen.len());
            for (k, pair) in seen.windows(2).enumerate() {
                close(
                    pair[1].first,
                    formula(&pair[0], &pair[1]),
                    &format!("{first:?}, {k}"),
                );
            }
            // The opening of the same paper, step I0: 0.01 |x| / |g| in largest magnitudes.
            let most = |x: &X| x.iter().fold(0.0_f64, |m, x| m.max(x.abs()));
            close(seen[0].first, 0.01 * most(&x0) / most(&f(&x0).1), "opening");
        }
    }
}

#[test]
fn openings_at_the_origin() {
    let away = |x: &X| (7.0 + x[0] + 2.0 * x[1], [1.0, 2.0, 0.0]);
    let seen = searches(
        away,
        [0.0; 3],
        FirstTrial::HagerZhang,
        armijo(),
        Reference::Current,
    );
    close(seen[0].first, 0.01 * 7.0 / 5.0, "0.01 |f| / g.g");
    let level = |x: &X| (x[0] + 2.0 * x[1], [1.0, 2.0, 0.0]);
    let seen = searches(
        level,
        [0.0; 3],
        FirstTrial::HagerZhang,
        armijo(),
        Reference::Current,
    );
    close(seen[0].first, 1.0, "1");
}

#[test]
fn steps_of_their_own() {
    let any = || -> BoxedRule<f64> { Box::new(AnyFinite) };
    for (first, formula) in [
        (FirstTrial::Unit, (|_| 1.0) as fn(usize) -> f64),
        (FirstTrial::Fixed(0.01), |_| 0.01),
        (FirstTrial::Diminishing { first: 0.05 }, |k| {
            0.05 / (k as f64 + 1.0)
        }),
    ] {
        let start = if first == FirstTrial::Unit {
            [1e-3, 2e-3, -1e-3]
        } else {
            START
        };
        let f: Function = if first == FirstTrial::Unit {
            hill
        } else {
            bowl
        };
        let seen = searches(f, start, first, any(), Reference::Current);
        assert!(seen.len() >= 10, "{first:?}: only {} searches", seen.len());
        for (k, begun) in seen.iter().enumerate() {
            close(begun.first, formula(k), &format!("{first:?}, search {k}"));
        }
        // Any finite value is taken: each move is its first trial.
        for (k, pair) in seen.windows(2).enumerate() {
            close(
                step(&pair[0], &pair[1]),
                formula(k),
                &format!("{first:?}, move {k}"),
            );
        }
    }
    // Moves of diminishing steps converge on a bowl; their sum, the harmonic series, has no end.
    let seen = searches(
        bowl,
        START,
        FirstTrial::Diminishing { first: 0.05 },
        any(),
        Reference::Current,
    );
    assert!(seen.last().unwrap().value < 0.1 * seen[0].value);
}

// ---- The cap on a move ----

fn capped(
    finder: BoxedFinder<f64>,
    direction: BoxedDirection<X>,
    rule: BoxedRule<f64>,
    cap: f64,
    limits: Limits<f64>,
) -> (Report<X>, u64) {
    let descent = Descent::new(direction, finder, rule)
        .with_longest_move(cap)
        .unwrap()
        .with_limits(limits)
        .with_stopping(Stopping {
            gradient: Some(1e-4),
            iterations: 2_000,
            ..Stopping::default()
        })
        .unwrap();
    let mut run = descent.start(START);
    let mut full = 0;
    while let Some(request) = run.request() {
        let (want, point) = (request.want, *request.point);
        let (value, gradient) = bowl(&point);
        *request.gradient = gradient;
        let x = *run.point();
        let longest = minus(&point, &x)
            .iter()
            .fold(0.0_f64, |m, d| m.max(d.abs()));
        // The point itself is rounded, which is no part of the move.
        assert!(
            longest <= cap * (1.0 + 1e-15) + 1e-15,
            "a trial {longest:e} away, cap {cap:e}"
        );
        let before = run.iterations();
        let given = match want {
            Want::Value => Given::Value(value),
            Want::Gradient => Given::Gradient,
            Want::Both => Given::Both(value),
        };
        run.supply(given).unwrap();
        if run.iterations() > before {
            let moved = minus(run.point(), &x)
                .iter()
                .fold(0.0_f64, |m, d| m.max(d.abs()));
            assert!(
                moved <= cap * (1.0 + 1e-15) + 1e-15,
                "a move of {moved:e}, cap {cap:e}"
            );
            full += u64::from(moved >= 0.999 * cap);
        }
    }
    (run.finish().1, full)
}

#[test]
fn no_trial_is_longer_than_the_cap() {
    for cap in [0.01, 0.3, 1e3] {
        for number in 0..6 {
            for way in 0..3 {
                let finder: BoxedFinder<f64> = match number {
                    0 => Box::new(Bisection::new()),
                    1 => Box::new(MoreThuente::new()),
                    2 => Box::new(BracketZoom::new()),
                    3 => Box::new(HagerZhang::new()),
                    4 => Box::new(Expansion::default()),
                    _ => Box::new(GoldenSection::new(1e-3).unwrap()),
                };
                let direction: BoxedDirection<X> = match way {
                    0 => Box::new(SteepestDescent),
                    1 => Box::new(ConjugateGradient::new(Update::PolakRibierePlus)),
                    _ => Box::new(Lbfgs::new(4).unwrap()),
                };
                let rule: BoxedRule<f64> = match way {
                    0 => Box::new(WeakWolfe::default()),
                    _ => Box::new(StrongWolfe::new(1e-4, 0.1).unwrap()),
                };
                let (report, full) = capped(finder, direction, rule, cap, Limits::default());
                let what = format!("cap {cap}, finder {number}, direction {way}");
                assert!(report.converged(), "{what}: {}", report.ending);
                // From 3 away, short moves are needed, and many.
                let least = if cap < 1.0 { (1.0 / cap) as u64 } else { 0 };
                assert!(full >= least, "{what}: {full} full moves");
                assert!(
                    cap < 1.0 || full == 0,
                    "{what}: {full} moves of the whole cap"
                );
            }
        }
    }
}

#[test]
fn the_tighter_of_cap_and_bound_holds() {
    // Steps up to 1e-3 along gradients of 30 at most are shorter than the cap.
    let limits = Limits::new(0.0, 1e-3, 50).unwrap();
    let (report, full) = capped(
        Box::new(Bisection::new()),
        Box::new(SteepestDescent),
        armijo(),
        0.5,
        limits,
    );
    assert_eq!(full, 0, "{}", report.ending);
    assert_eq!(report.ending, RunEnding::IterationsSpent);
}

// ---- Noise ----

#[test]
fn noise_of_the_values_is_allowed_for() {
    // Values off by up to 1e-3, by a hash of the point; gradients are exact. The bowl's decrease drowns near its minimum.
    let noisy = |x: &X, g: &mut X| {
        let (value, gradient) = bowl(x);
        *g = gradient;
        let bits = x.iter().fold(17_u64, |h, x| {
            (h ^ x.to_bits()).wrapping_mul(0x9E37_79B9_7F4A_7C15)
        });
        value + 1e-3 * ((bits >> 11) as f64 / (1_u64 << 52) as f64 - 1.0)
    };
    let with = |noise: f64| {
        Descent::new(
            Lbfgs::new(5).unwrap(),
            MoreThuente::new(),
            WeakWolfe::default(),
        )
        .with_value_noise(noise)
        .unwrap()
        .with_stopping(Stopping {
            gradient: Some(1e-8),
            iterations: 500,
            ..Stopping::default()
        })
        .unwrap()
        .minimize_fn(START, noisy)
        .unwrap()
    };
    let told = with(1e-3);
    assert!(told.converged(), "{}", told.ending);
    assert!(
        !with(0.0).converged(),
        "without the allowance nothing should get so far"
    );
    // No noise is no change, bit for bit.
    let plain = |noise: Option<f64>| {
        let descent = Descent::new(
            Lbfgs::new(5).unwrap(),
            MoreThuente::new(),
            WeakWolfe::default(),
        );
        let descent = match noise {
            Some(noise) => descent.with_value_noise(noise).unwrap(),
            None => descent,
        };
        let objective = surefoot::separate(|x: &X| bowl(x).0, |x: &X, g: &mut X| *g = bowl(x).1);
        descent.minimize(START, objective).unwrap()
    };
    assert_eq!(plain(Some(0.0)), plain(None));
}

#[test]
fn settings_out_of_range() {
    let plain = || Descent::new(SteepestDescent, Backtracking::<f64>::default(), AnyFinite);
    for bad in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        for first in [
            FirstTrial::Fixed(bad),
            FirstTrial::Diminishing { first: bad },
        ] {
            assert_eq!(
                plain().with_first_trial(first).err(),
                Some(SettingError::FirstTrial)
            );
        }
        assert_eq!(
            plain().with_longest_move(bad).err(),
            Some(SettingError::LongestMove)
        );
    }
    for bad in [-1e-300, f64::NAN, f64::INFINITY] {
        assert_eq!(
            plain().with_value_noise(bad).err(),
            Some(SettingError::ValueNoise)
        );
    }
    for (error, sentence) in [
        (
            SettingError::FirstTrial,
            "a fixed or diminishing first trial must be positive and finite",
        ),
        (
            SettingError::LongestMove,
            "the cap on the length of a move must be positive and finite",
        ),
        (
            SettingError::ValueNoise,
            "the noise of the values must be finite and not negative",
        ),
    ] {
        assert_eq!(error.to_string(), sentence);
    }
}
