//! Draws the picture of a ray: `phi` along it, the steps that each rule accepts, and the trials of a search.
//!
//! ```sh
//! cargo run --release --features "plot problems" --example step_profile
//! cargo run --release --features "plot problems" --example step_profile -- --function 2 --first 0.001 --rule weak
//! ```

#[path = "shared/finders.rs"]
mod shared;

use shared::finders;
use std::error::Error;
use std::path::PathBuf;
use std::process::ExitCode;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::audit::{Grid, step_profile};
use surefoot::plot::{Scale, StepPicture};
use surefoot::problems::more_thuente;
use surefoot::{Acceptance, Ray, StepSearch};

const HELP: &str = "\
Draws phi along one of the six published functions of Moré and Thuente (1994), with what four rules accept of it, and the
trials of a search; writes an SVG file and says where.

usage:  step_profile [--function N] [--first STEP] [--rule RULE] [--finder FINDER] [--out FILE] [--overwrite]

  --function N     1 to 6 (default 1)
  --first STEP     the first step, above 0 (default 10; the published ones are 0.001, 0.1, 10 and 1000)
  --rule RULE      strong, weak, goldstein or decrease (default strong), with the published thresholds of the function
  --finder FINDER  the finder that proposes the steps (default three_point; --help lists them below)
  --out FILE       where to write (default target/step_profile_N.svg)
  --overwrite      write over FILE if it is there
  --help           this text

finders:  ";

/// What was asked for.
struct Wish {
    function: usize,
    first: f64,
    rule: usize,
    finder: String,
    out: Option<PathBuf>,
    overwrite: bool,
}

const RULES: [(&str, &str); 4] = [
    ("strong", "strong Wolfe"),
    ("weak", "weak Wolfe"),
    ("goldstein", "Goldstein"),
    ("decrease", "sufficient decrease"),
];

fn main() -> ExitCode {
    let wish = match parse(std::env::args().skip(1)) {
        Ok(Some(wish)) => wish,
        Ok(None) => {
            let names: Vec<&str> = finders().iter().map(|(name, _)| *name).collect();
            println!("{HELP}{}", names.join(", "));
            return ExitCode::SUCCESS;
        }
        Err(sentence) => {
            eprintln!("step_profile: {sentence}; --help says what there is");
            return ExitCode::from(2);
        }
    };
    match draw(&wish) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("step_profile: {error}");
            ExitCode::FAILURE
        }
    }
}

/// `None`: the help is asked for.
fn parse(mut arguments: impl Iterator<Item = String>) -> Result<Option<Wish>, String> {
    let mut wish = Wish {
        function: 1,
        first: 10.0,
        rule: 0,
        finder: "three_point".into(),
        out: None,
        overwrite: false,
    };
    while let Some(option) = arguments.next() {
        if option == "--help" {
            return Ok(None);
        }
        if option == "--overwrite" {
            wish.overwrite = true;
            continue;
        }
        let known = ["--function", "--first", "--rule", "--finder", "--out"];
        if !known.contains(&option.as_str()) {
            return Err(format!("unknown option `{option}`"));
        }
        let Some(value) = arguments.next() else {
            return Err(format!("`{option}` needs a value after it"));
        };
        let bad = || format!("`{option}` cannot be `{value}`");
        match option.as_str() {
            "--function" => {
                let number = value.parse().ok().filter(|n| (1..=6).contains(n));
                wish.function = number.ok_or_else(bad)?;
            }
            "--first" => {
                let step = value
                    .parse()
                    .ok()
                    .filter(|s: &f64| *s > 0.0 && s.is_finite());
                wish.first = step.ok_or_else(bad)?;
            }
            "--rule" => {
                let number = RULES.iter().position(|(word, _)| *word == value);
                wish.rule = number.ok_or_else(bad)?;
            }
            "--finder" if finders().iter().any(|(name, _)| *name == value) => wish.finder = value,
            "--out" => wish.out = Some(value.into()),
            _ => return Err(bad()),
        }
    }
    Ok(Some(wish))
}

