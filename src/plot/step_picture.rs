//! `phi` along a ray, what rules accept of it, and what a search tried.

use super::axis::{Axis, Scale};
use super::number::short;
use super::panel::Panel;
use super::picture::{Anchor, Picture};
use super::step_parts::INK_LINE;
use super::step_trials::{MOST_LISTED, verdict};
use crate::Ray;
use crate::audit::StepProfile;
use crate::search::Entry;
use std::format;
use std::string::String;
use std::vec::Vec;

const WIDTH: f64 = 1000.0;
/// Left and right end of the frames.
pub(super) const SPAN: (f64, f64) = (100.0, 700.0);
pub(super) const LIST: f64 = 722.0;
pub(super) const ROW: f64 = 19.0;

/// The picture of a ray: above `phi(a)` with the trials of a search, numbered in their order; below it what each rule accepts, a
/// hatched strip a rule; at the foot the slope ratio `phi'(a) / phi'(0)` with the curvature thresholds. The interval of the first
/// rule is also shaded behind `phi`. A disc is an accepted trial; a triangle points to the side where the rule sent the
/// search; a cross lies outside of the domain; the list at the right says the same in words.
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::StrongWolfe, finder::ThreePoint};
/// use surefoot::{audit::{Grid, step_profile}, plot::StepPicture};
/// let phi = |a: f64| ((a - 1.0).powi(4), 4.0 * (a - 1.0).powi(3));
/// let (ray, rule) = (Ray::new(1.0, -4.0), StrongWolfe::new(1e-4, 0.1)?);
/// let mut search = StepSearch::new(ThreePoint::new(), rule);
/// search.along(ray, 3.0, phi)?;
/// let profile = step_profile(&ray, &Grid::linear(0.0, 3.0, 301)?, phi, &[("strong Wolfe", &rule)])?;
/// let picture = StepPicture::new("A quartic", &ray)
///     .with_profile(&profile)
///     .with_trials(search.log().iter())
///     .with_curvature(0.1, true)
///     .picture()?;
/// assert!(picture.svg().contains("strong Wolfe"));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Debug)]
pub struct StepPicture<'a> {
    pub(super) title: String,
    pub(super) ray: Ray<f64>,
    pub(super) profile: Option<&'a StepProfile<f64>>,
    pub(super) trials: Vec<Entry<f64>>,
    pub(super) decrease: Option<f64>,
    /// Threshold, and whether it also holds the slope from above.
    pub(super) curvature: Vec<(f64, bool)>,
    pub(super) scale: Scale,
}

/// Why there is no picture.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum StepPictureError {
    /// Neither a profile nor trials with a step.
    #[error("there is nothing to draw: give a step profile, or the trials of a search")]
    Empty,
}

impl<'a> StepPicture<'a> {
    /// An empty picture of this ray.
    pub fn new(title: &str, ray: &Ray<f64>) -> Self {
        StepPicture {
            title: title.into(),
            ray: *ray,
            profile: None,
            trials: Vec::new(),
            decrease: None,
            curvature: Vec::new(),
            scale: Scale::Linear,
        }
    }

    /// The curve, and what each of its rules accepts.
    #[must_use]
    pub fn with_profile(self, profile: &'a StepProfile<f64>) -> Self {
        StepPicture {
            profile: Some(profile),
            ..self
        }
    }

