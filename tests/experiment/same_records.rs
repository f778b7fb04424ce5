//! Records do not depend on threads, formats or on which runs stand beside them.

use super::{assert_same, fresh_folder, lbfgs, small};
use surefoot::Objective;
use surefoot::experiment::{
    Ending, Experiment, ExperimentError, Format, Record, Task, Workers, correct_digits,
    read_records, write_records,
};
use surefoot::problems::large::tridia;
use surefoot::problems::more_garbow_hillstrom;
use surefoot::problems::wrapped::{Amplitude, Noisy};

#[test]
fn serial_and_parallel_runs_say_the_same() {
    let many = small().with_problems(more_garbow_hillstrom().into_iter().skip(15));
    let serial = many.run().unwrap();
    for workers in [Workers::AllCores, Workers::Exactly(7.try_into().unwrap())] {
        let parallel = many.clone().with_workers(workers);
        assert_same(&parallel.run().unwrap(), &serial, "in memory");
        let folder = fresh_folder(&format!("parallel_{}", workers == Workers::AllCores));
        assert_same(&parallel.run_in(&folder).unwrap(), &serial, "on disk");
        assert_same(&read_records(&folder).unwrap(), &serial, "read again");
    }
}

#[test]
fn records_come_by_problem_contender_start_and_repetition() {
    let records = small().with_repetitions(2).run().unwrap();
    let keys: Vec<_> = records
        .iter()
        .map(|r| {
            (
                r.problem.as_str(),
                r.contender.as_str(),
                r.start,
                r.repetition,
            )
        })
        .collect();
    let contenders = [
        "weak, three-point",
        "strong, \"bisection\"",
        "steepest descent",
    ];
    let mut wanted = Vec::new();
    for (problem, starts) in [("Rosenbrock", 1), ("Beale (m = 3)", 2), ("Wood (m = 6)", 1)] {
        for contender in contenders {
            for start in 0..starts {
                wanted.extend((0..2).map(|repetition| (problem, contender, start, repetition)));
            }
        }
    }
    assert_eq!(keys, wanted);
}

/// Noise depends on problem, start, repetition and the experiment's seed; contenders of one make meet the same.
#[test]
fn contenders_meet_the_same_noise_and_repetitions_do_not() {
    let noisy = |name: &str| {
        let smooth = tridia(10).unwrap();
        let start = smooth.start().to_vec();
        Task::seeded(name, start, move |seed| {
            Noisy::new(smooth.clone(), Amplitude::Absolute(1e-3), seed).unwrap()
        })
    };
    let experiment = Experiment::new()
        .with_problem(noisy("one"))
        .with_problem(noisy("two"))
        .with_contender(lbfgs("first"))
        .with_contender(lbfgs("second"))
        .with_repetitions(2)
        .quiet();
    let records = experiment.run().unwrap();
    let value = |problem: usize, contender: usize, repetition: usize| {
        records[4 * problem + 2 * contender + repetition].start_value
    };
    let smooth = Objective::value(&mut tridia(10).unwrap(), &vec![1.0; 10]).unwrap();
    assert!((value(0, 0, 0) - smooth).abs() <= 1e-3 && value(0, 0, 0) != smooth);
    assert_eq!(value(0, 0, 0), value(0, 1, 0));
    assert_eq!(value(0, 0, 1), value(0, 1, 1));
    assert_ne!(value(0, 0, 0), value(0, 0, 1));
    assert_ne!(value(0, 0, 0), value(1, 0, 0));
    let other = experiment.clone().with_seed(1).run().unwrap();
    assert_ne!(other[0].start_value, records[0].start_value);
    assert_same(&experiment.run().unwrap(), &records, "once more");
}

#[test]
fn any_number_and_any_word_survives_the_files() {
    let numbers = [
        0.0,
        -0.0,
        f64::NAN,
        f64::INFINITY,
        f64::NEG_INFINITY,
        f64::MIN_POSITIVE,
        5e-324,
        f64::MAX,
        0.1 + 0.2,
        -1.0 / 3.0,
        1e15,
        123_456_789_012_345_680.0,
        3.0,
    ];
    let mut records = Vec::new();
    for (i, &x) in numbers.iter().enumerate() {
        let mut record = Record::new("a, \"b\" ; 'c' é | 1e5", i, "7");
        record.ending = Ending::ALL[i % Ending::ALL.len()];
        record.note = " spaces, commas and \"quotes\" ".into();
        record.iterations = u64::MAX - i as u64;
        (record.start_value, record.value, record.gradient_max) = (x, -x, x);
        record.correct_digits = (i % 3 > 0).then_some(x);
        records.push(record);
    }
    for format in [Format::Csv, Format::JsonLines] {
        let folder = fresh_folder(&format!("survives_{format:?}"));
        std::fs::create_dir_all(&folder).unwrap();
        let file = folder.join("copy");
        write_records(&records, &file, format).unwrap();
        // Read as any reader of the format would.
        let found: Vec<Record> = match format {
            Format::Csv => csv::Reader::from_path(&file)
                .unwrap()
                .deserialize()
                .map(Result::unwrap)
                .collect(),
            _ => std::fs::read_to_string(&file)
                .unwrap()
                .lines()
                .map(|line| serde_json::from_str(line).unwrap())
                .collect(),
        };
        assert_same(&found, &records, "copy");
        let again = write_records(&records, &file, format);
        assert!(matches!(again, Err(ExperimentError::Exists { .. })));
    }
}

#[test]
fn the_columns_are_the_documented_ones() {
    let folder = fresh_folder("columns");
    small().run_in(&folder).unwrap();
    let text = std::fs::read_to_string(folder.join("records.csv")).unwrap();
    assert_eq!(
        text.lines().next().unwrap(),
        "problem,n,contender,start,repetition,ending,note,iterations,values,gradients,both,too_long,too_short,outside,\
         start_value,value,gradient_max,correct_digits,seconds"
    );
}

#[test]
fn correct_digits_by_hand() {
    // |1.25 - 1| / 1 = 1/4, and log10(4) = 0.60206 (any table of logarithms).
    let quarter = correct_digits(1.25, 9.0, &[1.0]).unwrap();
    assert!((quarter - 0.602_059_991_327_962_4).abs() < 1e-15);
    // The nearest counts: 48 is off 50 by 2 parts in 50, and log10(25) = 1.39794.
    let nearest = correct_digits(48.0, 100.0, &[0.0, 50.0]).unwrap();
    assert!((nearest - 1.397_940_008_672_037_6).abs() < 1e-14);
    // At a minimum of 0 the value at the start is the scale.
    assert_eq!(correct_digits(0.5, 50.0, &[0.0]), Some(2.0));
    assert_eq!(correct_digits(0.0, 50.0, &[0.0]), Some(16.0));
    assert_eq!(correct_digits(-7.0, 50.0, &[-7.0]), Some(16.0));
    assert_eq!(
        correct_digits(1.0 + f64::EPSILON / 4.0, 5.0, &[1.0]),
        Some(16.0)
    );
    // Worse than nothing.
    assert_eq!(correct_digits(1e3, 10.0, &[0.0]), Some(-2.0));
    assert_eq!(correct_digits(f64::INFINITY, 1.0, &[0.0]), None);
    assert_eq!(correct_digits(1.0, 1.0, &[]), None);
    assert_eq!(correct_digits(1.0, f64::NAN, &[0.0]), None);
}
