//! My line search failed: symptom, diagnosis, what to do.
//!
//! A search that finds no acceptable step says why in its [`Ending`](crate::Ending), with numbers; its `Display` is a
//! sentence. A driver tries its remedies first, then hands the ending over in
//! [`RunEnding::SearchFailed`](crate::RunEnding::SearchFailed); [`Report::remedies`](crate::Report::remedies) says what it
//! tried. The [log](crate::StepSearch::log) has every trial, and [`explain`](crate::StepSearch::explain) each condition with
//! what was found and what the limit was.
//!
//! | ending | what was seen | look at | do |
//! |---|---|---|---|
//! | [`WrongSlope`](crate::Ending::WrongSlope) | differences of values settle on another slope than the one given | the gradient's formula, its sign, a factor, a component that is left out | check it with [`audit`](crate::audit) |
//! | [`Flat`](crate::Ending::Flat) | every value equals the first one | whether the variables reach the objective; a clipped or saturated model | longer first steps; another scaling |
//! | [`MoveBelowRounding`](crate::Ending::MoveBelowRounding) | `x + a d` is `x` | variables of very different size | rescale them, or longer first steps |
//! | [`BelowRounding`](crate::Ending::BelowRounding) | acceptable steps promise less decrease than values resolve | how near the minimum is: `max\|g\|` against its noise | stop here; or [`ApproximateWolfe`](crate::acceptance::ApproximateWolfe); or state the noise ([`Ray::with_value_noise`](crate::Ray::with_value_noise)) |
//! | [`Narrow`](crate::Ending::Narrow) | the bracket shrank to neighbouring numbers | a jump or a kink of the value; a gradient that belongs to another function; rounding | [`WeakWolfe`](crate::acceptance::WeakWolfe) at kinks; the noise estimate of [`audit`](crate::audit) |
//! | [`Endless`](crate::Ending::Endless) | still falling at the largest number | a missing bound or regularisation | add it, or an upper bound on the step |
//! | [`Edge`](crate::Ending::Edge) | falling right up to where the function is undefined | a constraint that the objective does not say | a barrier, other variables, or take the best step |
//! | [`UpperBound`](crate::Ending::UpperBound) | the bound is too short for the rule | whether the bound is meant | take it (drivers do), or raise it |
//! | [`LowerBound`](crate::Ending::LowerBound) | the bound is too long for the rule | sign and scale of the gradient | lower it |
//! | [`BudgetSpent`](crate::Ending::BudgetSpent) | neither side settled | the log: a side that never changes is a scale that is far off | a better first trial; more trials |
//! | [`FinderSpent`](crate::Ending::FinderSpent) | the finder had no more to propose | what the finder is for | another finder |
//! | [`SlopeMissing`](crate::Ending::SlopeMissing) | the rule needs a slope and got none | what the objective can give | give slopes, or a rule that reads values |
//! | [`RuleUndecided`](crate::Ending::RuleUndecided) | a rule asked for a slope that it had | a rule of your own | say `NeedsSlope` only while the slope is unknown |
//!
//! | a run ends with | it means | do |
//! |---|---|---|
//! | [`NotDescent`](crate::RunEnding::NotDescent) | `g . d` is not negative, not even after a reset | check the gradient's sign, and a direction of your own for zero or NaN |
//! | [`AtRounding`](crate::RunEnding::AtRounding) | near rounding, value and gradient improve no more | accept the point, or rescale |
//! | [`Fault`](crate::RunEnding::Fault) | the input was not fit | what it says |
//!
//! # A step profile says more than an ending
//!
//! [`audit::step_profile`](crate::audit::step_profile()) tabulates `phi`, its slope, the slope ratio `phi'(a) / phi'(0)` and every rule's
//! verdict along a ray. On a smooth function the slope ratio begins at 1 and falls smoothly, linearly on a quadratic, to 0 at
//! the minimizer (common practice). A ratio that does not begin at 1 tells of a gradient that does not belong to the value; one
//! that jumps, of a kink; one that stays near 1, of a first step far too short.
//!
//! # What a driver does before it gives up
//!
//! 1. The direction does not descend: it is reset to steepest descent.
//! 2. The search failed, but its best trial is lower by more than rounding: it is taken, and the direction reset.
//! 3. The decrease drowned in rounding: the same direction is searched again with a slack of 4,096 units of rounding, and a
//!    trial that only the slack lets pass must have decreased by its slope (the approximate first Wolfe condition of Hager &
//!    Zhang 2005). The slack stays for the rest of the run, and no value
//!    exceeds the lowest one by more than it.
//! 4. The best trial is lower at all: it is taken.
//! 5. The direction has a memory to give up: it is reset, and the search repeated.
