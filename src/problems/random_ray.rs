//! Random functions of one variable, made from a seed.

/// A smooth function `phi(a)` of a step `a >= 0` that descends from 0, with a first step and a pair of Wolfe parameters.
///
/// Everything comes from the seed: the kind, its parameters, the scale (`10^u`, `u` uniform in [-3, 3)), the first step
/// (scale times `10^u`, `u` in [-3, 1)), the curvature parameter (0.9, 0.1, 0.01 or 0.001) and the decrease parameter
/// (1e-4). A step too short or too long by several orders of magnitude, several minima, slopes from nearly flat to
/// exponential: a family to compare finders and rules on. The stream of random numbers is fixed, so a seed names the
/// same ray everywhere and for good.
///
/// Source: this project's own reference family. The generator is the xorshift of G. Marsaglia, "Xorshift RNGs",
/// J. Statistical Software 8(14), 2003, with the shifts (13, 7, 17), doi:10.18637/jss.v008.i14.
///
/// ```
/// use surefoot::problems::RandomRay;
///
/// let ray = RandomRay::new(7);
/// let (value, slope) = ray.evaluate(0.0);
/// assert!(value.is_finite() && slope < 0.0);
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RandomRay {
    kind: RandomRayKind,
    scale: f64,
    first: f64,
    decrease: f64,
    curvature: f64,
    /// Shape parameters, uniform in [0, 1).
    p: f64,
    q: f64,
    w: f64,
}

/// The formulas of the family, in `u = a / scale` with `p`, `q`, `w` uniform in [0, 1).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum RandomRayKind {
    /// `u^2 (0.5 + p u^2) - u`
    Quartic,
    /// `exp(-(1 + p) u) + 0.3 q u`: decay towards a gentle rise.
    Exponential,
    /// `exp((1 + 3 p) u) - (2 + 3 p + q) u`: steep growth beyond the minimizer.
    ExponentialGrowth,
    /// `ln(1 + (u - 1)^2)`: not convex, slopes vanish far out.
    Logarithm,
    /// `0.5 (u - 1)^2 + 0.05 q sin(k u) / k`, `k = 5 + 20 p`: ripples in the slope.
    Wave,
    /// `sqrt((u - 1)^2 + d^2) + 0.2 p u`, `d = 0.001 + w`: nearly a kink for small `d`.
    KinkLikeRoot,
    /// `(u - 1)^(2 k)`, `k` = 2, 3 or 4 by `p`: flat about the minimizer.
    FlatPower,
    /// `0.02 u^2 - 0.1 (1 + p) u + h (cos(m u) - 1) / m`, `m = 2 + 2 p`, `h = 0.2 + 1.5 q`: many minima.
    MultiWell,
}

impl RandomRayKind {
    /// A name for tables.
    pub fn name(self) -> &'static str {
        match self {
            RandomRayKind::Quartic => "quartic",
            RandomRayKind::Exponential => "exponential",
            RandomRayKind::ExponentialGrowth => "exponential growth",
            RandomRayKind::Logarithm => "logarithm",
            RandomRayKind::Wave => "wave",
            RandomRayKind::KinkLikeRoot => "kink-like root",
            RandomRayKind::FlatPower => "flat power",
            RandomRayKind::MultiWell => "multi-well",
        }
    }
}

impl RandomRay {
    /// The ray of a seed. Any seed will do.
    pub fn new(seed: u64) -> Self {
        let mut random = Uniform::new(seed);
        let kind = KINDS[random.index(KINDS.len())];
        let scale = 10f64.powf(random.next() * 6.0 - 3.0);
        let first = 10f64.powf(random.next() * 4.0 - 3.0) * scale;
        let curvature = CURVATURES[random.index(CURVATURES.len())];
        RandomRay {
            kind,
            scale,
            first,
            decrease: 1e-4,
            curvature,
            p: random.next(),
            q: random.next(),
            w: random.next(),
        }
    }

    /// Which formula it is.
    pub fn kind(&self) -> RandomRayKind {
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
        self.decrease
    }

    /// The parameter of the curvature condition: 0.9, 0.1, 0.01 or 0.001.
    pub fn curvature(&self) -> f64 {
        self.curvature
    }

    /// Value and slope, `(phi(step), phi'(step))`.
    pub fn evaluate(&self, step: f64) -> (f64, f64) {
        let (value, slope) = self.unscaled(step / self.scale);
        (value, slope / self.scale)
    }

