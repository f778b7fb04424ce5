//! Pictures are well-formed, say in words what they show, and do not rest on colour.

use surefoot::acceptance::{Goldstein, StrongWolfe, WeakWolfe};
use surefoot::audit::{Grid, step_profile};
use surefoot::finder::{BracketZoom, MoreThuente};
use surefoot::plot::{
    Chart, HeatMap, HeatMapError, Picture, Scale, StepPicture, StepPictureError, WriteError,
    convergence_chart, short,
};
use surefoot::problems::more_thuente;
use surefoot::search::{Entry, Fate, Origin};
use surefoot::{Ray, Side, StepSearch, Trial};

/// Elements opened and closed in order, attributes quoted, no control characters, no number that is none.
fn check(picture: &Picture) -> String {
    let svg = picture.svg();
    let mut open: Vec<String> = Vec::new();
    let mut rest = svg.as_str();
    while let Some(at) = rest.find('<') {
        assert!(
            !rest[..at].contains('>'),
            "a stray > before {}",
            &rest[at..rest.len().min(at + 80)]
        );
        let end = at + rest[at..].find('>').expect("every tag ends");
        let tag = &rest[at + 1..end];
        assert_eq!(tag.matches('"').count() % 2, 0, "{tag}");
        if let Some(name) = tag.strip_prefix('/') {
            assert_eq!(open.pop().as_deref(), Some(name));
        } else {
            let name = tag.split([' ', '/']).next().unwrap();
            let mut seen = Vec::new();
            for part in tag
                .split('"')
                .step_by(2)
                .filter_map(|part| part.trim().strip_suffix('='))
            {
                assert!(!seen.contains(&part.to_owned()), "twice {part} in <{tag}>");
                seen.push(part.to_owned());
            }
            if !tag.ends_with('/') {
                open.push(name.to_owned());
            }
        }
        rest = &rest[end + 1..];
    }
    assert!(open.is_empty(), "{open:?}");
    assert!(svg.chars().all(|c| c == '\n' || !c.is_control()));
    // Numbers in attributes, not the words of a label.
    for part in svg
        .split('"')
        .skip(1)
        .step_by(2)
        .filter(|part| !part.contains(' '))
    {
        assert!(!part.contains("NaN") && !part.contains("inf"), "{part}");
    }
    for path in svg
        .split(" d=\"")
        .skip(1)
        .filter_map(|rest| rest.split('"').next())
    {
        assert!(!path.contains("NaN") && !path.contains("inf"), "{path}");
    }
    svg
}

#[test]
fn every_published_ray_can_be_drawn() {
    for problem in more_thuente() {
        for first in [1e-3, 0.1, 10.0, 1e3] {
            let (value, slope) = problem.evaluate(0.0);
            let ray = Ray::new(value, slope);
            let rule = StrongWolfe::new(problem.decrease(), problem.curvature()).unwrap();
            let mut search = StepSearch::new(MoreThuente::new(), rule);
            let found = search.along(ray, first, |a| problem.evaluate(a)).unwrap();
            let grid = Grid::geometric(1e-4, 2e3, 400).unwrap();
            let (weak, goldstein) = (WeakWolfe::default(), Goldstein::default());
            let profile = step_profile(
                &ray,
                &grid,
                |a| problem.evaluate(a),
                &[
                    ("in force", &rule),
                    ("weak <Wolfe> & \"co\"", &weak),
                    ("Goldstein", &goldstein),
                ],
            )
            .unwrap();
            let picture = StepPicture::new("Ray", &ray)
                .with_profile(&profile)
                .with_trials(search.log().iter())
                .with_decrease(problem.decrease())
                .with_curvature(problem.curvature(), true)
                .with_scale(Scale::Logarithmic)
                .picture()
                .unwrap();
            let svg = check(&picture);
            assert!(svg.contains("weak &lt;Wolfe&gt; &amp; &quot;co&quot;"));
            assert!(
                svg.contains(">value φ(a)<")
                    && svg.contains(">slope ratio<")
                    && svg.contains(">step a<")
            );
            // Each trial has its number in the lane, and its verdict in words.
            for entry in search.log().iter() {
                assert!(svg.contains(&format!(">{}<", entry.number)));
            }
            assert_eq!(svg.matches(">accepted<").count(), 1);
            assert!(
                picture
                    .description()
                    .contains(&format!("trial {} at step", found.outcome.trials))
            );
        }
    }
}

