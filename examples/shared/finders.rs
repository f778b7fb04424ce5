//! Every step finder of the crate, each under the name of its row or column.

use surefoot::BoxedFinder;
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, BrentSlopes, BrentValues, Expansion, GoldenSection,
    HagerZhang, InterpolatingBacktracking, MoreThuente, ThreePoint,
};

pub(crate) fn finders() -> Vec<(&'static str, BoxedFinder<f64>)> {
    vec![
        ("three_point", Box::new(ThreePoint::new())),
        ("more_thuente", Box::new(MoreThuente::new())),
        ("bracket_zoom", Box::new(BracketZoom::new())),
        ("hager_zhang", Box::new(HagerZhang::new())),
        ("bisection", Box::new(Bisection::new())),
        ("backtracking", Box::new(Backtracking::default())),
        (
            "interpolating_backtracking",
            Box::new(InterpolatingBacktracking::new()),
        ),
        ("expansion", Box::new(Expansion::default())),
        ("brent_slopes", Box::new(BrentSlopes::default())),
        ("brent_values", Box::new(BrentValues::default())),
        ("golden_section", Box::new(GoldenSection::default())),
    ]
}
