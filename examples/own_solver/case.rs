//! A data set as a regression, and how an answer is graded.

use crate::data::DataSet;
use crate::models::{Model, model_of};
use crate::solver::{Fit, Regression};
use nalgebra::{DMatrix, DVector};

/// How many correct digits make a run solved.
const REQUIRED: f64 = 6.0;

/// How many digits are certified.
const CERTIFIED: f64 = 11.0;

/// A data set with its model.
#[derive(Debug, Clone)]
pub(crate) struct Case {
    pub(crate) data: DataSet,
    model: Model,
    responses: DVector<f64>,
}

impl Case {
    /// `None` where no model belongs to the name of the data set.
    pub(crate) fn new(data: DataSet) -> Option<Self> {
        let model = model_of(&data.name)?;
        let responses = DVector::from_column_slice(&data.responses);
        Some(Case {
            data,
            model,
            responses,
        })
    }

    /// Six correct digits of the residual sum of squares, or of every parameter.
    pub(crate) fn solved(&self, fit: &Fit) -> bool {
        let digits = if self.judged_by_parameters() {
            least_digits(fit.parameters.iter(), &self.data.certified)
        } else {
            correct_digits(fit.rss, self.data.certified_rss)
        };
        digits >= REQUIRED
    }

    /// Lanczos1 lies within 1e-13 of its model: its sum of 1.4e-25 cannot be resolved by residuals that are rounded
    /// at 1e-16.
    pub(crate) fn judged_by_parameters(&self) -> bool {
        self.data.name == "Lanczos1"
    }

    /// The least correct digits among the standard deviations of the parameters; 0 where there are none.
    pub(crate) fn digits_of_deviations(&self, fit: &Fit) -> f64 {
        fit.deviations.as_ref().map_or(0.0, |found| {
            least_digits(found.iter(), &self.data.deviations)
        })
    }
}

impl Regression for Case {
    fn responses(&self) -> &DVector<f64> {
        &self.responses
    }

    fn predict(&self, parameters: &DVector<f64>, predictions: &mut DVector<f64>) {
        for (prediction, x) in predictions.iter_mut().zip(&self.data.predictors) {
            *prediction = (self.model)(parameters.as_slice(), x, None);
        }
    }

    fn jacobian(&self, parameters: &DVector<f64>, jacobian: &mut DMatrix<f64>) {
        let mut row = vec![0.0; parameters.len()];
        for (i, x) in self.data.predictors.iter().enumerate() {
            (self.model)(parameters.as_slice(), x, Some(&mut row));
            jacobian.row_mut(i).copy_from_slice(&row);
        }
    }
}

/// The least [`correct_digits`] of a list.
pub(crate) fn least_digits<'a>(found: impl Iterator<Item = &'a f64>, certified: &[f64]) -> f64 {
    found
        .zip(certified)
        .map(|(found, certified)| correct_digits(*found, *certified))
        .fold(CERTIFIED, f64::min)
}

/// Log relative error, `-log10(|found - certified| / |certified|)`: 0 where not even the first digit is right, never
/// more than the 11 digits that are certified.
pub(crate) fn correct_digits(found: f64, certified: f64) -> f64 {
    let error = (found - certified).abs() / certified.abs();
    if error == 0.0 {
        CERTIFIED
    } else if error < 1.0 {
        (-error.log10()).min(CERTIFIED)
    } else {
        0.0
    }
}
