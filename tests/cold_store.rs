//! The example `cold_store`: its gradient, its answers to bad files, and fits with a known outcome.
//!
//! The modules are those of the example itself, compiled into this test.
#![cfg(feature = "alloc")]

// What only the program's `main` uses is not used here.
#[allow(dead_code)]
#[path = "../examples/cold_store/command.rs"]
mod command;
#[path = "../examples/cold_store/contest.rs"]
mod contest;
#[path = "../examples/cold_store/estimates.rs"]
mod estimates;
#[path = "../examples/cold_store/fit.rs"]
mod fit;
#[path = "../examples/cold_store/model.rs"]
mod model;
#[path = "../examples/cold_store/page.rs"]
mod page;
#[path = "../examples/cold_store/readings.rs"]
mod readings;
#[path = "../examples/cold_store/residuals.rs"]
mod residuals;
#[path = "../examples/cold_store/study.rs"]
mod study;

use fit::Fit;
use model::{PARAMETERS, Parameters};
use readings::Row;
use std::ffi::OsString;
use study::Study;
use surefoot::acceptance::StrongWolfe;
use surefoot::finder::MoreThuente;
use surefoot::{Objective, Relation};

const RECOVERY: &[u8] = include_bytes!("../examples/cold_store/recovery.csv");

/// A store that the model describes exactly, in the order and units of the model's table.
const TRUTH: Parameters = [2.5, 0.2, 0.3, 30.0, 12.0, -19.0, -20.0];

fn recovery() -> Vec<Row> {
    readings::parse(RECOVERY).expect("the file in the example is sound")
}

/// The inputs and the empty cells of the example's file with readings by the model itself, each with `error(i)` added.
fn exact(p: &Parameters, mut error: impl FnMut(usize) -> [f64; 2]) -> Vec<Row> {
    let inputs = recovery();
    let mut rows = Vec::new();
    model::simulate(&inputs, p, |row, [air, product]| {
        let [e, f] = error(rows.len());
        rows.push(Row {
            air: row.air.map(|_| air + e),
            product: row.product.map(|_| product + f),
            ..row.clone()
        });
    });
    rows
}

fn far_from_start() -> Vec<f64> {
    vec![3.0, -4.0, 2.5, -6.0, 1.5, 2.0, -3.0]
}

#[test]
fn the_gradient_agrees_with_central_differences() {
    let rows = recovery();
    let mut fit = Fit::new(&rows);
    for x in [fit.origin(), far_from_start()] {
        let mut g = vec![f64::NAN; PARAMETERS];
        let both = fit.value_and_gradient(&x, &mut g).unwrap();
        assert!((both - fit.value(&x).unwrap()).abs() <= 1e-14 * both);
        let mut alone = vec![f64::NAN; PARAMETERS];
        fit.gradient(&x, &mut alone).unwrap();
        assert_eq!(alone, g);
        let size = g.iter().fold(0.0_f64, |m, g| m.max(g.abs()));
        for i in 0..PARAMETERS {
            // Two central differences, extrapolated: an error of order h^4.
            let mut difference = |h: f64| {
                let mut at = |by: f64| {
                    let mut y = x.clone();
                    y[i] += by;
                    fit.value(&y).unwrap()
                };
                (at(h) - at(-h)) / (2.0 * h)
            };
            let expected = (4.0 * difference(1e-3) - difference(2e-3)) / 3.0;
            assert!(
                (g[i] - expected).abs() <= 1e-9 * size,
                "{i}: {} {expected}",
                g[i]
            );
        }
    }
}

