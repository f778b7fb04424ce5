//! Curves and staircases over two axes.

use super::axis::{Axis, Scale};
use super::panel::{Panel, legend_entry};
use super::picture::{Anchor, Picture};
use super::style;
use std::format;
use std::string::{String, ToString};
use std::vec::Vec;

const WIDTH: f64 = 920.0;
const LEGEND: f64 = 290.0;
/// A line with more points than this is thinned to the columns that can be told apart.
const MOST_POINTS: usize = 1200;

/// A chart of named lines. Points that cannot be drawn (not finite, or not above 0 on a logarithmic axis) break a line.
///
/// ```
/// use surefoot::plot::{Chart, Scale};
/// let picture = Chart::new("Loss of a fit", "move", "loss (tolerances)")
///     .with_y_scale(Scale::Logarithmic)
///     .line("weak Wolfe", &[(0.0, 12.0), (1.0, 3.0), (2.0, 0.02)])
///     .line("Goldstein", &[(0.0, 12.0), (1.0, 9.0), (2.0, 0.5)])
///     .picture();
/// assert!(picture.svg().starts_with("<svg"));
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct Chart {
    title: String,
    x_label: String,
    y_label: String,
    note: String,
    x_scale: Scale,
    y_scale: Scale,
    y_ends: Option<(f64, f64)>,
    lines: Vec<Line>,
}

#[derive(Clone, Debug, PartialEq)]
struct Line {
    name: String,
    points: Vec<(f64, f64)>,
    staircase: bool,
}

impl Chart {
    /// An empty chart; the labels name the quantities and their units.
    pub fn new(title: &str, x_label: &str, y_label: &str) -> Self {
        Chart {
            title: title.into(),
            x_label: x_label.into(),
            y_label: y_label.into(),
            note: String::new(),
            x_scale: Scale::Linear,
            y_scale: Scale::Linear,
            y_ends: None,
            lines: Vec::new(),
        }
    }

    /// How the x axis is divided; default linear.
    #[must_use]
    pub fn with_x_scale(self, x_scale: Scale) -> Self {
        Chart { x_scale, ..self }
    }

    /// How the y axis is divided; default linear.
    #[must_use]
    pub fn with_y_scale(self, y_scale: Scale) -> Self {
        Chart { y_scale, ..self }
    }

    /// The ends of the y axis; default: those of the points. Ends that are not finite or not in order are passed over.
    #[must_use]
    pub fn with_y_ends(self, low: f64, high: f64) -> Self {
        let sound = low < high && low.is_finite() && high.is_finite();
        Chart {
            y_ends: sound.then_some((low, high)),
            ..self
        }
    }

    /// A sentence below the chart.
    #[must_use]
    pub fn with_note(self, note: &str) -> Self {
        Chart {
            note: note.into(),
            ..self
        }
    }

    /// Adds a line through points `(x, y)`.
    #[must_use]
    pub fn line(mut self, name: &str, points: &[(f64, f64)]) -> Self {
        self.lines.push(Line {
            name: name.into(),
            points: points.to_vec(),
            staircase: false,
        });
        self
    }

    /// Adds a staircase: from each point level to the next one's x, and from the last one to the end of the axis.
    #[must_use]
    pub fn staircase(mut self, name: &str, points: &[(f64, f64)]) -> Self {
        self.lines.push(Line {
            name: name.into(),
            points: points.to_vec(),
            staircase: true,
        });
        self
    }

    /// Draws it: 920 pixels wide, higher with many lines, the legend to the right in the order of the lines.
    pub fn picture(&self) -> Picture {
        let legend_height = 22.0 * self.lines.len() as f64;
        let (top, bottom) = (44.0, 44.0 + legend_height.max(330.0));
        let height = bottom + if self.note.is_empty() { 50.0 } else { 72.0 };
        let names: Vec<&str> = self.lines.iter().map(|line| line.name.as_str()).collect();
        let description = format!(
            "{} against {}. Lines: {}. {}",
            self.y_label,
            self.x_label,
            if names.is_empty() {
                "none".to_string()
            } else {
                names.join(", ")
            },
            self.note
        );
        let mut picture = Picture::new(WIDTH, height, &self.title, &description);
        let (left, right) = (84.0, WIDTH - LEGEND - 20.0);
        let points = || self.lines.iter().flat_map(|line| &line.points);
        let y = match self.y_ends {
            Some((low, high)) => Axis::over([low, high], self.y_scale, (bottom, top)),
            None => {
                Axis::over(points().map(|p| p.1), self.y_scale, (bottom, top)).with_margin(0.04)
            }
        };
        let panel = Panel {
            x: Axis::over(points().map(|p| p.0), self.x_scale, (left, right)).with_margin(0.02),
            y,
        };
        picture.styled_text(
            (left, 26.0),
            Anchor::Start,
            15.0,
            "font-weight=\"bold\"",
            &self.title,
        );
        panel.frame(&mut picture, &self.x_label, &self.y_label);
        for (number, line) in self.lines.iter().enumerate() {
            self.draw(&mut picture, &panel, number, line);
        }
        panel.outline(&mut picture);
        for (number, line) in self.lines.iter().enumerate() {
            let at = (right + 22.0, top + 14.0 + 22.0 * number as f64);
            legend_entry(&mut picture, number, at, &line.name, LEGEND - 10.0);
        }
        if self.lines.is_empty() {
            picture.text(
                (0.5 * (left + right), 0.5 * (top + bottom)),
                Anchor::Middle,
                14.0,
                "nothing to draw",
            );
        }
        if !self.note.is_empty() {
            picture.text((left, height - 14.0), Anchor::Start, 12.0, &self.note);
        }
        picture
    }

