//! What tells series, rules and verdicts apart.

use super::picture::Picture;
use std::format;
use std::string::String;

/// Blue, vermilion, green, purple, orange, black, sky blue (the order in which series take them).
pub(super) const COLOURS: [&str; 7] = [
    "#0072b2", "#c85200", "#008a64", "#a8508a", "#9c6a00", "#1b1b1b", "#2380b5",
];

const DASHES: [&str; 5] = ["", "8 4", "2.5 3", "10 3 2.5 3", "15 5"];

pub(super) fn colour(series: usize) -> usize {
    series % COLOURS.len()
}

/// Attributes of a series' line: with seven colours and five dashes, 35 differ.
pub(super) fn stroke(series: usize, width: f64) -> String {
    let colour = colour(series);
    let dash = DASHES[series % DASHES.len()];
    let dash = if dash.is_empty() {
        String::new()
    } else {
        format!(" stroke-dasharray=\"{dash}\"")
    };
    format!(
        r#"class="s{colour}" fill="none" stroke="{}" stroke-width="{width}" stroke-linejoin="round"{dash}"#,
        COLOURS[colour]
    )
}

/// The marker of a series; six shapes.
pub(super) fn marker(picture: &mut Picture, series: usize, at: (f64, f64)) {
    const SHAPES: [Shape; 6] = [
        Shape::Disc,
        Shape::Square,
        Shape::Up,
        Shape::Diamond,
        Shape::Down,
        Shape::Ring,
    ];
    let colour = colour(series);
    shape(
        picture,
        SHAPES[series % SHAPES.len()],
        at,
        4.0,
        &format!(
            r#"class="f{colour} s{colour}" fill="{0}" stroke="{0}" stroke-width="1.4""#,
            COLOURS[colour]
        ),
    );
}

#[derive(Clone, Copy, PartialEq)]
pub(super) enum Shape {
    Disc,
    Ring,
    Square,
    Diamond,
    Up,
    Down,
    Left,
    Right,
    Cross,
}

/// A shape around a point; `r` is half its width.
pub(super) fn shape(picture: &mut Picture, shape: Shape, (x, y): (f64, f64), r: f64, style: &str) {
    let polygon = |points: &[(f64, f64)]| {
        let corners: std::vec::Vec<String> = points
            .iter()
            .map(|(dx, dy)| format!("{:.1},{:.1}", x + r * dx, y + r * dy))
            .collect();
        corners.join(" ")
    };
    let corners = match shape {
        Shape::Disc => {
            return picture.element(format_args!(
                r#"<circle cx="{x:.1}" cy="{y:.1}" r="{r}" {style}/>"#
            ));
        }
        // The second `fill` style wins over class and attribute.
        Shape::Ring => {
            return picture.element(format_args!(
                r#"<circle cx="{x:.1}" cy="{y:.1}" r="{r}" {style} style="fill:none"/>"#
            ));
        }
        Shape::Cross => {
            let (l, t, u, b) = (x - r, y - r, x + r, y + r);
            return picture.element(format_args!(
                r#"<path d="M{l:.1} {t:.1}L{u:.1} {b:.1}M{l:.1} {b:.1}L{u:.1} {t:.1}" {style}/>"#
            ));
        }
        Shape::Square => polygon(&[(-0.9, -0.9), (0.9, -0.9), (0.9, 0.9), (-0.9, 0.9)]),
        Shape::Diamond => polygon(&[(0.0, -1.25), (1.25, 0.0), (0.0, 1.25), (-1.25, 0.0)]),
        Shape::Up => polygon(&[(0.0, -1.2), (1.1, 0.8), (-1.1, 0.8)]),
        Shape::Down => polygon(&[(0.0, 1.2), (1.1, -0.8), (-1.1, -0.8)]),
        Shape::Left => polygon(&[(-1.25, 0.0), (0.85, -1.1), (0.85, 1.1)]),
        Shape::Right => polygon(&[(1.25, 0.0), (-0.85, -1.1), (-0.85, 1.1)]),
    };
    picture.element(format_args!(r#"<polygon points="{corners}" {style}/>"#));
}

/// A rectangle with a tint and hatching of its own: rising, falling, upright, level, crossed lines.
pub(super) fn hatched(
    picture: &mut Picture,
    series: usize,
    (x0, y0): (f64, f64),
    (x1, y1): (f64, f64),
    strength: f64,
) {
    const GAP: f64 = 8.0;
    let colour = colour(series);
    let hex = COLOURS[colour];
    let (w, h) = (x1 - x0, y1 - y0);
    picture.element(format_args!(
        r#"<rect class="f{colour}" x="{x0:.1}" y="{y0:.1}" width="{w:.1}" height="{h:.1}" fill="{hex}" fill-opacity="{:.2}"/>"#,
        0.3 * strength
    ));
    let mut d = String::new();
    let mut line = |from: (f64, f64), to: (f64, f64)| {
        d.push_str(&format!(
            "M{:.1} {:.1}L{:.1} {:.1}",
            from.0, from.1, to.0, to.1
        ));
    };
    // A slanted line from (c, y1) to (c + h, y0), cut to the rectangle.
    let mut slanted = |falling: bool| {
        let mut c = x0 - h + GAP - (x0 - h).rem_euclid(GAP);
        while c < x1 {
            let (from, to) = (c.max(x0), (c + h).min(x1));
            let (start, end) = (y1 - (from - c), y1 - (to - c));
            if falling {
                line((from, y0 + y1 - start), (to, y0 + y1 - end));
            } else {
                line((from, start), (to, end));
            }
            c += GAP;
        }
    };
    match series % 5 {
        0 => slanted(false),
        1 => slanted(true),
        2 => {
            let mut x = x0 + 0.5 * GAP;
            while x < x1 {
                line((x, y0), (x, y1));
                x += GAP;
            }
        }
        3 => {
            let mut y = y0 + 0.25 * GAP;
            while y < y1 {
                line((x0, y), (x1, y));
                y += 0.5 * GAP;
            }
        }
        _ => {
            slanted(false);
            slanted(true);
        }
    }
    picture.element(format_args!(
        r#"<path class="s{colour}" d="{d}" stroke="{hex}" stroke-width="1" stroke-opacity="{strength:.2}" fill="none"/>"#
    ));
    picture.element(format_args!(
        r#"<rect class="s{colour}" x="{x0:.1}" y="{y0:.1}" width="{w:.1}" height="{h:.1}" fill="none" stroke="{hex}" stroke-opacity="{strength:.2}" stroke-width="1"/>"#
    ));
}
