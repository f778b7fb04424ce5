//! Pictures in the page.

use super::Options;
use crate::experiment::analysis::{CostTable, Measure, data_profile, performance_profile};
use crate::plot::{Picture, escaped, profile_chart, sweep_map};
use std::fmt::Write;
use std::string::String;

/// Lines in one chart.
const MOST_LINES: usize = 12;

pub(super) fn profiles(out: &mut String, tables: &[CostTable]) {
    out.push_str("<section id=\"profiles\" aria-labelledby=\"h-profiles\">\n<h2 id=\"h-profiles\">Profiles</h2>\n");
    for table in tables {
        let (measure, solved) = (table.measure(), table.solved());
        let chart = profile_chart(&performance_profile(table), measure, solved, MOST_LINES);
        figure(
            out,
            &chart.picture(),
            "Share of instances solved at no more than so many times the cost of the cheapest contender on the same instance \
             (Dolan and Moré 2002). Higher is better; at the left edge stands who is cheapest most often, at the right who solves most.",
        );
        if measure == Measure::Calls {
            let chart = profile_chart(&data_profile(table, true), measure, solved, MOST_LINES);
            figure(
                out,
                &chart.picture(),
                "Share of instances solved within a budget of calls for each variable and one more (Moré and Wild 2009). It does not depend \
                 on who else takes part.",
            );
        }
    }
    out.push_str("</section>\n");
}

/// The sweep, and the caller's own pictures.
pub(super) fn further(out: &mut String, options: &Options) {
    if options.sweep.is_none() && options.pictures.is_empty() {
        return;
    }
    out.push_str("<section id=\"pictures\" aria-labelledby=\"h-pictures\">\n<h2 id=\"h-pictures\">Pictures</h2>\n");
    if let Some((sweep, measure)) = &options.sweep
        && let Ok(picture) = sweep_map(sweep, *measure).picture()
    {
        figure(
            out,
            &picture,
            "Cost of each pair of thresholds as a multiple of the cheapest pair of each instance, geometric mean; an unsolved instance \
             counts as 10. The least is framed.",
        );
    }
    for (caption, picture) in &options.pictures {
        figure(out, picture, caption);
    }
    out.push_str("</section>\n");
}

/// A picture that scrolls sideways where the page is narrow.
pub(super) fn figure(out: &mut String, picture: &Picture, caption: &str) {
    let label = escaped(picture.title());
    let least = picture.size().0.min(640.0);
    let _ = write!(
        out,
        "<figure>\n<div class=\"wide\" role=\"group\" tabindex=\"0\" aria-label=\"{label}\" style=\"--least:{least}px\">\n{}</div>\n<figcaption>{}</figcaption>\n</figure>\n",
        picture.svg(),
        escaped(caption)
    );
}
