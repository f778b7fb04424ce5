//! The parts of a step picture but for its trials.

use super::axis::{Axis, Scale};
use super::number::short;
use super::panel::{Panel, fitted};
use super::picture::{Anchor, Picture};
use super::step_picture::{LIST, SPAN, StepPicture};
use super::step_trials::mark;
use super::style;
use std::format;
use std::vec::Vec;

pub(super) const INK_LINE: &str =
    r##"class="s5" fill="none" stroke="#1b1b1b" stroke-width="1.8" stroke-linejoin="round""##;

impl StepPicture<'_> {
    /// Short strokes along the slopes that are known, in place of the curve.
    pub(super) fn tangents(&self, picture: &mut Picture, panel: &Panel) {
        let of_trials = self
            .trials
            .iter()
            .filter_map(|t| Some((t.trial.step, t.trial.value, t.trial.slope?)));
        for (step, value, slope) in of_trials.chain([(0.0, self.ray.value, self.ray.slope)]) {
            let middle = panel.x.at(step);
            let points: Vec<(f64, f64)> = (-4..=4)
                .map(|i| panel.x.number_at(middle + 6.0 * f64::from(i)))
                .map(|a| (a, value + slope * (a - step)))
                .collect();
            panel.line(picture, &points, INK_LINE);
        }
    }

    /// The first rule's intervals behind `phi`.
    pub(super) fn shade(&self, picture: &mut Picture, panel: &Panel) {
        let Some(profile) = self.profile.filter(|p| !p.rules().is_empty()) else {
            return;
        };
        let (bottom, top) = panel.y.pixels();
        for interval in profile.accepted(0) {
            let (from, to) = band(&panel.x, interval.start, interval.end);
            style::hatched(picture, 0, (from, top), (to, bottom), 0.35);
        }
    }

    pub(super) fn start_and_decrease(&self, picture: &mut Picture, panel: &Panel) {
        let (low, high) = panel.x.ends();
        let y = panel.y.at(self.ray.value);
        picture.rule((SPAN.0, y), (SPAN.1, y), 1.0, "stroke-dasharray=\"1.5 4\"");
        picture.haloed_text((SPAN.1 - 6.0, y - 5.0), Anchor::End, 12.0, "\u{3c6}(0)");
        let Some(decrease) = self.decrease else {
            return;
        };
        let points: Vec<(f64, f64)> = (0..=200)
            .map(|i| {
                let share = f64::from(i) / 200.0;
                let a = match self.scale {
                    Scale::Linear => low.max(0.0) + share * (high - low.max(0.0)),
                    Scale::Logarithmic => (low.ln() + share * (high.ln() - low.ln())).exp(),
                };
                (a, self.ray.decrease_limit(decrease, a))
            })
            .collect();
        panel.line(picture, &points, &style::stroke(1, 1.6));
        // Named where it is well inside, else at its last point.
        let (bottom, top) = panel.y.pixels();
        let inside = |p: &&(f64, f64)| (top + 16.0..bottom - 8.0).contains(&panel.y.at(p.1));
        let visible: Vec<&(f64, f64)> = points.iter().filter(inside).collect();
        if let Some(&&(a, v)) = visible.get(visible.len() / 2) {
            let (x, y) = (panel.x.at(a), panel.y.at(v));
            let text = format!("decrease {}", short(decrease));
            let near_start = (y - panel.y.at(self.ray.value)).abs() < 16.0;
            let y = if near_start { y + 15.0 } else { y - 6.0 };
            picture.haloed_text((x.min(SPAN.1 - 100.0), y), Anchor::Start, 12.0, &text);
        }
    }

    pub(super) fn strips(&self, picture: &mut Picture, x: &Axis, top: f64) {
        let Some(profile) = self.profile else {
            return;
        };
        for (number, name) in profile.rules().iter().enumerate() {
            let y = top + 24.0 * number as f64;
            picture.rule((SPAN.0, y + 17.0), (SPAN.1, y + 17.0), 0.8, "");
            let intervals = profile.accepted(number);
            for interval in &intervals {
                let (from, to) = band(x, interval.start, interval.end);
                style::hatched(picture, number, (from, y), (to, y + 17.0), 1.0);
            }
            let none = if intervals.is_empty() {
                " (nothing)"
            } else {
                ""
            };
            let name = format!("{}{none}", fitted(name, 250.0, 12.0));
            picture.text((LIST, y + 13.0), Anchor::Start, 12.0, &name);
        }
        if !profile.rules().is_empty() {
            picture.text((SPAN.0 - 8.0, top + 13.0), Anchor::End, 12.0, "accepts");
        }
    }

    pub(super) fn slope_panel(&self, picture: &mut Picture, panel: &Panel) {
        panel.frame(picture, "step a", "slope ratio");
        let zero = panel.y.at(0.0);
        picture.rule((SPAN.0, zero), (SPAN.1, zero), 1.0, "");
        for (number, &(curvature, strong)) in self.curvature.iter().enumerate() {
            let stroke = style::stroke(number + 2, 1.8);
            let level = |c: f64| [(panel.x.ends().0, c), (panel.x.ends().1, c)];
            let (upper, lower) = (panel.y.at(curvature), panel.y.at(-curvature));
            panel.line(picture, &level(curvature), &stroke);
            if strong {
                panel.line(picture, &level(-curvature), &stroke);
            }
            let close = lower - upper < 15.0;
            let text = short(curvature);
            let label = match (strong, close) {
                (true, true) => format!("curvature \u{b1}{text}"),
                _ => format!("curvature {text}"),
            };
            picture.text(
                (
                    LIST,
                    0.5 * (upper + if close && strong { lower } else { upper }) + 4.0,
                ),
                Anchor::Start,
                12.0,
                &label,
            );
            if strong && !close {
                picture.text(
                    (LIST, lower + 4.0),
                    Anchor::Start,
                    12.0,
                    &format!("curvature \u{2212}{text}"),
                );
            }
        }
        if let Some(profile) = self.profile {
            let points: Vec<(f64, f64)> = profile
                .rows()
                .map(|row| (row.step, row.slope_ratio.unwrap_or(f64::NAN)))
                .collect();
            panel.line(picture, &points, INK_LINE);
        }
        panel.outline(picture);
        let (bottom, _) = panel.y.pixels();
        picture.text(
            (LIST, bottom + 36.0),
            Anchor::Start,
            12.0,
            "slope ratio = \u{3c6}\u{2032}(a) / \u{3c6}\u{2032}(0)",
        );
        for entry in &self.trials {
            if let Some(ratio) = self.slope_ratio(entry) {
                mark(picture, panel, entry, ratio);
            }
        }
    }
}

/// Pixels of an interval, at least three wide so that it can be seen.
fn band(x: &Axis, start: f64, end: f64) -> (f64, f64) {
    let (from, to) = (x.clamped(start).0, x.clamped(end).0);
    let short = (1.5 - 0.5 * (to - from)).max(0.0);
    ((from - short).max(SPAN.0), (to + short).min(SPAN.1))
}
