//! Random functions of one variable that chose nothing: a second family, to prove on.

/// A function `phi(a)` of a step `a >= 0` that descends from 0, of a kind that [`RandomRay`](super::RandomRay) has not, with a
/// first step and a pair of Wolfe parameters.
///
/// The settings of the finders were chosen without these rays, which show what a finder does on rays that it was not made for.
/// Everything comes from the seed, in the ranges of [`RandomRay`](super::RandomRay): the kind, its parameters, the scale
/// (`10^u`, `u` uniform in [-3, 3)), the first step (scale times `10^u`, `u` in [-3, 1), but for
/// [`NearlyRight`](FurtherRayKind::NearlyRight)), the curvature parameter (0.9, 0.1, 0.01 or 0.001) and the decrease
/// parameter (1e-4). Every ray is bounded below and has a continuous slope where it is defined, so there are steps for
/// every Wolfe rule. A seed names the same ray everywhere and for good.
///
/// Source: this project's own. The generator is SplitMix64 (G. L. Steele, D. Lea & C. H. Flood, "Fast splittable
/// pseudorandom number generators", OOPSLA 2014, doi:10.1145/2660193.2660195; constants from memory).
///
/// ```
/// use surefoot::problems::{FurtherRay, FurtherRayKind};
///
/// let barrier = (0..).map(FurtherRay::new).find(|ray| ray.kind() == FurtherRayKind::Barrier).unwrap();
/// assert!(barrier.evaluate(0.0).1 < 0.0);
/// assert!(barrier.evaluate(3.0 * barrier.scale()).0.is_nan()); // every wall is nearer
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FurtherRay {
    kind: FurtherRayKind,
    scale: f64,
    first: f64,
    curvature: f64,
    /// Shape parameters, uniform in [0, 1).
    p: f64,
    q: f64,
    w: f64,
    r: [f64; 12],
}

/// The formulas of the family, in `u = a / scale` with `p`, `q`, `w` and `r1` to `r12` uniform in [0, 1).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum FurtherRayKind {
    /// `-u - m sum ln(1 - u / e_i)`, `m = 0.2 * 10^(-3 p)`, four walls at `e_i = 1 + 2 r_i`: NaN from the nearest one on.
    Barrier,
    /// `sum v_i sqrt((u - 2 r_i)^2 + d^2)` over `i` from 1 to 6, `v_i = 0.2 + r_(i + 6)`, `d = 10^(-4 p)`: a sum of smoothed
    /// kinks.
    Kinks,
    /// `k (y - sin 2x)^2 + 0.1 (x^2 + y^2)`, `k = 10^(1 + 4 q)`: a deep winding valley, along a line through
    /// `(3 r1 - 1.5, 3 r2 - 1.5)` in the direction `(0.3 + r3, 2 r4 - 1)`, or against it where that ascends.
    Valley,
    /// `-1 / (1 + ((u - 1) / d)^2)`, `d = 0.1 + p`: a well in a plateau.
    Plateau,
    /// `cosh(k (u - 1)) + 0.25 q exp(u)`, `k = 0.5 + 3 p`: exponential on both sides.
    HyperbolicCosine,
    /// `0.02 sqrt((u - w)^2 + 1e-6) + sum ln(1 + exp(2 r_(i + 6) - m_i u))` over `i` from 1 to 6, `m_i = 6 r_i - 2.1`, all of
    /// one sign changed where the ray would ascend: logistic losses with a rounded absolute value.
    Logistic,
    /// `0.3 u^m + (2 r1 - 2) u + sum (2 r_i - 1) u^i` over `i` from 2 to `n - 1`, `n` from 3 to 8 by `p`, `m` the least even
    /// number from `n` on: a polynomial.
    Polynomial,
    /// `-exp(-t^2 / 2) - 0.001 u + 1e-4 u^2`, `t = (u - 3 - 5 p) / (1 + q)`: a well far beyond the first step.
    FarGaussian,
    /// `|u - 1|^1.5 + 0.3 q u`: the curvature at the minimizer has no bound.
    ThreeHalves,
    /// `t^2 / 2 + 0.3 (p - 0.5) t^3 + 0.1 q t^4 + 0.02 t^6`, `t = u - 1`, with a first step of `0.6 + 0.9 w` times the scale: as
    /// along a quasi-Newton direction.
    NearlyRight,
    /// `(u - 1)^4 / 4 + 0.3 q sin(k u + w) / k`, `k = 3 + 6 p`: a flat bottom with ripples.
    QuarticWave,
    /// `sqrt((u - 1)^2 + 1e-4) + 0.8 w sin(k u) / k`, `k = 10 + 60 p`: a kink among ripples.
    KinkRipple,
}

