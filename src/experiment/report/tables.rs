//! The aggregates, as tables.

use super::page::{counted, grouped};
use crate::experiment::analysis::{CostTable, Score, effort, head_to_head, scores};
use crate::experiment::{Ending, Record};
use crate::plot::{escaped, short};
use std::collections::HashMap;
use std::fmt::Write;
use std::format;
use std::string::String;
use std::vec::Vec;

/// Rows of a table of contenders.
const MOST_CONTENDERS: usize = 500;
/// Contenders side by side.
const MOST_COLUMNS: usize = 12;
/// Rows of the table of problems.
const MOST_PROBLEMS: usize = 1000;

/// One row a contender, best first.
pub(super) fn contenders(out: &mut String, records: &[Record], tables: &[CostTable]) {
    let mut table = Table::new(
        "contenders",
        "Contenders",
        "Each contender over all its runs",
    );
    table.column("contender", false);
    table.column("solved", true);
    table.column("cheapest on", true);
    for of_measure in tables {
        table.column(&format!("cost ({})", of_measure.measure().name()), true);
    }
    for name in ["calls a move", "too long", "too short", "outside", "runs"] {
        table.column(name, true);
    }
    let all: Vec<Vec<Score>> = tables.iter().map(scores).collect();
    let efforts = effort(records);
    for contender in order(&all[0]).into_iter().take(MOST_CONTENDERS) {
        let name = &tables[0].contenders()[contender];
        let score = all[0][contender];
        table.row();
        table.head(name);
        table.number(score.solved as f64, &grouped(score.solved));
        table.number(score.cheapest as f64, &grouped(score.cheapest));
        for of_measure in &all {
            let ratio = of_measure[contender].ratio;
            table.number(ratio, &format!("{ratio:.2}"));
        }
        let Some(effort) = efforts.iter().find(|effort| effort.contender == *name) else {
            continue;
        };
        let a_move = effort.evaluations_per_iteration();
        table.maybe(a_move, |x| format!("{x:.2}"));
        for share in [
            effort.share_too_long(),
            effort.share_too_short(),
            effort.share_outside(),
        ] {
            table.maybe(share, |x| format!("{:.1}\u{a0}%", 100.0 * x));
        }
        table.number(effort.runs as f64, &grouped(effort.runs as usize));
    }
    let width = tables[0].contenders().len();
    let note = format!(
        "Of {}. Cost: geometric mean of the multiples of the cheapest contender on each instance, 1.00 being always the cheapest; multiples \
         above 10, and unsolved instances, count as 10. Too long, too short, outside: shares of all trials refused for that reason.{}",
        counted(tables[0].instances().len(), "instance"),
        left_out(width, MOST_CONTENDERS, "contender")
    );
    table.finish(out, &note);
}

/// Wins and losses of the best, each against each.
pub(super) fn pairs(out: &mut String, costs: &CostTable) {
    let order: Vec<usize> = order(&scores(costs))
        .into_iter()
        .take(MOST_COLUMNS)
        .collect();
    let mut table = Table::new(
        "pairs",
        "Head to head",
        "Problems won and lost, row against column, and the sign test",
    );
    table.column("won\u{2013}lost against", false);
    for &column in &order {
        table.column(&costs.contenders()[column], false);
    }
    for &row in &order {
        table.row();
        table.head(&costs.contenders()[row]);
        for &column in &order {
            match head_to_head(costs, row, column).filter(|_| row != column) {
                Some(game) => {
                    // By weight and word, since a tint alone would not do.
                    let clear = game.p <= 0.05;
                    let class = if clear { " class=\"clear\"" } else { "" };
                    let p = if game.p < 0.001 {
                        format!("{:.0e}", game.p)
                    } else {
                        format!("{:.3}", game.p)
                    };
                    let _ = write!(
                        table.body,
                        "<td{class}>{}\u{2013}{} <span class=\"muted\">p\u{a0}{p}</span></td>",
                        game.wins, game.losses
                    );
                }
                None => table.body.push_str("<td aria-label=\"itself\">\u{b7}</td>"),
            }
        }
    }
    let note = format!(
        "A game is a problem: it is won by whoever paid fewer {} from more of its starts. p: exact two-sided sign test; in bold where it is \
         0.05 or less. With many pairs some fall below by chance; the recommendation corrects for that.{}",
        costs.measure().name(),
        left_out(costs.contenders().len(), MOST_COLUMNS, "contender")
    );
    table.unsortable().finish(out, &note);
}

