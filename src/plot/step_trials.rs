//! The trials of a step picture: marks, numbers, and the list that says the same in words.

use super::number::short;
use super::panel::Panel;
use super::picture::{Anchor, Picture};
use super::step_picture::{LIST, ROW, SPAN, StepPicture};
use super::style::{self, Shape};
use super::trial_lane::apart;
use crate::Side;
use crate::search::{Entry, Fate};
use std::format;
use std::vec::Vec;

/// More trials are drawn and numbered, but not listed.
pub(super) const MOST_LISTED: usize = 15;

impl StepPicture<'_> {
    pub(super) fn mark_trials(&self, picture: &mut Picture, panel: &Panel) {
        let mut order: Vec<&Entry<f64>> = self.trials.iter().collect();
        order.sort_by(|a, b| {
            a.trial
                .step
                .total_cmp(&b.trial.step)
                .then(a.number.cmp(&b.number))
        });
        let wished: Vec<f64> = order
            .iter()
            .map(|t| panel.x.clamped(t.trial.step).0)
            .collect();
        let room = SPAN.1 - SPAN.0;
        let gap = (room / wished.len().max(1) as f64).min(18.0);
        let size = if gap < 13.0 { 8.0 } else { 11.5 };
        let lane = panel.y.pixels().1 - 18.0;
        for (entry, at) in order.iter().zip(apart(&wished, gap, SPAN)) {
            let (x, _) = panel.x.clamped(entry.trial.step);
            let (y, _) = panel.y.clamped(entry.trial.value);
            let style = "stroke-opacity=\"0.55\"";
            picture.rule((at, lane + 4.0), (x, lane + 16.0), 0.8, style);
            picture.rule((x, lane + 16.0), (x, y), 0.8, style);
            picture.text(
                (at, lane),
                Anchor::Middle,
                size,
                &format!("{}", entry.number),
            );
        }
        for entry in &self.trials {
            mark(picture, panel, entry, entry.trial.value);
        }
        if !self.trials.is_empty() {
            picture.text((SPAN.0 - 8.0, lane), Anchor::End, 12.0, "trial");
        }
    }

    pub(super) fn list(&self, picture: &mut Picture) {
        if self.trials.is_empty() {
            return;
        }
        let mut y = 84.0;
        let columns = [
            (22.0, Anchor::End),
            (54.0, Anchor::Start),
            (196.0, Anchor::End),
            (266.0, Anchor::End),
        ];
        let mut row = |picture: &mut Picture, cells: [&str; 4]| {
            for ((dx, anchor), cell) in columns.iter().zip(cells) {
                picture.text((LIST + dx, y), *anchor, 12.0, cell);
            }
            y += ROW;
            y - ROW
        };
        row(picture, ["trial", "verdict", "step a", "\u{3c6}(a)"]);
        for entry in self.trials.iter().take(MOST_LISTED) {
            let number = format!("{}", entry.number);
            let (step, value) = (short(entry.trial.step), short(entry.trial.value));
            let value = if entry.trial.value.is_finite() {
                value.as_str()
            } else {
                "\u{2013}"
            };
            let y = row(picture, [&number, verdict(entry.fate), &step, value]);
            symbol(picture, entry.fate, (LIST + 38.0, y - 4.0));
        }
        if self.trials.len() > MOST_LISTED {
            let text = format!("and {} more", self.trials.len() - MOST_LISTED);
            row(picture, ["", &text, "", ""]);
        }
    }
}

pub(super) fn verdict(fate: Fate) -> &'static str {
    match fate {
        Fate::Accepted => "accepted",
        Fate::Refused(Side::TooLong) => "too long",
        Fate::Refused(Side::TooShort) => "too short",
        Fate::Outside => "outside",
        Fate::Undecided => "undecided",
    }
}

fn symbol(picture: &mut Picture, fate: Fate, at: (f64, f64)) {
    let filled = |colour: usize| {
        format!(
            r##"class="f{colour} halo" fill="{}" stroke="#ffffff" stroke-width="1""##,
            style::COLOURS[colour]
        )
    };
    match fate {
        Fate::Accepted => style::shape(picture, Shape::Disc, at, 5.5, &filled(2)),
        Fate::Refused(Side::TooLong) => style::shape(picture, Shape::Left, at, 5.5, &filled(1)),
        Fate::Refused(Side::TooShort) => style::shape(picture, Shape::Right, at, 5.5, &filled(0)),
        Fate::Outside => style::shape(
            picture,
            Shape::Cross,
            at,
            5.0,
            r##"class="s5" stroke="#1b1b1b" stroke-width="2.4" fill="none""##,
        ),
        Fate::Undecided => style::shape(picture, Shape::Diamond, at, 5.0, &filled(3)),
    }
}

/// A trial at its place; at the edge with an arrowhead where it lies beyond.
pub(super) fn mark(picture: &mut Picture, panel: &Panel, entry: &Entry<f64>, height: f64) {
    let (x, _) = panel.x.clamped(entry.trial.step);
    let (y, inside) = panel.y.clamped(height);
    symbol(picture, entry.fate, (x, y));
    if !inside && height.is_finite() {
        // Away from the frame's middle.
        let (bottom, top) = panel.y.pixels();
        let up = if y < 0.5 * (bottom + top) { 1.0 } else { -1.0 };
        let y = y + 14.0 * up;
        picture.element(format_args!(
            r##"<path class="rule" d="M{:.1} {:.1}L{x:.1} {:.1}L{:.1} {:.1}" fill="none" stroke="#444444" stroke-width="1.6"/>"##,
            x - 4.5, y, y - 5.0 * up, x + 4.5, y
        ));
    }
}
