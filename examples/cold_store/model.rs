//! The fitted model: two heat stores, air and product, and how their temperatures move with seven parameters.
//!
//! ```text
//! d air/dt     = air_by_product (product - air) + air_by_outside (outside - air) - pull cooling + heat defrost
//! d product/dt = product_by_air (air - product)
//! ```
//!
//! Temperatures in degrees Celsius, time in hours. `cooling` and `defrost` are the shares of the file's rows, constant
//! from row to row; `outside` likewise. Integrated by the classical Runge-Kutta scheme of order four (common practice)
//! in equal steps of at most one minute between rows.

use crate::readings::Row;

/// Number of parameters.
pub(crate) const PARAMETERS: usize = 7;

/// In the order of [`TABLE`], in its units.
pub(crate) type Parameters = [f64; PARAMETERS];

const AIR_BY_PRODUCT: usize = 0;
const PRODUCT_BY_AIR: usize = 1;
const AIR_BY_OUTSIDE: usize = 2;
const PULL: usize = 3;
const HEAT: usize = 4;
pub(crate) const AIR_START: usize = 5;
pub(crate) const PRODUCT_START: usize = 6;

/// What a parameter is called, its unit, and where a fit begins.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Entry {
    pub(crate) name: &'static str,
    pub(crate) unit: &'static str,
    /// Typical size of a positive parameter; `None` for a temperature, which begins at the first readings.
    pub(crate) typical: Option<f64>,
}

/// The typical sizes are round guesses for a walk-in store; a fit moves away from them by any factor.
pub(crate) const TABLE: [Entry; PARAMETERS] = [
    entry("air follows product", "1/h", Some(1.0)),
    entry("product follows air", "1/h", Some(0.5)),
    entry("air follows outside", "1/h", Some(0.5)),
    entry("pull of the plant on the air", "K/h", Some(60.0)),
    entry("heat of the defrost on the air", "K/h", Some(5.0)),
    entry("air at the start", "C", None),
    entry("product at the start", "C", None),
];

const fn entry(name: &'static str, unit: &'static str, typical: Option<f64>) -> Entry {
    Entry {
        name,
        unit,
        typical,
    }
}

/// Longest step of the integration, in minutes.
const LONGEST_STEP: f64 = 1.0;

/// Temperatures of the two stores.
const STATE: usize = 2;
/// The same with their derivatives by each parameter: first those of the air, then those of the product.
const WITH_SENSITIVITIES: usize = STATE + 2 * PARAMETERS;

/// How many equations the gradient integrates for each one of the value: the price of a gradient in values.
pub(crate) const PRICE_OF_GRADIENT: u64 = (WITH_SENSITIVITIES / STATE) as u64;

/// Runs the model over the rows; `visit` gets each row with the temperatures of air and product.
pub(crate) fn simulate(rows: &[Row], p: &Parameters, mut visit: impl FnMut(&Row, [f64; 2])) {
    let start = [p[AIR_START], p[PRODUCT_START]];
    walk(
        rows,
        start,
        |row, y| rates(p, row, y[0], y[1]),
        |row, y| visit(row, *y),
    );
}

/// The same with the derivatives of both temperatures by each parameter.
///
/// The sensitivities obey linear equations of their own. One Runge-Kutta pass over both gives the exact derivative of
/// the scheme's own answer, not an approximation to it, so value and gradient belong together to rounding.
pub(crate) fn simulate_with_sensitivities(
    rows: &[Row],
    p: &Parameters,
    mut visit: impl FnMut(&Row, [f64; 2], &[f64], &[f64]),
) {
    let mut start = [0.0; WITH_SENSITIVITIES];
    (start[0], start[1]) = (p[AIR_START], p[PRODUCT_START]);
    start[STATE + AIR_START] = 1.0;
    start[STATE + PARAMETERS + PRODUCT_START] = 1.0;
    walk(
        rows,
        start,
        |row, y| rates_with_sensitivities(p, row, y),
        |row, y| {
            let (air, product) = y[STATE..].split_at(PARAMETERS);
            visit(row, [y[0], y[1]], air, product);
        },
    );
}

fn rates(p: &Parameters, row: &Row, air: f64, product: f64) -> [f64; STATE] {
    [
        p[AIR_BY_PRODUCT] * (product - air) + p[AIR_BY_OUTSIDE] * (row.outside - air)
            - p[PULL] * row.cooling
            + p[HEAT] * row.defrost,
        p[PRODUCT_BY_AIR] * (air - product),
    ]
}

fn rates_with_sensitivities(
    p: &Parameters,
    row: &Row,
    y: &[f64; WITH_SENSITIVITIES],
) -> [f64; WITH_SENSITIVITIES] {
    let (air, product) = (y[0], y[1]);
    let (air_by, product_by) = y[STATE..].split_at(PARAMETERS);
    let mut out = [0.0; WITH_SENSITIVITIES];
    [out[0], out[1]] = rates(p, row, air, product);
    let (by_air, by_product) = out[STATE..].split_at_mut(PARAMETERS);
    for i in 0..PARAMETERS {
        by_air[i] = p[AIR_BY_PRODUCT] * (product_by[i] - air_by[i]) - p[AIR_BY_OUTSIDE] * air_by[i];
        by_product[i] = p[PRODUCT_BY_AIR] * (air_by[i] - product_by[i]);
    }
    by_air[AIR_BY_PRODUCT] += product - air;
    by_air[AIR_BY_OUTSIDE] += row.outside - air;
    by_air[PULL] -= row.cooling;
    by_air[HEAT] += row.defrost;
    by_product[PRODUCT_BY_AIR] += air - product;
    out
}

/// Integrates from row to row. A row's shares say what happened since the row before, so they drive the stretch that
/// ends there; those of the first row drive nothing.
fn walk<const N: usize>(
    rows: &[Row],
    start: [f64; N],
    rates: impl Fn(&Row, &[f64; N]) -> [f64; N],
    mut visit: impl FnMut(&Row, &[f64; N]),
) {
    let mut y = start;
    let mut minute = rows.first().map_or(0.0, |row| row.minute);
    for row in rows {
        let stretch = row.minute - minute;
        minute = row.minute;
        let steps = (stretch / LONGEST_STEP).ceil();
        let hours = stretch / steps.max(1.0) / 60.0;
        for _ in 0..steps as u64 {
            step(&mut y, hours, |y| rates(row, y));
        }
        visit(row, &y);
    }
}

/// One classical Runge-Kutta step of length `h`.
fn step<const N: usize>(y: &mut [f64; N], h: f64, rates: impl Fn(&[f64; N]) -> [f64; N]) {
    let ahead = |k: &[f64; N], a: f64, y: &[f64; N]| -> [f64; N] {
        std::array::from_fn(|i| y[i] + a * k[i])
    };
    let k1 = rates(y);
    let k2 = rates(&ahead(&k1, h / 2.0, y));
    let k3 = rates(&ahead(&k2, h / 2.0, y));
    let k4 = rates(&ahead(&k3, h, y));
    for i in 0..N {
        y[i] += h / 6.0 * (k1[i] + 2.0 * k2[i] + 2.0 * k3[i] + k4[i]);
    }
}