/// Median costs, one row an instance.
pub(super) fn problems(out: &mut String, costs: &CostTable) {
    let order: Vec<usize> = order(&scores(costs))
        .into_iter()
        .take(MOST_COLUMNS)
        .collect();
    let mut table = Table::new(
        "problems",
        "Problem by problem",
        &format!("Cost in {} on each instance", costs.measure().name()),
    );
    for (name, numeric) in [("problem", false), ("n", true), ("start", true)] {
        table.column(name, numeric);
    }
    for &column in &order {
        table.column(&costs.contenders()[column], true);
    }
    for (number, instance) in costs.instances().iter().enumerate().take(MOST_PROBLEMS) {
        let cheapest = (0..costs.contenders().len())
            .filter_map(|c| costs.cost(number, c))
            .fold(f64::INFINITY, f64::min);
        table.row();
        table.head(&instance.problem);
        table.number(instance.n as f64, &grouped(instance.n));
        table.number(f64::from(instance.start), &format!("{}", instance.start));
        for &column in &order {
            match costs.cost(number, column) {
                Some(cost) if cost <= cheapest => {
                    let _ = write!(
                        table.body,
                        "<td class=\"num best\" data-v=\"{cost}\">{}<span class=\"mark\"> \u{2605}</span></td>",
                        short(cost)
                    );
                }
                cost => table.maybe(cost, short),
            }
        }
    }
    let note = format!(
        "\u{2605} the cheapest; \u{2013} not solved. Repetitions stand as their median.{}{}",
        left_out(costs.instances().len(), MOST_PROBLEMS, "instance"),
        left_out(costs.contenders().len(), MOST_COLUMNS, "contender")
    );
    table.finish(out, &note);
}

/// How the runs of each contender ended.
pub(super) fn endings(out: &mut String, records: &[Record]) {
    let mut counts: HashMap<&str, HashMap<Ending, usize>> = HashMap::new();
    let mut names: Vec<&str> = Vec::new();
    for record in records {
        let of_contender = counts.entry(&record.contender).or_insert_with(|| {
            names.push(&record.contender);
            HashMap::new()
        });
        *of_contender.entry(record.ending).or_default() += 1;
    }
    let seen: Vec<Ending> = Ending::ALL
        .into_iter()
        .filter(|ending| counts.values().any(|of| of.contains_key(ending)))
        .collect();
    let mut table = Table::new(
        "endings",
        "How the runs ended",
        "Runs of each contender by ending",
    );
    table.column("contender", false);
    for ending in &seen {
        table.column(&format!("{ending}"), true);
    }
    for name in names.iter().take(MOST_CONTENDERS) {
        table.row();
        table.head(name);
        for ending in &seen {
            let count = counts[name].get(ending).copied().unwrap_or(0);
            table.number(count as f64, &grouped(count));
        }
    }
    let note = left_out(names.len(), MOST_CONTENDERS, "contender");
    table.finish(
        out,
        &format!("The sentence of each ending stands with the run.{note}"),
    );
}

/// Contenders from the least ratio up.
fn order(scores: &[Score]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..scores.len()).collect();
    order.sort_by(|&a, &b| {
        scores[a]
            .ratio
            .total_cmp(&scores[b].ratio)
            .then(scores[b].solved.cmp(&scores[a].solved))
    });
    order
}

fn left_out(all: usize, most: usize, noun: &str) -> String {
    match all.saturating_sub(most) {
        0 => String::new(),
        more => format!(" Left out here: {}.", counted(more, noun)),
    }
}

/// A table in a section of its own; its columns sort where there is a script.
struct Table {
    id: &'static str,
    title: String,
    caption: String,
    sorts: bool,
    columns: String,
    body: String,
    rows: usize,
}

impl Table {
    fn new(id: &'static str, title: &str, caption: &str) -> Self {
        Table {
            id,
            title: title.into(),
            caption: caption.into(),
            sorts: true,
            columns: String::new(),
            body: String::new(),
            rows: 0,
        }
    }

    fn unsortable(mut self) -> Self {
        self.sorts = false;
        self
    }

    fn column(&mut self, name: &str, numeric: bool) {
        let class = if numeric { " class=\"num\"" } else { "" };
        let _ = write!(
            self.columns,
            "<th scope=\"col\"{class}>{}</th>",
            escaped(name)
        );
    }

    fn row(&mut self) {
        self.body.push_str(if self.rows == 0 {
            "<tr>"
        } else {
            "</tr>\n<tr>"
        });
        self.rows += 1;
    }

    fn head(&mut self, name: &str) {
        let _ = write!(self.body, "<th scope=\"row\">{}</th>", escaped(name));
    }

    fn number(&mut self, value: f64, text: &str) {
        let _ = write!(
            self.body,
            "<td class=\"num\" data-v=\"{value}\">{text}</td>"
        );
    }

    fn maybe(&mut self, value: Option<f64>, text: impl Fn(f64) -> String) {
        match value {
            Some(value) => self.number(value, &text(value)),
            None => self.body.push_str("<td class=\"num\">\u{2013}</td>"),
        }
    }

    fn finish(self, out: &mut String, note: &str) {
        let Table {
            id,
            title,
            caption,
            sorts,
            columns,
            body,
            ..
        } = self;
        let (title, caption) = (escaped(&title), escaped(&caption));
        let class = if sorts { " class=\"sorts\"" } else { "" };
        let _ = write!(
            out,
            "<section id=\"{id}\" aria-labelledby=\"h-{id}\">\n<h2 id=\"h-{id}\">{title}</h2>\n\
             <div class=\"wide\" role=\"group\" tabindex=\"0\" aria-label=\"{caption}\">\n\
             <table{class}>\n<caption>{caption}</caption>\n<thead><tr>{columns}</tr></thead>\n<tbody>\n{body}</tr>\n</tbody>\n</table>\n</div>\n\
             <p class=\"muted\">{}</p>\n</section>\n",
            escaped(note)
        );
    }
}
