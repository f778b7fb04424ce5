use std::time::{Duration, Instant};

use crate::{Cost, Objective, Vector};

/// How an evaluation waits.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Delay {
    /// It keeps its processor busy, as a computation does. Exact to a microsecond or so.
    Spin(Duration),
    /// It lets others run, as a call to another machine does. The system may let it sleep longer.
    Sleep(Duration),
}

/// An objective whose every evaluation takes longer by a delay: a stand-in for an expensive simulation.
///
/// A value, a gradient, and both at once wait once each, after the work of the objective within.
///
/// ```
/// use std::time::{Duration, Instant};
/// use surefoot::Objective;
/// use surefoot::problems::large::tridia;
/// use surefoot::problems::wrapped::{Delay, Delayed};
///
/// let mut slow = Delayed::new(tridia(3)?, Delay::Spin(Duration::from_millis(2)));
/// let begin = Instant::now();
/// slow.value(&vec![1.0; 3])?;
/// assert!(begin.elapsed() >= Duration::from_millis(2));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Debug)]
pub struct Delayed<O> {
    inner: O,
    delay: Delay,
}

impl<O> Delayed<O> {
    /// Waits so in every evaluation.
    pub fn new(inner: O, delay: Delay) -> Self {
        Delayed { inner, delay }
    }

    /// The objective within.
    pub fn into_inner(self) -> O {
        self.inner
    }
}

impl Delay {
    fn wait(self) {
        match self {
            Delay::Spin(duration) => {
                let begin = Instant::now();
                while begin.elapsed() < duration {
                    core::hint::spin_loop();
                }
            }
            Delay::Sleep(duration) => std::thread::sleep(duration),
        }
    }
}

impl<V: Vector, O: Objective<V>> Objective<V> for Delayed<O> {
    type Error = O::Error;

    fn cost(&self) -> Cost {
        self.inner.cost()
    }

    fn value(&mut self, x: &V) -> Result<V::Scalar, O::Error> {
        let value = self.inner.value(x);
        self.delay.wait();
        value
    }

    fn value_up_to(&mut self, x: &V, ceiling: Option<V::Scalar>) -> Result<V::Scalar, O::Error> {
        let value = self.inner.value_up_to(x, ceiling);
        self.delay.wait();
        value
    }

    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), O::Error> {
        let done = self.inner.gradient(x, g);
        self.delay.wait();
        done
    }

    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, O::Error> {
        let value = self.inner.value_and_gradient(x, g);
        self.delay.wait();
        value
    }

    fn accepted(&mut self, x: &V) -> Result<(), O::Error> {
        self.inner.accepted(x)
    }
}
