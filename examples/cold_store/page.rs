//! The page that a person reads.

use crate::contest::{Account, Agreement, COMMON_FINDER, COMMON_RULE, TOLERANCE};
use crate::fit::{AIR_TOLERANCE, BEND, PRODUCT_TOLERANCE};
use crate::model::{PRICE_OF_GRADIENT, TABLE};
use crate::residuals::{Sensor, remarks};
use crate::study::Study;
use std::fmt;
use surefoot::Relation;

/// The line that stands under every set of estimates.
const CAUTION: &str = "Caution: an estimate is no food-safety or refrigeration-safety release; local codes and licensed practice decide.";

const WIDTH: usize = 110;

impl fmt::Display for Study {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.head(f)?;
        writeln!(
            f,
            "\n1  What each acceptance rule cost (finder: {COMMON_FINDER})\n"
        )?;
        costs(f, "rule", &self.rules, &self.agreement_of_rules)?;
        writeln!(f, "\n2  Why trials were refused\n")?;
        reasons(f, &self.rules)?;
        writeln!(f, "\n3  What each finder cost (rule: {COMMON_RULE})\n")?;
        costs(f, "finder", &self.finders, &self.agreement_of_finders)?;
        writeln!(f, "\n4  Estimates, with approximate standard errors\n")?;
        self.table_of_estimates(f)?;
        writeln!(f, "\n   {CAUTION}")?;
        writeln!(f, "\n5  Residuals: measured minus modelled\n")?;
        residuals(f, &self.sensors)?;
        writeln!(f, "\n6  What the residuals say\n")?;
        let remarks = remarks(&self.sensors);
        if remarks.is_empty() {
            paragraph(f, "Nothing in them speaks against the model.")?;
        }
        remarks.iter().try_for_each(|remark| item(f, remark))
    }
}

impl Study {
    fn head(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (first, last) = match &self.rows[..] {
            [first, .., last] => (first.minute, last.minute),
            _ => (f64::NAN, f64::NAN),
        };
        writeln!(
            f,
            "A cold store after a defrost: two heat stores fitted to its temperatures\n"
        )?;
        writeln!(f, "   readings  {}", self.source)?;
        writeln!(
            f,
            "             {} rows, minute {first} to {last}",
            self.rows.len()
        )?;
        writeln!(
            f,
            "   loss      mean pseudo-Huber of residuals in tolerances ({AIR_TOLERANCE} K air, {PRODUCT_TOLERANCE} K product), bend at {BEND}"
        )?;
        writeln!(
            f,
            "   method    L-BFGS from a loss of {:.4}, until max|g| <= {TOLERANCE:e}",
            self.start_loss
        )
    }

    fn table_of_estimates(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let e = &self.estimates;
        writeln!(
            f,
            "   {:32}{:>10}{:>12}{:>12}  unit   as a time constant",
            "parameter", "start", "estimate", "error"
        )?;
        for (i, entry) in TABLE.iter().enumerate() {
            let error = e.errors[i].map_or("not fixed".to_owned(), |error| format!("{error:.4}"));
            let constant = match entry.unit {
                "1/h" if e.parameters[i] > 1.0 => format!("{:.1} min", 60.0 / e.parameters[i]),
                "1/h" => format!("{:.2} h", 1.0 / e.parameters[i]),
                _ => String::new(),
            };
            let line = format!(
                "   {:32}{:10.3}{:12.4}{error:>12}  {:7}{constant}",
                entry.name, e.start[i], e.parameters[i], entry.unit
            );
            writeln!(f, "{}", line.trim_end())?;
        }
        if e.errors.iter().any(Option::is_none) {
            writeln!(f)?;
            paragraph(
                f,
                "Not fixed: these readings do not determine the parameter (or, if all are so marked, not all of them at once). Log a \
                 stretch in which plant and heater go on and off.",
            )?;
        }
        match e.entangled {
            Some((i, j, r)) if r.abs() > 0.95 => {
                writeln!(f)?;
                let (a, b) = (TABLE[i].name, TABLE[j].name);
                paragraph(
                    f,
                    &format!(
                        "The errors of `{a}` and `{b}` go together (correlation {r:.3}): what the readings fix is a combination of the two."
                    ),
                )
            }
            _ => Ok(()),
        }
    }
}

/// One row a run, then what is to be said about them.
fn costs(
    f: &mut fmt::Formatter<'_>,
    what: &str,
    accounts: &[Account],
    agreement: &Agreement,
) -> fmt::Result {
    writeln!(
        f,
        "   {:22}{:>6}{:>9}{:>8}{:>11}{:>6} |{:>9}{:>7}{:>11} |{:>13}{:>8}",
        what,
        "moves",
        "at once",
        "values",
        "gradients",
        "work",
        "too long",
        "short",
        "undefined",
        "final loss",
        "max|g|"
    )?;
    for a in accounts {
        let (r, e) = (&a.report, &a.report.evaluations);
        let slope = r
            .gradient_max
            .map_or("unknown".to_owned(), |g| format!("{g:.0e}"));
        writeln!(
            f,
            "   {:22}{:6}{:9}{:8}{:11}{:6} |{:9}{:7}{:11} |{:13.9}{slope:>8}",
            a.label,
            r.iterations,
            a.at_once,
            e.all_values(),
            e.all_gradients(),
            a.work(),
            r.refusals.too_long,
            r.refusals.too_short,
            r.refusals.outside,
            r.value,
        )?;
    }
    writeln!(f)?;
    paragraph(
        f,
        &format!(
            "at once: moves whose first trial was taken. work: runs of the model; a gradient brings its value along and costs \
             {PRICE_OF_GRADIENT}. too long, short, undefined: refused trials."
        ),
    )?;
    for a in accounts.iter().filter(|a| !a.report.converged()) {
        let ending = &a.report.ending;
        item(f, &format!("{} did not converge: {ending}", a.label))?;
    }
    for a in accounts.iter().filter(|a| a.useless_pairs > 0) {
        let (pairs, moves) = (a.useless_pairs, a.report.iterations);
        let text = format!(
            "{}: L-BFGS learnt nothing from {pairs} of {moves} moves, along which the slope did not rise",
            a.label
        );
        item(f, &text)?;
    }
    paragraph(f, &format!("{} {}", extremes(accounts), agreed(agreement)))
}

