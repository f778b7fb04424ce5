//! The experiment bench: which rule, which finder, which driver is better on *my* problems.
//!
//! Contenders x problems x starts x repetitions, each run counted and recorded, whatever becomes of it.
//!
//! | what | where |
//! |---|---|
//! | what is compared | [`Contender`]: a name and a way to build a [`Descent`](crate::Descent) |
//! | on what | [`Task`]: any [`Objective`](crate::Objective) with starts; a [`Problem`](crate::problems::Problem) converts |
//! | the runs | [`Experiment`]: in memory or on disk, on one core or all |
//! | at what cost at most | [`Budget`] in calls and time; [`Isolation`] in processes that are killed |
//! | what is kept | a [`Record`] a run, and its trials on request ([`TrialLog`]) |
//! | reading it again | [`read_records`], [`read_trials`]; [`write_records`] in another format |
//!
//! ```
//! use surefoot::Descent;
//! use surefoot::acceptance::WeakWolfe;
//! use surefoot::direction::Lbfgs;
//! use surefoot::experiment::{Contender, Experiment, Task, Workers, read_records};
//! use surefoot::finder::{Bisection, ThreePoint};
//! use surefoot::{joint, problems::more_garbow_hillstrom::wood};
//!
//! let folder = std::env::temp_dir().join(format!("a-first-experiment-{}", std::process::id()));
//! let mine = joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
//!     g[0] = x[0].exp() - 1.0;
//!     x[0].exp() - x[0]
//! });
//! let memory = Lbfgs::new(5)?;
//! let experiment = Experiment::new()
//!     .with_problem(wood())
//!     .with_problem(Task::new("mine", vec![4.0], mine).with_minimum(1.0))
//!     .with_contender(Contender::new("three-point", {
//!         let memory = memory.clone();
//!         move || Descent::new(memory.clone(), ThreePoint::new(), WeakWolfe::default())
//!     }))
//!     .with_contender(Contender::new("bisection", move || {
//!         Descent::new(memory.clone(), Bisection::new(), WeakWolfe::default())
//!     }))
//!     .with_workers(Workers::AllCores);
//! let records = experiment.run_in(&folder)?;
//! for record in &records {
//!     println!("{} {} {}: {}", record.problem, record.contender, record.ending, record.evaluations());
//! }
//! assert_eq!(read_records(&folder)?.len(), 4);
//! experiment.run_in(&folder)?; // nothing is left to do, and nothing is overwritten
//! # std::fs::remove_dir_all(&folder)?;
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```

pub mod analysis;
mod bench;
mod budget;
mod contender;
mod error;
mod isolation;
mod lines;
mod one_run;
mod plan;
mod progress;
mod record;
#[cfg(feature = "plot")]
pub mod report;
mod store;
mod task;
mod trials;
mod workers;

pub use self::bench::Experiment;
pub use self::budget::Budget;
pub use self::contender::Contender;
pub use self::error::ExperimentError;
pub use self::isolation::Isolation;
pub use self::record::{Ending, Record, correct_digits};
pub use self::store::{Format, read_records, read_trials, write_records};
pub use self::task::Task;
pub use self::trials::{LoggedTrial, SearchTrials, TrialLog, TrialVerdict};
pub use self::workers::Workers;
