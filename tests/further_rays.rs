//! The second family of random rays: its formulas, and what every finder does on kinds that chose nothing.
#![cfg(feature = "problems")]
#![allow(missing_docs)]

mod support;

use std::collections::BTreeMap;
use support::cast::{Rule, finders};
use surefoot::acceptance::StrongWolfe;
use surefoot::finder::{Bisection, MoreThuente, ThreePoint};
use surefoot::problems::{FurtherRay, FurtherRayKind};
use surefoot::{Ray, StepFinder, StepSearch};

fn rule(ray: &FurtherRay) -> StrongWolfe<f64> {
    StrongWolfe::new(ray.decrease(), ray.curvature()).expect("the ray's own parameters")
}

/// The accepted step, if any, and the trials.
fn search(ray: &FurtherRay, finder: impl StepFinder<f64>) -> (Option<f64>, u32) {
    let (value, slope) = ray.evaluate(0.0);
    let mut search = StepSearch::new(finder, rule(ray));
    let found = search.along(Ray::new(value, slope), ray.first_step(), |step| {
        ray.evaluate(step)
    });
    let outcome = found.expect("every ray descends").outcome;
    (outcome.accepted().map(|trial| trial.step), outcome.trials)
}

/// Seed and kind, then: first step, curvature parameter, scale, value and slope at the first step, value and slope at 0.6
/// times the scale.
///
/// Computed with 50 digits from the formulas as the documentation prints them (values, and derivatives of the values), by
/// a program that shares nothing with the crate.
#[rustfmt::skip]
const PINS: [(u64, FurtherRayKind, [f64; 7]); 26] = [
    (0, FurtherRayKind::QuarticWave, [0.0004953396223006894, 0.001, 0.38830052907590207, 0.2535194748046193, -2.3166091896678913, 0.025476012444271872, -0.34373499246640565]),
    (1, FurtherRayKind::Polynomial, [228.40287062104335, 0.1, 29.83256142984017, 59993.63054863604, 1578.8973398758276, -0.6105961475490719, -0.02880364340879029]),
    (2, FurtherRayKind::FarGaussian, [7.541373123390766, 0.001, 31.2534599380832, -0.006106472848389132, -0.0004776182535025254, -0.013872638601826234, -0.0009575801206809357]),
    (3, FurtherRayKind::Kinks, [4.504637124929581, 0.9, 15.913330460848494, 4.130843751495602, -0.2261482758076024, 2.997635039901319, -0.2222295284226625]),
    (4, FurtherRayKind::Logistic, [617.88787643909, 0.1, 226.17316527918086, 5.467321398025637, 0.0015396784300228002, 7.024942564145735, -0.012482346167977394]),
    (5, FurtherRayKind::HyperbolicCosine, [0.2784061071243282, 0.9, 32.64691098071881, 1.7058084418246697, -0.03817222174630026, 1.265300729917985, -0.008979313865318164]),
    (6, FurtherRayKind::ThreeHalves, [0.0008003020450967849, 0.9, 0.47630191134125677, 0.9978958956973487, -2.6278141087033315, 0.40124605686748466, -1.4729667771397277]),
    (7, FurtherRayKind::HyperbolicCosine, [0.00505559749046805, 0.01, 0.0012610426267084562, 137.14572413516473, 199653.74936229564, 1.4025255037544, -1107.5948679444882]),
    (8, FurtherRayKind::FarGaussian, [2.6779717676382204, 0.01, 4.695572792737514, -0.13606343489938894, -0.04215964674021776, -0.1420343219021175, -0.043526304736735695]),
    (9, FurtherRayKind::ThreeHalves, [0.36767078314061874, 0.001, 31.927826719116982, 0.9831722352275583, -0.04563278967301585, 0.2736116686402723, -0.02863648940831501]),
    (10, FurtherRayKind::Barrier, [0.08513222887901298, 0.001, 25.480205016265437, -0.003337441998742569, -0.03920299823368976, -0.599197097075719, -0.03918088572825823]),
    (11, FurtherRayKind::Plateau, [0.013377047793403526, 0.01, 0.037513787211200036, -0.14521290548873142, -10.285243207020041, -0.3053357259843069, -28.270382196791015]),
    (12, FurtherRayKind::Polynomial, [3.7647389710096903, 0.001, 433.2909325551234, -0.0043633175243278635, -0.0011665809713945813, -0.45368514285152434, -0.0019199068947354605]),
    (13, FurtherRayKind::NearlyRight, [0.11753839620178497, 0.1, 0.09378370611403976, 0.033770957918649494, 2.9212779391081694, 0.07489817037802457, -3.887530180891375]),
    (18, FurtherRayKind::Barrier, [1.016687071980006, 0.01, 19.27845112354493, -0.042257363357392046, -0.041395974106791744, -0.45369849417954333, -0.035699688281701024]),
    (20, FurtherRayKind::Valley, [1.3298958245671674e-05, 0.1, 0.0013073210589760013, 5.894919886321726, -33001.9416209444, 1.035235275722946, 3202.68790076879]),
    (22, FurtherRayKind::NearlyRight, [352.8576778315978, 0.01, 412.68365525084835, 0.010238843661978083, -0.00033838113721784447, 0.07571150324508481, -0.0009050264386700371]),
    (23, FurtherRayKind::QuarticWave, [0.004548430495437364, 0.001, 3.9000528282951747, 0.2652995687781345, -0.22997022124888658, -0.009604901843755759, 0.010203264936395996]),
    (32, FurtherRayKind::KinkRipple, [0.05047232264859673, 0.01, 3.6660811257985935, 0.9917916311709026, -0.1772052233281852, 0.4090592954127789, -0.2273496714922776]),
    (33, FurtherRayKind::Valley, [4.4057784453949764e-05, 0.9, 0.002827433101136269, 1.4843342476621595, -1507.4628679383254, 11.031812452044882, 16163.32559618242]),
    (35, FurtherRayKind::Plateau, [6.779299674927643, 0.1, 4.190068452184832, -0.6582120232505054, 0.17377278145183853, -0.8213037888611778, -0.1751330281811081]),
    (38, FurtherRayKind::KinkRipple, [2.2954192131805847e-06, 0.9, 0.0011062091881282933, 0.9985173274446937, -668.0066266921723, 0.3924201529075489, -788.6307564065444]),
    (47, FurtherRayKind::Logistic, [0.0007859249376547596, 0.9, 0.054427460760155505, 6.163886384567532, -137.4673671640768, 2.870883344853078, -70.83644945262068]),
    (49, FurtherRayKind::Kinks, [0.2895966189970303, 0.001, 0.12884818889509123, 7.539724108450226, 42.95040313203498, 1.9788336817248922, -19.249367487457683]),
    (u64::MAX, FurtherRayKind::QuarticWave, [2.2568935384735824, 0.1, 298.9394434005552, 0.27126444080300827, -0.002820881141927513, -0.022389989252233036, 0.00023270274279840893]),
    (1 << 63, FurtherRayKind::Plateau, [1.3482194330324457, 0.1, 40.17647212172777, -0.02320484721565366, -0.0011675200768409054, -0.12178854184340633, -0.013310787044094455]),
];