#[test]
fn trials_alone_are_enough_and_strange_ones_do_no_harm() {
    let ray = Ray::new(1.0, -1.0);
    assert_eq!(
        StepPicture::new("none", &ray).picture().unwrap_err(),
        StepPictureError::Empty
    );
    let fates = [
        Fate::Refused(Side::TooLong),
        Fate::Outside,
        Fate::Undecided,
        Fate::Refused(Side::TooShort),
        Fate::Accepted,
    ];
    let numbers = [
        0.0,
        1.0,
        -3.0,
        1e300,
        -1e300,
        f64::NAN,
        f64::INFINITY,
        5e-324,
    ];
    let entry = |number: u32, step, value, slope, fate| Entry {
        number,
        trial: Trial { step, value, slope },
        origin: Origin::Finder,
        fate,
    };
    for scale in [Scale::Linear, Scale::Logarithmic] {
        for step in numbers {
            for value in numbers {
                let trials: Vec<Entry<f64>> = (1..)
                    .zip(fates)
                    .map(|(number, fate)| entry(number, step, value, Some(value), fate))
                    .collect();
                let picture = StepPicture::new("strange", &ray)
                    .with_trials(&trials)
                    .with_scale(scale)
                    .picture()
                    .unwrap();
                let svg = check(&picture);
                for word in ["too long", "too short", "outside", "undecided", "accepted"] {
                    assert!(svg.contains(&format!(">{word}<")));
                }
            }
        }
    }
    // Without slopes there is no lower panel.
    let values_only = [entry(1, 0.5, 0.6, None, Fate::Accepted)];
    let svg = check(
        &StepPicture::new("values", &ray)
            .with_trials(&values_only)
            .picture()
            .unwrap(),
    );
    assert!(!svg.contains("slope ratio<") && svg.contains(">step a<"));
}

#[test]
fn many_trials_keep_their_numbers_apart() {
    let ray = Ray::new(1.0, -1.0);
    let mut search = StepSearch::new(
        BracketZoom::new(),
        surefoot::acceptance::rule(|_: &Ray<f64>, _: &Trial<f64>| {
            surefoot::Verdict::Refuse(Side::TooLong)
        }),
    );
    search
        .along(ray, 1.0, |a: f64| ((a - 1.0).powi(2), 2.0 * (a - 1.0)))
        .unwrap();
    let trials = search.log().iter().count();
    assert!(trials > 20);
    let svg = check(
        &StepPicture::new("many", &ray)
            .with_trials(search.log().iter())
            .picture()
            .unwrap(),
    );
    assert!(svg.contains(&format!("and {} more", trials - 15)));
}

#[test]
fn a_chart_tells_its_lines_apart_without_colour() {
    let mut chart = Chart::new("Many", "move", "loss");
    for number in 0..35 {
        chart = chart.line(
            &format!("line {number}"),
            &[(0.0, 1.0), (1.0, f64::from(number))],
        );
    }
    let svg = check(&chart.picture());
    // Colour and dash of each line: 35 different pairs, and neighbours differ in dash, too.
    let strokes: Vec<&str> = svg
        .lines()
        .filter(|line| line.starts_with("<path d=\"M") && line.contains('H'))
        .collect();
    let style = |line: &&str| line.split(" class=").nth(1).unwrap().to_owned();
    let mut styles: Vec<String> = strokes.iter().map(style).collect();
    assert_eq!(styles.len(), 35);
    styles.sort();
    styles.dedup();
    assert_eq!(styles.len(), 35);
    let dash = |line: &str| line.split("stroke-dasharray=").nth(1).map(str::to_owned);
    assert!(
        strokes
            .windows(2)
            .all(|pair| dash(pair[0]) != dash(pair[1]))
    );
}

#[test]
fn charts_of_next_to_nothing_are_drawn_all_the_same() {
    for points in [
        &[][..],
        &[(1.0, 1.0)],
        &[(0.0, 0.0), (f64::NAN, 1.0)],
        &[(1.0, -1e308), (2.0, 1e308)],
        &[(-1.0, f64::INFINITY)],
    ] {
        for scale in [Scale::Linear, Scale::Logarithmic] {
            let chart = Chart::new("t", "x", "y")
                .with_x_scale(scale)
                .with_y_scale(scale);
            check(&chart.clone().line("a", points).picture());
            check(
                &chart
                    .staircase("b", points)
                    .with_y_ends(f64::NAN, 1.0)
                    .picture(),
            );
        }
    }
    assert!(check(&Chart::new("t", "x", "y").picture()).contains("nothing to draw"));
    let curve = [(1.0, 1.0), (2.0, 1e-3), (3.0, 0.0)];
    assert!(
        check(&convergence_chart("fit", "calls", "loss", &[("a", &curve)]).picture())
            .contains(">loss<")
    );
}

