//! Profiles, head-to-head tables, sweeps and recommendations say what can be worked out by hand.
//!
//! `tests/check_profiles.py` works the profiles of the file written here out once more, in NumPy.

#[path = "experiment_support/records.rs"]
mod support;

use std::fmt::Write;
use support::{Numbers, invented, paid, record};
use surefoot::experiment::analysis::*;
use surefoot::experiment::{Ending, Record};

/// Calls; `-` did not converge.
///
/// | problem | n | A | B | C |
/// |---|---|---|---|---|
/// | P1 | 1 | 10 | 20 | 10 |
/// | P2 | 3 | 40 | 20 | - |
/// | P3 | 1 | 30 | 90 | 60 |
/// | P4 | 9 | - | 50 | 100 |
fn hand() -> Vec<Record> {
    let rows = [
        ("P1", 1, [Some(10), Some(20), Some(10)]),
        ("P2", 3, [Some(40), Some(20), None]),
        ("P3", 1, [Some(30), Some(90), Some(60)]),
        ("P4", 9, [None, Some(50), Some(100)]),
    ];
    let runs = rows.iter().flat_map(|(problem, n, costs)| {
        let of_contender = |(name, cost): (&&str, &Option<u64>)| paid(problem, *n, name, *cost);
        ["A", "B", "C"]
            .iter()
            .zip(costs)
            .map(of_contender)
            .collect::<Vec<_>>()
    });
    runs.collect()
}

fn hand_table() -> CostTable {
    CostTable::new(&hand(), Measure::Calls, Solved::Converged).unwrap()
}

#[test]
fn a_performance_profile_worked_by_hand() {
    // Ratios to the cheapest: A 1 2 1 -, B 2 1 3 1, C 1 - 2 2.
    let profile = performance_profile(&hand_table());
    let shares = |tau| [0, 1, 2].map(|contender| profile.share(contender, tau));
    assert_eq!(shares(0.99), [0.0, 0.0, 0.0]);
    assert_eq!(shares(1.0), [0.5, 0.5, 0.25]);
    assert_eq!(shares(1.99), [0.5, 0.5, 0.25]);
    assert_eq!(shares(2.0), [0.75, 0.75, 0.75]);
    assert_eq!(shares(3.0), [0.75, 1.0, 0.75]);
    assert_eq!(shares(1e9), [0.75, 1.0, 0.75]);
    assert_eq!(
        profile.steps(1).collect::<Vec<_>>(),
        [(1.0, 0.5), (2.0, 0.75), (3.0, 1.0)]
    );
    assert_eq!(profile.range(), Some((1.0, 3.0)));
    assert_eq!((profile.instances(), profile.share(3, 9.0)), (4, 0.0));
}

#[test]
fn a_data_profile_worked_by_hand() {
    // Over n + 1: A 5 10 15 -, B 10 5 45 5, C 5 - 30 10.
    let table = hand_table();
    let profile = data_profile(&table, true);
    let shares = |kappa| [0, 1, 2].map(|contender| profile.share(contender, kappa));
    assert_eq!(shares(4.9), [0.0, 0.0, 0.0]);
    assert_eq!(shares(5.0), [0.25, 0.5, 0.25]);
    assert_eq!(shares(10.0), [0.5, 0.75, 0.5]);
    assert_eq!(shares(44.0), [0.75, 0.75, 0.75]);
    let calls = data_profile(&table, false);
    assert_eq!(
        calls.steps(0).collect::<Vec<_>>(),
        [(10.0, 0.25), (30.0, 0.5), (40.0, 0.75)]
    );
    assert_eq!(calls.range(), Some((10.0, 100.0)));
}

#[test]
fn a_head_to_head_table_worked_by_hand() {
    let pairs = all_pairs(&hand_table());
    let scores: Vec<_> = pairs
        .iter()
        .map(|h| (h.first, h.second, h.wins, h.losses, h.ties))
        .collect();
    assert_eq!(scores, [(0, 1, 2, 2, 0), (0, 2, 2, 1, 1), (1, 2, 2, 2, 0)]);
    assert_eq!(pairs[1].p, 1.0); // 2 (1 + 3) / 8
    // Both solved P1 and P3: sqrt(10/10 x 30/60).
    assert_eq!(pairs[1].both_solved, 2);
    assert!((pairs[1].ratio.unwrap() - 0.5_f64.sqrt()).abs() < 1e-15);
    assert_eq!(head_to_head(&hand_table(), 0, 3), None);
}

