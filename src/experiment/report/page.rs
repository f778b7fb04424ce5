//! The page as a whole.

use super::runs::Listed;
use super::searches::Drawn;
use super::{Options, figures, tables};
use crate::experiment::Record;
use crate::experiment::analysis::{CostTable, Recommendation, recommend};
use crate::plot::escaped;
use std::fmt::Write;
use std::string::String;

const STYLE: &str = include_str!("page.css");
const SCRIPT: &str = include_str!("page.js");

/// `tables`: one a measure, the leading one first.
pub(super) fn page(
    records: &[Record],
    options: &Options,
    tables: &[CostTable],
    listed: &Listed,
    drawn: &Drawn,
) -> String {
    let mut out = String::new();
    let title = escaped(&options.title);
    // Nothing may be loaded, whatever stands in a name: the policy holds even where escaping failed.
    let _ = write!(
        out,
        "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n\
         <meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n\
         <meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'unsafe-inline'; script-src 'unsafe-inline'\">\n\
         <title>{title}</title>\n<style>\n{STYLE}</style>\n</head>\n<body>\n\
         <a class=\"skip\" href=\"#main\">Skip to the recommendation</a>\n\
         <header>\n<h1>{title}</h1>\n<p class=\"muted\">{}</p>\n\
         <nav aria-label=\"Sections\"><a href=\"#contenders\">Contenders</a> <a href=\"#profiles\">Profiles</a> \
         <a href=\"#pairs\">Head to head</a> <a href=\"#problems\">Problems</a> <a href=\"#endings\">Endings</a> \
         <a href=\"#runs\">Runs</a></nav>\n\
         <button type=\"button\" id=\"theme\" hidden>Dark or light</button>\n</header>\n<main id=\"main\">\n",
        head_line(records, &tables[0])
    );
    recommendations(&mut out, tables);
    tables::contenders(&mut out, records, tables);
    figures::profiles(&mut out, tables);
    tables::pairs(&mut out, &tables[0]);
    figures::further(&mut out, options);
    tables::problems(&mut out, &tables[0]);
    tables::endings(&mut out, records);
    listed.section(&mut out);
    let _ = write!(
        out,
        "</main>\n<div id=\"said\" class=\"unseen\" role=\"status\" aria-live=\"polite\"></div>\n{}\
         <script type=\"application/json\" id=\"data\">{}</script>\n<script>\n{SCRIPT}</script>\n</body>\n</html>\n",
        drawn.html, listed.json
    );
    out
}

fn head_line(records: &[Record], table: &CostTable) -> String {
    let (runs, problems) = (records.len(), table.problems());
    let (instances, contenders) = (table.instances().len(), table.contenders().len());
    std::format!(
        "{} of {} on {}, {} in all. Solved: {}.",
        counted(runs, "run"),
        counted(contenders, "contender"),
        counted(problems, "problem"),
        counted(instances, "start"),
        escaped(&table.solved().sentence())
    )
}

fn recommendations(out: &mut String, tables: &[CostTable]) {
    let said = recommend(&tables[0]);
    let _ = write!(
        out,
        "<section id=\"recommendation\" aria-labelledby=\"h-recommendation\">\n<h2 id=\"h-recommendation\">Recommendation</h2>\n\
         <p class=\"headline\">{}</p>\n<h3>What it rests on</h3>\n",
        escaped(&said.headline)
    );
    list(out, "evidence", &said.evidence);
    if said.warnings.is_empty() {
        out.push_str("<p>Nothing was found that speaks against it on these problems. On others it may be different.</p>\n");
    } else {
        out.push_str("<h3>Where the evidence is thin</h3>\n");
        list(out, "warnings", &said.warnings);
    }
    for table in &tables[1..] {
        let Recommendation { headline, .. } = recommend(table);
        let _ = writeln!(
            out,
            "<p>By {}: {}</p>",
            table.measure().name(),
            escaped(&headline)
        );
    }
    out.push_str("</section>\n");
}

fn list(out: &mut String, class: &str, sentences: &[String]) {
    let _ = writeln!(out, "<ul class=\"{class}\">");
    for sentence in sentences {
        let _ = writeln!(out, "<li>{}</li>", escaped(sentence));
    }
    out.push_str("</ul>\n");
}

/// `1 run`, `2 runs`, `12,000 runs`.
pub(super) fn counted(number: usize, noun: &str) -> String {
    std::format!(
        "{} {noun}{}",
        grouped(number),
        if number == 1 { "" } else { "s" }
    )
}

/// With a comma at each thousand.
pub(super) fn grouped(number: usize) -> String {
    let digits = std::format!("{number}");
    let mut out = String::new();
    for (i, c) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i) % 3 == 0 {
            out.push(',');
        }
        out.push(c);
    }
    out
}
