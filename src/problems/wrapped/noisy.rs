use crate::{Cost, Objective, Real, Vector};

/// The amplitude of uniform noise.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Amplitude {
    /// Up to so much, in the units of what it is added to.
    Absolute(f64),
    /// Up to so large a part of what it is added to.
    Relative(f64),
}

/// Why an [`Amplitude`] is refused.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("the amplitude of the noise must be a finite number of at least 0; give 0 for none")]
pub struct AmplitudeError;

/// An objective with uniform noise on its value and, if wanted, on each component of its gradient.
///
/// A value `f` becomes `f + a u`, or `f (1 + a u)`, `a` the [`Amplitude`],, with a `u` that is uniform in [-1, 1), of standard deviation
/// `1 / sqrt 3`. The `u` of an evaluation follows from the seed and the number of evaluations before it: the same calls give the
/// same numbers everywhere, and one point asked twice gives two values. A call of any kind is one evaluation. NaN and
/// infinities stay what they are.
///
/// ```
/// use surefoot::{Objective, joint};
/// use surefoot::problems::wrapped::{Amplitude, Noisy};
///
/// let bowl = joint(|x: &[f64; 1], g: &mut [f64; 1]| { g[0] = 2.0 * x[0]; x[0] * x[0] });
/// let mut noisy = Noisy::new(bowl, Amplitude::Relative(1e-3), 1)?;
/// let value = noisy.value(&[2.0]).unwrap();
/// assert!(value != 4.0 && (value - 4.0).abs() <= 4e-3);
/// # Ok::<(), surefoot::problems::wrapped::AmplitudeError>(())
/// ```
///
/// Source: our own. The numbers are those of the generator of G. L. Steele, D. Lea & C. H. Flood, "Fast splittable pseudorandom
/// number generators", OOPSLA 2014, doi:10.1145/2660193.2660195; its constants from memory.
#[derive(Clone, Debug)]
pub struct Noisy<O> {
    inner: O,
    value: Amplitude,
    gradient: Amplitude,
    seed: u64,
    evaluations: u64,
}

impl<O> Noisy<O> {
    /// Noise on the value, none on the gradient.
    ///
    /// # Errors
    /// [`AmplitudeError`] unless the amplitude is finite and at least 0.
    pub fn new(inner: O, value: Amplitude, seed: u64) -> Result<Self, AmplitudeError> {
        value.check()?;
        Ok(Noisy {
            inner,
            value,
            gradient: Amplitude::Absolute(0.0),
            seed,
            evaluations: 0,
        })
    }

    /// The same with noise on the gradient, component by component. Default: none.
    ///
    /// # Errors
    /// [`AmplitudeError`] unless the amplitude is finite and at least 0.
    pub fn with_gradient_noise(self, gradient: Amplitude) -> Result<Self, AmplitudeError> {
        gradient.check()?;
        Ok(Noisy { gradient, ..self })
    }

    /// Number of evaluations so far.
    pub fn evaluations(&self) -> u64 {
        self.evaluations
    }

    /// The objective within.
    pub fn into_inner(self) -> O {
        self.inner
    }

    /// The stream of the next evaluation; its first number is the value's.
    fn next(&mut self) -> Stream {
        let stream = Stream::new(self.seed, self.evaluations);
        self.evaluations += 1;
        stream
    }
}

impl<V, O> Objective<V> for Noisy<O>
where
    V: Vector + AsMut<[V::Scalar]>,
    O: Objective<V>,
{
    type Error = O::Error;

    fn cost(&self) -> Cost {
        self.inner.cost()
    }

    fn value(&mut self, x: &V) -> Result<V::Scalar, O::Error> {
        let mut stream = self.next();
        Ok(self.value.on(self.inner.value(x)?, &mut stream))
    }

    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), O::Error> {
        let mut stream = self.next();
        stream.draw();
        self.inner.gradient(x, g)?;
        self.gradient.on_all(g.as_mut(), &mut stream);
        Ok(())
    }

    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, O::Error> {
        let mut stream = self.next();
        let value = self.inner.value_and_gradient(x, g)?;
        let value = self.value.on(value, &mut stream);
        self.gradient.on_all(g.as_mut(), &mut stream);
        Ok(value)
    }

    fn accepted(&mut self, x: &V) -> Result<(), O::Error> {
        self.inner.accepted(x)
    }
}

impl Amplitude {
    fn check(self) -> Result<(), AmplitudeError> {
        let (Amplitude::Absolute(amplitude) | Amplitude::Relative(amplitude)) = self;
        if amplitude >= 0.0 && amplitude.is_finite() {
            Ok(())
        } else {
            Err(AmplitudeError)
        }
    }

    fn on<T: Real>(self, exact: T, stream: &mut Stream) -> T {
        let u = stream.draw();
        if !exact.is_finite() {
            return exact;
        }
        match self {
            Amplitude::Absolute(amplitude) => exact + T::of(amplitude * u),
            Amplitude::Relative(amplitude) => exact + exact * T::of(amplitude * u),
        }
    }

    fn on_all<T: Real>(self, exact: &mut [T], stream: &mut Stream) {
        if self == Amplitude::Absolute(0.0) || self == Amplitude::Relative(0.0) {
            return;
        }
        for g in exact {
            *g = self.on(*g, stream);
        }
    }
}

/// The random numbers of one evaluation.
struct Stream(u64);

/// The odd integer next to `2^64` over the golden ratio.
const STEP: u64 = 0x9e37_79b9_7f4a_7c15;

impl Stream {
    /// Streams of different evaluations start at unrelated places: the seed and the count both go through the mixer.
    fn new(seed: u64, evaluation: u64) -> Self {
        Stream(mix(mix(seed.wrapping_add(STEP)).wrapping_add(evaluation)))
    }

    /// Uniform in [-1, 1).
    fn draw(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(STEP);
        let bits = mix(self.0) >> 11;
        bits as f64 / (1u64 << 52) as f64 - 1.0
    }
}

fn mix(z: u64) -> u64 {
    let z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    let z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}