#[test]
fn the_starts_of_a_problem_are_one_game() {
    // A wins two of three starts of one problem: one game won, not two.
    let mut records = Vec::new();
    for (start, (a, b)) in (0..).zip([(1, 2), (1, 2), (9, 3)]) {
        for (name, calls) in [("A", a), ("B", b)] {
            let mut run = paid("P", 2, name, Some(calls));
            run.start = start;
            records.push(run);
        }
    }
    let table = CostTable::new(&records, Measure::Calls, Solved::Converged).unwrap();
    let game = head_to_head(&table, 0, 1).unwrap();
    assert_eq!(
        (table.problems(), game.wins, game.losses, game.ties),
        (1, 1, 0, 0)
    );
}

#[test]
fn the_sign_test_equals_exact_binomials() {
    // The smallest two-sided value of 6 games is 2 / 64, of 5 games 2 / 32.
    assert_eq!(sign_test(6, 0), 0.03125);
    assert_eq!(sign_test(0, 5), 0.0625);
    assert_eq!(sign_test(0, 0), 1.0);
    assert_eq!(sign_test(8, 2), 112.0 / 1024.0); // 2 (1 + 10 + 45)
    assert_eq!(sign_test(10, 10), 1.0);
    assert_eq!(sign_test(10, 11), 1.0);
    // Pascal's triangle, in whole numbers while they fit and in doubles with a scale beyond.
    let mut row = vec![1.0_f64];
    for games in 1..=1000_u64 {
        let mut next = vec![0.0; row.len() + 1];
        for (k, share) in row.iter().enumerate() {
            next[k] += 0.5 * share;
            next[k + 1] += 0.5 * share;
        }
        row = next;
        let mut tail = 0.0;
        for few in 0..=games / 2 {
            tail += row[few as usize];
            let expected = if 2 * few == games {
                1.0
            } else {
                (2.0_f64 * tail).min(1.0)
            };
            let found = sign_test(few, games - few);
            // Below 1e-290 Pascal's triangle in doubles loses digits.
            assert!(
                (found - expected).abs() <= 1e-10 * expected + 1e-290,
                "{few} of {games}: {found:e} for {expected:e}"
            );
            assert_eq!(found, sign_test(games - few, few));
        }
    }
    let normal = sign_test(500_000 - 980, 500_000 + 980);
    assert!(
        (normal - 0.05).abs() < 1e-3,
        "1.96 standard deviations: {normal}"
    );
}

#[test]
fn effort_adds_up() {
    let mut runs = vec![
        record("P", 2, "A", 0),
        record("P", 2, "A", 1),
        record("P", 2, "B", 0),
    ];
    (
        runs[0].iterations,
        runs[0].values,
        runs[0].gradients,
        runs[0].both,
    ) = (6, 5, 7, 3);
    (runs[0].too_long, runs[0].too_short, runs[0].outside) = (4, 1, 1);
    (runs[1].iterations, runs[1].both, runs[1].too_long) = (4, 5, 4);
    runs[2].iterations = 0;
    let all = effort(&runs);
    assert_eq!(
        (all[0].runs, all[0].trials(), all[0].evaluations),
        (2, 20, 20)
    );
    assert_eq!(all[0].share_too_long(), Some(0.4));
    assert_eq!(all[0].share_too_short(), Some(0.05));
    assert_eq!(all[0].share_outside(), Some(0.05));
    assert_eq!(all[0].evaluations_per_iteration(), Some(2.0));
    assert_eq!(
        (all[1].share_too_long(), all[1].evaluations_per_iteration()),
        (None, None)
    );
}

