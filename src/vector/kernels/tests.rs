//! Sums that can be told exactly, and the same bits whichever way they are taken.

use super::*;
use std::vec::Vec;

#[test]
fn a_nan_survives_wherever_it_stands() {
    for n in 1..40 {
        for at in 0..n {
            let mut x: Vec<f64> = (0..n).map(f64::from).collect();
            x[at as usize] = f64::NAN;
            assert!(max_abs(&x).is_nan(), "n = {n}, at {at}");
            assert!(dot(&x, &x).is_nan());
        }
    }
}

#[test]
fn infinities_are_not_taken_for_nan() {
    let mut x = std::vec![1.0; 21];
    x[3] = f64::INFINITY;
    x[15] = f64::NEG_INFINITY;
    assert_eq!(max_abs(&x), f64::INFINITY);
    assert_eq!(max_abs::<f64>(&[]), 0.0);
}

#[test]
fn integers_add_up_exactly() {
    for n in 0..100_u32 {
        let x: Vec<f64> = (1..=n).map(f64::from).collect();
        let squares = f64::from(n) * f64::from(n + 1) * f64::from(2 * n + 1) / 6.0;
        assert_eq!(dot(&x, &x), squares);
    }
}

/// Numbers of many magnitudes and both signs.
fn numbers(n: usize, seed: u64) -> Vec<f64> {
    let mut state = seed;
    let mut next = move || {
        state = state
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (state >> 11) as f64 / 2f64.powi(53) - 0.5
    };
    (0..n)
        .map(|_| next() * 2f64.powi((40.0 * next()) as i32))
        .collect()
}

const LENGTHS: [usize; 12] = [0, 1, 7, 8, 63, 64, 100, 1023, 1025, 16_384, 16_385, 50_001];

/// The order of additions that the module promises, written down plainly.
fn plain_dot(x: &[f64], y: &[f64]) -> f64 {
    let mut total = None;
    for (x, y) in x.chunks(16_384).zip(y.chunks(16_384)) {
        let mut lanes = [0.0; 8];
        for (i, (x, y)) in x.iter().zip(y).enumerate() {
            lanes[i % 8] += x * y;
        }
        let sum = fold(lanes);
        total = Some(total.map_or(sum, |t: f64| t + sum));
    }
    total.unwrap_or(0.0)
}

#[test]
fn a_dot_adds_up_in_the_order_that_is_promised() {
    for n in LENGTHS {
        let (x, y) = (numbers(n, 1), numbers(n, 2));
        assert_eq!(
            dot(&x, &y).to_bits(),
            plain_dot(&x, &y).to_bits(),
            "n = {n}"
        );
        let (x, y): (Vec<f32>, Vec<f32>) = (
            x.iter().map(|&x| x as f32).collect(),
            y.iter().map(|&y| y as f32).collect(),
        );
        let (vectors, with) = ([&x[..n.min(16_384)]], &y[..n.min(16_384)]);
        let [portable] = Products { vectors, with }.run(Portable);
        assert_eq!(
            dot(vectors[0], with).to_bits(),
            portable.to_bits(),
            "n = {n}"
        );
    }
}

#[test]
fn several_products_at_once_are_single_ones_bit_for_bit() {
    for n in LENGTHS {
        for count in [0, 1, 3, 4, 5, 20, 24, 25, 50] {
            let vectors: Vec<_> = (0..count).map(|i| numbers(n, 10 + i)).collect();
            let [g, old, d] = [3, 4, 5].map(|seed| numbers(n, seed));
            let mut out = std::vec![0.0; vectors.len()];
            dots(|i| &vectors[i], &g, &mut out);
            let mut surveyed = out.clone();
            let survey = survey(&g, &old, &d, |i| &vectors[i], &mut surveyed);
            for ((v, &one), &other) in vectors.iter().zip(&out).zip(&surveyed) {
                assert_eq!(one.to_bits(), dot(v, &g).to_bits());
                assert_eq!(one.to_bits(), other.to_bits());
            }
            let y: Vec<f64> = g.iter().zip(&old).map(|(g, old)| g - old).collect();
            assert_eq!(survey.slope.to_bits(), dot(&g, &d).to_bits());
            assert_eq!(survey.square.to_bits(), dot(&g, &g).to_bits());
            assert_eq!(survey.change_gradient.to_bits(), dot(&y, &g).to_bits());
            assert_eq!(survey.change_square.to_bits(), dot(&y, &y).to_bits());
            assert_eq!(survey.change_slope.to_bits(), dot(&y, &d).to_bits());
            assert_eq!(survey.direction_square.to_bits(), dot(&d, &d).to_bits());
            assert_eq!(survey.max_abs, max_abs(&g));
        }
    }
}