#[test]
fn a_seed_names_the_same_ray_for_good_and_it_is_what_the_formula_says() {
    for (seed, kind, [first, curvature, scale, v1, s1, v2, s2]) in PINS {
        let ray = FurtherRay::new(seed);
        assert_eq!((ray.kind(), ray.curvature()), (kind, curvature), "{seed}");
        assert_eq!(ray, FurtherRay::new(seed));
        // Powers, sines and logarithms differ in the last digits between systems; a steep valley multiplies them.
        let close = |found: f64, wanted: f64, size: f64| {
            assert!(
                (found - wanted).abs() <= 1e-12 * size,
                "{seed}: {found:?} for {wanted:?}"
            );
        };
        close(ray.first_step(), first, first);
        close(ray.scale(), scale, scale);
        let start = ray.evaluate(0.0);
        let (value, slope) = (start.0.abs(), start.1.abs() * scale);
        for (step, v, s) in [(first, v1, s1), (0.6 * scale, v2, s2)] {
            let found = ray.evaluate(step);
            close(found.0, v, 1.0 + value + v.abs());
            close(found.1 * scale, s * scale, 1.0 + slope + (s * scale).abs());
        }
    }
    let held: Vec<FurtherRayKind> = PINS.iter().map(|pin| pin.1).collect();
    assert!(FurtherRayKind::ALL.iter().all(|kind| held.contains(kind)));
}

#[test]
fn every_ray_descends_and_every_kind_occurs() {
    let rays: Vec<FurtherRay> = (0..6000).map(FurtherRay::new).collect();
    for ray in &rays {
        let (value, slope) = ray.evaluate(0.0);
        assert!(value.is_finite() && slope < 0.0, "{ray:?}");
        assert!((1e-3..1e3).contains(&ray.scale()));
        assert!((1e-3..10.0).contains(&(ray.first_step() / ray.scale())));
        assert!([0.9, 0.1, 0.01, 0.001].contains(&ray.curvature()));
    }
    for kind in FurtherRayKind::ALL {
        let count = rays.iter().filter(|ray| ray.kind() == kind).count();
        // 500 expected of each; 5 standard deviations are 107.
        assert!(count.abs_diff(500) < 107, "{} {count}", kind.name());
    }
}

/// The derivative of the values, `u` scales out, by central differences: for a ladder of intervals, extrapolated once
/// (Richardson), the one that changes least from one rung to the next; and by how much it changes.
fn difference(ray: &FurtherRay, u: f64) -> (f64, f64) {
    let central = |k: i32| {
        let h = 0.5_f64.powi(k) * ray.scale();
        let at = u * ray.scale();
        // The points as they are rounded.
        let (low, high) = (at - h, at + h);
        (ray.evaluate(high).0 - ray.evaluate(low).0) / (high - low)
    };
    let extrapolated: Vec<f64> = (6..22)
        .map(|k| (4.0 * central(k + 1) - central(k)) / 3.0)
        .collect();
    let pairs = extrapolated.windows(2);
    let best = pairs.map(|pair| (pair[1], (pair[1] - pair[0]).abs()));
    best.min_by(|a, b| a.1.total_cmp(&b.1)).expect("15 rungs")
}

