//! Pictures, as SVG text: step profiles, convergence curves, profiles, heat maps.
//!
//! | picture | made by |
//! |---|---|
//! | `phi` along a ray, what each rule accepts, the trials of a search, and the slope ratio below | [`StepPicture`] |
//! | curves and staircases over two axes: convergence, profiles | [`Chart`] |
//! | a grid of numbers, such as costs over two thresholds | [`HeatMap`] |
//! | the profiles and the sweep of an experiment (feature `experiment`) | [`profile_chart`], [`sweep_map`] |
//!
//! # Look
//!
//! Meaning is never carried by colour alone: series differ in dash and marker, rules in hatching, verdicts in shape, and all
//! of them in words. Series colours follow the set of M. Okabe & K. Ito (Color Universal Design, 2008; values from memory),
//! without its yellow and with its orange, sky blue and purple darkened, so that each stands out from white by 3 to 1 or more.
//!
//! Colours are presentation attributes, and every element has a class ([`Picture::CLASSES`]): a page that shows a picture can
//! recolour it, for a dark theme say, with plain style rules.
//!
//! For PNG, convert the SVG; Debian's `librsvg2-bin` does it: `rsvg-convert --zoom 2 picture.svg -o picture.png`.

mod axis;
mod chart;
#[cfg(feature = "experiment")]
mod experiment;
mod heat_map;
mod number;
mod panel;
mod picture;
mod step_parts;
mod step_picture;
mod step_trials;
mod style;
mod trial_lane;

pub use axis::Scale;
pub use chart::{Chart, convergence_chart};
#[cfg(feature = "experiment")]
pub use experiment::{profile_chart, sweep_map};
pub use heat_map::{HeatMap, HeatMapError};
pub use number::short;
pub use picture::{Picture, WriteError};
#[cfg(feature = "experiment")]
pub(crate) use picture::{escaped, write_text};
pub use step_picture::{StepPicture, StepPictureError};
