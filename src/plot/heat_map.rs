//! A grid of numbers, as tinted cells.

use super::number::short;
use super::picture::{Anchor, Picture};
use std::format;
use std::string::String;
use std::vec::Vec;

/// A grid of numbers. Each cell is tinted, lightest the least and darkest the largest by equal ratios, and holds its number;
/// the least has a double frame. Empty cells are crossed out.
#[derive(Clone, Debug, PartialEq)]
pub struct HeatMap {
    /// Stands above.
    pub title: String,
    /// What the columns are, with units.
    pub x_label: String,
    /// What the rows are, with units.
    pub y_label: String,
    /// What the numbers are, with units.
    pub unit: String,
    /// Names of the columns, left to right.
    pub columns: Vec<String>,
    /// Names of the rows, from the bottom up.
    pub rows: Vec<String>,
    /// Row by row, in the order of `rows`; not finite counts as empty.
    pub cells: Vec<Option<f64>>,
    /// A second line for each cell; empty: none.
    pub remarks: Vec<String>,
}

/// Why a grid cannot be drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum HeatMapError {
    /// `cells` has not one entry for each row and column, or `remarks` has another length that is not 0.
    #[error(
        "the heat map has {cells} cells and {remarks} remarks for {wanted} places: give one a place, row by row"
    )]
    Cells {
        /// Entries of `cells`.
        cells: usize,
        /// Entries of `remarks`.
        remarks: usize,
        /// Rows times columns.
        wanted: usize,
    },
}

const CELL: (f64, f64) = (86.0, 50.0);