#[test]
fn slopes_are_the_derivatives_of_values() {
    let mut checked = 0;
    for ray in (0..3000).map(FurtherRay::new) {
        // Walls begin at 1.
        let far = ray.kind() != FurtherRayKind::Barrier;
        let places = [0.1, 0.35, 0.8, 0.97]
            .into_iter()
            .chain([1.3, 2.2, 6.0].into_iter().filter(|_| far));
        for u in places {
            let (_, slope) = ray.evaluate(u * ray.scale());
            let (wanted, unsure) = difference(&ray, u);
            let most = 1e-7 * (wanted.abs() + ray.evaluate(0.0).1.abs()) + 10.0 * unsure;
            assert!(
                (slope - wanted).abs() <= most,
                "{} at {u}: {slope:e}, not {wanted:e} (unsure by {unsure:e}), {ray:?}",
                ray.kind().name()
            );
            // A check too unsure to fail is none.
            checked += u32::from(unsure <= 1e-6 * wanted.abs());
        }
    }
    assert!(
        checked > 19_000,
        "only {checked} slopes of 20,000 were sure"
    );
}

#[test]
fn a_barrier_ends_at_its_nearest_wall() {
    let barriers = (0..)
        .map(FurtherRay::new)
        .filter(|r| r.kind() == FurtherRayKind::Barrier);
    for ray in barriers.take(200) {
        let inside = |u: f64| ray.evaluate(u * ray.scale()).0.is_finite();
        let (mut low, mut high) = (0.0, 3.0);
        assert!(inside(low) && !inside(high) && !inside(1e6));
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            *(if inside(middle) { &mut low } else { &mut high }) = middle;
        }
        // Between 1 and 3, where the slope becomes steep and rises, and beyond which there is nothing.
        assert!(high >= 1.0, "a wall at {high}");
        let (value, slope) = ray.evaluate(low * ray.scale());
        assert!(value.is_finite() && slope * ray.scale() > 1e6, "{ray:?}");
        let (value, slope) = ray.evaluate(high * ray.scale());
        assert!(value.is_nan() && slope.is_nan());
    }
}

#[test]
fn every_finder_finds_an_acceptable_step_on_every_kind() {
    let mut found: BTreeMap<&str, u32> = BTreeMap::new();
    for ray in (0..3000).map(FurtherRay::new) {
        let wolfe = Rule::StrongWolfe {
            decrease: ray.decrease(),
            curvature: ray.curvature(),
        };
        for (name, finder) in finders() {
            let (step, trials) = search(&ray, finder);
            let Some(step) = step else {
                panic!("{name}: nothing after {trials} trials on {ray:?}")
            };
            let holds = wolfe.holds(ray.evaluate(0.0), step, ray.evaluate(step));
            assert!(holds, "{name} accepts {step:e} on {ray:?}");
        }
        *found.entry(ray.kind().name()).or_default() += 1;
    }
    assert_eq!(found.len(), FurtherRayKind::ALL.len());
}

/// Trials of the default finder, of Moré and Thuente's (guarded: their own bracket knows no edge) and of bisection.
#[test]
fn the_default_finder_spends_less_on_kinds_that_chose_nothing() {
    let mut spent: BTreeMap<&str, [u64; 3]> = BTreeMap::new();
    for ray in (0..1000).map(FurtherRay::new) {
        let counts = [
            search(&ray, ThreePoint::new()),
            search(&ray, MoreThuente::new()),
            search(&ray, Bisection::new()),
        ];
        let sums = spent.entry(ray.kind().name()).or_default();
        for (sum, (accepted, trials)) in sums.iter_mut().zip(counts) {
            assert!(accepted.is_some(), "{ray:?}");
            *sum += u64::from(trials);
        }
        // No theorem for kinds with several minima or an edge: 50 of 2 million rays exceed it (`ThreePoint`'s documentation).
        let [(_, own), _, (_, bisection)] = counts;
        assert!(own <= 2 * bisection + 4, "{own}, {bisection}: {ray:?}");
    }
    let mut all = [0; 3];
    for (name, sums) in &spent {
        println!("{name:<18} {:.3}", sums[0] as f64 / sums[1] as f64);
        for (total, sum) in all.iter_mut().zip(sums) {
            *total += sum;
        }
    }
    let [own, more_thuente, bisection] = all.map(|total| total as f64);
    println!(
        "all {:.4}, bisection {:.3}",
        own / more_thuente,
        bisection / more_thuente
    );
    // Measured: 0.822 on these seeds, 0.804 on seeds 3,000,000 to 4,999,999.
    assert!(own <= 0.85 * more_thuente, "{:.4}", own / more_thuente);
}