impl FurtherRayKind {
    /// All kinds, in the order of their definition.
    pub const ALL: [FurtherRayKind; 12] = [
        FurtherRayKind::Barrier,
        FurtherRayKind::Kinks,
        FurtherRayKind::Valley,
        FurtherRayKind::Plateau,
        FurtherRayKind::HyperbolicCosine,
        FurtherRayKind::Logistic,
        FurtherRayKind::Polynomial,
        FurtherRayKind::FarGaussian,
        FurtherRayKind::ThreeHalves,
        FurtherRayKind::NearlyRight,
        FurtherRayKind::QuarticWave,
        FurtherRayKind::KinkRipple,
    ];

    /// A name for tables.
    pub fn name(self) -> &'static str {
        match self {
            FurtherRayKind::Barrier => "barrier",
            FurtherRayKind::Kinks => "kinks",
            FurtherRayKind::Valley => "valley",
            FurtherRayKind::Plateau => "plateau",
            FurtherRayKind::HyperbolicCosine => "hyperbolic cosine",
            FurtherRayKind::Logistic => "logistic",
            FurtherRayKind::Polynomial => "polynomial",
            FurtherRayKind::FarGaussian => "far Gaussian",
            FurtherRayKind::ThreeHalves => "three halves",
            FurtherRayKind::NearlyRight => "nearly right",
            FurtherRayKind::QuarticWave => "quartic wave",
            FurtherRayKind::KinkRipple => "kink ripple",
        }
    }
}

impl FurtherRay {
    /// The ray of a seed. Any seed will do.
    pub fn new(seed: u64) -> Self {
        let mut random = Uniform(seed);
        let kind = FurtherRayKind::ALL[(random.next() * 12.0) as usize];
        let scale = 10f64.powf(random.next() * 6.0 - 3.0);
        let share = 10f64.powf(random.next() * 4.0 - 3.0);
        let curvature = [0.9, 0.1, 0.01, 0.001][(random.next() * 4.0) as usize];
        let (p, q, w) = (random.next(), random.next(), random.next());
        let share = match kind {
            FurtherRayKind::NearlyRight => 0.6 + 0.9 * w,
            _ => share,
        };
        FurtherRay {
            kind,
            scale,
            first: share * scale,
            curvature,
            p,
            q,
            w,
            r: core::array::from_fn(|_| random.next()),
        }
    }

    /// Which formula it is.
    pub fn kind(&self) -> FurtherRayKind {
        self.kind
    }

    /// The length of step that the formula counts as 1, from 1e-3 to 1e3.
    pub fn scale(&self) -> f64 {
        self.scale
    }

    /// The first step to try, from 1e-3 to 10 times the scale.
    pub fn first_step(&self) -> f64 {
        self.first
    }

    /// The parameter of sufficient decrease: 1e-4.
    pub fn decrease(&self) -> f64 {
        1e-4
    }

    /// The parameter of the curvature condition: 0.9, 0.1, 0.01 or 0.001.
    pub fn curvature(&self) -> f64 {
        self.curvature
    }

    /// Value and slope, `(phi(step), phi'(step))`; NaN at the wall of a [`Barrier`](FurtherRayKind::Barrier) and beyond.
    pub fn evaluate(&self, step: f64) -> (f64, f64) {
        let (value, slope) = self.unscaled(step / self.scale);
        (value, slope / self.scale)
    }

