use super::{Problem, Squares, Vec, components, problem};

/// Box's three-dimensional function, problem 12, with `m = 10`: it is 0 in a whole valley too.
///
/// `n = 3`: `ri = exp(-ti x1) - exp(-ti x2) - x3 (exp(-ti) - exp(-10 ti))` with `ti = i / 10`.
/// Start `(0, 10, 20)`. Minimum 0 at `(1, 10, 1)`, at `(10, 1, -1)` and wherever `x1 = x2, x3 = 0`. Quasi-Newton runs
/// from the start end in the valley.
pub fn box_three_dimensional() -> Problem {
    problem(
        12,
        "Box three-dimensional",
        10,
        residuals,
        [0.0, 10.0, 20.0],
    )
    .strict(0.0, &[1.0, 10.0, 1.0])
    .strict(0.0, &[10.0, 1.0, -1.0])
    .set(0.0, "x1 = x2, x3 = 0")
}

pub(super) fn listed() -> Vec<Problem> {
    [box_three_dimensional()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3] = components(x);
    for i in 1..=sum.residuals() {
        let t = i as f64 / 10.0;
        let (e1, e2) = ((-t * x1).exp(), (-t * x2).exp());
        let gap = (-t).exp() - (-10.0 * t).exp();
        sum.add(e1 - e2 - x3 * gap, || [-t * e1, t * e2, -gap]);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn boxes_valley_is_a_minimum_throughout() {
        let problem = box_three_dimensional();
        for x in [-0.5, 0.0, 1.0, 30.0] {
            assert_eq!(problem.value(&[x, x, 0.0]), Ok(0.0));
            let mut g = [f64::NAN; 3];
            assert_eq!(problem.gradient(&[x, x, 0.0], &mut g), Ok(()));
            assert_eq!(g, [0.0; 3]);
        }
    }
}