    /// The trials of a search, such as those of its [`Log`](crate::search::Log).
    #[must_use]
    pub fn with_trials<'e>(self, trials: impl IntoIterator<Item = &'e Entry<f64>>) -> Self {
        StepPicture {
            trials: trials.into_iter().copied().collect(),
            ..self
        }
    }

    /// Draws the line of sufficient decrease with this parameter, 0 to 1.
    #[must_use]
    pub fn with_decrease(self, decrease: f64) -> Self {
        StepPicture {
            decrease: Some(decrease),
            ..self
        }
    }

    /// Draws a curvature threshold into the slope ratio, 0 to 1: a slope ratio of at most `curvature` is asked for, and of at
    /// least `-curvature` where the rule is a strong one. May be called for several rules.
    #[must_use]
    pub fn with_curvature(mut self, curvature: f64, strong: bool) -> Self {
        self.curvature.push((curvature, strong));
        self
    }

    /// How the axis of the steps is divided; default linear. Logarithmic where trials span several powers of ten.
    #[must_use]
    pub fn with_scale(self, scale: Scale) -> Self {
        StepPicture { scale, ..self }
    }

    /// Draws it.
    ///
    /// # Errors
    /// [`StepPictureError::Empty`] if there is neither a profile nor a trial.
    pub fn picture(&self) -> Result<Picture, StepPictureError> {
        if self.profile.is_none() && self.trials.is_empty() {
            return Err(StepPictureError::Empty);
        }
        let rules = self.profile.map_or(0, |profile| profile.rules().len());
        let (top, bottom) = (78.0, 378.0);
        let strips = bottom + 14.0;
        let slope_top = strips + 24.0 * rules as f64 + if rules > 0 { 12.0 } else { 4.0 };
        let slope_bottom = slope_top + if self.has_slopes() { 180.0 } else { 0.0 };
        let height =
            (slope_bottom + 54.0).max(top + ROW * (self.trials.len().min(MOST_LISTED) + 3) as f64);
        let mut picture = Picture::new(WIDTH, height, &self.title, &self.in_words());
        picture.styled_text(
            (SPAN.0, 26.0),
            Anchor::Start,
            15.0,
            "font-weight=\"bold\"",
            &self.title,
        );

        let x = self.steps_axis();
        let panel = Panel {
            x,
            y: self.values_axis((bottom, top)),
        };
        self.shade(&mut picture, &panel);
        let x_label = if self.has_slopes() { "" } else { "step a" };
        panel.frame(&mut picture, x_label, "value \u{3c6}(a)");
        if let Some(profile) = self.profile {
            let points: Vec<(f64, f64)> = profile
                .rows()
                .map(|row| (row.step, row.value.unwrap_or(f64::NAN)))
                .collect();
            panel.line(&mut picture, &points, INK_LINE);
        } else {
            self.tangents(&mut picture, &panel);
        }
        self.start_and_decrease(&mut picture, &panel);
        panel.outline(&mut picture);
        self.strips(&mut picture, &x, strips);
        if self.has_slopes() {
            let slopes = Panel {
                x,
                y: self.slopes_axis((slope_bottom, slope_top)),
            };
            self.slope_panel(&mut picture, &slopes);
        }
        self.mark_trials(&mut picture, &panel);
        self.list(&mut picture);
        Ok(picture)
    }

    fn has_slopes(&self) -> bool {
        let in_profile = self
            .profile
            .is_some_and(|p| p.rows().any(|row| row.slope_ratio.is_some()));
        self.ray.slope != 0.0 && (in_profile || self.trials.iter().any(|t| t.trial.slope.is_some()))
    }

    fn in_words(&self) -> String {
        let trials: Vec<String> = self
            .trials
            .iter()
            .map(|t| {
                format!(
                    "trial {} at step {}: {}",
                    t.number,
                    short(t.trial.step),
                    verdict(t.fate)
                )
            })
            .collect();
        let rules = self.profile.map(|profile| {
            let each = profile.rules().iter().enumerate().map(|(number, rule)| {
                let parts: Vec<String> = profile
                    .accepted(number)
                    .iter()
                    .map(|i| format!("{} to {}", short(i.start), short(i.end)))
                    .collect();
                let parts = if parts.is_empty() {
                    "nothing".into()
                } else {
                    parts.join(" and ")
                };
                format!("{rule} accepts {parts}")
            });
            each.collect::<Vec<_>>().join("; ")
        });
        let said: Vec<String> = rules
            .into_iter()
            .filter(|r| !r.is_empty())
            .chain(trials)
            .collect();
        format!(
            "Value and slope ratio against the step. {}",
            said.join("; ")
        )
    }

    fn steps_axis(&self) -> Axis {
        let of_profile = self
            .profile
            .into_iter()
            .flat_map(StepProfile::rows)
            .map(|row| row.step);
        let of_trials = self.trials.iter().map(|t| t.trial.step);
        let zero = (self.scale == Scale::Linear).then_some(0.0);
        let all = of_profile.chain(of_trials).chain(zero);
        Axis::over(all, self.scale, SPAN).with_margin(0.02)
    }

    /// Steep ends are cut: what matters lies between the least value and a little above the start.
    fn values_axis(&self, pixels: (f64, f64)) -> Axis {
        let of_profile = self
            .profile
            .into_iter()
            .flat_map(StepProfile::rows)
            .filter_map(|row| row.value);
        let of_trials = self.trials.iter().map(|t| t.trial.value);
        let all: Vec<f64> = of_profile
            .chain(of_trials)
            .chain([self.ray.value])
            .filter(|v| v.is_finite())
            .collect();
        let low = all.iter().copied().fold(f64::INFINITY, f64::min);
        let high = all.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        let cut = self.ray.value + 0.6 * (self.ray.value - low);
        let high = if cut > self.ray.value {
            high.min(cut)
        } else {
            high
        };
        Axis::over([low, high], Scale::Linear, pixels).with_margin(0.06)
    }

    fn slopes_axis(&self, pixels: (f64, f64)) -> Axis {
        let of_profile = self
            .profile
            .into_iter()
            .flat_map(StepProfile::rows)
            .filter_map(|row| row.slope_ratio);
        let of_trials = self.trials.iter().filter_map(|t| self.slope_ratio(t));
        let thresholds = self
            .curvature
            .iter()
            .flat_map(|&(c, strong)| [c, if strong { -c } else { c }]);
        // A finite cut at both ends: a ratio beyond tells no more than that it is far off.
        let all = of_profile
            .chain(of_trials)
            .map(|ratio| ratio.clamp(-1.4, 1.4));
        Axis::over(
            all.chain(thresholds).chain([0.0, 1.0]),
            Scale::Linear,
            pixels,
        )
        .with_margin(0.06)
    }

    pub(super) fn slope_ratio(&self, entry: &Entry<f64>) -> Option<f64> {
        let ratio = entry.trial.slope? / self.ray.slope;
        ratio.is_finite().then_some(ratio)
    }
}
