use super::{Problem, Squares, Vec, components, numbered, problem};

/// Bard's function, problem 8: a second minimum at infinity.
///
/// `n = 3, m = 15`: `ri = yi - (x1 + ui / (vi x2 + wi x3))` with `ui = i`, `vi = 16 - i`, `wi = min(ui, vi)` and 15
/// data `yi`. Start `(1, 1, 1)`. Minimum 8.21487...e-3 at `(0.082410..., 1.13303..., 2.34369...)`; f falls to
/// 17.4286... as `x1 = 0.8406...` (the mean of the data) and `x2, x3` go to minus infinity.
pub fn bard() -> Problem {
    problem(8, "Bard", 15, residuals, [1.0, 1.0, 1.0])
        .strict(
            0.008214877306578975,
            &[0.08241055974978893, 1.1330360920297216, 2.343695178642537],
        )
        .at_infinity(
            17.42869333333333,
            "x1 = 0.84066..., x2 and x3 to minus infinity",
        )
}

pub(super) fn listed() -> Vec<Problem> {
    [bard()].into()
}

const Y: [f64; 15] = [
    0.14, 0.18, 0.22, 0.25, 0.29, 0.32, 0.35, 0.39, 0.37, 0.58, 0.73, 0.96, 1.34, 2.10, 4.39,
];

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3] = components(x);
    for (u, y) in numbered(Y) {
        let v = 16.0 - u;
        let w = u.min(v);
        let below = v * x2 + w * x3;
        let ratio = u / below;
        sum.add(y - (x1 + ratio), || {
            [-1.0, ratio * v / below, ratio * w / below]
        });
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_minimum_at_infinity_is_approached() {
        let problem = bard();
        let limit = problem.minima()[1].value();
        // The ratios vanish, x1 is the mean of the data.
        let mean = Y.iter().sum::<f64>() / 15.0;
        for far in [1e6, 1e9] {
            let value = problem.value(&[mean, -far, -far]).unwrap();
            assert!((value - limit).abs() < 100.0 / far, "{value}");
        }
    }
}
