//! The report says what it leaves out, writes over nothing, and holds whatever names it is given.

#[path = "experiment_support/records.rs"]
mod support;

use support::{invented, paid};
use surefoot::experiment::analysis::{AnalysisError, Solved};
use surefoot::experiment::report::{Options, ReportError, html, write};
use surefoot::plot::WriteError;

fn path(name: &str) -> std::path::PathBuf {
    std::env::temp_dir().join(format!(
        "surefoot-report-{name}-{}.html",
        std::process::id()
    ))
}

#[test]
fn an_old_report_is_kept_unless_told_otherwise() {
    let (path, records) = (path("kept"), [paid("P", 2, "A", Some(9))]);
    let written = write(&path, &records, &Options::new("first")).unwrap();
    assert_eq!(written.bytes, std::fs::metadata(&path).unwrap().len());
    assert_eq!((written.runs_shown, written.runs_left_out), (1, 0));
    let again = write(&path, &records, &Options::new("second"));
    assert!(matches!(
        again,
        Err(ReportError::Write(WriteError::Exists(_)))
    ));
    assert!(
        std::fs::read_to_string(&path)
            .unwrap()
            .contains("<h1>first</h1>")
    );
    write(
        &path,
        &records,
        &Options::new("second").with_overwrite(true),
    )
    .unwrap();
    assert!(
        std::fs::read_to_string(&path)
            .unwrap()
            .contains("<h1>second</h1>")
    );
    std::fs::remove_file(&path).unwrap();
    assert!(matches!(
        html(&[], &Options::default()),
        Err(ReportError::Analysis(AnalysisError::Empty))
    ));
    let bad = Options::default().with_solved(Solved::Gradient(f64::NAN));
    assert!(matches!(
        html(&records, &bad),
        Err(ReportError::Analysis(AnalysisError::Limit))
    ));
}

#[test]
fn names_cannot_break_out_of_the_page() {
    let evil = "</script><img src=x onerror=alert(1)>\u{0}\"'&<!--";
    let mut record = paid(evil, 2, evil, Some(9));
    record.note = evil.into();
    let page = html(&[record], &Options::new(evil)).unwrap();
    assert!(!page.contains("<img") && !page.contains("<!--"));
    assert_eq!(page.matches("</script>").count(), 2);
    // The data still reads, and holds the name as it was.
    let data = page
        .split("id=\"data\">")
        .nth(1)
        .unwrap()
        .split("</script>")
        .next()
        .unwrap();
    let data: serde_json::Value = serde_json::from_str(data).unwrap();
    assert_eq!(data["contenders"][0], evil);
}

#[test]
fn what_is_left_out_is_counted() {
    let records = invented(4, 50, 1, 1, 5);
    let page = html(&records, &Options::default().with_most_runs(30)).unwrap();
    assert!(
        page.contains("<p>30 of 200 runs:")
            && page.contains("170 runs left out to keep the file small")
    );
    let data = page
        .split("id=\"data\">")
        .nth(1)
        .unwrap()
        .split("</script>")
        .next()
        .unwrap();
    let data: serde_json::Value = serde_json::from_str(data).unwrap();
    let runs = data["runs"].as_array().unwrap();
    assert_eq!(runs.len(), 30);
    // Those that did not succeed come first.
    let failed = records
        .iter()
        .filter(|r| !r.ending.is_success())
        .count()
        .min(30);
    let word = |run: &serde_json::Value| data["notes"][run[5].as_u64().unwrap() as usize].clone();
    assert!(
        runs[..failed]
            .iter()
            .all(|run| word(run) == "evaluations_spent")
    );
}

#[test]
fn numbers_that_are_none_do_no_harm() {
    let mut records = invented(2, 8, 1, 1, 5);
    for (record, x) in records.iter_mut().zip([
        f64::NAN,
        f64::INFINITY,
        f64::NEG_INFINITY,
        1e308,
        -0.0,
        5e-324,
    ]) {
        (
            record.value,
            record.start_value,
            record.gradient_max,
            record.seconds,
        ) = (x, x, x, x);
        record.correct_digits = Some(x);
    }
    for solved in [
        Solved::Converged,
        Solved::Gradient(1e-5),
        Solved::Decrease(1e-3),
        Solved::Digits(4.0),
    ] {
        let page = html(&records, &Options::default().with_solved(solved)).unwrap();
        // The script itself asks for NaN.
        assert!(!page.split("<script>\n").next().unwrap().contains("NaN"));
        let data = page
            .split("id=\"data\">")
            .nth(1)
            .unwrap()
            .split("</script>")
            .next()
            .unwrap();
        assert!(serde_json::from_str::<serde_json::Value>(data).is_ok());
    }
}

#[test]
fn long_names_of_their_own_stay_under_twenty_megabytes() {
    // Each row a problem of its own with a long name and a long note: nothing can be shared.
    let records: Vec<_> = (0..150_000)
        .map(|i| {
            let mut record = paid(
                &format!(
                    "a chamber with a rather long name, the {i}th of them {}",
                    "x".repeat(300)
                ),
                2,
                "A",
                Some(9),
            );
            record.note = format!("a note of its own, {i} {}", "y".repeat(300));
            record
        })
        .collect();
    let page = html(&records, &Options::default().with_most_runs(usize::MAX)).unwrap();
    assert!(page.len() < 20_000_000, "{}", page.len());
    assert!(page.contains("left out to keep the file small"));
}
