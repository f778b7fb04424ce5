//! What the records say: who solved what at which cost, and how sure that is.
//!
//! | question | answer |
//! |---|---|
//! | who is cheapest, and who solves most? | [`performance_profile`] |
//! | what is solved within a budget? | [`data_profile`] |
//! | is one better than the other, or was it luck? | [`head_to_head()`], [`sign_test()`] |
//! | why were trials refused? | [`effort()`] |
//! | which thresholds of the rule? | [`sweep()`] |
//! | whom to take? | [`recommend`] |
//!
//! Everything starts from a [`CostTable`]: what each contender paid on each instance, or that it did not solve it. Nothing
//! here runs or reads anything; the work grows as `rows x log rows`, and for the head-to-head tables with the number of pairs
//! of contenders times that of instances.

mod effort;
mod head_to_head;
mod profile;
mod recommendation;
mod score;
mod sign_test;
mod sweep;
mod table;

pub use effort::{Effort, effort};
pub use head_to_head::{HeadToHead, all_pairs, head_to_head};
pub use profile::{Profile, ProfileKind, data_profile, performance_profile};
pub use recommendation::{FEW_PROBLEMS, MANY_FAILURES, Recommendation, SIGNIFICANT, recommend};
pub use score::{CAP, Score, scores};
pub use sign_test::sign_test;
pub use sweep::{Cell, Sweep, SweepError, Thresholds, sweep};
pub use table::{AnalysisError, CostTable, Instance, Measure, Solved};
