//! What each rule says of itself, its limits worked by hand, and its verdicts exactly on them.
//!
//! All numbers are sums of few powers of two, so that the formulas on the pages of the rules hold to the last bit.
#![cfg(feature = "alloc")]

use surefoot::acceptance::{
    AnyDecrease, AnyFinite, ApproximateWolfe, ForcingDecrease, GeneralisedWolfe, Goldstein,
    StrongWolfe, SufficientDecrease, WeakWolfe, both, rule, value_rule,
};
use surefoot::{Acceptance, BoxedRule, Condition, Ray, Side, Trial, Verdict};

const TOO_LONG: Verdict = Verdict::Refuse(Side::TooLong);
const TOO_SHORT: Verdict = Verdict::Refuse(Side::TooShort);

/// A ray on which no two terms of a limit are alike: `phi(0) = 8`, `phi'(0) = -4`, measured from 16, noise 1/4.
fn ray() -> Ray<f64> {
    Ray::new(8.0, -4.0)
        .with_reference(16.0)
        .with_value_noise(0.25)
}

/// The step at which limits are worked out.
const STEP: f64 = 2.0;

/// A rule and what its page says of it.
struct Said {
    name: &'static str,
    rule: BoxedRule<f64>,
    uses_slope: bool,
    uses_start_slope: bool,
    reads_slack: bool,
    decrease: Option<f64>,
    /// The ceiling at [`STEP`] on [`ray`].
    ceiling: Option<f64>,
}

/// `phi(ref) + c1 a phi'(0) + 2 noise` with `c1 = 1/4`: 16 - 1/4 2 4 + 1/2.
const LINE: f64 = 14.5;

fn rules() -> Vec<Said> {
    let said = |name, rule: BoxedRule<f64>, reads: [bool; 3], decrease, ceiling| Said {
        name,
        rule,
        uses_slope: reads[0],
        uses_start_slope: reads[1],
        reads_slack: reads[2],
        decrease,
        ceiling,
    };
    let quarter = Some(0.25);
    let wolfe = [true, true, false];
    let by_values = [false, true, false];
    let without_start = [false, false, false];
    let line = Some(LINE);
    let armijo = SufficientDecrease::new(0.25).unwrap();
    let goldstein = Goldstein::new(0.25).unwrap();
    let weak = WeakWolfe::new(0.25, 0.5).unwrap();
    let strong = StrongWolfe::new(0.25, 0.5).unwrap();
    let generalised = GeneralisedWolfe::new(0.25, 0.5, 2.0).unwrap();
    let approximate = ApproximateWolfe::new(0.25, 0.5).unwrap();
    let forcing = ForcingDecrease::new(0.75).unwrap();
    let closure = |_: &Ray<f64>, _: &Trial<f64>| Verdict::Accept;
    vec![
        said("Armijo", Box::new(armijo), by_values, quarter, line),
        said("Goldstein", Box::new(goldstein), by_values, quarter, line),
        said("weak Wolfe", Box::new(weak), wolfe, quarter, line),
        said("strong Wolfe", Box::new(strong), wolfe, quarter, line),
        said("generalised", Box::new(generalised), wolfe, quarter, line),
        said(
            "approximate",
            Box::new(approximate),
            [true, true, true],
            quarter,
            line,
        ),
        // 16 - 3/4 2^2 + 1/2
        said(
            "forcing",
            Box::new(forcing),
            without_start,
            None,
            Some(13.5),
        ),
        // 16 + 1/2
        said(
            "any decrease",
            Box::new(AnyDecrease),
            without_start,
            None,
            Some(16.5),
        ),
        said("any finite", Box::new(AnyFinite), without_start, None, None),
        said("closure", Box::new(rule(closure)), wolfe, None, None),
        said(
            "value closure",
            Box::new(value_rule(closure)),
            by_values,
            None,
            None,
        ),
    ]
}

fn trial(value: f64, slope: Option<f64>) -> Trial<f64> {
    Trial {
        step: STEP,
        value,
        slope,
    }
}

fn conditions(
    rule: &dyn Acceptance<f64>,
    ray: &Ray<f64>,
    trial: &Trial<f64>,
) -> Vec<Condition<f64>> {
    let mut all = Vec::new();
    rule.explain(ray, trial, &mut |condition| all.push(condition));
    all
}

