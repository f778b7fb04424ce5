//! A frame with two axes, and lines cut to it.

use super::axis::Axis;
use super::picture::{Anchor, Picture};
use super::style;
use std::format;
use std::string::String;
use std::vec::Vec;

/// Where curves are drawn: the axes know the pixels of the frame.
#[derive(Clone, Copy, Debug)]
pub(super) struct Panel {
    pub(super) x: Axis,
    pub(super) y: Axis,
}

impl Panel {
    /// Grid, ticks, labels; `x_label` empty: the x axis has marks but no numbers, since a panel below shares it.
    pub(super) fn frame(&self, picture: &mut Picture, x_label: &str, y_label: &str) {
        let ((left, right), (bottom, top)) = (self.x.pixels(), self.y.pixels());
        let columns = (((right - left) / 75.0) as usize).max(2);
        for (x, label) in self.x.ticks(columns) {
            let x = self.x.at(x);
            picture.grid((x, bottom), (x, top));
            picture.rule((x, bottom), (x, bottom + 4.0), 1.0, "");
            if !x_label.is_empty() {
                picture.text((x, bottom + 17.0), Anchor::Middle, 12.0, &label);
            }
        }
        for (y, label) in self.y.ticks((((bottom - top) / 45.0) as usize).max(2)) {
            let y = self.y.at(y);
            picture.grid((left, y), (right, y));
            picture.rule((left - 4.0, y), (left, y), 1.0, "");
            picture.text((left - 7.0, y + 4.2), Anchor::End, 12.0, &label);
        }
        if !x_label.is_empty() {
            picture.text(
                (0.5 * (left + right), bottom + 36.0),
                Anchor::Middle,
                13.0,
                x_label,
            );
        }
        let (x, y) = (left - 62.0, 0.5 * (bottom + top));
        let turn = format!(r#"transform="rotate(-90 {x:.1} {y:.1})""#);
        picture.styled_text((x, y), Anchor::Middle, 13.0, &turn, y_label);
    }

    /// The outline, drawn last so that it stays whole.
    pub(super) fn outline(&self, picture: &mut Picture) {
        let ((left, right), (bottom, top)) = (self.x.pixels(), self.y.pixels());
        let (w, h) = (right - left, bottom - top);
        picture.element(format_args!(
            r##"<rect class="rule" x="{left:.1}" y="{top:.1}" width="{w:.1}" height="{h:.1}" fill="none" stroke="#444444" stroke-width="1"/>"##
        ));
    }

    /// A line through points, broken where one cannot be drawn, cut at the frame.
    pub(super) fn line(&self, picture: &mut Picture, points: &[(f64, f64)], stroke: &str) {
        let pixels: Vec<(f64, f64)> = points
            .iter()
            .map(|&(x, y)| (self.x.at(x), self.y.at(y)))
            .collect();
        let mut path = String::new();
        let mut pen: Option<(f64, f64)> = None;
        for ends in pixels.windows(2) {
            let Some((from, to)) = self.cut(ends[0], ends[1]) else {
                pen = None;
                continue;
            };
            if pen != Some(from) {
                path.push_str(&format!("M{:.1} {:.1}", from.0, from.1));
            }
            path.push_str(&format!("L{:.1} {:.1}", to.0, to.1));
            pen = Some(to);
        }
        if !path.is_empty() {
            picture.element(format_args!(r#"<path d="{path}" {stroke}/>"#));
        }
    }

    /// The part of a segment inside of the frame (Liang & Barsky's parameters: ACM Trans. Graphics 3 (1984) 1-22).
    fn cut(&self, a: (f64, f64), b: (f64, f64)) -> Option<((f64, f64), (f64, f64))> {
        let ((left, right), (bottom, top)) = (self.x.pixels(), self.y.pixels());
        let (dx, dy) = (b.0 - a.0, b.1 - a.1);
        if !(dx.is_finite() && dy.is_finite()) {
            return None;
        }
        let (mut enter, mut leave) = (0.0_f64, 1.0_f64);
        for (speed, room) in [
            (-dx, a.0 - left),
            (dx, right - a.0),
            (-dy, a.1 - top),
            (dy, bottom - a.1),
        ] {
            if speed == 0.0 {
                if room < -1e-6 {
                    return None;
                }
            } else if speed < 0.0 {
                enter = enter.max(room / speed);
            } else {
                leave = leave.min(room / speed);
            }
        }
        let at = |t: f64| {
            if t == 1.0 {
                b
            } else {
                (a.0 + t * dx, a.1 + t * dy)
            }
        };
        (enter <= leave).then(|| (at(enter), at(leave)))
    }
}

/// An entry of a legend: sample and name, cut to the width.
pub(super) fn legend_entry(
    picture: &mut Picture,
    series: usize,
    (x, y): (f64, f64),
    name: &str,
    width: f64,
) {
    picture.element(format_args!(
        r#"<path d="M{x:.1} {0:.1}H{1:.1}" {2}/>"#,
        y - 4.0,
        x + 34.0,
        style::stroke(series, 2.0)
    ));
    style::marker(picture, series, (x + 17.0, y - 4.0));
    picture.text(
        (x + 41.0, y),
        Anchor::Start,
        12.0,
        &fitted(name, width - 41.0, 12.0),
    );
}

/// A name cut to a width in pixels, at about 0.56 of the font size a letter.
pub(super) fn fitted(name: &str, width: f64, size: f64) -> String {
    let room = (width / (0.56 * size)).max(2.0) as usize;
    if name.chars().count() <= room {
        return name.into();
    }
    let kept: String = name.chars().take(room.saturating_sub(1)).collect();
    format!("{}\u{2026}", kept.trim_end())
}
