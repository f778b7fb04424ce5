//! A line search linked into a solver of one's own: nonlinear regression on the 27 NIST data sets, from both
//! published starts.
//!
//! ```text
//! cargo run --release --example own_solver --features nalgebra
//! ```
//!
//! How to read it
//! 1. [`watch_one_search`] below holds the whole protocol in a few lines: begin, answer what is asked, take the
//!    outcome. It prints the conversation.
//! 2. `solver.rs` puts the same lines into a solver: `fit` is the iteration, `search_along` the coupling.
//! 3. `direction.rs` is where the solver's own knowledge lives: a damped Gauss–Newton direction from a singular value
//!    decomposition.
//! 4. `models.rs`, `data.rs` and `case.rs` hold what is fitted and how an answer is graded; `spread.rs` and
//!    `report.rs` what is printed.
//!
//! Nothing is tuned to a data set: one search, one set of settings, 54 runs. The last line says how many gave six
//! correct digits of the certified residual sum of squares.

mod case;
mod data;
mod direction;
mod models;
mod report;
mod solver;
mod spread;

use case::Case;
use direction::{Restraint, damped_gauss_newton};
use nalgebra::{DMatrix, DVector};
use report::{Total, table};
use solver::{Regression, Settings, fit};
use std::error::Error;
use std::io::{self, Write};
use surefoot::acceptance::StrongWolfe;
use surefoot::finder::MoreThuente;
use surefoot::{Need, Ray, Sample, StepSearch};

fn main() -> Result<(), Box<dyn Error>> {
    let mut out = io::stdout().lock();
    let mut cases = Vec::new();
    for data in data::all()? {
        let name = data.name.clone();
        cases.push(Case::new(data).ok_or(format!("no model belongs to the data set {name}"))?);
    }
    for case in cases.iter().filter(|case| case.data.name == "BoxBOD") {
        watch_one_search(&mut out, case)?;
    }

    // Any step finder works with any acceptance rule. One machine serves all searches of all runs.
    let mut search = StepSearch::new(MoreThuente::new(), StrongWolfe::new(1e-4, 0.9)?);
    let settings = Settings::default();
    let mut total = Total::default();
    for case in &cases {
        let [first, second] = &case.data.starts;
        let fits = [
            fit(case, &first.parameters, &mut search, &settings)?,
            fit(case, &second.parameters, &mut search, &settings)?,
        ];
        table(&mut out, case, &fits)?;
        for (start, fit) in fits.iter().enumerate() {
            total.add(case, start + 1, fit);
        }
    }
    total.print(&mut out)?;
    Ok(())
}

/// One search from the first start, along an undamped Gauss–Newton step that is much too long.
fn watch_one_search(out: &mut impl Write, case: &Case) -> Result<(), Box<dyn Error>> {
    // What a solver has at hand: a point, and a direction from there.
    let start = DVector::from_column_slice(&case.data.starts[0].parameters);
    let mut residuals = DVector::zeros(case.responses().len());
    let mut jacobian = DMatrix::zeros(residuals.len(), start.len());
    case.predict(&start, &mut residuals);
    residuals -= case.responses();
    case.jacobian(&start, &mut jacobian);
    let undamped = Restraint {
        reach: f64::MAX,
        cosine: 0.0,
    };
    let direction = damped_gauss_newton(&start, &residuals, &jacobian, undamped)
        .ok_or("there is no direction at the start")?;

    writeln!(
        out,
        "One search, watched: {} from start 1, half the sum of squares along an undamped step\n",
        case.data.name
    )?;
    let mut search = StepSearch::new(MoreThuente::new(), StrongWolfe::new(1e-4, 0.9)?);
    search.begin(
        Ray::new(0.5 * residuals.norm_squared(), direction.slope),
        1.0,
    )?;
    while let Some(ask) = search.request() {
        let trial = &start + &direction.step * ask.step;
        let mut value = || {
            case.predict(&trial, &mut residuals);
            residuals -= case.responses();
            0.5 * residuals.norm_squared()
        };
        let sample = match ask.need {
            Need::Value => Sample::Value(value()),
            Need::Slope => {
                case.jacobian(&trial, &mut jacobian);
                Sample::Slope(residuals.dot(&(&jacobian * &direction.step)))
            }
            Need::Both => {
                let value = value();
                case.jacobian(&trial, &mut jacobian);
                Sample::Both(value, residuals.dot(&(&jacobian * &direction.step)))
            }
        };
        writeln!(
            out,
            "  asked for {:<6} at step {:<12.6} supplied {sample:?}",
            format!("{:?}", ask.need),
            ask.step
        )?;
        search.supply(sample)?;
    }
    if let Some(outcome) = search.outcome() {
        writeln!(out, "  {} after {} trials:", outcome.ending, outcome.trials)?;
    }
    for entry in search.log().iter() {
        writeln!(out, "    step {:.6}: {:?}", entry.trial.step, entry.fate)?;
        let mut told = Ok(());
        search.explain(entry, &mut |condition| {
            if told.is_ok() {
                told = writeln!(out, "      {condition}");
            }
        });
        told?;
    }
    writeln!(out)?;
    Ok(())
}