    /// Value and derivative with respect to `u = a / scale`.
    fn unscaled(&self, u: f64) -> (f64, f64) {
        let FurtherRay { p, q, w, r, .. } = *self;
        let t = u - 1.0;
        match self.kind {
            FurtherRayKind::Barrier => {
                let weight = 0.2 * 10f64.powf(-3.0 * p);
                let walls = r[..4].iter().map(|r| 1.0 + 2.0 * r);
                let barrier = sum(walls.map(|e| match e - u {
                    room if room > 0.0 => (-weight * (-u / e).ln_1p(), weight / room),
                    _ => (f64::NAN, f64::NAN),
                }));
                plus(barrier, (-u, -1.0))
            }
            FurtherRayKind::Kinks => {
                let radius = 10f64.powf(-4.0 * p);
                sum((0..6).map(|i| {
                    let (root, slope) = rounded_kink(u - 2.0 * r[i], radius);
                    let weight = 0.2 + r[i + 6];
                    (weight * root, weight * slope)
                }))
            }
            FurtherRayKind::Valley => {
                let (k, x, y) = (
                    10f64.powf(1.0 + 4.0 * q),
                    3.0 * r[0] - 1.5,
                    3.0 * r[1] - 1.5,
                );
                let (dx, dy) = (0.3 + r[2], 2.0 * r[3] - 1.0);
                let at = |u: f64| {
                    let (x, y) = (x + u * dx, y + u * dy);
                    let off = y - (2.0 * x).sin();
                    let turn = dy - 2.0 * (2.0 * x).cos() * dx;
                    (
                        k * off * off + 0.1 * (x * x + y * y),
                        2.0 * k * off * turn + 0.2 * (x * dx + y * dy),
                    )
                };
                if at(0.0).1 > 0.0 {
                    let (value, slope) = at(-u);
                    (value, -slope)
                } else {
                    at(u)
                }
            }
            FurtherRayKind::Plateau => {
                let d = 0.1 + p;
                let s = t / d;
                let bowl = 1.0 + s * s;
                (-1.0 / bowl, 2.0 * s / (d * bowl * bowl))
            }
            FurtherRayKind::HyperbolicCosine => {
                let k = 0.5 + 3.0 * p;
                let rise = 0.25 * q * u.exp();
                ((k * t).cosh() + rise, k * (k * t).sinh() + rise)
            }
            FurtherRayKind::Logistic => {
                let losses = |sign: f64, u: f64| {
                    sum((0..6).map(|i| {
                        let rate = sign * (6.0 * r[i] - 2.1);
                        let z = 2.0 * r[i + 6] - rate * u;
                        // ln(1 + e^z) without overflow
                        let small = (-z.abs()).exp();
                        let share = if z > 0.0 { 1.0 } else { small } / (1.0 + small);
                        (z.max(0.0) + small.ln_1p(), -rate * share)
                    }))
                };
                let sign = if losses(1.0, 0.0).1 > 0.0 { -1.0 } else { 1.0 };
                let (root, slope) = rounded_kink(u - w, 1e-3);
                plus(losses(sign, u), (0.02 * root, 0.02 * slope))
            }
            FurtherRayKind::Polynomial => {
                let n = 3 + (6.0 * p) as usize;
                let even = n + n % 2;
                let coefficient = |i: usize| match i {
                    0 => 0.0,
                    1 => 2.0 * r[0] - 2.0,
                    i if i < n => 2.0 * r[i - 1] - 1.0,
                    i if i == even => 0.3,
                    _ => 0.0,
                };
                // Horner's scheme for value and derivative
                (0..=even).rev().fold((0.0, 0.0), |(value, slope), i| {
                    (value * u + coefficient(i), slope * u + value)
                })
            }
            FurtherRayKind::FarGaussian => {
                let width = 1.0 + q;
                let s = (u - 3.0 - 5.0 * p) / width;
                let bell = (-0.5 * s * s).exp();
                (
                    -bell - 0.001 * u + 1e-4 * u * u,
                    s / width * bell - 0.001 + 2e-4 * u,
                )
            }
            FurtherRayKind::ThreeHalves => {
                let root = t.abs().sqrt();
                (
                    t.abs() * root + 0.3 * q * u,
                    1.5 * root.copysign(t) + 0.3 * q,
                )
            }
            FurtherRayKind::NearlyRight => {
                let (cubic, quartic) = (0.3 * (p - 0.5), 0.1 * q);
                let s = t * t;
                (
                    s * (0.5 + t * cubic + s * (quartic + 0.02 * s)),
                    t * (1.0 + 3.0 * t * cubic + s * (4.0 * quartic + 0.12 * s)),
                )
            }
            FurtherRayKind::QuarticWave => {
                let (k, height) = (3.0 + 6.0 * p, 0.3 * q);
                let (sine, cosine) = (k * u + w).sin_cos();
                (
                    0.25 * (t * t) * (t * t) + height * sine / k,
                    t * t * t + height * cosine,
                )
            }
            FurtherRayKind::KinkRipple => {
                let (k, height) = (10.0 + 60.0 * p, 0.8 * w);
                let (sine, cosine) = (k * u).sin_cos();
                let ripple = (height * sine / k, height * cosine);
                plus(rounded_kink(t, 0.01), ripple)
            }
        }
    }
}

/// `sqrt(t^2 + radius^2)` and its derivative.
fn rounded_kink(t: f64, radius: f64) -> (f64, f64) {
    let root = (t * t + radius * radius).sqrt();
    (root, t / root)
}

fn plus(a: (f64, f64), b: (f64, f64)) -> (f64, f64) {
    (a.0 + b.0, a.1 + b.1)
}

fn sum(parts: impl Iterator<Item = (f64, f64)>) -> (f64, f64) {
    parts.fold((0.0, 0.0), plus)
}

/// Uniform random numbers in [0, 1): the upper 53 bits of SplitMix64.
struct Uniform(u64);

impl Uniform {
    fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let z = (self.0 ^ (self.0 >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        let z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    fn next(&mut self) -> f64 {
        (self.bits() >> 11) as f64 / (1u64 << 53) as f64
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_generator_is_splitmix64() {
        // The first outputs for the seed 1234567, as widely printed (from memory).
        let mut random = Uniform(1_234_567);
        let wanted = [
            6_457_827_717_110_365_317,
            3_203_168_211_198_807_973,
            9_817_491_932_198_370_423,
        ];
        assert_eq!(wanted.map(|_| random.bits()), wanted);
    }
}
