//! A family of random smooth rays, each bounded below: our own, for trying every finder with every rule.

/// One member of the family.
pub(crate) struct RandomRay {
    /// Which of the eight shapes.
    pub(crate) shape: u32,
    /// Unit of the step.
    pub(crate) scale: f64,
    /// First step of the search, 1e-3 to 10 units.
    pub(crate) first: f64,
    /// Curvature parameter to search with.
    pub(crate) curvature: f64,
    parameters: [f64; 3],
}

impl RandomRay {
    /// The member with this number; always the same.
    pub(crate) fn new(seed: u64) -> Self {
        let mut stream = Stream::new(seed);
        let shape = (stream.next() * 8.0) as u32;
        let scale = 10_f64.powf(stream.next() * 6.0 - 3.0);
        let first = 10_f64.powf(stream.next() * 4.0 - 3.0) * scale;
        let curvature = [0.9, 0.1, 0.01, 0.001][(stream.next() * 4.0) as usize];
        let parameters = [stream.next(), stream.next(), stream.next()];
        RandomRay {
            shape,
            scale,
            first,
            curvature,
            parameters,
        }
    }

    /// The decrease parameter that goes with the curvature parameter.
    pub(crate) fn decrease(&self) -> f64 {
        (self.curvature / 2.0).min(1e-4)
    }

    /// `phi` and `phi'` at a step.
    pub(crate) fn at(&self, step: f64) -> (f64, f64) {
        let (value, slope) = self.in_units(step / self.scale);
        (value, slope / self.scale)
    }

    fn in_units(&self, a: f64) -> (f64, f64) {
        let [p, q, w] = self.parameters;
        let t = a - 1.0;
        match self.shape {
            // a quartic
            0 => (a * a * (0.5 + p * a * a) - a, a + 4.0 * p * a * a * a - 1.0),
            // a decaying exponential and a gentle rise
            1 => {
                let (rate, rise) = (1.0 + p, 0.3 * q);
                let decay = (-rate * a).exp();
                (decay + rise * a, rise - rate * decay)
            }
            // a growing exponential and a steady fall
            2 => {
                let rate = 1.0 + 3.0 * p;
                let (growth, fall) = ((rate * a).exp(), rate + 1.0 + q);
                (growth - fall * a, rate * growth - fall)
            }
            // a logarithmic bowl, flat far away
            3 => {
                let bowl = 1.0 + t * t;
                (bowl.ln(), 2.0 * t / bowl)
            }
            // a parabola with ripples
            4 => {
                let (k, height) = (5.0 + 20.0 * p, 0.05 * q);
                (
                    0.5 * t * t + height * (k * a).sin() / k,
                    t + height * (k * a).cos(),
                )
            }
            // a rounded kink on a slope
            5 => {
                let radius = 1e-3 + w;
                let root = (t * t + radius * radius).sqrt();
                (root + 0.2 * p * a, t / root + 0.2 * p)
            }
            // an even power of 4, 6 or 8: very flat where it is least
            6 => {
                let half = 2 + (p * 3.0) as i32;
                let odd = (1..2 * half).fold(1.0, |power, _| power * t);
                (odd * t, f64::from(2 * half) * odd)
            }
            // a wide bowl with several wells
            _ => {
                let (k, depth, fall) = (2.0 + 2.0 * p, 0.2 + 1.5 * q, 0.1 * (1.0 + p));
                (
                    0.02 * a * a - fall * a + depth * ((k * a).cos() - 1.0) / k,
                    0.04 * a - fall - depth * (k * a).sin(),
                )
            }
        }
    }
}

/// Uniform numbers in `[0, 1)`: G. Marsaglia, "Xorshift RNGs", J. Stat. Software 8 (2003) issue 14, triple (13, 7, 17).
pub(crate) struct Stream(u64);

impl Stream {
    pub(crate) fn new(seed: u64) -> Self {
        Stream(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1)
    }

    pub(crate) fn next(&mut self) -> f64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }
}
