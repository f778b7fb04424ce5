use core::fmt;
use std::string::String;
use std::sync::Arc;
use std::vec::Vec;

use super::one_run::Conductor;
use super::task::Task;
use crate::{Acceptance, Descent, Direction, StepFinder};

/// What is compared: a name, and a way to build a driver.
///
/// Drivers of different types fit one list. One is built anew for each run, so that no run sees what another left behind.
///
/// ```
/// use surefoot::Descent;
/// use surefoot::acceptance::{StrongWolfe, WeakWolfe};
/// use surefoot::direction::{ConjugateGradient, Lbfgs, Update};
/// use surefoot::experiment::Contender;
/// use surefoot::finder::{MoreThuente, ThreePoint};
///
/// let memory = Lbfgs::new(8)?;
/// let strong = StrongWolfe::new(1e-4, 0.1)?;
/// let contenders = [
///     Contender::new("L-BFGS(8), weak", move || {
///         Descent::new(memory.clone(), ThreePoint::new(), WeakWolfe::default())
///     }),
///     Contender::new("conjugate gradient, strong", move || {
///         Descent::new(ConjugateGradient::new(Update::DaiYuan), MoreThuente::new(), strong)
///     }),
/// ];
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
///
/// The name stands for the contender: records found on disk under a name are taken for its own. Give another name when you
/// change a setting.
#[derive(Clone)]
pub struct Contender {
    name: String,
    conduct: Arc<dyn Fn(&mut Conductor<'_>) + Send + Sync>,
}

impl Contender {
    /// The same driver on every problem.
    pub fn new<D, F, A>(
        name: impl Into<String>,
        build: impl Fn() -> Descent<D, F, A> + Send + Sync + 'static,
    ) -> Self
    where
        D: Direction<Vec<f64>>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        Self::tailored(name, move |_| build())
    }

    /// A driver built for the problem at hand, from its size or starts.
    pub fn tailored<D, F, A>(
        name: impl Into<String>,
        build: impl Fn(&Task) -> Descent<D, F, A> + Send + Sync + 'static,
    ) -> Self
    where
        D: Direction<Vec<f64>>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        Contender {
            name: name.into(),
            conduct: Arc::new(move |conductor| {
                let descent = build(conductor.task());
                conductor.conduct(descent);
            }),
        }
    }

    /// The name.
    pub fn name(&self) -> &str {
        &self.name
    }

    pub(super) fn conduct(&self, conductor: &mut Conductor<'_>) {
        (self.conduct)(conductor);
    }
}

impl fmt::Debug for Contender {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Contender")
            .field("name", &self.name)
            .finish_non_exhaustive()
    }
}
