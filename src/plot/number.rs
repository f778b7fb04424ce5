//! Numbers as labels.

use std::format;
use std::string::{String, ToString};

/// A number for a label or a table: four significant digits, a power of ten where it would be long.
///
/// ```
/// use surefoot::plot::short;
/// assert_eq!(short(0.5), "0.5");
/// assert_eq!(short(1234.56), "1235");
/// assert_eq!(short(-1.5e-7), "-1.5e-7");
/// assert_eq!(short(f64::NAN), "not a number");
/// ```
pub fn short(x: f64) -> String {
    if x.is_nan() {
        return "not a number".into();
    }
    if x.is_infinite() {
        return if x > 0.0 {
            "infinite"
        } else {
            "minus infinite"
        }
        .into();
    }
    let size = x.abs();
    if size == 0.0 {
        return "0".into();
    }
    if !(1e-3..1e5).contains(&size) {
        let text = format!("{x:.3e}");
        let (digits, power) = text.split_once('e').unwrap_or((&text, "0"));
        return format!("{}e{power}", trimmed(digits));
    }
    let decimals = (3 - size.log10().floor() as i32).max(0) as usize;
    trimmed(&format!("{x:.decimals$}")).to_string()
}

/// `10` to a power, as a label: plain from 0.001 to 10000.
pub(super) fn power_of_ten(power: i32) -> String {
    match power {
        0..=4 => 10_u32.pow(power as u32).to_string(),
        -3..=-1 => format!("{:.*}", power.unsigned_abs() as usize, 10.0_f64.powi(power)),
        _ => format!("10{}", superscript(power)),
    }
}

/// A tick at a multiple of `step`, with as many decimals as the step has.
pub(super) fn tick(x: f64, step: f64, largest: f64) -> String {
    if x == 0.0 {
        return "0".into();
    }
    let of_step = step.abs().log10().floor() as i32;
    if largest >= 1e5 || (of_step < -5 && largest < 1e-3) {
        let digits = (largest.log10().floor() as i32 - of_step).clamp(0, 15) as usize;
        return format!("{x:.digits$e}").replace('-', "\u{2212}");
    }
    let decimals = (-of_step).max(0) as usize;
    format!("{x:.decimals$}").replace('-', "\u{2212}")
}

fn trimmed(digits: &str) -> &str {
    if digits.contains('.') {
        digits.trim_end_matches('0').trim_end_matches('.')
    } else {
        digits
    }
}

fn superscript(power: i32) -> String {
    power
        .to_string()
        .chars()
        .map(|c| match c {
            '-' => '\u{207b}',
            '1' => '\u{b9}',
            '2' => '\u{b2}',
            '3' => '\u{b3}',
            c => char::from_u32(0x2070 + c as u32 - '0' as u32).unwrap_or(c),
        })
        .collect()
}
