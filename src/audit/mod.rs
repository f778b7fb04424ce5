//! Instruments for a solver's author whose line search misbehaves.
//!
//! | what happens | instrument | what it tells |
//! |---|---|---|
//! | steps are refused for no visible reason, a search ends [`Narrow`](crate::Ending::Narrow) | [`check_gradient`], [`check_slope`] | whether the gradient belongs to the value, and which component does not |
//! | progress stops although the gradient is not small | [`estimate_noise`] | how much of a value is noise, ready for [`Ray::with_value_noise`](crate::Ray::with_value_noise) |
//! | a rule and a ray do not go together | [`step_profile()`] | value, slope and every rule's verdict on a grid of steps |
//!
//! They evaluate outside of any run, allocate as they like, and are not meant for the inside of a solver. Each result is
//! plain data; its `Display` is a sentence or a table.

mod gradient_check;
mod ladder;
mod noise;
mod step_profile;

pub use gradient_check::{
    Agreement, CheckError, CheckSettingError, Comparison, Difference, Doubt, GradientCheck,
    GradientReport, Neighbours, check_gradient, check_gradient_by, check_slope,
};
pub use noise::{
    Noise, NoiseError, NoiseEstimate, NoiseSettingError, TableError, TableNoise, estimate_noise,
    table_noise,
};
pub use step_profile::{
    Grid, GridError, Interval, ProfileError, ProfileRow, StepProfile, step_profile,
};