#[test]
fn each_rule_says_what_it_reads_and_which_decrease_it_asks_for() {
    for said in rules() {
        let (name, rule) = (said.name, &said.rule);
        assert_eq!(rule.uses_slope(), said.uses_slope, "{name}");
        assert_eq!(rule.uses_start_slope(), said.uses_start_slope, "{name}");
        assert_eq!(rule.reads_slack(), said.reads_slack, "{name}");
        assert_eq!(rule.decrease(), said.decrease, "{name}");
    }
}

#[test]
fn each_ceiling_is_the_limit_worked_by_hand() {
    for said in rules() {
        assert_eq!(
            said.rule.ceiling(&ray(), STEP),
            said.ceiling,
            "{}",
            said.name
        );
    }
    // A slack of 3 raises it to 16 + 3 + 1/2 for the rule that reads it, and for no other.
    for said in rules() {
        let expected = if said.reads_slack {
            Some(19.5)
        } else {
            said.ceiling
        };
        let found = said.rule.ceiling(&ray().with_slack(3.0), STEP);
        assert_eq!(found, expected, "{}", said.name);
    }
}

/// `explain` names a limit on the value for each rule that has a ceiling; it is the ceiling, and the verdict turns there.
#[test]
fn a_value_is_refused_just_above_the_ceiling_and_not_on_it() {
    for said in rules() {
        let (name, rule) = (said.name, &said.rule);
        let Some(ceiling) = said.ceiling else {
            continue;
        };
        for slope in [None, Some(-100.0), Some(0.0), Some(100.0)] {
            let above = trial(ceiling.next_up(), slope);
            assert_eq!(rule.judge(&ray(), &above), TOO_LONG, "{name}");
            let on = rule.judge(&ray(), &trial(ceiling, slope));
            let expected = match (name, slope) {
                ("any decrease", _) => TOO_LONG, // the only strict one
                // The lower line lies at 16 - 3/4 2 4 = 10.
                ("Armijo" | "Goldstein" | "forcing", _) => Verdict::Accept,
                (_, None) => Verdict::NeedsSlope,
                (_, Some(slope)) if slope < -2.0 => TOO_SHORT,
                ("strong Wolfe" | "generalised", Some(100.0)) => TOO_LONG,
                _ => Verdict::Accept,
            };
            assert_eq!(on, expected, "{name} at slope {slope:?}");
        }
        let below = conditions(rule.as_ref(), &ray(), &trial(ceiling.next_down(), None));
        let above = conditions(rule.as_ref(), &ray(), &trial(ceiling.next_up(), None));
        let on = conditions(rule.as_ref(), &ray(), &trial(ceiling, None));
        assert_eq!(on[0].holds, name != "any decrease", "{name}");
        assert_eq!(below[0].limit, ceiling, "{name}");
        assert!(below[0].holds && !above[0].holds, "{name}");
    }
}

/// The limits on the slope, `c2 phi'(0) = -2` and what stands opposite, are themselves accepted.
#[test]
fn a_slope_on_its_limit_is_accepted_and_one_beyond_it_is_not() {
    let low = 0.0; // far below every limit on the value
    let refused_left = (-2.0_f64).next_down();
    for said in rules() {
        let (name, rule) = (said.name, &said.rule);
        let judge = |slope: f64| rule.judge(&ray(), &trial(low, Some(slope)));
        let right = match name {
            "weak Wolfe" | "approximate" => None,
            "strong Wolfe" => Some(2.0),
            "generalised" => Some(8.0),
            _ => continue,
        };
        assert_eq!(judge(-2.0), Verdict::Accept, "{name}");
        assert_eq!(judge(refused_left), TOO_SHORT, "{name}");
        if let Some(right) = right {
            assert_eq!(judge(right), Verdict::Accept, "{name}");
            assert_eq!(judge(right.next_up()), TOO_LONG, "{name}");
        } else {
            assert_eq!(judge(1e300), Verdict::Accept, "{name}");
        }
    }
}

/// Goldstein's lower line, `16 + 3/4 2 (-4) = 10`, without the noise.
#[test]
fn goldstein_accepts_its_lower_line_and_nothing_below() {
    let rule = Goldstein::new(0.25).unwrap();
    assert_eq!(rule.judge(&ray(), &trial(10.0, None)), Verdict::Accept);
    let below = trial(10.0_f64.next_down(), None);
    assert_eq!(rule.judge(&ray(), &below), TOO_SHORT);
}