fn extremes(accounts: &[Account]) -> String {
    let converged = || accounts.iter().filter(|a| a.report.converged());
    let least = converged().min_by_key(|a| a.work());
    let most = converged().max_by_key(|a| a.work());
    match (least, most) {
        (Some(least), Some(most)) => format!(
            "Least work to the minimum: {} ({}), most: {} ({}).",
            least.label,
            least.work(),
            most.label,
            most.work()
        ),
        _ => "None converged.".to_owned(),
    }
}

fn agreed(
    Agreement {
        apart,
        loss,
        estimate,
    }: &Agreement,
) -> String {
    if apart.is_empty() {
        format!(
            "All reached the same minimum: final losses agree to {loss:.0e} of the lowest, estimates to {estimate:.0e} of their standard \
             errors."
        )
    } else {
        format!(
            "NOT all reached the same minimum. Above the lowest loss ended: {}. The estimates below are those of the lowest loss; \
             compare them with a fit to other readings before use.",
            apart.join(", ")
        )
    }
}

fn reasons(f: &mut fmt::Formatter<'_>, accounts: &[Account]) -> fmt::Result {
    writeln!(
        f,
        "   {:22}{:25}{:>8}   the first of them",
        "rule", "condition that failed", "trials"
    )?;
    for a in accounts {
        if a.reasons.is_empty() {
            writeln!(f, "   {:22}no trial was refused", a.label)?;
        }
        for (i, reason) in a.reasons.iter().enumerate() {
            let label = if i == 0 { a.label } else { "" };
            let e = &reason.example;
            write!(
                f,
                "   {label:22}{:25}{:8}   move {}, trial {}, step {:.2e}: ",
                reason.name, reason.count, e.moves, e.trial, e.step
            )?;
            match e.condition {
                Some(c) => {
                    let asked = match c.relation {
                        Relation::AtMost => "at most",
                        Relation::AtLeast => "at least",
                    };
                    writeln!(f, "{:.4e}, limit {asked} {:.4e}", c.found, c.limit)?;
                }
                None => writeln!(f, "the model ran out of numbers")?,
            }
        }
        let lost = a.lost();
        if lost > 0 {
            writeln!(
                f,
                "   {:22}(and {lost} at the end of searches that failed)",
                ""
            )?;
        }
    }
    writeln!(f)?;
    paragraph(
        f,
        "The numbers are losses for `sufficient decrease` and `not too short`, slopes along the search otherwise. A trial may fail two conditions.",
    )
}

fn residuals(f: &mut fmt::Formatter<'_>, sensors: &[Sensor]) -> fmt::Result {
    let mut line = |what: &str, cell: &dyn Fn(&Sensor) -> String| -> fmt::Result {
        write!(f, "   {what:44}")?;
        sensors
            .iter()
            .try_for_each(|s| write!(f, "{:>28}", cell(s)))?;
        writeln!(f)
    };
    line("", &|s| s.name.to_owned())?;
    line("readings used", &|s| s.used.to_string())?;
    line("empty cells", &|s| s.empty.to_string())?;
    line("tolerance, K", &|s| format!("{:.3}", s.tolerance))?;
    line("robust scale, K", &|s| format!("{:.3}", s.scale))?;
    line("readings at less than half weight", &|s| {
        s.held_down.to_string()
    })?;
    line("of these wild, 6 scales or tolerances off", &|s| {
        s.wild.to_string()
    })?;
    line("correlation of neighbours (lag 1)", &|s| {
        decimals(s.lag_one)
    })?;
    line("trend, K/h", &|s| {
        format!("{:+.3} +- {:.3}", s.trend, s.trend_error)
    })?;
    line("median by quarter of the record, K", &|s| {
        let shown = s
            .quarters
            .map(|q| q.map_or("none".to_owned(), |q| format!("{q:+.2}")));
        shown.join(" ")
    })?;
    line("largest, K", &|s| {
        format!("{:+.2} at minute {}", s.largest.kelvin, s.largest.minute)
    })?;
    line("", &|s| format!("(line {})", s.largest.line))
}

/// Two decimals, or `none` where there was nothing to compute it from.
fn decimals(x: f64) -> String {
    if x.is_nan() {
        "none".to_owned()
    } else {
        format!("{x:.2}")
    }
}

fn paragraph(f: &mut fmt::Formatter<'_>, text: &str) -> fmt::Result {
    wrapped(f, "   ", text)
}

fn item(f: &mut fmt::Formatter<'_>, text: &str) -> fmt::Result {
    wrapped(f, "   - ", text)
}

/// Text in lines of at most [`WIDTH`] characters; lines after the first are indented as far as it.
fn wrapped(f: &mut fmt::Formatter<'_>, lead: &str, text: &str) -> fmt::Result {
    let mut line = lead.to_owned();
    for word in text.split_whitespace() {
        if line.chars().count() + word.chars().count() > WIDTH {
            writeln!(f, "{}", line.trim_end())?;
            line = " ".repeat(lead.len());
        }
        line.push_str(word);
        line.push(' ');
    }
    writeln!(f, "{}", line.trim_end())
}