#[test]
fn repetitions_count_by_their_median() {
    let costs = |calls: &[Option<u64>]| {
        let runs: Vec<Record> = calls.iter().map(|&c| paid("P", 1, "A", c)).collect();
        CostTable::new(&runs, Measure::Calls, Solved::Converged)
            .unwrap()
            .cost(0, 0)
    };
    assert_eq!(costs(&[Some(9), Some(1), Some(4)]), Some(4.0));
    assert_eq!(costs(&[Some(9), Some(1), Some(4), Some(5)]), Some(4.5));
    assert_eq!(costs(&[Some(9), None, Some(4)]), Some(9.0));
    assert_eq!(costs(&[Some(9), None]), None);
}

#[test]
fn each_convergence_test_holds_to_its_limit() {
    let solved = |run: &Record, solved| {
        CostTable::new(std::slice::from_ref(run), Measure::Calls, solved)
            .unwrap()
            .solved_by(0)
            == 1
    };
    let mut run = record("P", 1, "A", 0);
    (
        run.start_value,
        run.value,
        run.gradient_max,
        run.correct_digits,
    ) = (11.0, 1.0, 1e-5, Some(6.0));
    assert!(solved(&run, Solved::Gradient(1e-5)) && !solved(&run, Solved::Gradient(9e-6)));
    assert!(solved(&run, Solved::Digits(6.0)) && !solved(&run, Solved::Digits(6.1)));
    run.correct_digits = None;
    run.gradient_max = f64::NAN;
    assert!(!solved(&run, Solved::Digits(1.0)) && !solved(&run, Solved::Gradient(1e9)));
    // From 11 the best fell by 10: tau = 0.25 asks for a fall of 7.5.
    let mut best = run.clone();
    best.contender = "best".into();
    for (value, expected) in [(3.5, 1), (3.6, 0), (f64::NAN, 0)] {
        run.value = value;
        let table = CostTable::new(
            &[run.clone(), best.clone()],
            Measure::Calls,
            Solved::Decrease(0.25),
        )
        .unwrap();
        assert_eq!(
            (table.solved_by(0), table.solved_by(1)),
            (expected, 1),
            "{value}"
        );
    }
}

#[test]
fn what_only_some_ran_is_left_out_and_counted() {
    let mut records = hand();
    records.push(paid("P5", 1, "A", Some(1)));
    let table = CostTable::new(&records, Measure::Calls, Solved::Converged).unwrap();
    assert_eq!((table.instances().len(), table.incomplete()), (4, 1));
    assert!(
        recommend(&table)
            .warnings
            .iter()
            .any(|w| w.contains("Left out: 1 instance "))
    );
}

#[test]
fn bad_input_is_an_error_with_a_sentence() {
    let new =
        |records: &[Record], solved| CostTable::new(records, Measure::Calls, solved).unwrap_err();
    assert_eq!(new(&[], Solved::Converged), AnalysisError::Empty);
    for limit in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        for solved in [
            Solved::Gradient(limit),
            Solved::Decrease(limit),
            Solved::Digits(limit),
        ] {
            assert_eq!(new(&hand(), solved), AnalysisError::Limit);
        }
    }
    assert_eq!(new(&hand(), Solved::Decrease(1.0)), AnalysisError::Limit);
    let apart = [paid("P", 1, "A", Some(1)), paid("Q", 1, "B", Some(1))];
    assert_eq!(
        new(&apart, Solved::Converged),
        AnalysisError::NothingInCommon
    );
    assert!(
        AnalysisError::NothingInCommon
            .to_string()
            .contains("let the experiment finish")
    );
}