/// With a slack of 3 the approximate rule takes values up to 19.5 where `-2 <= phi'(a) <= (2 c1 - 1) phi'(0) = 2`.
#[test]
fn the_approximate_rule_turns_exactly_on_its_limits() {
    let (rule, ray) = (
        ApproximateWolfe::new(0.25, 0.5).unwrap(),
        ray().with_slack(3.0),
    );
    let judge = |value, slope| rule.judge(&ray, &trial(value, slope));
    assert_eq!(judge(19.5, None), Verdict::NeedsSlope);
    assert_eq!(judge(19.5_f64.next_up(), None), TOO_LONG);
    for value in [19.5, LINE.next_up()] {
        assert_eq!(judge(value, Some(-2.0)), Verdict::Accept);
        assert_eq!(judge(value, Some((-2.0_f64).next_down())), TOO_SHORT);
        assert_eq!(judge(value, Some(2.0)), Verdict::Accept);
        assert_eq!(judge(value, Some(2.0_f64.next_up())), TOO_LONG);
    }
    // With sufficient decrease the weak rule is enough.
    assert_eq!(judge(LINE, Some(2.0_f64.next_up())), Verdict::Accept);
    let names: Vec<_> = conditions(&rule, &ray, &trial(15.0, Some(0.0)))
        .iter()
        .map(|c| (c.name, c.limit, c.holds))
        .collect();
    let expected = [
        ("sufficient decrease", LINE, false),
        ("within slack", 19.5, true),
        ("curvature", -2.0, true),
        ("decrease by slope", 2.0, true),
    ];
    assert_eq!(names, expected);
}

#[test]
fn two_rules_read_what_either_reads_and_ask_for_the_larger_decrease() {
    for a in rules() {
        for b in rules() {
            let name = format!("{} and {}", a.name, b.name);
            let pair = both(&a.rule, &b.rule);
            assert_eq!(pair.uses_slope(), a.uses_slope || b.uses_slope, "{name}");
            assert_eq!(
                pair.uses_start_slope(),
                a.uses_start_slope || b.uses_start_slope,
                "{name}"
            );
            assert_eq!(pair.reads_slack(), a.reads_slack || b.reads_slack, "{name}");
            assert_eq!(pair.decrease(), a.decrease.or(b.decrease), "{name}");
            let ceilings = [a.ceiling, b.ceiling].into_iter().flatten();
            let least = ceilings.reduce(f64::min);
            assert_eq!(pair.ceiling(&ray(), STEP), least, "{name}");
            let here = trial(12.0, Some(1.0));
            let mut told = conditions(&a.rule, &ray(), &here);
            told.extend(conditions(&b.rule, &ray(), &here));
            assert_eq!(conditions(&pair, &ray(), &here), told, "{name}");
        }
    }
    let (mild, strict) = (SufficientDecrease::new(0.25), SufficientDecrease::new(0.5));
    let (mild, strict) = (mild.unwrap(), strict.unwrap());
    assert_eq!(both(mild, strict).decrease(), Some(0.5));
    assert_eq!(both(strict, mild).decrease(), Some(0.5));
}

/// Every pair of answers, and what they come to: too long wins, a missing slope goes before too short.
#[test]
fn two_rules_agree_as_told() {
    use Verdict::{Accept, NeedsSlope};
    let answers = [Accept, NeedsSlope, TOO_SHORT, TOO_LONG];
    let expected = [
        [Accept, NeedsSlope, TOO_SHORT, TOO_LONG],
        [NeedsSlope, NeedsSlope, NeedsSlope, TOO_LONG],
        [TOO_SHORT, NeedsSlope, TOO_SHORT, TOO_LONG],
        [TOO_LONG; 4],
    ];
    for (a, line) in answers.into_iter().zip(expected) {
        for (b, expected) in answers.into_iter().zip(line) {
            let says = |verdict| rule(move |_: &Ray<f64>, _: &Trial<f64>| verdict);
            let pair = both(says(a), says(b));
            assert_eq!(
                pair.judge(&ray(), &trial(0.0, None)),
                expected,
                "{a:?} and {b:?}"
            );
        }
    }
}

/// A rule of the user's own that says no more than it must.
struct Bare;

impl Acceptance<f64> for Bare {
    fn judge(&self, _: &Ray<f64>, _: &Trial<f64>) -> Verdict {
        Verdict::Accept
    }
    fn uses_slope(&self) -> bool {
        false
    }
}

#[test]
fn a_rule_that_says_no_more_than_it_must_reads_the_start_and_promises_nothing() {
    assert!(Bare.uses_start_slope());
    assert!(!Bare.reads_slack());
    assert_eq!(Bare.decrease(), None);
    assert_eq!(Bare.ceiling(&ray(), STEP), None);
    assert_eq!(conditions(&Bare, &ray(), &trial(0.0, None)), []);
}
