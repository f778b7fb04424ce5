//! The first trial of each search against its formula, recomputed from the points and gradients that the run visited; the
//! cap on the length of a move; values with noise.
#![cfg(feature = "alloc")]

use surefoot::acceptance::{AnyFinite, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, Expansion, GoldenSection, HagerZhang, MoreThuente,
};
use surefoot::{
    BoxedDirection, BoxedFinder, BoxedRule, Cost, Descent, FirstTrial, Given, Limits, Reference,
    Report, RunEnding, SettingError, Stopping, Want,
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

// ---- Hager and Zhang's quadratic step ----

/// One search of a run of steepest descent: where it began, the probe before it, and the first trial.
struct Probed {
    begun: Begun,
    probe: f64,
    probed: f64,
}

/// The searches of a run, but the first, which has no probe.
fn probed_searches(f: Function, x0: X, cost: Cost) -> Vec<Probed> {
    let descent = Descent::new(SteepestDescent, Backtracking::<f64>::default(), armijo())
        .with_first_trial(FirstTrial::HagerZhangQuadratic)
        .unwrap()
        .with_cost(cost)
        .with_stopping(Stopping {
            gradient: Some(1e-5),
            iterations: 40,
            ..Stopping::default()
        })
        .unwrap();
    let mut run = descent.start(x0);
    let mut seen: Vec<Probed> = Vec::new();
    let (mut known, mut asked) = (0, 0_u64);
    while let Some(request) = run.request() {
        let (want, point, ceiling) = (request.want, *request.point, request.ceiling);
        let (value, gradient) = f(&point);
        *request.gradient = gradient;
        asked += 1;
        if let Some(&g) = run.gradient() {
            let x = *run.point();
            let step = -dot(&minus(&point, &x), &g) / dot(&g, &g);
            if run.iterations() > known {
                known = run.iterations();
                let begun = Begun {
                    x,
                    value: run.value(),
                    g,
                    first: f64::NAN,
                };
                seen.push(Probed {
                    begun,
                    probe: step,
                    probed: value,
                });
                let alone = match cost {
                    Cost::Separate => Want::Value,
                    Cost::Joint => Want::Both,
                };
                assert_eq!((want, ceiling), (alone, Some(run.value())));
            } else if let Some(last) = seen.last_mut()
                && last.begun.first.is_nan()
            {
                last.begun.first = step;
            }
        }
        let given = match want {
            Want::Value => Given::Value(value),
            Want::Gradient => Given::Gradient,
            Want::Both => Given::Both(value),
        };
        run.supply(given).unwrap();
    }
    // The probe is counted like any other evaluation.
    assert_eq!(run.finish().1.evaluations.calls(), asked);
    seen
}

/// W. W. Hager & H. Zhang, SIAM J. Optim. 16 (2005) 170-192, section 4, steps I1 and I2, from the search before and the probe;
/// and whether it was I1.
fn initial_guess(before: &Begun, now: &Probed) -> (f64, bool) {
    let (fall, a) = (dot(&now.begun.g, &now.begun.g), now.probe);
    // q(t) = value - fall t + c t^2
    let c = ((now.probed - now.begun.value) / a + fall) / a;
    if now.probed <= now.begun.value && c > 0.0 {
        (fall / (2.0 * c), true)
    } else {
        (2.0 * step(before, &now.begun), false)
    }
}

#[test]
fn quadratic_steps_follow_their_formula() {
    let (mut by_parabola, mut doubled) = (0, 0);
    for cost in [Cost::Separate, Cost::Joint] {
        for (f, x0) in [
            (bowl as Function, START),
            (hill, [0.01, -0.02, 0.015]),
            (canyon, [0.5, 0.001, 0.0]),
        ] {
            let seen = probed_searches(f, x0, cost);
            assert!(seen.len() >= 6, "only {} searches", seen.len());
            for (k, pair) in seen.windows(2).enumerate() {
                let (before, now) = (&pair[0].begun, &pair[1]);
                close(now.probe, 0.1 * step(before, &now.begun), "a tenth");
                let (wanted, parabola) = initial_guess(before, now);
                // The formula subtracts values; near the minimum nothing is left of the difference.
                let sure = (now.probed - now.begun.value).abs() > 1e-8 * now.begun.value.abs();
                if sure {
                    close(now.begun.first, wanted, &format!("search {}", k + 3));
                    by_parabola += u32::from(parabola);
                    doubled += u32::from(!parabola);
                }
            }
        }
    }
    assert!(by_parabola >= 20, "I1 was used {by_parabola} times");
    assert!(doubled >= 6, "I2 was used {doubled} times");
}

/// `-x + y^2` with growing curvature: after long steps, shorter ones.
fn canyon(x: &X) -> (f64, X) {
    let rise = x[0].powi(2);
    let width = 1.0 + 1e3 * rise;
    let value = 0.05 * x[0].powi(4) - x[0] + width * x[1] * x[1] + x[2] * x[2];
    let along = 0.2 * x[0].powi(3) - 1.0 + 2e3 * x[0] * x[1] * x[1];
    (value, [along, 2.0 * width * x[1], 2.0 * x[2]])
}

#[test]
fn a_parabola_gives_its_minimizer_as_first_trial() {
    // Curvatures 1, 5 and 30: along -g the minimizer is g.g / g.Hg, exactly.
    let parabola = |x: &X| {
        let hx = [x[0], 5.0 * x[1], 30.0 * x[2]];
        (0.5 * dot(x, &hx), hx)
    };
    let mut minimizers = 0;
    for probed in probed_searches(parabola, START, Cost::Separate) {
        let g = probed.begun.g;
        let hg = [g[0], 5.0 * g[1], 30.0 * g[2]];
        if probed.probed <= probed.begun.value && probed.begun.first.is_finite() {
            let wanted = dot(&g, &g) / dot(&g, &hg);
            close(probed.begun.first, wanted, "the minimizer");
            minimizers += 1;
        }
    }
    assert!(minimizers >= 10, "{minimizers} minimizers");
}

/// A run along one axis that has moved from 0 to 1, where the value is -1 and the slope along `d = 2` is -4, and whose probe
/// at a step of 0.1 was answered; with the step that it tries next.
fn after_probe(
    answer: Given<f64>,
    limits: Limits<f64>,
    calls: u64,
) -> (Option<f64>, Report<[f64; 1]>) {
    let descent = Descent::new(SteepestDescent, Backtracking::<f64>::default(), armijo())
        .with_first_trial(FirstTrial::HagerZhangQuadratic)
        .unwrap()
        .with_limits(limits)
        .with_stopping(Stopping {
            gradient: Some(0.0),
            evaluations: calls,
            ..Stopping::default()
        })
        .unwrap();
    let mut run = descent.start([0.0]);
    let mut give = |given: Given<f64>, slope: f64, at: f64| {
        let request = run.request().expect("something is wanted");
        assert!(
            (request.point[0] - at).abs() < 1e-14,
            "at {}",
            request.point[0]
        );
        request.gradient[0] = slope;
        run.supply(given).unwrap();
    };
    // The opening at the origin, where the value is 0 too, is 1.
    give(Given::Both(0.0), -1.0, 0.0);
    give(Given::Value(-1.0), 0.0, 1.0);
    give(Given::Gradient, -2.0, 1.0);
    let probe = 0.1_f64.clamp(limits.lower(), limits.upper());
    give(answer, 0.0, 1.0 + 2.0 * probe);
    let next = run.request().map(|request| (request.point[0] - 1.0) / 2.0);
    (next, run.finish().1)
}

#[test]
fn where_no_parabola_opens_upward_the_last_step_is_doubled() {
    let next = |answer| after_probe(answer, Limits::default(), 1000).0.unwrap();
    // -1 - 4 t + c t^2 at t = 0.1, with its minimizer 2 / c.
    for c in [0.25, 1.0, 10.0, 39.0, 40.0 - 1e-9] {
        let value = -1.0 - 4.0 * 0.1 + c * 0.01;
        close(next(Given::Value(value)), 2.0 / c, "the minimizer");
        close(next(Given::Both(value)), 2.0 / c, "more than was wanted");
    }
    // Not above is enough.
    close(next(Given::Value(-1.0)), 0.05, "a level probe");
    for (answer, what) in [
        (Given::Value(-1.0 - 0.4 - 0.01), "concave"),
        (Given::Value(-1.0 + 1e-9), "above the start"),
        (Given::Value(f64::NAN), "NaN"),
        (Given::Value(f64::INFINITY), "infinite"),
        (Given::Value(f64::NEG_INFINITY), "infinite below"),
        (Given::OutsideDomain, "outside"),
    ] {
        close(next(answer), 2.0, what);
    }
}

#[test]
fn a_probe_is_counted_and_keeps_to_the_bounds() {
    for answer in [Given::Value(-1.3), Given::Value(0.0), Given::OutsideDomain] {
        let (_, report) = after_probe(answer, Limits::default(), 1000);
        let evaluations = report.evaluations;
        // Start; first trial; its gradient; probe.
        assert_eq!(
            (evaluations.both, evaluations.values, evaluations.gradients),
            (1, 2, 1)
        );
        assert_eq!(report.refusals, Default::default(), "no trial was refused");
        // The budget ends there.
        let (next, report) = after_probe(answer, Limits::default(), 4);
        assert_eq!((next, report.ending), (None, RunEnding::EvaluationsSpent));
    }
    // `after_probe` looks where the probe is. -1 - 4 t + 2 t^2 at 0.25:
    let limits = Limits::new(0.25, f64::INFINITY, 50).unwrap();
    let (next, _) = after_probe(Given::Value(-1.875), limits, 1000);
    close(next.unwrap(), 1.0, "a probe on the lower bound");
    // -1 - 4 t exactly: a straight line has no minimizer.
    let (next, _) = after_probe(Given::Value(-2.0), limits, 1000);
    close(next.unwrap(), 2.0, "a straight line");
}

#[test]
fn a_probe_beyond_all_numbers_is_left_out() {
    let mut run = Descent::new(SteepestDescent, Backtracking::<f64>::default(), armijo())
        .with_first_trial(FirstTrial::HagerZhangQuadratic)
        .unwrap()
        .start([1.7e308]);
    // A move by a step of 1.7e306 along 1; a tenth of that along 1e4 is beyond the largest number.
    for (given, slope) in [
        (Given::Both(0.0), -1.0),
        (Given::Value(-1e305), 0.0),
        (Given::Gradient, -1e4),
    ] {
        let request = run.request().unwrap();
        request.gradient[0] = slope;
        run.supply(given).unwrap();
    }
    assert_eq!((run.iterations(), run.refusals().outside), (1, 0));
    // So is the first trial, twice the last step, but that is a trial, and refused.
    assert!(run.request().unwrap().point[0].is_finite());
    assert!(run.refusals().outside > 0);
}

#[test]
fn a_probe_lower_than_all_else_is_kept() {
    // The run ends at the probe, or right after.
    for calls in [4, 1000] {
        let (_, report) = after_probe(Given::Value(-1.37), Limits::default(), calls);
        assert_eq!(report.value, -1.37);
        assert!((report.point[0] - 1.2).abs() < 1e-14);
    }
    for unfit in [-0.5, f64::NAN, f64::NEG_INFINITY] {
        let (_, report) = after_probe(Given::Value(unfit), Limits::default(), 4);
        assert_eq!((report.value, report.point), (-1.0, [1.0]));
    }
    // A search that finds nothing lower gives way to it; where the rule accepts a trial, that is where the run moves.
    let report = with_other_values(1.0);
    assert_eq!(
        (report.ending, report.value),
        (RunEnding::IterationsSpent, -1.37)
    );
    assert_eq!(report.remedies.best_taken, 1);
    let report = with_other_values(-1.25);
    assert_eq!(report.value, -1.25);
    close(report.point[0], 1.0 + 4.0 / 3.0, "the first trial");
}

/// A run of two moves where the value is 0 at 0, -1 at 1, -1.37 at the probe, 1.2, and `other` elsewhere.
fn with_other_values(other: f64) -> Report<[f64; 1]> {
    let steps = |x: &[f64; 1], g: &mut [f64; 1]| {
        let (value, slope) = match x[0] {
            0.0 => (0.0, -1.0),
            1.0 => (-1.0, -2.0),
            x if (x - 1.2).abs() < 1e-14 => (-1.37, -4.0),
            _ => (other, -1.0),
        };
        g[0] = slope;
        value
    };
    Descent::new(SteepestDescent, Backtracking::<f64>::default(), armijo())
        .with_first_trial(FirstTrial::HagerZhangQuadratic)
        .unwrap()
        .with_limits(Limits::new(0.0, f64::INFINITY, 10).unwrap())
        .with_stopping(Stopping {
            iterations: 2,
            ..Stopping::default()
        })
        .unwrap()
        .minimize_fn([0.0], steps)
        .unwrap()
}

// ---- The cap on a move ----

fn capped(
    finder: BoxedFinder<f64>,
    direction: BoxedDirection<X>,
    rule: BoxedRule<f64>,
    first: FirstTrial,
    cap: f64,
    limits: Limits<f64>,
) -> (Report<X>, u64) {
    let descent = Descent::new(direction, finder, rule)
        .with_first_trial(first)
        .unwrap()
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
                let first = match number {
                    0 | 3 => FirstTrial::HagerZhangQuadratic,
                    _ => FirstTrial::default(),
                };
                let (report, full) = capped(finder, direction, rule, first, cap, Limits::default());
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
        FirstTrial::default(),
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
