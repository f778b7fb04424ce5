//! Drivers reach known minima with every finder, rule and vector; directions, first trials and stopping tests are what
//! their papers and their documentation say, compared with naive re-computations that stand in this file.
#![cfg(feature = "alloc")]

use std::convert::Infallible;
use std::fmt::Debug;
use std::ops::ControlFlow;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::{
    ConjugateGradient, Form, InitialScale, Lbfgs, Moved, SteepestDescent, Update,
};
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, InterpolatingBacktracking, MoreThuente,
};
use surefoot::{
    Acceptance, BoxedDirection, BoxedFinder, BoxedRule, Criterion, Descent, Direction, FirstTrial,
    Given, Limits, Real, Report, Run, RunEnding, StepFinder, Stopping, Vector, Want, joint,
    separate,
};

const N: usize = 6;
const UPDATES: [Update; 5] = [
    Update::FletcherReeves,
    Update::PolakRibierePlus,
    Update::HestenesStiefelPlus,
    Update::DaiYuan,
    Update::HagerZhang,
];

// ---- Known minima, with every finder, rule and vector ----

#[test]
fn every_driver_reaches_the_known_minimum_and_moves_alike_over_every_vector() {
    let mut faults = Vec::new();
    for landscape in landscapes() {
        for (way, look, rule) in casts() {
            let told = trace::<Vec<f64>>(&landscape, way, look, rule);
            let cell = format!("{way:?} {look:?} {rule:?} on {}", landscape.name);
            if let Err(fault) = landscape.judge(&told, landscape.tolerance::<f64>()) {
                faults.push(format!("{cell}: {fault}"));
            }
            let same = |other: &Told, vector: &str| {
                (told.points != other.points).then(|| format!("{cell}: {vector} goes elsewhere"))
            };
            faults.extend(same(
                &trace::<[f64; N]>(&landscape, way, look, rule),
                "an array",
            ));
            #[cfg(feature = "nalgebra")]
            {
                let dynamic = trace::<nalgebra::DVector<f64>>(&landscape, way, look, rule);
                faults.extend(same(&dynamic, "DVector"));
                let fixed = trace::<nalgebra::SVector<f64, N>>(&landscape, way, look, rule);
                faults.extend(same(&fixed, "SVector"));
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn every_driver_reaches_the_known_minimum_in_single_precision() {
    let mut faults = Vec::new();
    for landscape in landscapes() {
        for (way, look, rule) in casts() {
            let told = trace::<Vec<f32>>(&landscape, way, look, rule);
            let cell = format!("{way:?} {look:?} {rule:?} on {}", landscape.name);
            if let Err(fault) = landscape.judge(&told, landscape.tolerance::<f32>()) {
                faults.push(format!("{cell}: {fault}"));
            }
            let array = trace::<[f32; N]>(&landscape, way, look, rule);
            if array.points != told.points {
                faults.push(format!("{cell}: an array goes elsewhere"));
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn a_driver_is_the_same_at_any_scale_of_the_objective() {
    // f and g times a power of two: with the opening step of the gradient's inverse scale every number of the run is
    // scaled without rounding, so the points must agree bit for bit.
    let landscape = &landscapes()[1];
    for way in [
        Way::Steepest,
        Way::Conjugate(Update::FletcherReeves),
        Way::Lbfgs(5),
    ] {
        let run_at = |power: i32| {
            let scale = 2.0_f64.powi(power);
            let descent = descent::<Vec<f64>>(way, Look::MoreThuente, Rule::Strong(1e-4, 0.1))
                .with_stopping(Stopping {
                    gradient: Some(0.0),
                    iterations: 25,
                    ..Stopping::default()
                })
                .unwrap();
            let mut points = Vec::new();
            let objective = joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
                let value = scale * landscape.value_and_gradient(x, g);
                g.iter_mut().for_each(|g| *g *= scale);
                value
            });
            let report = descent
                .minimize_watched(landscape.start.to_vec(), objective, |run| {
                    points.push(bits(run.point()));
                    ControlFlow::Continue(())
                })
                .unwrap();
            assert_eq!(
                report.ending,
                RunEnding::IterationsSpent,
                "{way:?} at 2^{power}"
            );
            points
        };
        let plain = run_at(0);
        for power in [-450, -100, 100, 450] {
            let other = run_at(power);
            let first = (0..25).find(|&k| other[k] != plain[k]);
            assert_eq!(
                first, None,
                "{way:?} at 2^{power}: the first point that differs"
            );
        }
    }
}

#[test]
fn steepest_descent_with_exact_steps_contracts_as_kantorovich_says() {
    // f+ - f* <= ((k - 1) / (k + 1))^2 (f - f*) with the condition number k (Nocedal & Wright 2006, theorem 3.4).
    let (low, high) = (1.0_f64, 40.0);
    let curvature = |i: usize| low + (high - low) * i as f64 / (N - 1) as f64;
    let worst = ((high - low) / (high + low)).powi(2);
    let mut values = vec![f64::NAN];
    let descent = Descent::new(SteepestDescent, MoreThuente::new(), nearly_exact::<f64>());
    let bowl = joint(|x: &[f64; N], g: &mut [f64; N]| {
        (0..N).fold(0.0, |f, i| {
            g[i] = curvature(i) * x[i];
            f + 0.5 * g[i] * x[i]
        })
    });
    let start = std::array::from_fn(|i| 1.0 / curvature(i));
    values[0] = (0..N).map(|i| 0.5 / curvature(i)).sum();
    descent
        .minimize_watched(start, bowl, |run| {
            values.push(run.value());
            ControlFlow::Continue(())
        })
        .unwrap();
    assert!(values.len() > 20, "{}", values.len());
    for pair in values.windows(2) {
        assert!(pair[1] <= (worst + 1e-7) * pair[0], "{pair:?}");
    }
}

// ---- L-BFGS ----

#[test]
fn the_direction_is_that_of_the_dense_bfgs_matrix_in_both_forms() {
    // Nocedal & Wright 2006, eq. 7.16 to 7.20: H is built by the BFGS formula, eq. 6.17, from (s.y / y.y) I.
    let mut random = Random(11);
    for n in [1, 2, 3, 7, 16, 30, 50] {
        for memory in [1, 2, 5, 20] {
            for moves in [1_usize, 2, 4, 6, 21, 33] {
                let pairs: Vec<_> = (0..moves).map(|_| random.curved_pair(n)).collect();
                let g = random.vector(n);
                let held = &pairs[moves.saturating_sub(memory)..];
                let want = scaled(-1.0, &times(&dense_bfgs(held, n), &g));
                for form in [Form::Compact, Form::TwoLoop] {
                    let (d, lbfgs) = after_pairs(memory, form, &pairs, &g);
                    let off = distance(&d, &want) / norm(&want);
                    assert!(
                        off <= 1e-10,
                        "{form:?}, n = {n}, m = {memory}, {moves} moves: {off:e}"
                    );
                    assert_eq!((lbfgs.pairs(), lbfgs.skipped()), (held.len(), 0));
                    // The secant equation H y = s of the newest pair.
                    let (s, y) = &pairs[moves - 1];
                    let (d, _) = after_pairs(memory, form, &pairs, y);
                    let off = distance(&d, &scaled(-1.0, s)) / norm(s);
                    assert!(
                        off <= 1e-10,
                        "{form:?}, secant, n = {n}, m = {memory}, {moves} moves: {off:e}"
                    );
                }
            }
        }
    }
}

#[test]
fn a_pair_without_positive_curvature_is_skipped_and_the_others_stay() {
    let mut random = Random(5);
    let n = 8;
    for memory in [1, 2, 4] {
        for spoiled in [0, 2, 5] {
            for form in [Form::Compact, Form::TwoLoop] {
                let mut pairs: Vec<_> = (0..6).map(|_| random.curved_pair(n)).collect();
                pairs[spoiled].1 = scaled(-1.0, &pairs[spoiled].1);
                let g = random.vector(n);
                let (d, lbfgs) = after_pairs(memory, form, &pairs, &g);
                assert_eq!((lbfgs.skipped(), lbfgs.pairs()), (1, memory.min(5)));
                pairs.remove(spoiled);
                let held = &pairs[pairs.len() - memory.min(5)..];
                let want = scaled(-1.0, &times(&dense_bfgs(held, n), &g));
                assert!(distance(&d, &want) <= 1e-10 * norm(&want));
                assert!(Direction::<Vec<f64>>::unit_step(&lbfgs));
            }
        }
    }
}

// ---- Conjugate gradients ----

#[test]
fn each_update_is_its_published_formula() {
    let mut random = Random(3);
    let mut seen = 0;
    for update in UPDATES {
        for n in [1, 2, 5, 17, 40] {
            for _ in 0..20 {
                let (g_old, g_new, d) = (random.vector(n), random.vector(n), random.vector(n));
                let beta = naive_beta(update, &g_old, &g_new, &d);
                let want: Vec<f64> = (0..n).map(|i| beta * d[i] - g_new[i]).collect();
                let found = after_move(
                    ConjugateGradient::new(update).with_restart(None),
                    &g_old,
                    &g_new,
                    &d,
                );
                // Both ways lose digits where d and y are nearly orthogonal: such draws prove nothing.
                let y: Vec<f64> = (0..n).map(|i| g_new[i] - g_old[i]).collect();
                if dot(&d, &y).abs() < 0.05 * norm(&d) * norm(&y) {
                    continue;
                }
                let off = distance(&found, &want) / (norm(&want) + beta.abs() * norm(&d));
                assert!(off <= 1e-12, "{update:?}, n = {n}: {off:e}");
                seen += 1;
            }
        }
    }
    assert!(seen > 300, "{seen}");
}

#[test]
fn hager_zhang_descends_by_seven_eighths_whatever_the_step() {
    // Theorem 1.1 of the paper: g.d <= -7/8 g.g, for any y with d.y != 0.
    let mut random = Random(8);
    for n in [1, 2, 5, 30] {
        for _ in 0..300 {
            let (g_old, g_new) = (random.vector(n), random.vector(n));
            let d = random.vector(n);
            let found = after_move(
                ConjugateGradient::new(Update::HagerZhang),
                &g_old,
                &g_new,
                &d,
            );
            let (slope, square) = (dot(&g_new, &found), dot(&g_new, &g_new));
            assert!(
                slope <= (-0.875 + 1e-9) * square,
                "n = {n}: {slope:e} {square:e}"
            );
        }
    }
}

#[test]
fn hager_zhang_descends_also_where_the_gradient_hardly_changed() {
    // Along a straight piece y is 0, and after a very short step it is nearly so: `whatever the step` includes both.
    let mut random = Random(81);
    let mut worst = f64::NEG_INFINITY;
    for change in [0.0, 1e-17, 1e-16, 1e-15, 1e-13, 1e-11, 1e-9, 1e-8, 1e-7] {
        for n in [1, 2, 5, 30] {
            for _ in 0..100 {
                let g_old = scaled(0.1, &random.vector(n));
                let shift = random.vector(n);
                let g_new: Vec<f64> = (0..n)
                    .map(|i| g_old[i] * (1.0 + change * shift[i]))
                    .collect();
                let d = scaled(-1.0, &g_old);
                let found = after_move(
                    ConjugateGradient::new(Update::HagerZhang),
                    &g_old,
                    &g_new,
                    &d,
                );
                worst = worst.max(dot(&g_new, &found) / dot(&g_new, &g_new));
            }
        }
    }
    assert!(worst <= -0.875 + 1e-6, "g.d / g.g reaches {worst:e}");
}

#[test]
fn hager_zhang_directions_of_a_run_descend_by_seven_eighths() {
    let mut seen = 0;
    for landscape in landscapes() {
        for rule in [
            Rule::Strong(1e-4, 0.1),
            Rule::Weak(0.1, 0.9),
            Rule::Decrease,
        ] {
            let spy = Spy::new(ConjugateGradient::new(Update::HagerZhang));
            let descent = Descent::new(spy, rule.finder(), rule.boxed())
                .with_stopping(landscape.stopping::<f64>())
                .unwrap();
            let mut run = descent.start(landscape.start.to_vec());
            landscape.serve(&mut run);
            for &(slope, square) in &run.direction().slopes {
                assert!(
                    slope <= (-0.875 + 1e-6) * square,
                    "{} {rule:?}: {slope:e} {square:e}",
                    landscape.name
                );
                seen += 1;
            }
        }
    }
    assert!(seen > 100, "{seen}");
}

#[test]
fn with_exact_steps_every_update_is_the_linear_conjugate_gradient_method() {
    // Hestenes & Stiefel 1952: on a quadratic all five formulas agree, directions are conjugate, n steps suffice.
    let mut random = Random(21);
    let a = random.positive_definite(N, 30.0);
    let centre = random.vector(N);
    let start = scaled(3.0, &random.vector(N));
    let gradient = |x: &[f64]| {
        let e: Vec<f64> = (0..N).map(|i| x[i] - centre[i]).collect();
        times(&a, &e)
    };
    let textbook = linear_conjugate_gradients(&a, &gradient(&start), &start);
    for update in UPDATES {
        let spy = Spy::new(ConjugateGradient::new(update));
        let descent = Descent::new(spy, MoreThuente::new(), nearly_exact::<f64>())
            .with_stopping(Stopping {
                gradient: Some(1e-6 * norm(&gradient(&start))),
                ..Stopping::default()
            })
            .unwrap();
        let mut run = descent.start(start.clone());
        let mut points = Vec::new();
        while let Some(request) = run.request() {
            let g = gradient(request.point);
            let e: Vec<f64> = (0..N).map(|i| request.point[i] - centre[i]).collect();
            let value = 0.5 * dot(&g, &e);
            request.gradient.copy_from_slice(&g);
            let before = run.iterations();
            run.supply(Given::Both(value)).unwrap();
            if run.iterations() > before {
                points.push(run.point().clone());
            }
        }
        assert_eq!(
            run.ending(),
            Some(RunEnding::Converged(Criterion::Gradient)),
            "{update:?}"
        );
        assert_eq!(points.len(), N, "{update:?}: n steps, no fewer and no more");
        for (k, (point, want)) in points.iter().zip(&textbook).enumerate() {
            let off = distance(point, want) / norm(want);
            assert!(off < 1e-6, "{update:?}: iterate {k} is off by {off:e}");
        }
        let directions = &run.direction().directions;
        for (i, di) in directions.iter().enumerate() {
            for dj in &directions[..i] {
                let energy = |d: &[f64], e: &[f64]| dot(d, &times(&a, e));
                let cosine = energy(di, dj) / (energy(di, di) * energy(dj, dj)).sqrt();
                assert!(cosine.abs() < 1e-6, "{update:?}: {cosine:e}");
            }
        }
    }
}

#[test]
fn powells_test_restarts_at_its_threshold_and_nowhere_else() {
    // |g+.g| >= 0.2 g+.g+ (Powell 1977). With g+ = (1, 0) and g = (t, 1) the left side is |t|, the right one 0.2.
    let g_new = vec![1.0, 0.0];
    let d = vec![-1.0, -3.0];
    for update in UPDATES {
        for (t, far) in [
            (0.201, true),
            (-0.201, true),
            (0.19, false),
            (-0.19, false),
            (0.6, true),
        ] {
            let g_old = vec![t, 1.0];
            let plain = vec![-1.0, -0.0];
            let usual = ConjugateGradient::new(update);
            let has_test = !matches!(update, Update::DaiYuan | Update::HagerZhang);
            let found = after_move(usual, &g_old, &g_new, &d);
            let unrestarted = after_move(usual.with_restart(None), &g_old, &g_new, &d);
            assert_ne!(
                unrestarted, plain,
                "{update:?}: beta would be 0 here, the test shows nothing"
            );
            assert_eq!(found == plain, far && has_test, "{update:?} at {t}");
            let own = usual.with_restart(Some(0.5));
            assert_eq!(
                after_move(own, &g_old, &g_new, &d) == plain,
                t.abs() >= 0.5,
                "{update:?} at {t} with a share of 0.5"
            );
            let mut counting = usual.with_restart(Some(0.2));
            feed(&mut counting, &g_old, &g_new, &d);
            assert_eq!(counting.restarts(), u64::from(far));
        }
    }
}

// ---- First trials ----

#[test]
fn first_trials_follow_their_formulas() {
    use FirstTrial::{ByDirection, Fixed, LastDecrease, SameChange, Unit};
    for landscape in landscapes() {
        for choice in [ByDirection, Unit, Fixed(0.003), SameChange, LastDecrease] {
            for way in [
                Way::Steepest,
                Way::Conjugate(Update::PolakRibierePlus),
                Way::Lbfgs(5),
            ] {
                let descent = descent::<Vec<f64>>(way, Look::MoreThuente, Rule::Strong(1e-4, 0.1))
                    .with_first_trial(choice)
                    .unwrap()
                    .with_stopping(Stopping {
                        iterations: 25,
                        gradient: Some(1e-3),
                        ..Stopping::default()
                    })
                    .unwrap();
                let searches = first_steps(descent, &landscape);
                assert!(searches.len() > 3, "{way:?} {choice:?}");
                // The documented correction of the natural step, by logarithms.
                let mut mean = 0.0_f64;
                for (k, s) in searches.iter().enumerate() {
                    if let (true, Some(last)) = (k > 1, s.last) {
                        let before = &searches[k - 1];
                        let moved: Vec<f64> =
                            s.x.iter().zip(&before.x).map(|(a, b)| a - b).collect();
                        let there = dot(&s.g, &moved) / last.step;
                        let vanishes = last.step * last.slope / (last.slope - there);
                        mean += (vanishes.clamp(1.0 / 16.0, 16.0).ln() - mean) / 8.0;
                    }
                    let corrected = (mean / 2.0).exp().clamp(0.25, 4.0);
                    let by_direction = matches!(way, Way::Lbfgs(_)) && k > 0;
                    let opening = 0.01 * max_abs(&s.x) / max_abs(&s.g);
                    let want = match (choice, s.last) {
                        (Unit, _) => 1.0,
                        (Fixed(step), _) => step,
                        (ByDirection, _) if by_direction => corrected,
                        (_, None) => opening,
                        // Nocedal & Wright 2006, section 3.5: the two formulas there.
                        (SameChange, Some(last)) => last.step * last.slope / s.slope,
                        (_, Some(last)) => 2.0 * (s.value - last.value) / s.slope,
                    };
                    let off = (s.first - want).abs() / want;
                    // Differences of points tell a slope less sharply than the run knows it.
                    let sharp = if choice == ByDirection && by_direction {
                        1e-8
                    } else {
                        1e-14
                    };
                    assert!(
                        off <= sharp,
                        "{way:?} {choice:?}, search {k}: {} for {want}",
                        s.first
                    );
                }
            }
        }
    }
}

#[test]
fn the_opening_step_has_its_three_cases() {
    // Hager & Zhang 2006, step I0: by |x|, where that is 0 by |f|, where that is 0 too 1.
    let open = |x: [f64; 2], value: f64| {
        let descent = Descent::new(SteepestDescent, Bisection::new(), WeakWolfe::default());
        let mut run = descent.start_known(x, value, [-3.0, 4.0]);
        assert!(run.request().is_some());
        run.search().request().unwrap().step
    };
    assert_eq!(open([2.0, -7.0], 5.0), 0.01 * 7.0 / 4.0);
    assert_eq!(open([0.0, 0.0], -5.0), 0.01 * 5.0 / 25.0);
    assert_eq!(open([0.0, 0.0], 0.0), 1.0);
}

// ---- Stopping ----

#[test]
fn each_criterion_alone_ends_the_run_at_the_first_point_where_it_holds() {
    let never = Stopping {
        gradient: Some(0.0),
        iterations: 150,
        ..Stopping::default()
    };
    let landscape = &landscapes()[1];
    for way in [Way::Lbfgs(5), Way::Conjugate(Update::HagerZhang)] {
        let (visited, _) = visits(landscape, way, never);
        assert!(visited.len() > 30, "{}", visited.len());
        let check =
            |stopping: Stopping, criterion: Criterion, holds: &dyn Fn(&Visit, &Visit) -> bool| {
                let (_, report) = visits(landscape, way, stopping);
                let at = (1..visited.len())
                    .find(|&k| holds(&visited[k - 1], &visited[k]))
                    .unwrap_or_else(|| panic!("{criterion:?} never holds: no test"));
                assert!(at > 1, "{criterion:?}: at once is no test");
                assert_eq!(report.ending, RunEnding::Converged(criterion), "{way:?}");
                assert_eq!(report.iterations, at as u64, "{criterion:?}, {way:?}");
                assert_eq!(
                    bits(&report.point),
                    bits(&visited[at].x),
                    "{criterion:?}, {way:?}"
                );
                assert_eq!(report.gradient_max, Some(visited[at].gradient_max));
            };
        let share = visited[2..]
            .iter()
            .map(|v| v.gradient_max / v.value)
            .fold(f64::INFINITY, f64::min)
            * 1.01;
        for tolerance in [1.0, 0.1] {
            check(
                Stopping {
                    gradient: Some(tolerance),
                    ..never
                },
                Criterion::Gradient,
                &|_, v| v.gradient_max <= tolerance,
            );
        }
        check(
            Stopping {
                gradient_by_value: share,
                ..never
            },
            Criterion::Gradient,
            &|_, v| v.gradient_max <= share * v.value.abs(),
        );
        check(
            Stopping {
                gradient: Some(0.5),
                gradient_by_value: 0.8 * share,
                ..never
            },
            Criterion::Gradient,
            &|_, v| v.gradient_max <= 0.5 + 0.8 * share * v.value.abs(),
        );
        for tolerance in [0.03, 0.005] {
            check(
                Stopping {
                    value_change: tolerance,
                    ..never
                },
                Criterion::ValueChange,
                &|u, v| (u.value - v.value).abs() <= tolerance * u.value.abs().max(v.value.abs()),
            );
        }
        for tolerance in [0.1, 0.01] {
            check(
                Stopping {
                    step_change: tolerance,
                    ..never
                },
                Criterion::StepChange,
                &|u, v| distance_max(&u.x, &v.x) <= tolerance * max_abs(&v.x),
            );
        }
        check(
            Stopping {
                target: Some(landscape.offset + 0.5),
                ..never
            },
            Criterion::Target,
            &|_, v| v.value <= landscape.offset + 0.5,
        );
    }
}

#[test]
fn a_criterion_that_holds_at_the_start_costs_one_evaluation() {
    let landscape = &landscapes()[0];
    let (visited, report) = visits(
        landscape,
        Way::Lbfgs(5),
        Stopping {
            target: Some(1e9),
            ..Stopping::default()
        },
    );
    assert_eq!(report.ending, RunEnding::Converged(Criterion::Target));
    assert_eq!((report.iterations, report.evaluations.calls()), (0, 1));
    assert_eq!(bits(&report.point), bits(&visited[0].x));
}

#[test]
fn the_limit_on_iterations_is_exact() {
    let landscape = &landscapes()[1];
    let stopping = |iterations| Stopping {
        gradient: Some(0.0),
        iterations,
        ..Stopping::default()
    };
    let (visited, _) = visits(landscape, Way::Lbfgs(5), stopping(20));
    assert_eq!(visited.len(), 21);
    for k in 0..20 {
        let (_, report) = visits(landscape, Way::Lbfgs(5), stopping(k));
        assert_eq!(report.ending, RunEnding::IterationsSpent);
        assert_eq!(report.iterations, k);
        assert_eq!(bits(&report.point), bits(&visited[k as usize].x), "{k}");
    }
}

#[test]
fn the_limit_on_evaluations_is_never_exceeded() {
    let landscape = &landscapes()[1];
    for look in [Look::MoreThuente, Look::Bisection] {
        for rule in [Rule::Strong(1e-4, 0.1), Rule::Decrease, Rule::Goldstein] {
            for limit in 0..80 {
                let mut calls = 0;
                let descent = descent::<Vec<f64>>(Way::Lbfgs(5), look, rule)
                    .with_stopping(Stopping {
                        gradient: Some(0.0),
                        evaluations: limit,
                        ..Stopping::default()
                    })
                    .unwrap();
                let mut run = descent.start(landscape.start.to_vec());
                while let Some(request) = run.request() {
                    calls += 1;
                    assert!(
                        calls <= limit,
                        "{look:?} {rule:?}: {calls} calls of {limit}"
                    );
                    let given = landscape.answer(request.want, request.point, request.gradient);
                    run.supply(given).unwrap();
                }
                let (_, report) = run.finish();
                assert_eq!(report.ending, RunEnding::EvaluationsSpent);
                assert_eq!(report.evaluations.calls(), limit);
            }
        }
    }
}

#[test]
fn the_callers_own_test_stops_the_run() {
    let landscape = &landscapes()[1];
    let descent = descent::<Vec<f64>>(Way::Lbfgs(5), Look::MoreThuente, Rule::Weak(1e-4, 0.9));
    let objective = joint(|x: &Vec<f64>, g: &mut Vec<f64>| landscape.value_and_gradient(x, g));
    let mut last = Vec::new();
    let report = descent
        .minimize_watched(landscape.start.to_vec(), objective, |run| {
            last = run.point().clone();
            if run.iterations() == 7 {
                ControlFlow::Break(())
            } else {
                ControlFlow::Continue(())
            }
        })
        .unwrap();
    assert_eq!(report.ending, RunEnding::Stopped);
    assert_eq!((report.iterations, bits(&report.point)), (7, bits(&last)));
}

#[test]
fn a_watcher_sees_the_log_of_the_search_that_made_the_move() {
    // The documentation of `Run::search`: the last search, with its log.
    let landscape = &landscapes()[1];
    let descent = descent::<Vec<f64>>(Way::Lbfgs(5), Look::MoreThuente, Rule::Strong(1e-4, 0.1));
    let objective = joint(|x: &Vec<f64>, g: &mut Vec<f64>| landscape.value_and_gradient(x, g));
    let mut trials = 0;
    let report = descent
        .minimize_watched(landscape.start.to_vec(), objective, |run| {
            trials += u64::from(run.search().log().trials());
            ControlFlow::Continue(())
        })
        .unwrap();
    assert_eq!(trials, report.evaluations.calls() - 1);
}

// ---- Bounds on the step ----

#[test]
fn a_step_at_its_upper_bound_is_taken_and_is_no_failure() {
    // A long way to go and a short bound: every search ends at the bound, and the rule wants more.
    for rule in [
        Rule::Weak(1e-4, 0.1),
        Rule::Strong(1e-4, 0.1),
        Rule::Goldstein,
    ] {
        let descent = descent::<Vec<f64>>(Way::Steepest, Look::Bisection, rule)
            .with_limits(Limits::new(0.0, 0.01, 30).unwrap())
            .with_stopping(Stopping {
                iterations: 20,
                ..Stopping::default()
            })
            .unwrap();
        let bowl = separate(
            |x: &Vec<f64>| 0.5 * x[0] * x[0],
            |x: &Vec<f64>, g: &mut Vec<f64>| g[0] = x[0],
        );
        let report = descent.minimize(vec![100.0], bowl).unwrap();
        assert_eq!(report.ending, RunEnding::IterationsSpent, "{rule:?}");
        assert!((report.point[0] - 100.0 * 0.99_f64.powi(20)).abs() < 1e-10);
        assert_eq!(
            (report.remedies.best_taken, report.remedies.resets),
            (0, 0),
            "{rule:?}"
        );
    }
}

// ---- Chosen at run time, sent, used again ----

#[test]
fn a_run_of_boxed_parts_is_that_of_the_parts_and_can_be_sent_to_a_thread() {
    let landscape = landscapes()[1].clone();
    let boxed = descent::<Vec<f64>>(Way::Lbfgs(5), Look::MoreThuente, Rule::Strong(1e-4, 0.9));
    let plain = Descent::new(
        Lbfgs::new(5).unwrap(),
        MoreThuente::new(),
        StrongWolfe::new(1e-4, 0.9).unwrap(),
    );
    let objective = |x: &Vec<f64>, g: &mut Vec<f64>| landscape.value_and_gradient(x, g);
    let want = plain
        .minimize(landscape.start.to_vec(), joint(objective))
        .unwrap();
    let mut run = boxed.start(landscape.start.to_vec());
    for _ in 0..5 {
        let request = run.request().unwrap();
        let value = landscape.value_and_gradient(request.point, request.gradient);
        run.supply(Given::Both(value)).unwrap();
    }
    let there = landscape.clone();
    let report = std::thread::spawn(move || {
        while let Some(request) = run.request() {
            let value = there.value_and_gradient(request.point, request.gradient);
            run.supply(Given::Both(value)).unwrap();
        }
        run.finish().1
    })
    .join()
    .unwrap();
    assert!(report.converged());
    assert_eq!(bits(&report.point), bits(&want.point));
    assert_eq!(report.iterations, want.iterations);
}

#[test]
fn settings_that_come_back_give_the_same_run_again() {
    let landscape = &landscapes()[1];
    for (way, look, rule) in casts() {
        let fresh = || {
            descent::<Vec<f64>>(way, look, rule)
                .with_stopping(Stopping {
                    iterations: 40,
                    ..Stopping::default()
                })
                .unwrap()
                .with_first_trial(FirstTrial::SameChange)
                .unwrap()
                .with_limits(Limits::new(1e-20, 1e3, 40).unwrap())
        };
        let mut first = fresh().start(landscape.start.to_vec());
        landscape.serve(&mut first);
        let (again, want) = first.finish();
        // In between, a run of another length that is stopped half-way.
        let mut other = again.start(vec![3.0; 4]);
        for _ in 0..7 {
            let Some(request) = other.request() else {
                break;
            };
            request.gradient.copy_from_slice(request.point);
            let value = 0.5 * dot(request.point, request.point);
            other.supply(Given::Both(value)).unwrap();
        }
        let (again, _) = other.finish();
        let mut second = again.start(landscape.start.to_vec());
        landscape.serve(&mut second);
        let (_, found) = second.finish();
        assert_eq!(found, want, "{way:?} {look:?} {rule:?}");
    }
}

// ---- Casts ----

#[derive(Clone, Copy, Debug, PartialEq)]
enum Way {
    Steepest,
    Conjugate(Update),
    Lbfgs(usize),
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Look {
    MoreThuente,
    BracketZoom,
    Bisection,
    Interpolating,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Rule {
    Weak(f64, f64),
    Strong(f64, f64),
    Goldstein,
    Decrease,
}

impl Way {
    fn boxed<V: Vector + Send + 'static>(self) -> BoxedDirection<V> {
        match self {
            Way::Steepest => Box::new(SteepestDescent),
            Way::Conjugate(update) => Box::new(ConjugateGradient::new(update)),
            Way::Lbfgs(memory) => Box::new(Lbfgs::new(memory).unwrap()),
        }
    }
}

impl Look {
    fn boxed<T: Real>(self) -> BoxedFinder<T> {
        match self {
            Look::MoreThuente => Box::new(MoreThuente::new()),
            Look::BracketZoom => Box::new(BracketZoom::new()),
            Look::Bisection => Box::new(Bisection::new()),
            Look::Interpolating => Box::new(InterpolatingBacktracking::new()),
        }
    }
}

impl Rule {
    fn boxed<T: Real>(self) -> BoxedRule<T> {
        match self {
            Rule::Weak(c1, c2) => Box::new(WeakWolfe::new(T::of(c1), T::of(c2)).unwrap()),
            Rule::Strong(c1, c2) => Box::new(StrongWolfe::new(T::of(c1), T::of(c2)).unwrap()),
            Rule::Goldstein => Box::new(Goldstein::default()),
            Rule::Decrease => Box::new(SufficientDecrease::default()),
        }
    }

    /// The finder that suits it.
    fn finder(self) -> BoxedFinder<f64> {
        match self {
            Rule::Decrease => Box::new(Backtracking::default()),
            _ => Box::new(MoreThuente::new()),
        }
    }
}

fn casts() -> Vec<(Way, Look, Rule)> {
    let mut ways = vec![Way::Steepest];
    ways.extend(UPDATES.map(Way::Conjugate));
    ways.extend([1, 5, 20].map(Way::Lbfgs));
    let mut casts = Vec::new();
    for way in ways {
        let curvature = if matches!(way, Way::Lbfgs(_)) {
            0.9
        } else {
            0.1
        };
        let mut rules = vec![Rule::Weak(1e-4, curvature), Rule::Strong(1e-4, curvature)];
        if !matches!(way, Way::Conjugate(_)) {
            rules.extend([Rule::Goldstein, Rule::Decrease]);
        }
        for look in [
            Look::MoreThuente,
            Look::BracketZoom,
            Look::Bisection,
            Look::Interpolating,
        ] {
            casts.extend(rules.iter().map(|rule| (way, look, *rule)));
        }
    }
    casts
}

type AnyDescent<V> = Descent<
    BoxedDirection<V>,
    BoxedFinder<<V as Vector>::Scalar>,
    BoxedRule<<V as Vector>::Scalar>,
>;

fn descent<V: Vector + Send + 'static>(way: Way, look: Look, rule: Rule) -> AnyDescent<V> {
    Descent::new(way.boxed(), look.boxed(), rule.boxed())
}

fn nearly_exact<T: Real>() -> StrongWolfe<T> {
    StrongWolfe::new(T::of(1e-9), T::of(1e-9)).unwrap()
}

// ---- Landscapes with known minima ----

/// A function of six variables with one minimizer in its domain, known in closed form.
#[derive(Clone, Debug)]
struct Landscape {
    name: &'static str,
    kind: Kind,
    start: [f64; N],
    minimizer: [f64; N],
    /// The value there.
    offset: f64,
    /// A lower bound on the Hessian's eigenvalues near the minimizer.
    least_curvature: f64,
    /// Gradient tolerances in double and single precision.
    tolerances: (f64, f64),
}

#[derive(Clone, Debug)]
enum Kind {
    /// `offset + e'A e / 2` with `e = x - minimizer`.
    Bowl(Vec<Vec<f64>>),
    /// The sum of three of Rosenbrock's functions, each of two variables; minimum 0 at (1, .., 1).
    Valleys,
    /// `sum c_i x_i - ln x_i` for `x > 0`; minimizer `1 / c_i`, Hessian `c_i^2` there.
    Barrier([f64; N]),
}

fn landscapes() -> [Landscape; 3] {
    let mut random = Random(1);
    let matrix = random.positive_definite(N, 20.0);
    let costs = [0.5, 1.0, 2.0, 3.0, 0.8, 1.5];
    [
        Landscape {
            name: "a bowl",
            kind: Kind::Bowl(matrix),
            start: [4.0, -3.0, 2.0, 5.0, -1.0, 0.5],
            minimizer: [1.0, -2.0, 0.5, 3.0, 0.0, -1.5],
            offset: -3.0,
            least_curvature: 1.0,
            tolerances: (1e-6, 5e-2),
        },
        Landscape {
            name: "three curved valleys",
            kind: Kind::Valleys,
            start: [-1.2, 1.0, -0.5, 0.8, 1.5, 0.3],
            minimizer: [1.0; N],
            offset: 0.0,
            // Eigenvalues of ((802, -400), (-400, 200)): 501 -+ sqrt(501^2 - 400).
            least_curvature: 0.39,
            tolerances: (1e-4, 1e-2),
        },
        Landscape {
            name: "a barrier",
            kind: Kind::Barrier(costs),
            start: [1e-3, 5.0, 0.1, 1.0, 2.0, 0.01],
            minimizer: costs.map(|c| 1.0 / c),
            offset: costs.iter().map(|c| 1.0 + f64::ln(*c)).sum(),
            least_curvature: 0.25 * 0.9,
            tolerances: (1e-6, 1e-2),
        },
    ]
}

impl Landscape {
    fn value_and_gradient<T: Real>(&self, x: &[T], g: &mut [T]) -> T {
        let of = T::of;
        match &self.kind {
            Kind::Bowl(a) => {
                let e: [T; N] = std::array::from_fn(|i| x[i] - of(self.minimizer[i]));
                let mut value = T::zero();
                for i in 0..N {
                    g[i] = (0..N).fold(T::zero(), |s, j| s + of(a[i][j]) * e[j]);
                    value = value + of(0.5) * g[i] * e[i];
                }
                of(self.offset) + value
            }
            Kind::Valleys => (0..N).step_by(2).fold(T::zero(), |value, i| {
                let (a, b) = (of(1.0) - x[i], x[i + 1] - x[i] * x[i]);
                g[i] = of(-2.0) * a - of(400.0) * x[i] * b;
                g[i + 1] = of(200.0) * b;
                value + a * a + of(100.0) * b * b
            }),
            Kind::Barrier(costs) => (0..N).fold(T::zero(), |value, i| {
                g[i] = of(costs[i]) - x[i].recip();
                value + of(costs[i]) * x[i] - x[i].ln()
            }),
        }
    }

    fn answer(&self, want: Want, x: &[f64], g: &mut [f64]) -> Given<f64> {
        match want {
            Want::Value => Given::Value(self.value_and_gradient(x, &mut [0.0; N])),
            Want::Gradient => {
                self.value_and_gradient(x, g);
                Given::Gradient
            }
            Want::Both => Given::Both(self.value_and_gradient(x, g)),
        }
    }

    fn serve<D, F, A>(&self, run: &mut Run<Vec<f64>, D, F, A>)
    where
        D: Direction<Vec<f64>>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        while let Some(request) = run.request() {
            let given = self.answer(request.want, request.point, request.gradient);
            run.supply(given).unwrap();
        }
    }

    fn tolerance<T: Real>(&self) -> f64 {
        if T::epsilon() > T::of(1e-10) {
            self.tolerances.1
        } else {
            self.tolerances.0
        }
    }

    fn stopping<T: Real>(&self) -> Stopping {
        Stopping {
            gradient: Some(self.tolerance::<T>()),
            iterations: 60_000,
            ..Stopping::default()
        }
    }

    /// Near a minimizer with curvature of at least `c`, `|x - x*| <= |g| / c`.
    fn judge(&self, told: &Told, tolerance: f64) -> Result<(), String> {
        let off = distance(&told.end, &self.minimizer);
        let allowed = (N as f64).sqrt() * tolerance / self.least_curvature;
        if told.ending != "Converged(Gradient)" {
            Err(format!("{} after {} moves", told.ending, told.points.len()))
        } else if off > allowed {
            Err(format!(
                "ends {off:e} from the minimizer, {allowed:e} allowed"
            ))
        } else {
            Ok(())
        }
    }
}

/// What a run told: a print of every point, the last one, and why it ended.
struct Told {
    points: Vec<u64>,
    end: Vec<f64>,
    ending: String,
}

fn trace<V: Slice + Debug + Send + 'static>(
    landscape: &Landscape,
    way: Way,
    look: Look,
    rule: Rule,
) -> Told {
    let descent = descent::<V>(way, look, rule)
        .with_stopping(landscape.stopping::<V::Scalar>())
        .unwrap();
    let mut points = Vec::new();
    // Generic code returns a `Result`: only `f32` and `f64` themselves are plain replies.
    let objective = joint(|x: &V, g: &mut V| {
        Ok::<_, Infallible>(landscape.value_and_gradient(x.all(), g.all_mut()))
    });
    let report: Report<V> = descent
        .minimize_watched(V::of(&landscape.start), objective, |run| {
            points.push(print_of(run.point().all()));
            ControlFlow::Continue(())
        })
        .unwrap();
    Told {
        points,
        end: report.point.all().iter().map(|x| x.to_double()).collect(),
        ending: format!("{:?}", report.ending),
    }
}

/// The vectors that show their numbers as one slice.
trait Slice: Vector {
    fn of(x: &[f64]) -> Self;
    fn all(&self) -> &[Self::Scalar];
    fn all_mut(&mut self) -> &mut [Self::Scalar];
}

impl<T: Real> Slice for Vec<T> {
    fn of(x: &[f64]) -> Self {
        x.iter().map(|x| T::of(*x)).collect()
    }
    fn all(&self) -> &[T] {
        self
    }
    fn all_mut(&mut self) -> &mut [T] {
        self
    }
}

impl<T: Real, const M: usize> Slice for [T; M] {
    fn of(x: &[f64]) -> Self {
        std::array::from_fn(|i| T::of(x[i]))
    }
    fn all(&self) -> &[T] {
        self
    }
    fn all_mut(&mut self) -> &mut [T] {
        self
    }
}

#[cfg(feature = "nalgebra")]
impl Slice for nalgebra::DVector<f64> {
    fn of(x: &[f64]) -> Self {
        Self::from_column_slice(x)
    }
    fn all(&self) -> &[f64] {
        self.as_slice()
    }
    fn all_mut(&mut self) -> &mut [f64] {
        self.as_mut_slice()
    }
}

#[cfg(feature = "nalgebra")]
impl<const M: usize> Slice for nalgebra::SVector<f64, M> {
    fn of(x: &[f64]) -> Self {
        Self::from_column_slice(x)
    }
    fn all(&self) -> &[f64] {
        self.as_slice()
    }
    fn all_mut(&mut self) -> &mut [f64] {
        self.as_mut_slice()
    }
}

// ---- What a run went through ----

/// Where a run was: at its start and after each move.
struct Visit {
    x: Vec<f64>,
    value: f64,
    gradient_max: f64,
}

fn visits(landscape: &Landscape, way: Way, stopping: Stopping) -> (Vec<Visit>, Report<Vec<f64>>) {
    let descent = descent::<Vec<f64>>(way, Look::MoreThuente, Rule::Strong(1e-4, 0.1))
        .with_stopping(stopping)
        .unwrap();
    let mut run = descent.start(landscape.start.to_vec());
    let mut visits = Vec::new();
    while let Some(request) = run.request() {
        let given = landscape.answer(request.want, request.point, request.gradient);
        run.supply(given).unwrap();
        if visits.is_empty() || run.iterations() == visits.len() as u64 {
            visits.push(Visit {
                x: run.point().clone(),
                value: run.value(),
                gradient_max: run.gradient_max().unwrap(),
            });
        }
    }
    (visits, run.finish().1)
}

/// How a search of a run began.
struct Opening {
    first: f64,
    x: Vec<f64>,
    g: Vec<f64>,
    value: f64,
    slope: f64,
    last: Option<LastMove>,
}

#[derive(Clone, Copy)]
struct LastMove {
    step: f64,
    slope: f64,
    value: f64,
}

fn first_steps(descent: AnyDescent<Vec<f64>>, landscape: &Landscape) -> Vec<Opening> {
    let mut run = descent.start(landscape.start.to_vec());
    let mut openings: Vec<Opening> = Vec::new();
    let mut step = f64::NAN;
    while run.request().is_some() {
        // A search begins with the request for its first trial.
        if let Some(ask) = run.search().request() {
            if openings.len() as u64 == run.iterations() {
                let last = openings.last().map(|o| LastMove {
                    step,
                    slope: o.slope,
                    value: o.value,
                });
                openings.push(Opening {
                    first: ask.step,
                    x: run.point().clone(),
                    g: run.gradient().unwrap().clone(),
                    value: run.value(),
                    slope: run.search().ray().slope,
                    last,
                });
            }
            step = ask.step;
        }
        let Some(request) = run.request() else { break };
        let given = landscape.answer(request.want, request.point, request.gradient);
        run.supply(given).unwrap();
    }
    openings
}

/// A direction that notes what it says: `(g.d, g.g)` and `d`.
struct Spy<D> {
    inner: D,
    slopes: Vec<(f64, f64)>,
    directions: Vec<Vec<f64>>,
}

impl<D> Spy<D> {
    fn new(inner: D) -> Self {
        Spy {
            inner,
            slopes: Vec::new(),
            directions: Vec::new(),
        }
    }
}

impl<D: Direction<Vec<f64>>> Direction<Vec<f64>> for Spy<D> {
    fn begin(&mut self, x: &Vec<f64>) {
        self.inner.begin(x);
    }
    fn direction(&mut self, x: &Vec<f64>, g: &Vec<f64>, d: &mut Vec<f64>) -> Option<f64> {
        let known = self.inner.direction(x, g, d);
        self.slopes.push((dot(g, d), dot(g, g)));
        self.directions.push(d.clone());
        known
    }
    fn moved(&mut self, moved: Moved<'_, Vec<f64>>) {
        self.inner.moved(moved);
    }
    fn reset(&mut self) {
        self.inner.reset();
    }
    fn unit_step(&self) -> bool {
        self.inner.unit_step()
    }
}

// ---- Directions driven by hand ----

/// Tells a direction of a move along `d` between points with these gradients.
fn feed(direction: &mut impl Direction<Vec<f64>>, g_old: &[f64], g_new: &Vec<f64>, d: &[f64]) {
    let x_old = vec![0.0; d.len()];
    direction.begin(&x_old);
    let (mut g_old, mut d) = (g_old.to_vec(), d.to_vec());
    let x_new = d.clone();
    let survey = direction.survey(g_new, &g_old, &d);
    direction.moved(Moved::new(
        1.0,
        &mut d,
        (&x_old, &x_new),
        (&mut g_old, g_new),
        survey,
    ));
}

/// The direction after that move.
fn after_move(
    mut direction: ConjugateGradient,
    g_old: &[f64],
    g_new: &Vec<f64>,
    d: &Vec<f64>,
) -> Vec<f64> {
    feed(&mut direction, g_old, g_new, d);
    let mut next = d.clone();
    direction.direction(d, g_new, &mut next);
    next
}

/// The L-BFGS direction at gradient `g` after moves with these `(s, y)`, and its state.
fn after_pairs(
    memory: usize,
    form: Form,
    pairs: &[(Vec<f64>, Vec<f64>)],
    g: &Vec<f64>,
) -> (Vec<f64>, Lbfgs<Vec<f64>>) {
    let mut lbfgs = Lbfgs::new(memory)
        .unwrap()
        .with_form(form)
        .with_initial_scale(InitialScale::Newest);
    let zero = vec![0.0; g.len()];
    lbfgs.begin(&zero);
    // Gradients that follow one another and end at `g`.
    let mut gradients = vec![g.clone()];
    for (_, y) in pairs.iter().rev() {
        let after = &gradients[gradients.len() - 1];
        gradients.push(after.iter().zip(y).map(|(g, y)| g - y).collect());
    }
    gradients.reverse();
    for ((s, _), g) in pairs.iter().zip(gradients.windows(2)) {
        let (mut d, mut g_old) = (s.clone(), g[0].clone());
        let survey = lbfgs.survey(&g[1], &g_old, &d);
        lbfgs.moved(Moved::new(
            1.0,
            &mut d,
            (&zero, s),
            (&mut g_old, &g[1]),
            survey,
        ));
    }
    let mut d = vec![f64::NAN; g.len()];
    let known = lbfgs.direction(&zero, g, &mut d);
    assert!(known.is_none_or(|slope| (slope - dot(g, &d)).abs() <= 1e-12 * norm(g) * norm(&d)));
    (d, lbfgs)
}

// ---- Naive mathematics ----

/// The formulas as published, from explicit difference vectors.
fn naive_beta(update: Update, g_old: &[f64], g_new: &[f64], d: &[f64]) -> f64 {
    let y: Vec<f64> = g_new.iter().zip(g_old).map(|(a, b)| a - b).collect();
    match update {
        // Fletcher & Reeves 1964
        Update::FletcherReeves => dot(g_new, g_new) / dot(g_old, g_old),
        // Polak & Ribière 1969; Nocedal & Wright 2006, eq. 5.44, 5.45
        Update::PolakRibierePlus => (dot(g_new, &y) / dot(g_old, g_old)).max(0.0),
        // Hestenes & Stiefel 1952; eq. 5.46
        Update::HestenesStiefelPlus => (dot(g_new, &y) / dot(d, &y)).max(0.0),
        // Dai & Yuan 1999
        Update::DaiYuan => dot(g_new, g_new) / dot(d, &y),
        // Hager & Zhang 2005, eq. 1.3 to 1.6
        Update::HagerZhang => {
            let d_y = dot(d, &y);
            let turned: Vec<f64> = y
                .iter()
                .zip(d)
                .map(|(y_i, d_i)| y_i - 2.0 * d_i * dot(&y, &y) / d_y)
                .collect();
            let eta = -1.0 / (norm(d) * norm(g_old).min(0.01));
            (dot(&turned, g_new) / d_y).max(eta)
        }
        _ => panic!("an update without its formula here"),
    }
}

/// The inverse BFGS matrix from `(s.y / y.y) I` of the newest pair, by the rank-two formula.
fn dense_bfgs(pairs: &[(Vec<f64>, Vec<f64>)], n: usize) -> Vec<Vec<f64>> {
    let scale = pairs.last().map_or(1.0, |(s, y)| dot(s, y) / dot(y, y));
    let mut h: Vec<Vec<f64>> = (0..n)
        .map(|i| (0..n).map(|j| if i == j { scale } else { 0.0 }).collect())
        .collect();
    for (s, y) in pairs {
        // H+ = (I - r s y') H (I - r y s') + r s s', with r = 1 / s.y
        let r = 1.0 / dot(s, y);
        let h_y = times(&h, y);
        let y_h_y = dot(y, &h_y);
        for i in 0..n {
            for j in 0..n {
                h[i][j] +=
                    -r * (s[i] * h_y[j] + h_y[i] * s[j]) + r * (r * y_h_y + 1.0) * s[i] * s[j];
            }
        }
    }
    h
}

/// Iterates of the linear conjugate gradient method (Nocedal & Wright 2006, algorithm 5.2) from residual `r`.
fn linear_conjugate_gradients(a: &[Vec<f64>], r: &[f64], start: &[f64]) -> Vec<Vec<f64>> {
    let (mut x, mut r) = (start.to_vec(), r.to_vec());
    let mut p = scaled(-1.0, &r);
    (0..N)
        .map(|_| {
            let a_p = times(a, &p);
            let old = dot(&r, &r);
            let step = old / dot(&p, &a_p);
            for i in 0..N {
                x[i] += step * p[i];
                r[i] += step * a_p[i];
            }
            let beta = dot(&r, &r) / old;
            p = (0..N).map(|i| beta * p[i] - r[i]).collect();
            x.clone()
        })
        .collect()
}

fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}

fn norm(a: &[f64]) -> f64 {
    dot(a, a).sqrt()
}

fn distance(a: &[f64], b: &[f64]) -> f64 {
    a.iter()
        .zip(b)
        .map(|(a, b)| (a - b).powi(2))
        .sum::<f64>()
        .sqrt()
}

fn distance_max(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).fold(0.0, |m, (a, b)| m.max((a - b).abs()))
}

fn max_abs(a: &[f64]) -> f64 {
    a.iter().fold(0.0, |m, a| m.max(a.abs()))
}

fn scaled(by: f64, a: &[f64]) -> Vec<f64> {
    a.iter().map(|a| by * a).collect()
}

fn times(a: &[Vec<f64>], x: &[f64]) -> Vec<f64> {
    a.iter().map(|row| dot(row, x)).collect()
}

fn bits(x: &[f64]) -> Vec<u64> {
    x.iter().map(|x| x.to_bits()).collect()
}

/// One number that differs, for all practical purposes, where a bit of a vector differs (FNV-1a).
fn print_of<T: Real>(x: &[T]) -> u64 {
    x.iter().fold(0xcbf2_9ce4_8422_2325, |h, x| {
        (h ^ x.to_double().to_bits())
            .wrapping_mul(0x0000_0100_0000_01b3)
            .rotate_left(29)
    })
}

/// SplitMix64 (G. L. Steele, D. Lea & C. H. Flood 2014): the same numbers on every machine.
struct Random(u64);

impl Random {
    /// Uniform in `[-1, 1)`.
    fn number(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        (z ^ (z >> 31)) as f64 / 2.0_f64.powi(63) - 1.0
    }

    fn vector(&mut self, n: usize) -> Vec<f64> {
        (0..n).map(|_| self.number()).collect()
    }

    /// `s` and `y` with an angle of less than 73 degrees between them.
    fn curved_pair(&mut self, n: usize) -> (Vec<f64>, Vec<f64>) {
        loop {
            let s = self.vector(n);
            let y: Vec<f64> = s
                .iter()
                .map(|s| (1.1 + self.number()) * s + 0.2 * self.number())
                .collect();
            if dot(&s, &y) > 0.3 * norm(&s) * norm(&y) && norm(&s) > 0.05 {
                return (s, y);
            }
        }
    }

    /// A symmetric matrix with eigenvalues spread evenly between 1 and `condition`.
    fn positive_definite(&mut self, n: usize, condition: f64) -> Vec<Vec<f64>> {
        let mut a: Vec<Vec<f64>> = (0..n)
            .map(|i| {
                let eigenvalue = 1.0 + (condition - 1.0) * i as f64 / (n - 1) as f64;
                (0..n)
                    .map(|j| if i == j { eigenvalue } else { 0.0 })
                    .collect()
            })
            .collect();
        // Turned by a reflection in each of a few random planes: A becomes R A R with R = I - 2 v v' / v.v.
        for _ in 0..3 {
            let v = self.vector(n);
            let r: Vec<Vec<f64>> = (0..n)
                .map(|i| {
                    let at = |j| f64::from(u8::from(i == j)) - 2.0 * v[i] * v[j] / dot(&v, &v);
                    (0..n).map(at).collect()
                })
                .collect();
            let half: Vec<Vec<f64>> = r.iter().map(|row| times(&a, row)).collect(); // R A, since A is symmetric
            a = half.iter().map(|row| times(&r, row)).collect();
        }
        a
    }
}