#[test]
fn the_model_follows_the_closed_form_of_a_store_without_product() {
    // air' = k (outside - air) - pull: air = far + (air(0) - far) exp(-k t) with far = outside - pull / k.
    let (k, pull, outside, start) = (1.5, 40.0, 20.0, 5.0);
    let p = [0.0, 0.0, k, pull, 0.0, start, -3.0];
    let rows: Vec<Row> = (0..50_u8)
        .map(|i| row(3.7 * f64::from(i), outside, 1.0, 0.0))
        .collect();
    let far = outside - pull / k;
    // A stretch of 3.7 minutes takes 4 steps h. A scheme of order four multiplies the distance from `far` by exp(-k h) to
    // within (k h)^5 / 120 a step, which adds up to k t exp(-k t) (k h)^4 / 120 of it: largest at k t = 1.
    let kh: f64 = k * 3.7 / 4.0 / 60.0;
    let bound = 1.05 * (start - far) * kh.powi(4) / 120.0 / std::f64::consts::E;
    let mut seen = 0;
    model::simulate(&rows, &p, |row, [air, product]| {
        let expected = far + (start - far) * (-k * row.minute / 60.0).exp();
        assert!(
            (air - expected).abs() < bound,
            "{} {air} {expected}",
            row.minute
        );
        assert_eq!(product, -3.0);
        seen += 1;
    });
    assert_eq!(seen, 50);
}

#[test]
fn a_row_speaks_of_the_time_since_the_row_before() {
    let p = [0.0, 0.0, 0.0, 60.0, 0.0, 0.0, 0.0];
    let rows = [
        row(0.0, 0.0, 1.0, 0.0),
        row(2.0, 0.0, 0.5, 0.0),
        row(5.0, 0.0, 0.0, 0.0),
    ];
    let mut air = Vec::new();
    model::simulate(&rows, &p, |_, [a, _]| air.push(a));
    // 60 K/h is 1 K a minute: nothing before the first row, half of 2 minutes, nothing more.
    assert_eq!(air[0], 0.0);
    assert!((air[1] + 1.0).abs() < 1e-12 && (air[2] + 1.0).abs() < 1e-12);
}

fn row(minute: f64, outside: f64, cooling: f64, defrost: f64) -> Row {
    Row {
        line: 1,
        minute,
        air: None,
        product: None,
        outside,
        cooling,
        defrost,
    }
}

#[test]
fn every_rule_and_finder_recovers_the_parameters_of_exact_readings() {
    let rows = exact(&TRUTH, |_| [0.0; 2]);
    let fit = Fit::new(&rows);
    let accounts = contest::by_rule(&fit, 1e-10)
        .into_iter()
        .chain(contest::by_finder(&fit, 1e-10));
    for account in accounts {
        assert!(
            account.report.converged(),
            "{}: {}",
            account.label,
            account.report.ending
        );
        let found = fit.parameters(&account.report.point);
        for (found, truth) in found.iter().zip(&TRUTH) {
            assert!(
                (found - truth).abs() <= 1e-6 * truth.abs(),
                "{}: {found} {truth}",
                account.label
            );
        }
    }
}

#[test]
fn all_rules_and_finders_reach_one_minimum_of_the_readings_in_the_example() {
    let rows = recovery();
    let fit = Fit::new(&rows);
    let accounts: Vec<_> = contest::by_rule(&fit, contest::TOLERANCE)
        .into_iter()
        .chain(contest::by_finder(&fit, contest::TOLERANCE))
        .collect();
    assert_eq!(accounts.len(), 11);
    let lowest = contest::lowest(&accounts).unwrap().report.value;
    for account in &accounts {
        let label = account.label;
        assert!(
            account.report.converged(),
            "{label}: {}",
            account.report.ending
        );
        assert!(account.report.value - lowest <= 1e-9 * lowest, "{label}");
    }
}

