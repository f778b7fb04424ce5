//! The searches of runs with a trial log, each a picture and a table.

use super::figures::figure;
use crate::experiment::{LoggedTrial, Record, SearchTrials, TrialLog, TrialVerdict};
use crate::plot::{Scale, StepPicture, escaped, short};
use crate::search::{Entry, Fate, Origin};
use crate::{Ray, Side, Trial};
use std::collections::HashMap;
use std::fmt::Write;
use std::format;
use std::string::String;
use std::vec::Vec;

/// What is drawn.
pub(super) struct Drawn {
    /// Numbers of the records that have searches.
    pub(super) runs: Vec<usize>,
    /// The searches as inert templates, which the script shows on demand.
    pub(super) html: String,
}

/// Searches of one run that are drawn.
const MOST_SEARCHES: usize = 40;
/// No further search is drawn once the text is as long as this.
const MOST_BYTES: usize = 6_000_000;

pub(super) fn templates(records: &[Record], logs: &[TrialLog]) -> Drawn {
    let mut drawn = Drawn {
        runs: Vec::new(),
        html: String::new(),
    };
    if logs.is_empty() {
        return drawn;
    }
    let by_key: HashMap<_, usize> = records
        .iter()
        .enumerate()
        .map(|(number, r)| {
            (
                (
                    r.problem.as_str(),
                    r.n,
                    r.contender.as_str(),
                    r.start,
                    r.repetition,
                ),
                number,
            )
        })
        .collect();
    for log in logs {
        let key = (
            log.problem.as_str(),
            log.n,
            log.contender.as_str(),
            log.start,
            log.repetition,
        );
        let Some(&number) = by_key.get(&key) else {
            continue;
        };
        if drawn.html.len() > MOST_BYTES || drawn.runs.contains(&number) {
            continue;
        }
        drawn.runs.push(number);
        run(&mut drawn.html, number, log);
    }
    drawn
}

fn run(out: &mut String, number: usize, log: &TrialLog) {
    let all = log.searches.len();
    for (at, search) in log.searches.iter().enumerate().take(MOST_SEARCHES) {
        if out.len() > MOST_BYTES {
            break;
        }
        let _ = writeln!(
            out,
            "<template data-run=\"{number}\" data-all=\"{all}\" data-trials=\"{}\">",
            search.trials.len()
        );
        let ray = Ray::new(search.value, search.slope);
        let entries: Vec<Entry<f64>> = (1..)
            .zip(&search.trials)
            .map(|(i, trial)| entry(i, trial))
            .collect();
        let steps = || search.trials.iter().map(|t| t.step).filter(|a| *a > 0.0);
        let (least, most) =
            steps().fold((f64::INFINITY, 0.0_f64), |(l, h), a| (l.min(a), h.max(a)));
        let scale = if most > 30.0 * least {
            Scale::Logarithmic
        } else {
            Scale::Linear
        };
        let title = format!("Search {} of {all}", at + 1);
        let picture = StepPicture::new(&title, &ray)
            .with_trials(&entries)
            .with_scale(scale)
            .picture();
        if let Ok(picture) = picture {
            let caption =
                "Trials at their values. Short strokes show slopes, where they were asked for.";
            figure(out, &picture, caption);
        }
        table(out, search);
        out.push_str("</template>\n");
    }
}

fn table(out: &mut String, search: &SearchTrials) {
    let _ = writeln!(
        out,
        "<div class=\"wide\" role=\"group\" tabindex=\"0\" aria-label=\"Trials of the search\"><table><caption>Trials from \u{3c6}(0) = {}, \u{3c6}\u{2032}(0) = {}</caption>\
         <thead><tr><th scope=\"col\" class=\"num\">trial</th><th scope=\"col\" class=\"num\">step</th><th scope=\"col\" class=\"num\">value</th>\
         <th scope=\"col\" class=\"num\">slope</th><th scope=\"col\">verdict</th></tr></thead><tbody>",
        short(search.value),
        short(search.slope)
    );
    for (number, trial) in (1..).zip(&search.trials) {
        let slope = trial.slope.map_or("\u{2013}".into(), short);
        let _ = writeln!(
            out,
            "<tr><th scope=\"row\" class=\"num\">{number}</th><td class=\"num\">{}</td><td class=\"num\">{}</td><td class=\"num\">{slope}</td><td>{}</td></tr>",
            short(trial.step),
            short(trial.value),
            escaped(word(trial.verdict))
        );
    }
    out.push_str("</tbody></table></div>\n");
}

fn entry(number: u32, logged: &LoggedTrial) -> Entry<f64> {
    Entry {
        number,
        trial: Trial {
            step: logged.step,
            value: logged.value,
            slope: logged.slope,
        },
        // Who proposed it was not logged, and is not drawn.
        origin: Origin::Finder,
        fate: match logged.verdict {
            TrialVerdict::Accepted => Fate::Accepted,
            TrialVerdict::TooLong => Fate::Refused(Side::TooLong),
            TrialVerdict::TooShort => Fate::Refused(Side::TooShort),
            TrialVerdict::Outside => Fate::Outside,
            TrialVerdict::Undecided => Fate::Undecided,
        },
    }
}

fn word(verdict: TrialVerdict) -> &'static str {
    match verdict {
        TrialVerdict::Accepted => "accepted",
        TrialVerdict::TooLong => "too long",
        TrialVerdict::TooShort => "too short",
        TrialVerdict::Outside => "outside of the domain",
        TrialVerdict::Undecided => "undecided",
    }
}
