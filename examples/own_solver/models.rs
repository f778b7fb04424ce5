//! The model functions of the 27 data sets, each with its derivatives by every parameter, derived by hand.
//!
//! A function is handed the parameters `b`, the predictors `x` of one observation and, when a row of the Jacobian is
//! wanted, a slice to write it into. Where a formula has no value (the power of a negative number, an overflow) the
//! result is not finite, and the solver takes such a point for one outside the domain.

use std::f64::consts::PI;

/// Value of a model at one observation; fills the row of derivatives when there is one to fill.
pub(crate) type Model = fn(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64;

/// The model that belongs to a data set, by the data set's name.
pub(crate) fn model_of(data_set: &str) -> Option<Model> {
    Some(match data_set {
        "Misra1a" | "BoxBOD" => saturating_exponential,
        "Misra1b" => saturating_square,
        "Misra1c" => saturating_root,
        "Misra1d" => saturating_ratio,
        "Chwirut1" | "Chwirut2" => exponential_over_line,
        "DanWood" => power,
        "Lanczos1" | "Lanczos2" | "Lanczos3" => three_exponentials,
        "Gauss1" | "Gauss2" | "Gauss3" => two_peaks_on_decay,
        "Kirby2" => rational::<2>,
        "Hahn1" | "Thurber" => rational::<3>,
        "Nelson" => thermal_ageing,
        "MGH17" => two_exponentials_on_level,
        "MGH09" => enzyme_ratio,
        "MGH10" => shifted_arrhenius,
        "Roszman1" => line_minus_arctangent,
        "ENSO" => three_cycles,
        "Rat42" => logistic,
        "Rat43" => generalised_logistic,
        "Eckerle4" => peak,
        "Bennett5" => shifted_power,
        _ => return None,
    })
}

/// b1 (1 - exp(-b2 x))
fn saturating_exponential(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let share = -(-b[1] * x).exp_m1();
    if let Some(row) = row {
        row[0] = share;
        row[1] = b[0] * x * (-b[1] * x).exp();
    }
    b[0] * share
}

/// b1 (1 - (1 + b2 x / 2)^-2)
fn saturating_square(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let u = 1.0 + b[1] * x / 2.0;
    let share = 1.0 - 1.0 / (u * u);
    if let Some(row) = row {
        row[0] = share;
        row[1] = b[0] * x / (u * u * u);
    }
    b[0] * share
}

/// b1 (1 - (1 + 2 b2 x)^-1/2)
fn saturating_root(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let u = 1.0 + 2.0 * b[1] * x;
    let share = 1.0 - 1.0 / u.sqrt();
    if let Some(row) = row {
        row[0] = share;
        row[1] = b[0] * x / (u * u.sqrt());
    }
    b[0] * share
}

/// b1 b2 x / (1 + b2 x)
fn saturating_ratio(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let u = 1.0 + b[1] * x;
    let share = b[1] * x / u;
    if let Some(row) = row {
        row[0] = share;
        row[1] = b[0] * x / (u * u);
    }
    b[0] * share
}

/// exp(-b1 x) / (b2 + b3 x)
fn exponential_over_line(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let line = b[1] + b[2] * x;
    let value = (-b[0] * x).exp() / line;
    if let Some(row) = row {
        row[0] = -x * value;
        row[1] = -value / line;
        row[2] = -x * value / line;
    }
    value
}

/// b1 x^b2
fn power(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let raised = x.powf(b[1]);
    if let Some(row) = row {
        row[0] = raised;
        row[1] = b[0] * raised * x.ln();
    }
    b[0] * raised
}

/// b1 exp(-b2 x) + b3 exp(-b4 x) + b5 exp(-b6 x)
fn three_exponentials(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let decays = [(-b[1] * x).exp(), (-b[3] * x).exp(), (-b[5] * x).exp()];
    if let Some(row) = row {
        for (k, decay) in decays.iter().enumerate() {
            row[2 * k] = *decay;
            row[2 * k + 1] = -b[2 * k] * x * decay;
        }
    }
    b[0] * decays[0] + b[2] * decays[1] + b[4] * decays[2]
}

/// b1 exp(-b2 x) + b3 exp(-(x - b4)^2 / b5^2) + b6 exp(-(x - b7)^2 / b8^2)
fn two_peaks_on_decay(b: &[f64], x: &[f64], mut row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let decay = (-b[1] * x).exp();
    if let Some(row) = row.as_deref_mut() {
        row[0] = decay;
        row[1] = -b[0] * x * decay;
    }
    let mut value = b[0] * decay;
    for first in [2, 5] {
        let (height, centre, width) = (b[first], b[first + 1], b[first + 2]);
        let z = (x - centre) / width;
        let bell = (-z * z).exp();
        value += height * bell;
        if let Some(row) = row.as_deref_mut() {
            row[first] = bell;
            row[first + 1] = 2.0 * height * bell * z / width;
            row[first + 2] = 2.0 * height * bell * z * z / width;
        }
    }
    value
}

/// (b1 + b2 x + ... + b(n+1) x^n) / (1 + b(n+2) x + ... + b(2n+1) x^n), n = `DEGREE`
fn rational<const DEGREE: usize>(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let (above, below) = b.split_at(DEGREE + 1);
    let numerator = above.iter().rev().fold(0.0, |sum, c| sum * x + c);
    let denominator = 1.0 + x * below.iter().rev().fold(0.0, |sum, c| sum * x + c);
    let value = numerator / denominator;
    if let Some(row) = row {
        let mut raised = 1.0;
        for k in 0..=DEGREE {
            row[k] = raised / denominator;
            if k > 0 {
                row[DEGREE + k] = -value * raised / denominator;
            }
            raised *= x;
        }
    }
    value
}

/// b1 - b2 x1 exp(-b3 x2), the logarithm of the response
fn thermal_ageing(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let decay = x[0] * (-b[2] * x[1]).exp();
    if let Some(row) = row {
        row[0] = 1.0;
        row[1] = -decay;
        row[2] = b[1] * x[1] * decay;
    }
    b[0] - b[1] * decay
}

/// b1 + b2 exp(-b4 x) + b3 exp(-b5 x)
fn two_exponentials_on_level(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let (first, second) = ((-b[3] * x).exp(), (-b[4] * x).exp());
    if let Some(row) = row {
        row[0] = 1.0;
        row[1] = first;
        row[2] = second;
        row[3] = -b[1] * x * first;
        row[4] = -b[2] * x * second;
    }
    b[0] + b[1] * first + b[2] * second
}

/// b1 (x^2 + b2 x) / (x^2 + b3 x + b4)
fn enzyme_ratio(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let denominator = x * x + b[2] * x + b[3];
    let ratio = (x * x + b[1] * x) / denominator;
    if let Some(row) = row {
        row[0] = ratio;
        row[1] = b[0] * x / denominator;
        row[2] = -b[0] * ratio * x / denominator;
        row[3] = -b[0] * ratio / denominator;
    }
    b[0] * ratio
}

/// b1 exp(b2 / (x + b3))
fn shifted_arrhenius(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let shifted = x[0] + b[2];
    let raised = (b[1] / shifted).exp();
    if let Some(row) = row {
        row[0] = raised;
        row[1] = b[0] * raised / shifted;
        row[2] = -b[0] * raised * b[1] / (shifted * shifted);
    }
    b[0] * raised
}

/// b1 - b2 x - arctan(b3 / (x - b4)) / pi
fn line_minus_arctangent(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let distance = x - b[3];
    if let Some(row) = row {
        let squares = PI * (distance * distance + b[2] * b[2]);
        row[0] = 1.0;
        row[1] = -x;
        row[2] = -distance / squares;
        row[3] = -b[2] / squares;
    }
    b[0] - b[1] * x - (b[2] / distance).atan() / PI
}

/// b1 plus a cycle of 12 months (b2, b3), one of b4 (b5, b6) and one of b7 (b8, b9): amplitudes of cosine and sine of
/// 2 pi x / period
fn three_cycles(b: &[f64], x: &[f64], mut row: Option<&mut [f64]>) -> f64 {
    let turn = 2.0 * PI * x[0];
    let (sin, cos) = (turn / 12.0).sin_cos();
    if let Some(row) = row.as_deref_mut() {
        row[0] = 1.0;
        row[1] = cos;
        row[2] = sin;
    }
    let mut value = b[0] + b[1] * cos + b[2] * sin;
    for first in [3, 6] {
        let (period, along_cos, along_sin) = (b[first], b[first + 1], b[first + 2]);
        let (sin, cos) = (turn / period).sin_cos();
        value += along_cos * cos + along_sin * sin;
        if let Some(row) = row.as_deref_mut() {
            row[first] = (along_cos * sin - along_sin * cos) * turn / (period * period);
            row[first + 1] = cos;
            row[first + 2] = sin;
        }
    }
    value
}

/// b1 / (1 + exp(b2 - b3 x))
fn logistic(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let share = 1.0 / (1.0 + (b[1] - b[2] * x).exp());
    if let Some(row) = row {
        let bend = b[0] * share * (1.0 - share);
        row[0] = share;
        row[1] = -bend;
        row[2] = x * bend;
    }
    b[0] * share
}

/// b1 / (1 + exp(b2 - b3 x))^(1 / b4)
fn generalised_logistic(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let x = x[0];
    let u = 1.0 + (b[1] - b[2] * x).exp();
    let share = u.powf(-1.0 / b[3]);
    let value = b[0] * share;
    if let Some(row) = row {
        let bend = value / b[3] * (1.0 - 1.0 / u);
        row[0] = share;
        row[1] = -bend;
        row[2] = x * bend;
        row[3] = value * u.ln() / (b[3] * b[3]);
    }
    value
}

/// (b1 / b2) exp(-((x - b3) / b2)^2 / 2)
fn peak(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let z = (x[0] - b[2]) / b[1];
    let bell = (-z * z / 2.0).exp() / b[1];
    let value = b[0] * bell;
    if let Some(row) = row {
        row[0] = bell;
        row[1] = value * (z * z - 1.0) / b[1];
        row[2] = value * z / b[1];
    }
    value
}

/// b1 (b2 + x)^(-1 / b3)
fn shifted_power(b: &[f64], x: &[f64], row: Option<&mut [f64]>) -> f64 {
    let shifted = b[1] + x[0];
    let raised = shifted.powf(-1.0 / b[2]);
    let value = b[0] * raised;
    if let Some(row) = row {
        row[0] = raised;
        row[1] = -value / (b[2] * shifted);
        row[2] = value * shifted.ln() / (b[2] * b[2]);
    }
    value
}