#[test]
fn each_refused_trial_is_accounted_for() {
    let rows = recovery();
    for account in contest::by_rule(&Fit::new(&rows), contest::TOLERANCE) {
        let (report, label) = (&account.report, account.label);
        let refusals = report.refusals;
        let refused = refusals.too_long + refusals.too_short + refusals.outside;
        assert_eq!(account.lost(), 0, "{label}");
        // Every search ended in a move, and each trial has one value; one value more is that of the start.
        assert_eq!(
            report.evaluations.all_values(),
            1 + report.iterations + refused,
            "{label}"
        );
        assert!(account.at_once < report.iterations, "{label}");
        let told: u64 = account.reasons.iter().map(|r| r.count).sum();
        assert!(told >= refused && refused > 0, "{label}");
        for reason in &account.reasons {
            let condition = reason
                .example
                .condition
                .expect("the model stays finite on these readings");
            assert_eq!(condition.name, reason.name);
            match condition.relation {
                Relation::AtMost => assert!(condition.found > condition.limit),
                Relation::AtLeast => assert!(condition.found < condition.limit),
            }
            let long = ["sufficient decrease", "slope not too positive"].contains(&reason.name);
            let short = ["curvature", "not too short"].contains(&reason.name);
            assert!(long || short, "{}", reason.name);
            assert!(if long {
                refusals.too_long > 0
            } else {
                refusals.too_short > 0
            });
        }
    }
}

