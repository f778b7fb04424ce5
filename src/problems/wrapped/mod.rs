//! Wrappers that make any objective harder: noisy, slow, or defined on a part of space only.
//!
//! | wrapper | what it adds |
//! |---|---|
//! | [`Noisy`] | uniform noise on the value, and on the gradient if wanted |
//! | [`Delayed`] | a wait in every evaluation |
//! | [`Edged`] | an edge of the domain: NaN beyond it |
//!
//! They nest, and pass on what they do not change: the cost, the error, the notice of an accepted point.
//!
//! ```
//! use surefoot::Objective;
//! use surefoot::problems::large::tridia;
//! use surefoot::problems::wrapped::{Edged, Amplitude, Noisy, farther_than};
//!
//! let problem = tridia(3)?;
//! let near = farther_than(problem.start().to_vec(), 2.0);
//! let mut hard = Noisy::new(Edged::new(problem, near), Amplitude::Absolute(1e-6), 7)?;
//! assert!((hard.value(&vec![1.0; 3])? - 5.0).abs() <= 1e-6);
//! assert!(hard.value(&vec![4.0; 3])?.is_nan());
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```

mod delayed;
mod edged;
mod noisy;

pub use self::delayed::{Delay, Delayed};
pub use self::edged::{Edged, farther_than};
pub use self::noisy::{Amplitude, AmplitudeError, Noisy};
