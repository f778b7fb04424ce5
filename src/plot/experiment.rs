//! The profiles and the sweep of an experiment, as pictures.

use super::{Chart, HeatMap, Scale, short};
use crate::experiment::analysis::{Measure, Profile, ProfileKind, Solved, Sweep};
use std::format;
use std::vec::Vec;

/// A profile as a chart of staircases, at most `most` of them: those who solve most, and of equals the quicker.
pub fn profile_chart(profile: &Profile, measure: Measure, solved: Solved, most: usize) -> Chart {
    let (name, instances) = (measure.name(), profile.instances());
    let (title, x_label) = match profile.kind() {
        ProfileKind::Ratio => (
            format!("Performance profile by {name}"),
            format!("{name}, as a multiple of the cheapest contender's"),
        ),
        ProfileKind::Cost => (
            format!("Data profile by {name}"),
            format!("budget ({name})"),
        ),
        ProfileKind::SimplexGradients => (
            format!("Data profile by {name} per variable"),
            format!("budget in simplex gradients ({name} / (n + 1))"),
        ),
    };
    let end = profile.range().map_or(1.0, |(_, end)| end);
    let first = profile.range().map_or(1.0, |(first, _)| first);
    // The area under the staircase over powers of the allowance: large for those who solve much, soon.
    let area = |contender: usize| {
        let last = (end.max(first) / first).ln().max(1e-9);
        profile
            .steps(contender)
            .fold((0.0, 0.0), |(sum, before), (at, share)| {
                (
                    sum + (share - before) * (1.0 + (last - (at / first).ln()) / last),
                    share,
                )
            })
            .0
    };
    let mut order: Vec<(usize, f64)> = (0..profile.contenders().len())
        .map(|c| (c, area(c)))
        .collect();
    order.sort_by(|a, b| b.1.total_cmp(&a.1));
    let left_out = order.len().saturating_sub(most);
    order.truncate(most);
    let mut note = format!("{instances} instances; solved: {}", solved.sentence());
    if left_out > 0 {
        note = format!("{note}; {left_out} contenders left out");
    }
    let chart = Chart::new(
        &title,
        &x_label,
        &format!("share of {instances} instances solved"),
    )
    .with_x_scale(Scale::Logarithmic)
    .with_y_ends(0.0, 1.02)
    .with_note(&note);
    order.into_iter().fold(chart, |chart, (contender, _)| {
        let steps: Vec<(f64, f64)> = profile.steps(contender).collect();
        chart.staircase(&profile.contenders()[contender], &steps)
    })
}

/// The costs of a sweep over its two thresholds, with the share solved in each cell.
pub fn sweep_map(sweep: &Sweep, measure: Measure) -> HeatMap {
    let (rows, columns) = (sweep.decreases(), sweep.curvatures());
    let places =
        || (0..rows.len()).flat_map(|row| (0..columns.len()).map(move |column| (row, column)));
    HeatMap {
        title: format!("Cost of the two thresholds, in {}", measure.name()),
        x_label: "curvature threshold (share of the first slope)".into(),
        y_label: "decrease threshold".into(),
        unit: "times the cheapest".into(),
        columns: columns.iter().map(|&c| short(c)).collect(),
        rows: rows.iter().map(|&d| short(d)).collect(),
        cells: places()
            .map(|(row, column)| sweep.cell(row, column).map(|cell| cell.ratio))
            .collect(),
        remarks: places()
            .map(|(row, column)| {
                let cell = sweep.cell(row, column);
                cell.map_or("".into(), |cell| {
                    format!("{:.0} % solved", 100.0 * cell.solved)
                })
            })
            .collect(),
    }
}
