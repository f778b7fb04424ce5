//! The fit as an objective: a robust loss of the residuals, its exact gradient, and coordinates that suit a descent.

use crate::model::{
    AIR_START, PARAMETERS, PRODUCT_START, Parameters, TABLE, simulate, simulate_with_sensitivities,
};
use crate::readings::Row;
use std::convert::Infallible;
use surefoot::{Cost, Objective};

/// Residuals are measured in these tolerances of the sensors, in kelvin: a reading is believed to about so much.
pub(crate) const AIR_TOLERANCE: f64 = 0.3;
pub(crate) const PRODUCT_TOLERANCE: f64 = 0.1;

/// Where the loss bends from a parabola to a straight line, in tolerances: a reading further off pulls no harder.
pub(crate) const BEND: f64 = 1.5;

/// A step of 1 in a coordinate: this share of a positive parameter, or so many kelvin of a temperature. With it the loss
/// curves about equally along all coordinates, which is worth more to a descent than any choice of rule.
const SHARE: f64 = 0.1;
const KELVIN: f64 = 0.1;

/// The pseudo-Huber loss of a residual in tolerances, `b^2 (sqrt(1 + (z/b)^2) - 1)` with the bend `b`: `z^2/2` near 0,
/// `b |z|` far out, smooth everywhere. Written so that a small residual loses no digits.
pub(crate) fn loss(z: f64) -> f64 {
    let q = z / BEND;
    z * z / (1.0 + (1.0 + q * q).sqrt())
}

/// The share of its full weight with which a residual counts: the loss's slope divided by `z`, 1 at 0.
pub(crate) fn weight(z: f64) -> f64 {
    let q = z / BEND;
    1.0 / (1.0 + q * q).sqrt()
}

/// A fit of the model to the rows.
///
/// Its coordinates `x` are plain numbers of size 1: a positive parameter is `start exp(0.1 x)`, so that no step
/// makes it negative; a temperature is `start + 0.1 x`. The fit begins at `x = 0`.
#[derive(Clone, Debug)]
pub(crate) struct Fit<'a> {
    rows: &'a [Row],
    start: Parameters,
    /// Number of readings, both sensors together: the loss is a mean, so tolerances do not depend on it.
    readings: f64,
}

impl<'a> Fit<'a> {
    /// From the typical parameters and the first readings of each sensor.
    pub(crate) fn new(rows: &'a [Row]) -> Self {
        let mut start: Parameters = std::array::from_fn(|i| TABLE[i].typical.unwrap_or(0.0));
        start[AIR_START] = first(rows.iter().filter_map(|r| r.air));
        start[PRODUCT_START] = first(rows.iter().filter_map(|r| r.product));
        let readings = rows
            .iter()
            .map(|r| usize::from(r.air.is_some()) + usize::from(r.product.is_some()));
        Fit {
            rows,
            start,
            readings: readings.sum::<usize>() as f64,
        }
    }

    /// The rows fitted to.
    pub(crate) fn rows(&self) -> &'a [Row] {
        self.rows
    }

    /// Where a descent begins.
    pub(crate) fn origin(&self) -> Vec<f64> {
        vec![0.0; PARAMETERS]
    }

    /// The parameters at `x`, in their units.
    pub(crate) fn parameters(&self, x: &[f64]) -> Parameters {
        std::array::from_fn(|i| match TABLE[i].typical {
            Some(_) => self.start[i] * (SHARE * x[i]).exp(),
            None => self.start[i] + KELVIN * x[i],
        })
    }

    /// The derivative of each parameter by its own coordinate.
    pub(crate) fn units(&self, p: &Parameters) -> Parameters {
        std::array::from_fn(|i| match TABLE[i].typical {
            Some(_) => SHARE * p[i],
            None => KELVIN,
        })
    }
}

impl Objective<Vec<f64>> for Fit<'_> {
    type Error = Infallible;

    /// A gradient integrates eight times as many equations as a value: it is worth asking for it only where needed.
    fn cost(&self) -> Cost {
        Cost::Separate
    }

    fn value(&mut self, x: &Vec<f64>) -> Result<f64, Infallible> {
        let mut sum = 0.0;
        simulate(self.rows, &self.parameters(x), |row, model| {
            for z in in_tolerances(row, model).into_iter().flatten() {
                sum += loss(z);
            }
        });
        Ok(sum / self.readings)
    }

    fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), Infallible> {
        self.value_and_gradient(x, g).map(|_| ())
    }

    fn value_and_gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<f64, Infallible> {
        let p = self.parameters(x);
        let mut sum = 0.0;
        g.fill(0.0);
        simulate_with_sensitivities(self.rows, &p, |row, model, air_by, product_by| {
            let [air, product] = in_tolerances(row, model);
            for (z, by, tolerance) in [
                (air, air_by, AIR_TOLERANCE),
                (product, product_by, PRODUCT_TOLERANCE),
            ] {
                if let Some(z) = z {
                    sum += loss(z);
                    let pull = -weight(z) * z / tolerance;
                    for (g, by) in g.iter_mut().zip(by) {
                        *g += pull * by;
                    }
                }
            }
        });
        for (g, unit) in g.iter_mut().zip(self.units(&p)) {
            *g *= unit / self.readings;
        }
        Ok(sum / self.readings)
    }
}

/// Measured minus modelled, in tolerances, for air and product.
pub(crate) fn in_tolerances(row: &Row, model: [f64; 2]) -> [Option<f64>; 2] {
    [
        row.air.map(|t| (t - model[0]) / AIR_TOLERANCE),
        row.product.map(|t| (t - model[1]) / PRODUCT_TOLERANCE),
    ]
}

/// The median of the first three: one wild reading among them does no harm.
fn first(readings: impl Iterator<Item = f64>) -> f64 {
    let mut some: Vec<f64> = readings.take(3).collect();
    some.sort_by(f64::total_cmp);
    some.get(some.len() / 2).copied().unwrap_or(0.0)
}
