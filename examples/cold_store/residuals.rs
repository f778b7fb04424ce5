//! What is left over when the model is taken from the readings, sensor by sensor, and what that says in words.

use crate::fit::{AIR_TOLERANCE, PRODUCT_TOLERANCE, weight};
use crate::model::{Parameters, simulate};
use crate::readings::Row;

/// Readings further apart than this, in minutes, are not neighbours.
const NEIGHBOURS: f64 = 10.0;
/// A residual is called wild from this many robust scales, or tolerances if they are larger, away from the median.
const WILD: f64 = 6.0;
/// Residuals below this share of the tolerance say nothing.
const NOTHING: f64 = 0.01;
/// From this correlation of neighbours on the model is said to miss something.
const ALIKE: f64 = 0.3;

/// The residuals of one sensor. Residuals are measured minus modelled, in kelvin.
#[derive(Clone, Debug)]
pub(crate) struct Sensor {
    pub(crate) name: &'static str,
    /// Readings used, and cells that were empty.
    pub(crate) used: usize,
    pub(crate) empty: usize,
    pub(crate) tolerance: f64,
    /// 1.4826 times the median distance from the median: the standard deviation, were they normal.
    pub(crate) scale: f64,
    /// Readings that count with less than half of their full weight.
    pub(crate) held_down: usize,
    pub(crate) wild: usize,
    /// Correlation of neighbouring residuals, wild ones drawn in as the loss draws them in.
    pub(crate) lag_one: f64,
    /// Weighted straight line through the residuals, in kelvin an hour, and its standard error widened for `lag_one`.
    pub(crate) trend: f64,
    pub(crate) trend_error: f64,
    /// Median of each quarter of the record; `None` where a quarter has no reading.
    pub(crate) quarters: [Option<f64>; 4],
    /// The largest one.
    pub(crate) largest: Residual,
}

#[derive(Clone, Copy, Debug)]
pub(crate) struct Residual {
    pub(crate) minute: f64,
    pub(crate) line: usize,
    pub(crate) kelvin: f64,
}

/// Both sensors, air first.
pub(crate) fn sensors(rows: &[Row], p: &Parameters) -> [Sensor; 2] {
    let (mut air, mut product) = (Vec::new(), Vec::new());
    simulate(rows, p, |row, model| {
        let residual = |kelvin| Residual {
            minute: row.minute,
            line: row.line,
            kelvin,
        };
        air.extend(row.air.map(|t| residual(t - model[0])));
        product.extend(row.product.map(|t| residual(t - model[1])));
    });
    let span = match rows {
        [first, .., last] => (first.minute, last.minute),
        _ => (0.0, 0.0),
    };
    [
        sensor("air", &air, rows.len(), AIR_TOLERANCE, span),
        sensor("product", &product, rows.len(), PRODUCT_TOLERANCE, span),
    ]
}

fn sensor(
    name: &'static str,
    all: &[Residual],
    rows: usize,
    tolerance: f64,
    span: (f64, f64),
) -> Sensor {
    let middle = median(all.iter().map(|r| r.kelvin)).unwrap_or(f64::NAN);
    let scale = 1.4826 * median(all.iter().map(|r| (r.kelvin - middle).abs())).unwrap_or(f64::NAN);
    let lag_one = lag_one(all, tolerance);
    let (trend, error) = trend(all, tolerance);
    let quarter = |q: f64| {
        let inside = move |r: &&Residual| {
            (4.0 * (r.minute - span.0) / (span.1 - span.0))
                .floor()
                .min(3.0)
                == q
        };
        median(all.iter().filter(inside).map(|r| r.kelvin))
    };
    let far = |a: &&Residual, b: &&Residual| a.kelvin.abs().total_cmp(&b.kelvin.abs());
    let nothing = Residual {
        minute: f64::NAN,
        line: 0,
        kelvin: f64::NAN,
    };
    Sensor {
        name,
        used: all.len(),
        empty: rows - all.len(),
        tolerance,
        scale,
        held_down: all
            .iter()
            .filter(|r| weight(r.kelvin / tolerance) < 0.5)
            .count(),
        wild: all
            .iter()
            .filter(|r| (r.kelvin - middle).abs() > WILD * scale.max(tolerance))
            .count(),
        lag_one,
        trend,
        trend_error: error * too_small_by(lag_one),
        quarters: [quarter(0.0), quarter(1.0), quarter(2.0), quarter(3.0)],
        largest: all.iter().max_by(far).copied().unwrap_or(nothing),
    }
}

/// By what factor standard errors are too small when neighbouring residuals correlate by `r` and those further apart
/// by its powers: `sqrt((1 + r) / (1 - r))` (common practice).
pub(crate) fn too_small_by(r: f64) -> f64 {
    let r = r.clamp(0.0, 0.99);
    ((1.0 + r) / (1.0 - r)).sqrt()
}

