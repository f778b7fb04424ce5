//! What a million records cost: the analysis in seconds, the report in seconds and bytes.

#[path = "../tests/experiment_support/records.rs"]
mod support;

use criterion::{Criterion, criterion_group, criterion_main};
use std::hint::black_box;
use std::time::Duration;
use support::invented;
use surefoot::experiment::analysis::{
    CostTable, Measure, Solved, all_pairs, data_profile, effort, performance_profile, recommend,
};
use surefoot::experiment::report;

fn a_million(c: &mut Criterion) {
    // 20 contenders, 5,000 problems, 5 starts, 2 repetitions.
    let records = invented(20, 5000, 5, 2, 1);
    assert_eq!(records.len(), 1_000_000);
    let mut group = c.benchmark_group("a million records");
    group
        .sample_size(10)
        .measurement_time(Duration::from_secs(10));
    let table =
        || CostTable::new(&records, Measure::Calls, Solved::Decrease(1e-3)).expect("records");
    group.bench_function("table of costs", |b| b.iter(&table));
    let costs = table();
    group.bench_function("performance and data profile", |b| {
        b.iter(|| {
            (
                performance_profile(black_box(&costs)),
                data_profile(&costs, true),
            )
        });
    });
    group.bench_function("190 pairs head to head", |b| {
        b.iter(|| all_pairs(black_box(&costs)));
    });
    group.bench_function("effort", |b| b.iter(|| effort(black_box(&records))));
    group.bench_function("recommendation", |b| {
        b.iter(|| recommend(black_box(&costs)));
    });
    let page = || report::html(&records, &report::Options::default()).expect("records");
    let bytes = page().len();
    println!("the report of a million records has {bytes} bytes");
    assert!(bytes < 20_000_000);
    group.bench_function("report", |b| b.iter(page));
    group.finish();
}

criterion_group!(benches, a_million);
criterion_main!(benches);