#[test]
fn a_survey_is_not_deaf_to_nan() {
    for n in [1, 9, 70, 20_000] {
        for at in [0, n / 2, n - 1] {
            let mut g = numbers(n, 6);
            g[at] = f64::NAN;
            let survey = survey(&g, &numbers(n, 7), &numbers(n, 8), |_| &[0.0; 0], &mut []);
            assert!(survey.max_abs.is_nan() && survey.slope.is_nan());
            g[at] = f64::NEG_INFINITY;
            let survey = super::survey(&g, &numbers(n, 7), &numbers(n, 8), |_| &[0.0; 0], &mut []);
            assert_eq!(survey.max_abs, f64::INFINITY);
        }
    }
}

#[test]
fn a_combination_is_the_sum_from_left_to_right() {
    for n in LENGTHS {
        for count in [0, 1, 4, 6, 20] {
            let vectors: Vec<_> = (0..count).map(|i| numbers(n, 20 + i)).collect();
            let (x, c) = (numbers(n, 9), numbers(vectors.len(), 10));
            let mut to = std::vec![f64::NAN; n];
            combine(&mut to, -0.3, &x, &c, |i| &vectors[i]);
            let mut plain = x;
            scale(&mut plain, -0.3);
            for (&c, v) in c.iter().zip(&vectors) {
                add_scaled(&mut plain, c, v);
            }
            assert_eq!(to, plain);
        }
    }
}

#[test]
fn passes_that_do_two_things_do_both() {
    for n in LENGTHS {
        let (x, d) = (numbers(n, 11), numbers(n, 12));
        let (mut one, mut other) = (std::vec![0.0; n], std::vec![0.0; n]);
        step_from(&mut one, &x, 0.7, &d);
        assert!(finite_step_from(&mut other, &x, 0.7, &d));
        assert_eq!(one, other);
        for at in [0, n / 2, n.saturating_sub(1)].into_iter().take(n) {
            for bad in [f64::NAN, f64::INFINITY] {
                let mut d = d.clone();
                d[at] = bad;
                assert!(
                    !finite_step_from(&mut other, &x, 0.7, &d),
                    "n = {n}, at {at}"
                );
            }
        }
        scale_add(&mut one, 3.0, -2.0, &x);
        subtract_from(&mut one, &d);
        for (i, &found) in one.iter().enumerate() {
            let step = x[i] + 0.7 * d[i];
            assert_eq!(found, d[i] - (step * 3.0 + -2.0 * x[i]));
        }
    }
}

#[test]
fn a_norm_is_right_wherever_it_can_be_represented() {
    // A right-angled triangle with whole sides, at every scale.
    for k in (-1060..1020).step_by(3) {
        let unit = 2f64.powi(k / 2) * 2f64.powi(k - k / 2);
        let sides = [3.0 * unit, 0.0, -4.0 * unit];
        assert_eq!(norm(&sides), 5.0 * unit, "2^{k}");
    }
    for k in -140..120 {
        let unit = 2f32.powi(k / 2) * 2f32.powi(k - k / 2);
        assert_eq!(norm(&[3.0 * unit, -4.0 * unit]), 5.0 * unit, "2^{k}");
    }
    let long = std::vec![2f64.powi(997); 40_000];
    assert_eq!(norm(&long), 200.0 * 2f64.powi(997));
    assert!(norm(&[1.0, f64::NAN]).is_nan());
    assert_eq!(norm(&[1.0, f64::NEG_INFINITY]), f64::INFINITY);
    assert_eq!(norm::<f64>(&[]), 0.0);
}
