//! Every error and every ending is a sentence that says what to do; the texts are pinned.

use surefoot::acceptance::{
    ForcingDecreaseError, GeneralisedWolfeError, GoldsteinError, SufficientDecreaseError,
    WolfeError,
};
use surefoot::finder::BacktrackingError;
use surefoot::{BeginError, Ending, LimitsError, RayFault, SearchError, WrongReply};

#[test]
fn every_error_says_what_to_do() {
    let told = |error: &dyn std::error::Error| error.to_string();
    for (said, sentence) in [
        (
            told(&SufficientDecreaseError::Decrease),
            "the decrease parameter must lie strictly between 0 and 1: 1e-4 is usual",
        ),
        (
            told(&GoldsteinError::Share),
            "the Goldstein parameter must lie strictly between 0 and 1/2: 0.25 is usual",
        ),
        (
            told(&WolfeError::Decrease),
            "the decrease parameter must be above 0: 1e-4 is usual",
        ),
        (
            told(&WolfeError::Curvature),
            "the curvature parameter must be below 1: 0.9 is usual with quasi-Newton directions, 0.1 with conjugate gradients",
        ),
        (
            told(&WolfeError::DecreaseAboveCurvature),
            "the decrease parameter must not exceed the curvature parameter, or no step may satisfy both conditions",
        ),
        (
            told(&GeneralisedWolfeError::Decrease),
            "the decrease parameter must be above 0: 1e-4 is usual",
        ),
        (
            told(&GeneralisedWolfeError::Left),
            "the left curvature parameter must be at least the decrease parameter and below 1",
        ),
        (
            told(&GeneralisedWolfeError::Right),
            "the right curvature parameter must not be negative: use infinity for no bound",
        ),
        (
            told(&ForcingDecreaseError::Forcing),
            "the forcing factor must be positive and finite: for any decrease at all use AnyDecrease",
        ),
        (
            told(&BacktrackingError::Ratio),
            "the backtracking ratio must lie strictly between 0 and 1: 0.5 is usual",
        ),
        (
            told(&LimitsError::Lower),
            "the lower bound on the step must be finite and not negative: use 0 for none",
        ),
        (
            told(&LimitsError::Upper),
            "the upper bound on the step must be above 0: use infinity for none",
        ),
        (
            told(&LimitsError::NoStepLeft),
            "the bounds exclude every step: the lower bound must not exceed the upper one",
        ),
        (
            told(&LimitsError::Trials),
            "the budget must allow at least one trial",
        ),
        (
            told(&BeginError::Ray(RayFault::ValueNotFinite)),
            "the value at the start is not finite: begin from a point where the objective is defined",
        ),
        (
            told(&BeginError::Ray(RayFault::SlopeNotFinite)),
            "the slope at the start is not finite: check the gradient and the direction there",
        ),
        (
            told(&BeginError::Ray(RayFault::NotDescent)),
            "the slope at the start is not negative: no step along this direction is a descent; use the negative gradient, or check its sign",
        ),
        (
            told(&RayFault::Reference),
            "the reference is not finite or lies below the value at the start: use a value that an accepted point had",
        ),
        (
            told(&RayFault::Noise),
            "a noise bound or the slack is negative or not finite: use 0 where no noise is known",
        ),
        (
            told(&BeginError::FirstStep),
            "the first step must be positive and finite: 1 is usual for quasi-Newton directions",
        ),
        (
            told(&WrongReply::NothingAsked),
            "nothing is being asked for: begin a search, and supply only while `request` returns a step",
        ),
        (
            told(&WrongReply::ValueAsked),
            "the value is asked for, and a slope alone was supplied: supply the value, or both",
        ),
        (
            told(&WrongReply::SlopeAsked),
            "the slope is asked for, and a value alone was supplied: supply the slope, or say NoSlope",
        ),
        (
            told(&SearchError::Caller(std::fmt::Error)),
            "the function failed at a trial step: an error occurred when formatting an argument",
        ),
        (
            told(&SearchError::<std::fmt::Error>::Begin(
                BeginError::FirstStep,
            )),
            "the first step must be positive and finite: 1 is usual for quasi-Newton directions",
        ),
    ] {
        assert_eq!(said, sentence);
    }
}

#[test]
fn every_ending_says_what_to_look_at() {
    let step = 0.25;
    for (ending, sentence) in [
        (Ending::Accepted, "a step was accepted"),
        (
            Ending::BudgetSpent { trials: 20 },
            "the budget of 20 trials ran out: look at the log for a side that never changes, or allow more",
        ),
        (
            Ending::UpperBound { bound: 50.0 },
            "the upper bound 5.000e1 is still too short for the rule: take it as it is, or raise the bound",
        ),
        (
            Ending::LowerBound { bound: 1e-9 },
            "the lower bound 1.000e-9 is still too long: lower it, or check the sign and scale of the gradient",
        ),
        (
            Ending::Edge {
                inside: 0.5,
                outside: 0.75,
            },
            "the function falls right up to the edge of its domain, between 5.00000000000000000e-1 and 7.50000000000000000e-1: the minimum lies on a constraint that the objective does not say",
        ),
        (
            Ending::Endless { step: 1e300 },
            "the function still falls at step 1.000e300: it seems to be unbounded below along this direction",
        ),
        (
            Ending::Narrow {
                short: 0.5,
                long: 0.75,
            },
            "no acceptable step exists between the neighbouring steps 5.00000000000000000e-1 and 7.50000000000000000e-1: check that the gradient belongs to the value, or whether the decrease drowns in rounding",
        ),
        (
            Ending::Flat {
                value: 3.0,
                slope: -2.0,
                step,
            },
            "every value up to step 2.500e-1 equals the one at the start, 3.000000e0, although the slope there is -2.000e0: the variables may not reach the objective, or the steps may be too short to be felt",
        ),
        (
            Ending::WrongSlope {
                slope: -2.0,
                measured: 0.5,
                step,
            },
            "the slope at the start is said to be -2.000000e0, but the values up to step 2.500e-1 change at 5.000000e-1: check the gradient against differences, or whether the objective is smooth there",
        ),
        (
            Ending::MoveBelowRounding {
                moved: 1e-20,
                point: 7.0,
            },
            "moves up to 1.000e-20 vanish in the rounding of a point of size 7.000e0: rescale the variables, or take longer first steps",
        ),
        (
            Ending::BelowRounding {
                promised: 1e-20,
                resolved: 1e-16,
            },
            "acceptable steps promise a decrease of 1.000e-20, and values resolve only 1.000e-16: this may be the minimum as far as the arithmetic goes; use a rule that goes by slopes, or state the noise",
        ),
        (
            Ending::FinderSpent,
            "the step finder had nothing more to propose: use another, or allow it more",
        ),
        (
            Ending::SlopeMissing { step },
            "the rule needs the slope at step 2.500e-1 and none could be given: give slopes, or use a rule that reads values only",
        ),
        (
            Ending::RuleUndecided { step },
            "the rule asked for the slope at step 2.500e-1 although it had it: NeedsSlope may be said only while the slope is unknown",
        ),
    ] {
        assert_eq!(ending.to_string(), sentence);
    }
}