fn median(values: impl Iterator<Item = f64>) -> Option<f64> {
    let mut sorted: Vec<f64> = values.collect();
    sorted.sort_by(f64::total_cmp);
    let half = sorted.len() / 2;
    match sorted.len() {
        0 => None,
        n if n % 2 == 1 => Some(sorted[half]),
        _ => Some(0.5 * (sorted[half - 1] + sorted[half])),
    }
}

fn lag_one(all: &[Residual], tolerance: f64) -> f64 {
    let drawn_in = |r: &Residual| r.kelvin * weight(r.kelvin / tolerance);
    let mean = all.iter().map(drawn_in).sum::<f64>() / all.len() as f64;
    let (mut products, mut first, mut second) = (0.0, 0.0, 0.0);
    for pair in all
        .windows(2)
        .filter(|pair| pair[1].minute - pair[0].minute <= NEIGHBOURS)
    {
        let (a, b) = (drawn_in(&pair[0]) - mean, drawn_in(&pair[1]) - mean);
        products += a * b;
        first += a * a;
        second += b * b;
    }
    products / (first * second).sqrt()
}

/// Slope of the weighted line in kelvin an hour, and its standard error for independent readings.
fn trend(all: &[Residual], tolerance: f64) -> (f64, f64) {
    let points = || {
        all.iter()
            .map(|r| (weight(r.kelvin / tolerance), r.minute / 60.0, r.kelvin))
    };
    let sum = |f: &dyn Fn(f64, f64, f64) -> f64| points().map(|(w, t, r)| f(w, t, r)).sum::<f64>();
    let total = sum(&|w, _, _| w);
    let (t0, r0) = (sum(&|w, t, _| w * t) / total, sum(&|w, _, r| w * r) / total);
    let spread = sum(&|w, t, _| w * (t - t0) * (t - t0));
    let slope = sum(&|w, t, r| w * (t - t0) * (r - r0)) / spread;
    let left = sum(&|w, t, r| w * (r - r0 - slope * (t - t0)).powi(2)) / (all.len() as f64 - 2.0);
    (slope, (left / spread).sqrt())
}

/// What the diagnostics say. Empty when nothing speaks against the model.
pub(crate) fn remarks(sensors: &[Sensor]) -> Vec<String> {
    // Where only rounding is left, there is nothing to read in it.
    let told: Vec<&Sensor> = sensors
        .iter()
        .filter(|s| s.scale > NOTHING * s.tolerance)
        .collect();
    let mut out = Vec::new();
    let mut remark = |head: &str,
                      which: &dyn Fn(&Sensor) -> bool,
                      each: &dyn Fn(&Sensor) -> String,
                      then: &str| {
        let about = told.iter().filter(|s| which(s));
        let about: Vec<String> = about.map(|s| format!("{} ({})", s.name, each(s))).collect();
        if !about.is_empty() {
            out.push(format!("{head}: {}. {then}", about.join(", ")));
        }
    };
    let factor = told
        .iter()
        .map(|s| too_small_by(s.lag_one))
        .fold(1.0, f64::max);
    remark(
        "Neighbouring residuals are alike",
        &|s| s.lag_one > ALIKE,
        &|s| format!("correlation {:.2}", s.lag_one),
        &format!(
            "The model is too poor for these readings: something that lasts for minutes or hours is missing, \
             such as another heat store, fans that stop, a door, what went on in a gap. Take the standard errors above as too \
             small by a factor of about {factor:.1}, and the estimates as a description of this record only."
        ),
    );
    remark(
        "Residuals do not stay level",
        &|s| s.wander() > s.tolerance || s.trend.abs() > 3.0 * s.trend_error,
        &|s| {
            format!(
                "medians by quarter up to {:.2} K apart, trend {:+.3} K/h",
                s.wander(),
                s.trend
            )
        },
        "A sensor that drifts looks like this, and so does a slow process outside of the model: compare the \
         sensor with a second thermometer.",
    );
    remark(
        "Residuals scatter by more than the sensor's tolerance",
        &|s| s.scale > s.tolerance,
        &|s| format!("{:.2} K, tolerance {:.2} K", s.scale, s.tolerance),
        "The misfit is the model's, or the tolerance is too hopeful.",
    );
    remark(
        "Wild readings",
        &|s| s.wild > 0,
        &|s| {
            format!(
                "{}, the farthest in line {} at minute {}",
                s.wild, s.largest.line, s.largest.minute
            )
        },
        "The loss holds them down but does not remove them: look at the file.",
    );
    out
}

impl Sensor {
    /// The largest distance between the medians of two quarters.
    fn wander(&self) -> f64 {
        let medians = || self.quarters.iter().copied().flatten();
        medians().fold(f64::NEG_INFINITY, f64::max) - medians().fold(f64::INFINITY, f64::min)
    }
}