#[test]
fn a_sweep_worked_by_hand() {
    let pair = |contender: &str, decrease, curvature| Thresholds {
        contender: contender.into(),
        decrease,
        curvature,
    };
    let contenders = [
        pair("A", 1e-4, 0.9),
        pair("B", 1e-4, 0.1),
        pair("C", 0.3, 0.9),
    ];
    let mut records = hand();
    records.push(paid("P1", 1, "somebody else", Some(1)));
    let grid = sweep(&records, &contenders, Measure::Calls, Solved::Converged).unwrap();
    assert_eq!(
        (grid.decreases(), grid.curvatures()),
        (&[1e-4, 0.3][..], &[0.1, 0.9][..])
    );
    // Products of ratios, unsolved as 10: A 1 x 2 x 1 x 10, B 2 x 1 x 3 x 1, C 1 x 10 x 2 x 2; four instances.
    for (row, column, product, solved) in
        [(0, 1, 20.0_f64, 0.75), (0, 0, 6.0, 1.0), (1, 1, 40.0, 0.75)]
    {
        let cell = grid.cell(row, column).unwrap();
        assert!((cell.ratio - product.powf(0.25)).abs() < 1e-14);
        assert_eq!(cell.solved, solved);
    }
    assert_eq!(
        (grid.cell(1, 0), grid.cell(2, 0), grid.cell(0, 2)),
        (None, None, None)
    );
    assert_eq!((grid.cheapest(), grid.instances()), (Some((0, 0)), 4));
    let error = |contenders: &[Thresholds]| {
        sweep(&records, contenders, Measure::Calls, Solved::Converged).unwrap_err()
    };
    assert_eq!(
        error(&[pair("A", 0.1, 0.9), pair("B", 0.1, 0.9)]),
        SweepError::Twice("B".into())
    );
    assert_eq!(
        error(&[pair("A", 0.1, 0.9), pair("A", 0.1, 0.8)]),
        SweepError::Twice("A".into())
    );
    assert_eq!(
        error(&[pair("A", f64::NAN, 0.9)]),
        SweepError::NotFinite("A".into())
    );
    assert_eq!(
        error(&[pair("X", 0.1, 0.9)]),
        SweepError::Unknown("X".into())
    );
    assert_eq!(error(&[]), SweepError::Analysis(AnalysisError::Empty));
}

#[test]
fn the_recommendation_names_the_cheapest_and_what_is_thin() {
    let said = recommend(&hand_table());
    assert_eq!(said.contender.as_deref(), Some("B")); // 6^(1/4) against 20^(1/4) and 40^(1/4)
    assert!(said.headline.starts_with("Lean towards B"), "{said}");
    assert!(
        said.evidence[0].starts_with("It solved 4 of 4 instances"),
        "{said}"
    );
    assert!(
        said.evidence[3].contains("won 2, lost 2 and tied 0"),
        "{said}"
    );
    assert!(said.warnings[0].starts_with("Only 4 problems"), "{said}");
    assert!(
        said.warnings[1].contains("Not told from chance") && said.warnings[1].ends_with("A; C."),
        "{said}"
    );
    assert_eq!(said.warnings.len(), 2, "{said}");
}

#[test]
fn the_recommendation_is_plain_where_the_evidence_is() {
    let runs = |problems: u64, failing: u64| {
        let one = |i: u64| {
            let a = (i >= failing).then_some(10);
            [
                paid(&format!("P{i}"), 2, "A", a),
                paid(
                    &format!("P{i}"),
                    2,
                    "B",
                    Some(if i < failing { 500 } else { 30 }),
                ),
            ]
        };
        (0..problems).flat_map(one).collect::<Vec<Record>>()
    };
    let say = |records: &[Record]| {
        recommend(&CostTable::new(records, Measure::Calls, Solved::Converged).unwrap())
    };
    let clear = say(&runs(30, 0));
    assert!(
        clear.headline.starts_with("Take A") && clear.warnings.is_empty(),
        "{clear}"
    );
    assert!(say(&runs(12, 0)).warnings[0].starts_with("Few problems (12)"));
    // 24 cheap against 8 failures: still the least ratio, but that must be said.
    let failing = say(&runs(32, 8));
    assert_eq!(failing.contender.as_deref(), Some("A"));
    assert!(
        failing
            .warnings
            .iter()
            .any(|w| w.starts_with("Many failures: it left 8 of 32")),
        "{failing}"
    );
    assert!(
        failing
            .warnings
            .iter()
            .any(|w| w.starts_with("Others solved more instances: B")),
        "{failing}"
    );
    let alone: Vec<Record> = runs(30, 0)
        .into_iter()
        .filter(|r| r.contender == "A")
        .collect();
    assert!(say(&alone).headline.contains("only contender"));
    let nobody: Vec<Record> = (0..3)
        .map(|i| paid(&format!("P{i}"), 1, "A", None))
        .collect();
    assert_eq!(say(&nobody).contender, None);
}