#[test]
fn standard_errors_are_what_repeated_measurements_scatter_by() {
    let mut state = 1_u64;
    // Sum of twelve uniform numbers less six: mean 0, standard deviation 1.
    let mut normal = || {
        let mut uniform = || {
            state = state
                .wrapping_mul(6_364_136_223_846_793_005)
                .wrapping_add(1_442_695_040_888_963_407);
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        (0..12).map(|_| uniform()).sum::<f64>() - 6.0
    };
    const REPEATS: usize = 40;
    let (mut scatter, mut told) = ([0.0; PARAMETERS], [0.0; PARAMETERS]);
    for _ in 0..REPEATS {
        let rows = exact(&TRUTH, |_| {
            [
                fit::AIR_TOLERANCE * normal(),
                fit::PRODUCT_TOLERANCE * normal(),
            ]
        });
        let fit = Fit::new(&rows);
        let (finder, rule) = (MoreThuente::default(), StrongWolfe::default());
        let account = contest::run("", &fit, Box::new(finder), Box::new(rule), 1e-5);
        assert!(account.report.converged());
        let found = estimates::estimates(&fit, &account.report.point);
        for i in 0..PARAMETERS {
            scatter[i] += (found.parameters[i] - TRUTH[i]).powi(2) / REPEATS as f64;
            told[i] += found.errors[i]
                .expect("these inputs fix every parameter")
                .powi(2)
                / REPEATS as f64;
        }
    }
    for i in 0..PARAMETERS {
        // A variance from 40 repeats has a relative standard deviation of sqrt(2 / 40) = 0.22: four of them are allowed.
        let ratio = told[i] / scatter[i];
        assert!((1.0 / 1.9..1.9).contains(&ratio), "{i}: {ratio}");
    }
}

#[test]
fn a_parameter_that_the_readings_never_touch_gets_no_error() {
    let rows: Vec<Row> = recovery()
        .into_iter()
        .map(|row| Row {
            defrost: 0.0,
            ..row
        })
        .collect();
    let fit = Fit::new(&rows);
    let account = contest::by_rule(&fit, contest::TOLERANCE).pop().unwrap();
    let found = estimates::estimates(&fit, &account.report.point);
    let heat = model::TABLE
        .iter()
        .position(|entry| entry.name.starts_with("heat"))
        .unwrap();
    for i in 0..PARAMETERS {
        assert_eq!(found.errors[i].is_none(), i == heat);
    }
    assert_eq!(found.parameters[heat], found.start[heat]);
}

#[test]
fn residual_diagnostics_tell_what_was_put_in() {
    // The air errs by up to 0.2 K in a fixed round, and wildly once; the product sensor drifts by 0.06 K/h.
    let clean = recovery();
    let rows = exact(&TRUTH, |i| {
        let air = if i == 77 {
            5.0
        } else {
            [-0.2, 0.2, -0.1, 0.1, 0.0][i % 5]
        };
        [air, 0.06 * clean[i].minute / 60.0]
    });
    assert!(rows[77].air.is_some());
    let [air, product] = residuals::sensors(&rows, &TRUTH);
    assert_eq!(air.used + air.empty, rows.len());
    assert_eq!((air.wild, air.largest.line), (1, rows[77].line));
    assert!((air.largest.kelvin - 5.0).abs() < 1e-12);
    // Distances from the median, 0: one fifth 0, two fifths 0.1, two fifths 0.2. The median of them is 0.1.
    assert!((air.scale - 0.14826).abs() < 1e-12, "{}", air.scale);
    // Over one round the products sum to -0.07 and the squares to 0.1; empty cells and the wild reading disturb it a little.
    assert!((air.lag_one + 0.7).abs() < 0.15, "{}", air.lag_one);
    assert!((product.trend - 0.06).abs() < 1e-10, "{}", product.trend);
    assert!(product.lag_one > 0.9);
    let remarks = residuals::remarks(&[air, product]).join(" ");
    assert!(
        remarks.contains("do not stay level: product ("),
        "{remarks}"
    );
    assert!(remarks.contains("Wild readings: air (1, "), "{remarks}");
}

#[test]
fn exact_readings_draw_no_remark() {
    let rows = exact(&TRUTH, |_| [0.0; 2]);
    let study = Study::new("exact".to_owned(), rows).unwrap();
    assert_eq!(residuals::remarks(&study.sensors), Vec::<String>::new());
}

#[test]
fn the_page_names_every_rule_says_invented_and_carries_the_caution() {
    let file = std::str::from_utf8(RECOVERY).unwrap();
    assert!(file.lines().next().unwrap().contains("INVENTED"));
    let study = Study::new("recovery.csv".to_owned(), recovery()).unwrap();
    assert!(study.converged);
    let text = study.to_string();
    for label in [
        "sufficient decrease",
        "Goldstein 0.25",
        "weak Wolfe 0.9",
        "strong Wolfe 0.9",
        "strong Wolfe 0.1",
    ] {
        // Once for its cost, once for its reasons.
        assert!(
            text.matches(&format!("   {label} ")).count() >= 2,
            "{label}"
        );
    }
    let page = text.split_whitespace().collect::<Vec<_>>().join(" ");
    let caution =
        "no food-safety or refrigeration-safety release; local codes and licensed practice decide";
    assert_eq!(page.matches(caution).count(), 1);
    assert!(page.contains("All reached the same minimum"));
    assert!(page.contains("The model is too poor"));
}

/// A sound file of 30 rows; line 2 is the header, and row `i` stands in line `i + 3`.
fn sound() -> Vec<String> {
    let mut lines = vec!["# made up".to_owned(), readings::HEADER.join(",")];
    lines.extend((0..30).map(|i| format!("{}.5,-18.0,-20.0,21.0,0.25,0", 2 * i)));
    lines
}

fn parse(lines: &[String]) -> Result<Vec<Row>, readings::BadFile> {
    readings::parse((lines.join("\r\n") + "\r\n").as_bytes())
}

#[test]
fn a_sound_file_is_read_with_its_silences() {
    let mut lines = sound();
    lines[4] = " 4.5 , , -20.25 ,21,1,0".to_owned();
    lines.insert(6, "# a word".to_owned());
    lines.insert(7, String::new());
    let rows = parse(&lines).unwrap();
    assert_eq!(rows.len(), 30);
    let silent = Row {
        line: 5,
        minute: 4.5,
        air: None,
        product: Some(-20.25),
        outside: 21.0,
        cooling: 1.0,
        defrost: 0.0,
    };
    assert_eq!(rows[2], silent);
    assert_eq!(rows[4].line, 9);
    let marked = [b"\xEF\xBB\xBF".to_vec(), lines.join("\n").into_bytes()].concat();
    assert_eq!(readings::parse(&marked).unwrap(), rows);
}

#[test]
fn a_bad_row_is_answered_with_its_line_and_column() {
    let cases = [
        ("9.5,cold,-20,21,0,0", 2, "not a number"),
        ("9.5,-18,-20,2l,0,0", 4, "not a number"),
        ("9.5,NaN,-20,21,0,0", 2, "not a finite number"),
        ("9.5,-18,inf,21,0,0", 3, "not a finite number"),
        ("9.5,-18,-20,21,1e999,0", 5, "not a finite number"),
        (",-18,-20,21,0,0", 1, "empty"),
        ("9.5,-18,-20,,0,0", 4, "empty"),
        ("9.5,-18,-20,21,0,", 6, "empty"),
        ("9.5,-18,253.15,21,0,0", 3, "degrees Celsius"),
        ("9.5,-18,-20,21,40,0", 5, "share"),
        ("9.5,-18,-20,21,0,-0.1", 6, "share"),
        ("6.5,-18,-20,21,0,0", 1, "does not come after 6.5 of line 6"),
        ("-9.5,-18,-20,21,0,0", 1, "does not come after"),
        ("8000,-18,-20,21,0,0", 1, "minutes since line 6"),
        ("9.5,-18,-20,21,0", 6, "5 cells"),
        ("9.5", 2, "1 cells"),
        ("9.5,-18,-20,21,0,0,0", 7, "7 cells"),
        ("9,5,-18,-20,21,0,0", 7, "decimal comma"),
    ];
    for (row, column, word) in cases {
        let mut lines = sound();
        lines[6] = row.to_owned();
        let bad = parse(&lines).unwrap_err();
        assert_eq!((bad.line, bad.column), (7, column), "{row}: {bad}");
        let text = bad.to_string();
        assert!(
            text.starts_with(&format!("line 7, column {column}")) && text.contains(word),
            "{row}: {text}"
        );
    }
}

#[test]
fn a_bad_header_or_a_short_file_is_answered_with_its_line_and_column() {
    let cases = [
        (
            "minute,air_c,goods_c,outside_c,cooling,defrost",
            3,
            "`goods_c`",
        ),
        (
            "minute;air_c;product_c;outside_c;cooling;defrost",
            1,
            "with commas",
        ),
        ("minute,air_c,product_c,outside_c,cooling", 6, "too early"),
        (
            "minute,air_c,product_c,outside_c,cooling,defrost,door",
            7,
            "`door`",
        ),
        ("0.5,-18,-20,21,0,0", 1, "must read"),
    ];
    for (header, column, word) in cases {
        let mut lines = sound();
        lines[1] = header.to_owned();
        let bad = parse(&lines).unwrap_err();
        assert_eq!((bad.line, bad.column), (2, column), "{header}");
        assert!(bad.to_string().contains(word), "{bad}");
    }
    let ends = |lines: &[String]| {
        let bad = parse(lines).unwrap_err();
        (bad.line, bad.column)
    };
    assert_eq!(ends(&sound()[..21]), (21, 2)); // 19 readings of the air
    let silent: Vec<String> = sound()
        .iter()
        .map(|line| line.replace(",-20.0,", ",,"))
        .collect();
    assert_eq!(ends(&silent), (32, 3));
    assert_eq!(ends(&sound()[..1]), (1, 1));
    let nothing = readings::parse(b"").unwrap_err();
    assert_eq!((nothing.line, nothing.column), (1, 1));
    let latin = b"# b\nminute,air_c,product_c,outside_c,cooling,defrost\n0.5,-18,-20\xB0,21,0,0\n";
    let latin = readings::parse(latin).unwrap_err();
    assert_eq!((latin.line, latin.column), (3, 3));
}

#[test]
fn arguments_are_a_file_or_help_and_nothing_else() {
    use command::Command;
    let parse = |arguments: &[&str]| command::parse(arguments.iter().map(OsString::from));
    assert_eq!(parse(&[]), Ok(Command::Fit(None)));
    assert_eq!(parse(&["a.csv"]), Ok(Command::Fit(Some("a.csv".into()))));
    assert_eq!(parse(&["a.csv", "--help"]), Ok(Command::Help));
    assert!(parse(&["--speed"]).unwrap_err().contains("`--speed`"));
    assert!(parse(&["a.csv", "b.csv"]).unwrap_err().contains("`b.csv`"));
}
