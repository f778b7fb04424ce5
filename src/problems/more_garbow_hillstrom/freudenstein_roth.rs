use super::{Problem, Squares, Vec, components, problem};

/// The function of Freudenstein and Roth, problem 2: a local minimum where runs from the start end.
///
/// `n = 2, m = 2`: `r1 = -13 + x1 + ((5 - x2) x2 - 2) x2`, `r2 = -29 + x1 + ((x2 + 1) x2 - 14) x2`.
/// Start `(0.5, -2)`. Minimum 0 at `(5, 4)`; local minimum 48.98425... at
/// `((53 - 4 sqrt 22) / 3, (2 - sqrt 22) / 3)`.
pub fn freudenstein_roth() -> Problem {
    problem(2, "Freudenstein and Roth", 2, residuals, [0.5, -2.0])
        .strict(0.0, &[5.0, 4.0])
        .strict(
            48.98425367924002,
            &[11.412778986902094, -0.8968052532744765],
        )
}

pub(super) fn listed() -> Vec<Problem> {
    [freudenstein_roth()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2] = components(x);
    sum.add(-13.0 + x1 + ((5.0 - x2) * x2 - 2.0) * x2, || {
        [1.0, (10.0 - 3.0 * x2) * x2 - 2.0]
    });
    sum.add(-29.0 + x1 + ((x2 + 1.0) * x2 - 14.0) * x2, || {
        [1.0, (3.0 * x2 + 2.0) * x2 - 14.0]
    });
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_local_minimum_of_freudenstein_and_roth_is_its_closed_form() {
        let root = 22f64.sqrt();
        let point = [(53.0 - 4.0 * root) / 3.0, (2.0 - root) / 3.0];
        for (found, wanted) in freudenstein_roth().minima()[1]
            .point()
            .unwrap()
            .iter()
            .zip(point)
        {
            assert!((found - wanted).abs() <= 2.0 * f64::EPSILON * wanted.abs());
        }
    }
}