fn draw(wish: &Wish) -> Result<(), Box<dyn Error>> {
    let problem = more_thuente()[wish.function - 1];
    let (decrease, curvature) = (problem.decrease(), problem.curvature());
    let strong = StrongWolfe::new(decrease, curvature)?;
    let weak = WeakWolfe::new(decrease, curvature)?;
    let goldstein = Goldstein::default();
    let sufficient = SufficientDecrease::new(decrease)?;
    let rules: [&dyn Acceptance<f64>; 4] = [&strong, &weak, &goldstein, &sufficient];

    let (value, slope) = problem.evaluate(0.0);
    let ray = Ray::new(value, slope);
    let (_, finder) = finders()
        .into_iter()
        .find(|(name, _)| *name == wish.finder)
        .ok_or("no such finder")?;
    let mut search = StepSearch::new(finder, rules[wish.rule]);
    let found = search.along(ray, wish.first, |a| problem.evaluate(a))?;

    // The trials and the minimizer, with some room; by powers of ten where they are far apart.
    let steps = || {
        search
            .log()
            .iter()
            .map(|entry| entry.trial.step)
            .chain([problem.minimizer()])
    };
    let (least, most) = steps().fold((f64::INFINITY, 0.0_f64), |(low, high), a| {
        (low.min(a), high.max(a))
    });
    let (scale, coarse) = if most / least > 30.0 {
        (
            Scale::Logarithmic,
            Grid::geometric(0.4 * least, 2.0 * most, 1201)?,
        )
    } else {
        (Scale::Linear, Grid::linear(0.0, 1.3 * most, 1201)?)
    };
    // Sets of acceptable steps may be narrower than the grid: so also ever closer to the minimizer, and the trials themselves.
    let closer = (4..=30)
        .flat_map(|k| [-1.0, 1.0].map(|side| problem.minimizer() * (1.0 + side * 0.5_f64.powi(k))));
    let mut all: Vec<f64> = coarse
        .steps()
        .iter()
        .copied()
        .chain(closer)
        .chain(steps())
        .collect();
    all.sort_unstable_by(f64::total_cmp);
    all.dedup();
    let grid = Grid::of(all)?;
    // The rule in force first: its steps are shaded behind the curve.
    let mut named: Vec<(&str, &dyn Acceptance<f64>)> = Vec::new();
    for shift in 0..RULES.len() {
        let number = if shift == 0 {
            wish.rule
        } else if shift <= wish.rule {
            shift - 1
        } else {
            shift
        };
        named.push((RULES[number].1, rules[number]));
    }
    let profile = step_profile(&ray, &grid, |a| problem.evaluate(a), &named)?;

    let title = format!(
        "Function {} of Moré and Thuente from step {}: {}, {}",
        wish.function,
        wish.first,
        RULES[wish.rule].1,
        wish.finder.replace('_', " ")
    );
    let picture = StepPicture::new(&title, &ray)
        .with_profile(&profile)
        .with_trials(search.log().iter())
        .with_decrease(decrease)
        .with_curvature(curvature, true)
        .with_scale(scale)
        .picture()?;

    let by_default = format!("target/step_profile_{}.svg", wish.function);
    let (out, overwrite) = match &wish.out {
        Some(out) => (out.clone(), wish.overwrite),
        // A name of our own making, for a picture that can be made again.
        None => (PathBuf::from(by_default), true),
    };
    if let Some(folder) = out.parent().filter(|f| !f.as_os_str().is_empty()) {
        std::fs::create_dir_all(folder)?;
    }
    picture.write(&out, overwrite)?;
    println!("{}", found.outcome.ending);
    for (number, (name, _)) in named.iter().enumerate() {
        let parts: Vec<String> = profile
            .accepted(number)
            .iter()
            .map(|i| format!("{:.4e} to {:.4e}", i.start, i.end))
            .collect();
        let parts = if parts.is_empty() {
            "nothing on the grid".to_owned()
        } else {
            parts.join(", ")
        };
        println!("{name:20} accepts {parts}");
    }
    println!(
        "{} trials; the picture is in {}",
        found.outcome.trials,
        out.display()
    );
    Ok(())
}