    /// Value and derivative with respect to `u = a / scale`.
    fn unscaled(&self, u: f64) -> (f64, f64) {
        let RandomRay { p, q, w, .. } = *self;
        let off = u - 1.0;
        match self.kind {
            RandomRayKind::Quartic => (
                u * u * (0.5 + p * u * u) - u,
                u + 4.0 * p * (u * u * u) - 1.0,
            ),
            RandomRayKind::Exponential => {
                let e = (-u * (1.0 + p)).exp();
                (e + q * u * 0.3, q * 0.3 - (1.0 + p) * e)
            }
            RandomRayKind::ExponentialGrowth => {
                let rate = 1.0 + 3.0 * p;
                let pull = 2.0 + 3.0 * p + q;
                let e = (u * rate).exp();
                (e - pull * u, rate * e - pull)
            }
            RandomRayKind::Logarithm => {
                let t = 1.0 + off * off;
                (t.ln(), 2.0 * off / t)
            }
            RandomRayKind::Wave => {
                let k = 5.0 + 20.0 * p;
                let (sine, cosine) = (k * u).sin_cos();
                (
                    0.5 * (off * off) + 0.05 * q * sine / k,
                    off + 0.05 * q * cosine,
                )
            }
            RandomRayKind::KinkLikeRoot => {
                let d = 1e-3 + w;
                let t = (off * off + d * d).sqrt();
                (t + 0.2 * p * u, off / t + 0.2 * p)
            }
            RandomRayKind::FlatPower => {
                let k = 2 + (p * 3.0) as i32;
                let odd = (1..2 * k).fold(1.0, |power, _| power * off);
                (odd * off, f64::from(2 * k) * odd)
            }
            RandomRayKind::MultiWell => {
                let (m, h) = (2.0 + 2.0 * p, 0.2 + 1.5 * q);
                let (sine, cosine) = (m * u).sin_cos();
                (
                    0.02 * u * u - 0.1 * u * (1.0 + p) + h * (cosine - 1.0) / m,
                    0.04 * u - 0.1 * (1.0 + p) - h * sine,
                )
            }
        }
    }
}

const KINDS: [RandomRayKind; 8] = [
    RandomRayKind::Quartic,
    RandomRayKind::Exponential,
    RandomRayKind::ExponentialGrowth,
    RandomRayKind::Logarithm,
    RandomRayKind::Wave,
    RandomRayKind::KinkLikeRoot,
    RandomRayKind::FlatPower,
    RandomRayKind::MultiWell,
];

const CURVATURES: [f64; 4] = [0.9, 0.1, 0.01, 0.001];

/// Uniform random numbers in [0, 1): the upper 53 bits of a 64-bit xorshift.
struct Uniform(u64);

impl Uniform {
    fn new(seed: u64) -> Self {
        // The multiplier spreads neighbouring seeds (2^64 over the golden ratio); a state of 0 would stay 0.
        Uniform(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1)
    }