impl HeatMap {
    /// Draws it.
    ///
    /// # Errors
    /// [`HeatMapError::Cells`] if the number of cells does not fit rows and columns.
    pub fn picture(&self) -> Result<Picture, HeatMapError> {
        let (rows, columns) = (self.rows.len(), self.columns.len());
        let remarks = self.remarks.len();
        if self.cells.len() != rows * columns || (remarks != 0 && remarks != self.cells.len()) {
            return Err(HeatMapError::Cells {
                cells: self.cells.len(),
                remarks,
                wanted: rows * columns,
            });
        }
        let (left, top) = (110.0, 48.0);
        let (grid_width, bottom) = (CELL.0 * columns as f64, top + CELL.1 * rows as f64);
        let right = left + grid_width;
        let (width, height) = ((right + 150.0).max(520.0), bottom.max(top + 190.0) + 62.0);
        let finite = || {
            self.cells
                .iter()
                .flatten()
                .copied()
                .filter(|x| x.is_finite())
        };
        let low = finite().fold(f64::INFINITY, f64::min);
        let high = finite().fold(f64::NEG_INFINITY, f64::max);
        let description = format!(
            "{} for each {} and {}. Least {}, largest {}.",
            self.unit,
            self.x_label,
            self.y_label,
            short(low),
            short(high)
        );
        let mut picture = Picture::new(width, height, &self.title, &description);
        picture.styled_text(
            (left, 26.0),
            Anchor::Start,
            15.0,
            "font-weight=\"bold\"",
            &self.title,
        );

        let mut least = None;
        for row in 0..rows {
            for column in 0..columns {
                let at = row * columns + column;
                let place = (
                    left + CELL.0 * column as f64,
                    bottom - CELL.1 * (row + 1) as f64,
                );
                let number = self.cells[at].filter(|x| x.is_finite());
                cell(
                    &mut picture,
                    place,
                    number.map(|x| (x, share(x, low, high))),
                    self.remarks.get(at),
                );
                if least.is_none() && number == Some(low) {
                    least = Some(place);
                }
            }
        }
        if let Some((x, y)) = least {
            let (w, h) = CELL;
            picture.element(format_args!(
                r##"<rect x="{x:.1}" y="{y:.1}" width="{w}" height="{h}" fill="none" stroke="#ffffff" stroke-width="6"/><rect x="{:.1}" y="{:.1}" width="{:.1}" height="{:.1}" fill="none" stroke="#c85200" stroke-width="3"/>"##,
                x + 1.5, y + 1.5, w - 3.0, h - 3.0
            ));
        }
        for (column, name) in self.columns.iter().enumerate() {
            let x = left + CELL.0 * (column as f64 + 0.5);
            picture.text((x, bottom + 18.0), Anchor::Middle, 12.0, name);
        }
        for (row, name) in self.rows.iter().enumerate() {
            let y = bottom - CELL.1 * (row as f64 + 0.5) + 4.0;
            picture.text((left - 8.0, y), Anchor::End, 12.0, name);
        }
        picture.text(
            (left + 0.5 * grid_width, bottom + 40.0),
            Anchor::Middle,
            13.0,
            &self.x_label,
        );
        let y = 0.5 * (top + bottom);
        let turn = format!(r#"transform="rotate(-90 30 {y:.1})""#);
        picture.styled_text((30.0, y), Anchor::Middle, 13.0, &turn, &self.y_label);
        if low.is_finite() {
            self.key(&mut picture, (right + 28.0, top + 22.0), low, high);
        }
        Ok(picture)
    }

    /// The bar that tells the tints.
    fn key(&self, picture: &mut Picture, (x, y): (f64, f64), low: f64, high: f64) {
        const STEPS: usize = 24;
        let (width, height) = (18.0, 150.0);
        for step in 0..STEPS {
            let share = 1.0 - (step as f64 + 0.5) / STEPS as f64;
            let top = y + height * step as f64 / STEPS as f64;
            let h = height / STEPS as f64 + 0.6;
            let tint = tint(share);
            picture.element(format_args!(
                r#"<rect x="{x:.1}" y="{top:.1}" width="{width}" height="{h:.1}" fill="{tint}"/>"#
            ));
        }
        picture.text((x, y - 10.0), Anchor::Start, 12.0, &self.unit);
        picture.text(
            (x + width + 6.0, y + 9.0),
            Anchor::Start,
            12.0,
            &short(high),
        );
        picture.text(
            (x + width + 6.0, y + height),
            Anchor::Start,
            12.0,
            &short(low),
        );
        picture.element(format_args!(
            r##"<rect x="{x:.1}" y="{:.1}" width="16" height="13" fill="none" stroke="#c85200" stroke-width="3"/>"##,
            y + height + 15.0
        ));
        picture.text(
            (x + width + 6.0, y + height + 26.0),
            Anchor::Start,
            12.0,
            "least",
        );
    }
}

fn cell(
    picture: &mut Picture,
    (x, y): (f64, f64),
    number: Option<(f64, f64)>,
    remark: Option<&String>,
) {
    let (w, h) = CELL;
    let Some((number, share)) = number else {
        return picture.element(format_args!(
            r##"<path class="grid" d="M{x:.1} {y:.1}l{w} {h}m0 -{h}l-{w} {h}" stroke="#dedede" fill="none"/><rect class="grid" x="{x:.1}" y="{y:.1}" width="{w}" height="{h}" fill="none" stroke="#dedede"/>"##
        ));
    };
    let fill = tint(share);
    let ink = ink_on(share);
    picture.element(format_args!(
        r##"<rect x="{x:.1}" y="{y:.1}" width="{w}" height="{h}" fill="{fill}" stroke="#ffffff" stroke-width="1"/>"##
    ));
    let middle = x + 0.5 * w;
    let remark = remark.filter(|remark| !remark.is_empty());
    let baseline = y + if remark.is_some() { 23.0 } else { 30.0 };
    picture.element(format_args!(
        r#"<text x="{middle:.1}" y="{baseline:.1}" font-size="14" text-anchor="middle" fill="{ink}">{}</text>"#,
        short(number)
    ));
    if let Some(remark) = remark {
        picture.element(format_args!(
            r#"<text x="{middle:.1}" y="{:.1}" font-size="11" text-anchor="middle" fill="{ink}">{}</text>"#,
            y + 39.0,
            super::picture::escaped(remark)
        ));
    }
}

/// Where a number stands between the ends, by ratios where all are above 0.
fn share(x: f64, low: f64, high: f64) -> f64 {
    let share = if low > 0.0 {
        (x / low).ln() / (high / low).ln()
    } else {
        (x - low) / (high - low)
    };
    if share.is_finite() {
        share.clamp(0.0, 1.0)
    } else {
        0.0
    }
}

/// From near white to dark blue: lightness falls all the way, so that the order survives print without colour.
fn tint(share: f64) -> String {
    let [r, g, b] = mixed(share).map(|part| part.round() as u8);
    format!("#{r:02x}{g:02x}{b:02x}")
}

fn mixed(share: f64) -> [f64; 3] {
    const ENDS: [[f64; 3]; 3] = [
        [232.0, 241.0, 248.0],
        [76.0, 140.0, 186.0],
        [4.0, 42.0, 78.0],
    ];
    let (from, part) = if share < 0.5 {
        (0, 2.0 * share)
    } else {
        (1, 2.0 * share - 1.0)
    };
    [0, 1, 2].map(|i| ENDS[from][i] + part * (ENDS[from + 1][i] - ENDS[from][i]))
}

/// Black or white, whichever stands out more from the tint: by 4.5 to 1 at least (relative luminance of WCAG 2.2).
fn ink_on(share: f64) -> &'static str {
    let linear = |part: f64| {
        let c = part / 255.0;
        if c <= 0.04045 {
            c / 12.92
        } else {
            ((c + 0.055) / 1.055).powf(2.4)
        }
    };
    let [r, g, b] = mixed(share).map(linear);
    let light = 0.2126 * r + 0.7152 * g + 0.0722 * b;
    // (light + 0.05) / 0.05 against 1.05 / (light + 0.05).
    if (light + 0.05).powi(2) > 0.05 * 1.05 {
        "#000000"
    } else {
        "#ffffff"
    }
}