    fn draw(&self, picture: &mut Picture, panel: &Panel, number: usize, line: &Line) {
        let thinned = thinned(&line.points, panel);
        let mut corners = Vec::with_capacity(2 * thinned.len() + 1);
        for &(x, y) in &thinned {
            if line.staircase
                && let Some(&(_, before)) = corners.last()
            {
                corners.push((x, before));
            }
            corners.push((x, y));
        }
        if line.staircase
            && let Some(&(_, last)) = corners.last()
        {
            corners.push((panel.x.ends().1, last));
        }
        panel.line(picture, &corners, &style::stroke(number, 2.0));
        for at in marked(&corners, panel, number, self.lines.len()) {
            style::marker(picture, number, at);
        }
        // One point draws no segment.
        if let [(x, y)] = corners[..] {
            let ((x, x_inside), (y, y_inside)) = (panel.x.clamped(x), panel.y.clamped(y));
            if x_inside && y_inside {
                style::marker(picture, number, (x, y));
            }
        }
    }
}

/// At most about two points a pixel column: the first and the last of each.
fn thinned(points: &[(f64, f64)], panel: &Panel) -> Vec<(f64, f64)> {
    if points.len() <= MOST_POINTS {
        return points.to_vec();
    }
    let column = |p: &(f64, f64)| (panel.x.at(p.0) * 0.8).floor();
    let mut kept: Vec<(f64, f64)> = Vec::new();
    for same in points.chunk_by(|a, b| column(a) == column(b)) {
        kept.push(same[0]);
        if same.len() > 1 {
            kept.push(same[same.len() - 1]);
        }
    }
    kept
}

/// Markers at even distances in pixels along x, those of different lines apart from one another.
fn marked(corners: &[(f64, f64)], panel: &Panel, number: usize, lines: usize) -> Vec<(f64, f64)> {
    let pixels: Vec<(f64, f64)> = corners
        .iter()
        .map(|&(x, y)| (panel.x.at(x), panel.y.at(y)))
        .collect();
    let ((left, right), (bottom, top)) = (panel.x.pixels(), panel.y.pixels());
    let gap = (right - left) / 6.0;
    let mut next = left + gap * (0.15 + 0.85 * (number as f64 + 0.5) / lines as f64);
    let mut markers = Vec::new();
    for ends in pixels.windows(2) {
        let ((x0, y0), (x1, y1)) = (ends[0], ends[1]);
        while x1 > x0 && next <= x1 && next <= right {
            if next >= x0 {
                let y = y0 + (y1 - y0) * (next - x0) / (x1 - x0);
                if (top..=bottom).contains(&y) {
                    markers.push((next, y));
                }
            }
            next += gap;
        }
    }
    if markers.is_empty() {
        let inside =
            |p: &&(f64, f64)| (left..=right).contains(&p.0) && (top..=bottom).contains(&p.1);
        markers.extend(pixels.iter().rev().find(inside).copied());
    }
    markers
}

/// Convergence curves: for each run its name and `(spent, above)`, what was spent until then (say calls) and how far the value,
/// or the gradient, was above its limit; `above` is drawn by powers of ten.
pub fn convergence_chart(
    title: &str,
    spent: &str,
    above: &str,
    runs: &[(&str, &[(f64, f64)])],
) -> Chart {
    let chart = Chart::new(title, spent, above).with_y_scale(Scale::Logarithmic);
    runs.iter()
        .fold(chart, |chart, (name, points)| chart.line(name, points))
}
