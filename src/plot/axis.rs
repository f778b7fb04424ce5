//! From numbers to pixels, and where the ticks stand.

use super::number::{power_of_ten, short, tick};
use std::string::String;
use std::vec::Vec;

/// How an axis is divided.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Scale {
    /// Equal differences at equal distances.
    #[default]
    Linear,
    /// Equal ratios at equal distances; numbers of 0 and below are not drawn.
    Logarithmic,
}

/// A range of numbers laid over a range of pixels.
#[derive(Clone, Copy, Debug)]
pub(super) struct Axis {
    scale: Scale,
    low: f64,
    high: f64,
    /// Pixels of `low` and of `high`.
    pixels: (f64, f64),
}

impl Axis {
    /// Covers the numbers that can be drawn; a range without width is widened, no numbers give 0 to 1, or 1 to 10.
    pub(super) fn over(
        numbers: impl IntoIterator<Item = f64>,
        scale: Scale,
        pixels: (f64, f64),
    ) -> Self {
        let drawable = |x: &f64| x.is_finite() && (scale == Scale::Linear || *x > 0.0);
        // Far ends are drawn a little nearer, so that differences and ratios of two numbers stay finite.
        let near = |x: f64| match scale {
            Scale::Linear => x.clamp(-1e300, 1e300),
            Scale::Logarithmic => x.clamp(1e-280, 1e280),
        };
        let numbers = numbers.into_iter().filter(drawable).map(near);
        let range = numbers.fold(None, |range, x| {
            let (low, high) = range.unwrap_or((x, x));
            Some((x.min(low), x.max(high)))
        });
        let (low, high) = match (range, scale) {
            (None, Scale::Linear) => (0.0, 1.0),
            (None, Scale::Logarithmic) => (1.0, 10.0),
            (Some((low, high)), Scale::Linear)
                if !(high - low > 1e-12 * low.abs().max(high.abs())) =>
            {
                let margin = if low == 0.0 {
                    1.0
                } else {
                    (0.1 * low.abs()).max(1e-280)
                };
                (low - margin, high + margin)
            }
            (Some((low, high)), Scale::Logarithmic) if !(high.ln() - low.ln() > 1e-6) => {
                (low / 2.0, high * 2.0)
            }
            (Some(range), _) => range,
        };
        Axis {
            scale,
            low,
            high,
            pixels,
        }
    }

    /// The same range with a share of it added at each end.
    pub(super) fn with_margin(self, share: f64) -> Self {
        let (low, high) = match self.scale {
            Scale::Linear => {
                let margin = share * (self.high - self.low);
                (self.low - margin, self.high + margin)
            }
            Scale::Logarithmic => {
                let factor = (share * self.width()).exp();
                (self.low / factor, self.high * factor)
            }
        };
        Axis { low, high, ..self }
    }

    /// The width of a logarithmic axis, in natural logarithms.
    fn width(&self) -> f64 {
        self.high.ln() - self.low.ln()
    }

    pub(super) fn ends(&self) -> (f64, f64) {
        (self.low, self.high)
    }

    pub(super) fn pixels(&self) -> (f64, f64) {
        self.pixels
    }

    /// Share of the way from `low` to `high`; NaN where it cannot be drawn.
    fn share(&self, x: f64) -> f64 {
        match self.scale {
            Scale::Linear => (x - self.low) / (self.high - self.low),
            Scale::Logarithmic if x > 0.0 => (x.ln() - self.low.ln()) / self.width(),
            Scale::Logarithmic => f64::NAN,
        }
    }

    /// Its pixel; far outside where the number is, NaN where it cannot be drawn.
    pub(super) fn at(&self, x: f64) -> f64 {
        let share = self.share(x).clamp(-1e3, 1e3);
        self.pixels.0 + share * (self.pixels.1 - self.pixels.0)
    }

    /// The number at a pixel.
    pub(super) fn number_at(&self, pixel: f64) -> f64 {
        let share = (pixel - self.pixels.0) / (self.pixels.1 - self.pixels.0);
        match self.scale {
            Scale::Linear => self.low + share * (self.high - self.low),
            Scale::Logarithmic => (self.low.ln() + share * self.width()).exp(),
        }
    }

    /// Its pixel, moved to the nearer end where it lies outside; also whether it lies inside.
    pub(super) fn clamped(&self, x: f64) -> (f64, bool) {
        let share = self.share(x);
        let inside = (-1e-9..=1.0 + 1e-9).contains(&share);
        let share = if share.is_nan() {
            1.0
        } else {
            share.clamp(0.0, 1.0)
        };
        (
            self.pixels.0 + share * (self.pixels.1 - self.pixels.0),
            inside,
        )
    }

    /// Ticks with their labels, about `wished` of them.
    pub(super) fn ticks(&self, wished: usize) -> Vec<(f64, String)> {
        match self.scale {
            Scale::Linear => self.linear_ticks(wished),
            Scale::Logarithmic => self.logarithmic_ticks(wished),
        }
    }

    fn linear_ticks(&self, wished: usize) -> Vec<(f64, String)> {
        let raw = (self.high - self.low) / wished.max(1) as f64;
        let decade = 10.0_f64.powf(raw.log10().floor());
        let nice = [1.0, 2.0, 5.0, 10.0]
            .into_iter()
            .find(|m| m * decade >= raw * 0.999);
        let step = nice.unwrap_or(10.0) * decade;
        let largest = self.low.abs().max(self.high.abs());
        let (first, last) = ((self.low / step).ceil(), (self.high / step).floor());
        if !(step > 0.0 && (last - first).abs() < 100.0) {
            return Vec::new();
        }
        (0..=(last - first) as i64)
            .map(|i| {
                let x = (first + i as f64) * step;
                // The rounding of a sum of differences is no tick of its own.
                let x = if x.abs() < 1e-9 * step { 0.0 } else { x };
                (x, tick(x, step, largest))
            })
            .collect()
    }

    fn logarithmic_ticks(&self, wished: usize) -> Vec<(f64, String)> {
        let (first, last) = (self.low.log10(), self.high.log10());
        let inside = |x: &f64| (self.low * (1.0 - 1e-9)..=self.high * (1.0 + 1e-9)).contains(x);
        if last - first < 2.2 {
            let steps: &[f64] = match last - first {
                wide if wide > 1.2 => &[1.0, 2.0, 5.0],
                wide if wide > 0.5 => &[1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 7.0],
                _ => return self.linear_ticks(wished),
            };
            let decades = first.floor() as i32..=last.ceil() as i32;
            return decades
                .flat_map(|d| steps.iter().map(move |s| s * 10.0_f64.powi(d)))
                .filter(inside)
                .map(|x| (x, short(x)))
                .collect();
        }
        let (first, last) = ((first - 1e-9).ceil() as i32, (last + 1e-9).floor() as i32);
        let every = ((last - first) as usize / wished.max(1) + 1) as i32;
        (first..=last)
            .filter(|power| power.rem_euclid(every) == 0)
            .map(|power| (10.0_f64.powi(power), power_of_ten(power)))
            .collect()
    }
}