#[test]
fn ten_equal_contenders_are_not_told_apart() {
    // Costs by chance alone: a winner is always found, and must not be called significant.
    let mut numbers = Numbers(7);
    for _ in 0..20 {
        let records: Vec<Record> = (0..40)
            .flat_map(|problem| (0..10).map(move |contender| (problem, contender)))
            .map(|(problem, contender)| {
                paid(
                    &format!("P{problem}"),
                    2,
                    &format!("C{contender}"),
                    Some(10 + numbers.below(90)),
                )
            })
            .collect();
        let said = recommend(&CostTable::new(&records, Measure::Calls, Solved::Converged).unwrap());
        assert!(said.headline.starts_with("Lean towards"), "{said}");
    }
}

#[test]
fn profiles_follow_their_definition_on_invented_runs() {
    let records = invented(5, 40, 3, 1, 11);
    let table = CostTable::new(&records, Measure::Seconds, Solved::Gradient(1e-5)).unwrap();
    let (performance, data) = (performance_profile(&table), data_profile(&table, true));
    let instances = table.instances().len();
    for contender in 0..5 {
        for allowance in [1.0, 1.1, 1.5, 2.0, 5.0, 1e-5] {
            let share = |holds: &dyn Fn(usize, f64) -> bool| {
                let solved = (0..instances)
                    .filter(|&i| table.cost(i, contender).is_some_and(|cost| holds(i, cost)));
                solved.count() as f64 / instances as f64
            };
            let by_definition = share(&|i, cost| {
                let least = (0..5)
                    .filter_map(|other| table.cost(i, other))
                    .fold(f64::INFINITY, f64::min);
                cost / least <= allowance
            });
            assert_eq!(performance.share(contender, allowance), by_definition);
            let by_definition =
                share(&|i, cost| cost / (table.instances()[i].n as f64 + 1.0) <= allowance);
            assert_eq!(data.share(contender, allowance), by_definition);
        }
    }
}

/// Writes runs, and what is made of them, for `tests/check_profiles.py`.
#[test]
fn writes_runs_and_profiles_for_the_independent_check() {
    let folder = std::path::Path::new(env!("CARGO_TARGET_TMPDIR")).join("profiles");
    std::fs::create_dir_all(&folder).unwrap();
    let records = invented(6, 25, 2, 3, 3);
    let mut runs = String::from(
        "problem,n,contender,start,converged,calls,iterations,seconds,start_value,value\n",
    );
    for r in &records {
        let converged = u8::from(r.ending == Ending::Converged);
        let calls = r.evaluations();
        writeln!(
            runs,
            "{},{},{},{},{converged},{calls},{},{:e},{:e},{:e}",
            r.problem, r.n, r.contender, r.start, r.iterations, r.seconds, r.start_value, r.value
        )
        .unwrap();
    }
    let mut found = String::from("what,measure,solved,first,second,at,number\n");
    for measure in [Measure::Calls, Measure::Iterations, Measure::Seconds] {
        for (word, solved) in [
            ("converged", Solved::Converged),
            ("decrease", Solved::Decrease(1e-3)),
        ] {
            let table = CostTable::new(&records, measure, solved).unwrap();
            let measure = measure.name();
            let profiles = [
                ("ratio", performance_profile(&table)),
                ("cost", data_profile(&table, false)),
                ("simplex", data_profile(&table, true)),
            ];
            for (what, profile) in profiles {
                for (number, name) in profile.contenders().iter().enumerate() {
                    for (at, share) in profile.steps(number) {
                        writeln!(found, "{what},{measure},{word},{name},,{at:e},{share:e}")
                            .unwrap();
                    }
                }
            }
            for pair in all_pairs(&table) {
                let (a, b) = (
                    &table.contenders()[pair.first],
                    &table.contenders()[pair.second],
                );
                writeln!(
                    found,
                    "sign,{measure},{word},{a},{b},{},{:e}",
                    pair.wins, pair.p
                )
                .unwrap();
            }
            for (name, score) in table.contenders().iter().zip(scores(&table)) {
                writeln!(
                    found,
                    "score,{measure},{word},{name},,{},{:e}",
                    score.solved, score.ratio
                )
                .unwrap();
            }
        }
    }
    std::fs::write(folder.join("runs.csv"), runs).unwrap();
    std::fs::write(folder.join("found.csv"), found).unwrap();
}