#[test]
fn a_long_line_is_thinned() {
    let points: Vec<(f64, f64)> = (0..200_000)
        .map(|i| (f64::from(i), f64::from(i).sin()))
        .collect();
    let svg = check(&Chart::new("long", "x", "y").line("sine", &points).picture());
    assert!(svg.len() < 60_000, "{}", svg.len());
}

#[test]
fn a_heat_map_says_each_number() {
    let mut map = HeatMap {
        title: "Cost".into(),
        x_label: "curvature".into(),
        y_label: "decrease".into(),
        unit: "times".into(),
        columns: vec!["0.1".into(), "0.9".into()],
        rows: vec!["1e-4".into(), "0.2".into()],
        cells: vec![Some(1.25), Some(2.5), None, Some(f64::NAN)],
        remarks: Vec::new(),
    };
    let svg = check(&map.picture().unwrap());
    assert!(
        svg.contains(">1.25<")
            && svg.contains(">2.5<")
            && svg.contains(">least<")
            && svg.contains(">curvature<")
    );
    map.remarks = vec!["a".into()];
    assert_eq!(
        map.picture().unwrap_err(),
        HeatMapError::Cells {
            cells: 4,
            remarks: 1,
            wanted: 4
        }
    );
    map.remarks.clear();
    map.cells = vec![None; 4];
    check(&map.picture().unwrap());
}

#[test]
fn numbers_stand_out_from_their_cells() {
    let map = HeatMap {
        title: "Ramp".into(),
        x_label: "x".into(),
        y_label: "y".into(),
        unit: "times".into(),
        columns: (0..41).map(|i| i.to_string()).collect(),
        rows: vec!["only".into()],
        cells: (0..41)
            .map(|i| Some(10.0_f64.powf(f64::from(i) / 40.0)))
            .collect(),
        remarks: Vec::new(),
    };
    let svg = map.picture().unwrap().svg();
    let light = |line: &str| {
        let hex = line.split("fill=\"#").nth(1).unwrap();
        let part = |at: usize| {
            let c = f64::from(u8::from_str_radix(&hex[at..at + 2], 16).unwrap()) / 255.0;
            if c <= 0.04045 {
                c / 12.92
            } else {
                ((c + 0.055) / 1.055).powf(2.4)
            }
        };
        0.2126 * part(0) + 0.7152 * part(2) + 0.0722 * part(4)
    };
    // A cell is a filled rectangle, its number the next line.
    let lines: Vec<&str> = svg.lines().collect();
    let pairs = lines
        .windows(2)
        .filter(|pair| pair[0].starts_with("<rect x=") && pair[1].starts_with("<text x="));
    let (mut cells, mut last) = (0, 1.0);
    for pair in pairs {
        let (cell, text) = (light(pair[0]), light(pair[1]));
        let contrast = (cell.max(text) + 0.05) / (cell.min(text) + 0.05);
        assert!(contrast >= 4.5, "{contrast}: {pair:?}");
        assert!(cell < last, "each is darker than the one before");
        last = cell;
        cells += 1;
    }
    assert_eq!(cells, 41);
}

#[test]
fn nothing_is_written_over_without_being_told() {
    let path = std::env::temp_dir().join(format!("picture-{}.svg", std::process::id()));
    let picture = Chart::new("t", "x", "y")
        .line("a", &[(0.0, 0.0), (1.0, 1.0)])
        .picture();
    picture.write(&path, false).unwrap();
    assert!(matches!(
        picture.write(&path, false),
        Err(WriteError::Exists(_))
    ));
    picture.write(&path, true).unwrap();
    assert_eq!(std::fs::read_to_string(&path).unwrap(), picture.svg());
    std::fs::remove_file(&path).unwrap();
    let nowhere = path.join("no such folder").join("a.svg");
    assert!(
        picture
            .write(nowhere, false)
            .unwrap_err()
            .to_string()
            .contains("check the folder")
    );
}

#[test]
fn numbers_are_short() {
    let table = [
        (0.0, "0"),
        (1.0, "1"),
        (-0.25, "-0.25"),
        (99999.0, "99999"),
        (1e5, "1e5"),
        (0.001, "0.001"),
        (0.00099, "9.9e-4"),
        (1.0 / 3.0, "0.3333"),
        (-1e300, "-1e300"),
    ];
    for (x, text) in table {
        assert_eq!(short(x), text);
    }
}