    fn next(&mut self) -> f64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        (self.0 >> 11) as f64 / (1u64 << 53) as f64
    }

    /// A uniform index below `count`.
    fn index(&mut self, count: usize) -> usize {
        (self.next() * count as f64) as usize
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::vec::Vec;

    /// Seed, kind, then: first step, curvature parameter, a step of 0.6 times the scale, value and slope at the first
    /// step, value and slope at the other. Second-line pins: computed by an independent, literal transcription of the
    /// family's definition, to hold the stream and the formulas in place; the formulas' truth is that slopes agree with
    /// differences of values.
    #[rustfmt::skip]
    const PINS: [(u64, RandomRayKind, [f64; 7]); 18] = [
        (0, RandomRayKind::Quartic, [0.0006291595952518684, 0.001, 0.00142290041043143, -0.22751410701753627, -293.31196177379996, -0.35213852473584073, 22.099860837838015]),
        (1, RandomRayKind::FlatPower, [0.01941598940498711, 0.9, 0.13930261865979546, 0.7051594350957614, -13.257677552154021, 0.02560000000000001, -1.102635409712732]),
        (2, RandomRayKind::KinkLikeRoot, [7.746945983448729, 0.9, 85.43170378017784, 1.0045715786567078, -0.005544784721146582, 0.6035569701317564, -0.004411156505646121]),
        (3, RandomRayKind::FlatPower, [108.4065635581752, 0.9, 15.619841218856184, 10048.40248131839, 975.8869644549101, 0.0006553600000000006, -0.0005034827108553602]),
        (4, RandomRayKind::Logarithm, [4.648460076692614, 0.9, 0.8196865800787568, 1.9128774189226838, 0.519355935444321, 0.1484200051182734, -0.5048186874164975]),
        (5, RandomRayKind::KinkLikeRoot, [0.03518509336630637, 0.1, 0.0027706031308390275, 7.691409757861925, 246.4153413087295, 0.6231246185484439, -130.38082221521043]),
        (7, RandomRayKind::MultiWell, [34.675563053448975, 0.01, 212.9829067323277, -0.019794114108670956, -0.0007579819335973931, -0.27883911774040765, -0.0017940852806553797]),
        (8, RandomRayKind::MultiWell, [0.0010577072531524083, 0.9, 0.014919511152381437, -0.006679643496730428, -7.225099068472609, -0.2331412024503633, -20.997437083317653]),
        (9, RandomRayKind::Exponential, [9.466831223721622e-6, 0.9, 0.0008562056834943041, 0.9931708213614667, -717.5512858277567, 0.6132578287843949, -240.00257012420408]),
        (10, RandomRayKind::Logarithm, [0.0004375403938551517, 0.1, 0.006014724102481698, 0.6495145713484134, -99.65594176658122, 0.1484200051182734, -68.79668899152718]),
        (11, RandomRayKind::Quartic, [0.012679057871820991, 0.1, 0.23242084968644794, -0.03219515449885003, -2.496879458576973, -0.36705771217841143, -0.12146435550739582]),
        (22, RandomRayKind::Exponential, [1.9310822014565672, 0.001, 42.33143789214635, 0.9580376513205411, -0.021114821542772538, 0.47738650710282954, -0.00535501286826724]),
        (25, RandomRayKind::Wave, [0.39605488035964714, 0.01, 0.11951551485279875, 0.48973751154550416, 5.073872431072707, 0.08219543104304909, -1.9984394446546077]),
        (29, RandomRayKind::Wave, [0.000362578977814573, 0.01, 0.004935428573510773, 0.4579514230592372, -114.18988014926502, 0.08015432168053266, -45.261793941854776]),
        (31, RandomRayKind::ExponentialGrowth, [0.006194688367663502, 0.001, 0.0409398085830898, 0.9434041183199511, 4.394062718252504, 7.69634811887947, 560.9652381883782]),
        (37, RandomRayKind::ExponentialGrowth, [9.09465751254295e-6, 0.001, 0.0014108016861985276, 0.9923399476248908, -837.9505031352046, 1.3684919276182952, 1998.7986951790672]),
        (u64::MAX, RandomRayKind::FlatPower, [3.124793596830965, 0.001, 0.4595606704151496, 8092.509885180778, 27445.504403012772, 0.0006553600000000006, -0.017112691547115377]),
        (1 << 63, RandomRayKind::Wave, [0.046345588992924895, 0.1, 1.423500454386166, 0.48077127698481253, -0.4107926666801988, 0.07963018841917215, -0.170910465972932]),
    ];

    #[test]
    fn a_seed_names_the_same_ray_for_good() {
        for (seed, kind, [first, curvature, step, v1, s1, v2, s2]) in PINS {
            let ray = RandomRay::new(seed);
            assert_eq!(
                (ray.kind(), ray.curvature(), ray.decrease()),
                (kind, curvature, 1e-4)
            );
            // Powers of 10 differ in the last digit between systems.
            let close = |found: f64, wanted: f64, size: f64| {
                assert!(
                    (found - wanted).abs() <= 1e-13 * size,
                    "{seed}: {found:?} for {wanted:?}"
                );
            };
            close(ray.first_step(), first, first);
            close(0.6 * ray.scale(), step, step);
            for (step, value, slope) in [(first, v1, s1), (step, v2, s2)] {
                let found = ray.evaluate(step);
                close(found.0, value, 1.0 + value.abs());
                close(
                    found.1 * ray.scale(),
                    slope * ray.scale(),
                    1.0 + (slope * ray.scale()).abs(),
                );
            }
        }
    }

    #[test]
    fn every_ray_descends_and_every_kind_occurs() {
        let rays: Vec<RandomRay> = (0..4000).map(RandomRay::new).collect();
        for ray in &rays {
            let (value, slope) = ray.evaluate(0.0);
            assert!(value.is_finite() && slope < 0.0, "{ray:?}");
            assert!((1e-3..1e3).contains(&ray.scale()));
            assert!((1e-3..10.0).contains(&(ray.first_step() / ray.scale())));
            assert!([0.9, 0.1, 0.01, 0.001].contains(&ray.curvature()));
        }
        for kind in KINDS {
            let count = rays.iter().filter(|ray| ray.kind() == kind).count();
            // 500 expected of each; 5 standard deviations are 105.
            assert!(count.abs_diff(500) < 105, "{} {count}", kind.name());
        }
    }
}
