//! One derivative by differences: a ladder of steps, three extrapolated tables, and what they say about a gradient.

use super::gradient_check::{Agreement, Comparison, Difference, Doubt, GradientCheck, Neighbours};
use crate::Real;

/// Steps from the usual beginning down, each a quarter of the one before: they span eleven decades.
const LEVELS: u32 = 20;
/// How often a ladder may begin higher, and by how much: no power of 4, lest a period of the values go unseen.
const RAISES: u32 = 8;
const RAISE: f64 = 100.0;
/// Columns of a table; more would extrapolate noise.
const COLUMNS: usize = 6;
/// Rows to look for where a difference disagrees; two elsewhere.
const WITNESSES: usize = 3;
/// The error of an entry is so many times its distance from its parents.
const SAFETY: f64 = 4.0;
/// Rows before a table may be believed.
const ROWS: usize = 4;

/// The three tables of one derivative.
pub(super) struct Ladder<T> {
    both: Table<T>,
    right: Table<T>,
    left: Table<T>,
    /// The steepest chord from the point to any other value.
    chord: T,
    evaluations: usize,
}

/// One step of the ladder: how far each side really moved, and the value there if it is finite.
struct Rung<T> {
    right: Option<(T, T)>,
    left: Option<(T, T)>,
}

impl<T: Real> Rung<T> {
    /// Whether there are values, and each differs from the one at the point by `times` its noise at most.
    fn drowns(&self, value: T, times: T, noise: &impl Fn(T) -> T) -> bool {
        let drowned = |side: Option<(T, T)>| {
            side.is_none_or(|(_, there)| (there - value).abs() <= times * noise(there))
        };
        !self.is_empty() && drowned(self.right) && drowned(self.left)
    }

    /// The largest change from the value at the point.
    fn change(&self, value: T) -> T {
        let sides = [self.right, self.left].into_iter().flatten();
        sides.fold(T::zero(), |most, (_, there)| {
            most.max((there - value).abs())
        })
    }

    fn is_empty(&self) -> bool {
        self.right.is_none() && self.left.is_none()
    }
}

impl<T: Real> Ladder<T> {
    /// Evaluates until the tables are accurate enough to judge `gradient`, or cannot become so.
    ///
    /// `moved_and_value` gets a step of either sign and returns how far the point really moved, and the value there.
    pub(super) fn climb<E>(
        check: &GradientCheck<T>,
        value: T,
        gradient: T,
        magnitude: T,
        mut moved_and_value: impl FnMut(T) -> Result<(T, T), E>,
    ) -> Result<Self, E> {
        let mut rungs = 0;
        let mut rung_at = |step: T| -> Result<Rung<T>, E> {
            let mut side = |by: T| -> Result<Option<(T, T)>, E> {
                let (moved, there) = moved_and_value(by)?;
                Ok((there.is_finite() && moved != T::zero()).then_some((moved, there)))
            };
            rungs += 1;
            Ok(Rung {
                right: side(step)?,
                left: side(-step)?,
            })
        };
        // An error of a value that no comparison can see past: rounding, and what the caller knows of.
        let noise = |there: T| {
            let rounding = T::of(2.0) * T::epsilon() * value.abs().max(there.abs());
            check.value_noise + rounding + T::min_positive_value()
        };
        let few = T::of(4.0);
        let usual = T::of(0.11) * magnitude;
        let (mut step, mut rung) = (usual, rung_at(usual)?);
        let enough = T::of(100.0) / check.tolerance;
        let mut raises = 0;
        while raises < RAISES && rung.drowns(value, enough, &noise) {
            let higher = T::of(RAISE) * step;
            let wider = rung_at(higher)?;
            // Values that do not grow with the step wind within it, and a higher rung tells less.
            let grows = wider.change(value) >= T::of(8.0) * rung.change(value);
            if wider.is_empty() || !(grows || rung.drowns(value, few, &noise)) {
                break;
            }
            raises += 1;
            (step, rung) = (higher, wider);
        }
        if raises > 0 && rung.drowns(value, few, &noise) {
            // The values do not change anywhere: the usual steps tell so as well.
            (step, rung, raises) = (usual, rung_at(usual)?, 0);
        }
        let mut ladder = Ladder {
            both: Table::new(16.0),
            right: Table::new(4.0),
            left: Table::new(4.0),
            chord: T::zero(),
            evaluations: 0,
        };
        let levels = LEVELS + 4 * raises; // RAISE is less than 4^4
        for level in 0..levels {
            if level > 0 {
                step = step / T::of(4.0);
                rung = rung_at(step)?;
            }
            let flat = rung.drowns(value, few, &noise) && step <= usual;
            ladder.add(value, &rung, flat, check.tolerance, &noise);
            let floor = noise(value) / step;
            let mut active = ladder.active().peekable();
            let ready = active.peek().is_some();
            let done = active.all(|table| {
                table.rows >= ROWS && (flat || table.is_done(floor, check.tolerance, gradient))
            });
            if ready && done {
                break;
            }
        }
        ladder.evaluations = 2 * rungs;
        Ok(ladder)
    }

    fn add(&mut self, value: T, rung: &Rung<T>, flat: bool, tolerance: T, noise: &impl Fn(T) -> T) {
        let chord = |(moved, there): (T, T)| (there - value) / moved;
        let steepest = [rung.right, rung.left]
            .into_iter()
            .flatten()
            .fold(T::zero(), |most, side| most.max(chord(side).abs()));
        self.chord = self.chord.max(steepest);
        let row = |slope: T, noise: T, step: T, chord: T| Row {
            slope,
            noise,
            step,
            flat,
            trusted: tolerance.max(T::of(1e-3)) * chord,
            heard: T::of(0.05) * chord,
        };
        for (table, side) in [(&mut self.right, rung.right), (&mut self.left, rung.left)] {
            match side {
                Some((moved, there)) => {
                    let noise = (noise(there) + noise(value)) / moved.abs();
                    let chord = chord((moved, there));
                    table.push(row(chord, noise, moved.abs(), chord.abs()));
                }
                None => table.rows = 0,
            }
        }
        match (rung.right, rung.left) {
            (Some((right, above)), Some((left, below))) => {
                let width = right - left;
                let noise = (noise(above) + noise(below)) / width;
                // Where the function is even, the central difference vanishes and the chords do not.
                let central = (above - below) / width;
                self.both.push(row(central, noise, right, steepest));
            }
            _ => self.both.rows = 0,
        }
    }

    /// The tables that the present step went into.
    fn active(&self) -> impl Iterator<Item = &Table<T>> {
        [&self.both, &self.right, &self.left]
            .into_iter()
            .filter(|table| table.rows > 0)
    }

    pub(super) fn compare(
        &self,
        tolerance: T,
        component: Option<usize>,
        gradient: T,
    ) -> Comparison<T> {
        let inaccurate = Agreement::CannotTell(Doubt::Inaccurate);
        let (difference, agreement) = if let Some(kink) = self.kink(tolerance, gradient) {
            let told = self.least_error(|table| table.settled, T::zero());
            (told.map(|(d, _)| d), Agreement::CannotTell(kink))
        } else if let Some((d, rows)) = self
            .least_error(|table| table.settled, tolerance * gradient.abs())
            .or_else(|| self.least_error(|table| table.flat, T::zero()))
        {
            let apart = (gradient - d.slope).abs();
            let allowed = tolerance * gradient.abs().max(d.slope.abs());
            // Two sides that settled, and do not differ, bear each other out. One side alone accuses only at an edge: else
            // the other one, and the central difference, were too noisy to be heard.
            let sides = usize::from(self.right.settled.is_some() && self.left.settled.is_some());
            let at_an_edge = self.both.rough.is_none();
            let proven =
                rows + sides >= WITNESSES && (d.neighbours == Neighbours::Both || at_an_edge);
            let both_zero = apart <= d.error && d.error <= tolerance * self.chord;
            let both_nothing = gradient == T::zero() && self.chord == T::zero();
            let agreement = if apart + d.error <= allowed || both_zero || both_nothing {
                Agreement::Agrees
            } else if apart > allowed + d.error
                && proven
                && !self.vouched(gradient, tolerance, apart)
            {
                Agreement::Disagrees
            } else {
                inaccurate
            };
            (Some(d), agreement)
        } else if let Some((d, _)) = self.least_error(|table| table.rough, T::zero()) {
            (Some(d), inaccurate)
        } else if self.chord > T::zero() {
            (None, inaccurate)
        } else {
            (None, Agreement::CannotTell(Doubt::NoNeighbour))
        };
        Comparison {
            component,
            gradient,
            difference,
            agreement,
            evaluations: self.evaluations,
        }
    }

    /// Whether a table that could see a difference of `apart` has, by its own error, nothing against `gradient`.
    fn vouched(&self, gradient: T, tolerance: T, apart: T) -> bool {
        let tables = [&self.both, &self.right, &self.left];
        tables.iter().filter_map(|table| table.settled).any(|told| {
            let allowed = tolerance * gradient.abs().max(told.slope.abs());
            let sees = told.error <= T::of(0.5) * apart;
            sees && (gradient - told.slope).abs() <= allowed + told.error
        })
    }

    /// The central difference if its error is at most `needed`, else that of the three with the least error; and the
    /// number of rows that bear it out.
    fn least_error(
        &self,
        of: impl Fn(&Table<T>) -> Option<Told<T>>,
        needed: T,
    ) -> Option<(Difference<T>, usize)> {
        let told = |table: &Table<T>, neighbours| {
            of(table).map(|told| {
                let difference = Difference {
                    slope: told.slope,
                    error: told.error,
                    neighbours,
                    step: told.step,
                };
                (difference, told.rows)
            })
        };
        let both = told(&self.both, Neighbours::Both);
        if both.is_some_and(|(d, _)| d.error <= needed) {
            return both;
        }
        let sides = [
            both,
            told(&self.right, Neighbours::Right),
            told(&self.left, Neighbours::Left),
        ];
        sides
            .into_iter()
            .flatten()
            .reduce(|best, d| if d.0.error < best.0.error { d } else { best })
    }

    fn kink(&self, tolerance: T, gradient: T) -> Option<Doubt<T>> {
        let (right, left) = (self.right.settled?, self.left.settled?);
        let scale = gradient.abs().max(right.slope.abs()).max(left.slope.abs());
        let errors = right.error + left.error;
        ((right.slope - left.slope).abs() > tolerance * scale + errors).then_some(Doubt::Kink {
            left: left.slope,
            right: right.slope,
        })
    }
}

/// A Richardson table, row by row, for steps that shrink by a quarter.
struct Table<T> {
    /// By what the leading error shrinks from row to row.
    shrinks: T,
    rows: usize,
    row: [Entry<T>; COLUMNS],
    /// The entry of least error among those that are accurate beside the chords of their own row. Where the values wind
    /// faster than the steps, chords and entries fall like 1 / step: small errors there, beside large slopes, mean nothing.
    settled: Option<Told<T>>,
    /// The entry of least error among rows whose chords are nothing but noise.
    flat: Option<Told<T>>,
    /// The entry of least error of all.
    rough: Option<Told<T>>,
}

/// A difference and what is known of it.
struct Row<T> {
    slope: T,
    /// What noise in the values may do to it.
    noise: T,
    step: T,
    /// Whether the values here change by no more than their noise.
    flat: bool,
    /// Entries with errors up to this are accurate beside the chords of the row.
    trusted: T,
    /// Entries with errors up to this may bear out others, or contradict them.
    heard: T,
}

#[derive(Clone, Copy)]
struct Entry<T> {
    slope: T,
    noise: T,
}

#[derive(Clone, Copy)]
struct Told<T> {
    slope: T,
    error: T,
    step: T,
    /// How many rows bear it out.
    rows: usize,
}

impl<T: Real> Table<T> {
    fn new(shrinks: f64) -> Self {
        let none = Entry {
            slope: T::zero(),
            noise: T::zero(),
        };
        Table {
            shrinks: T::of(shrinks),
            rows: 0,
            row: [none; COLUMNS],
            settled: None,
            flat: None,
            rough: None,
        }
    }

    fn push(&mut self, row: Row<T>) {
        let above = self.row;
        self.row[0] = Entry {
            slope: row.slope,
            noise: row.noise,
        };
        let mut power = T::one();
        let mut here: Option<Told<T>> = None;
        for column in 1..COLUMNS.min(self.rows + 1) {
            power = power * self.shrinks;
            let (newer, older) = (self.row[column - 1], above[column - 1]);
            let rest = power - T::one();
            let slope = newer.slope + (newer.slope - older.slope) / rest;
            let noise = (power * newer.noise + older.noise) / rest;
            self.row[column] = Entry { slope, noise };
            let apart = (slope - newer.slope).abs().max((slope - older.slope).abs());
            let told = Told {
                slope,
                error: (T::of(SAFETY) * apart).max(noise),
                step: row.step,
                rows: 1,
            };
            if slope.is_finite() {
                here = Some(here.map_or(told, |best| best.better(told)));
            }
        }
        self.rows += 1;
        if let Some(here) = here {
            let joined = |old: Option<Told<T>>| Some(old.map_or(here, |old| old.joined(here)));
            self.settled = if here.error <= row.trusted {
                joined(self.settled)
            } else if here.error <= row.heard {
                self.settled.and_then(|old| old.borne_out(here))
            } else {
                self.settled
            };
            if row.flat {
                self.flat = joined(self.flat);
            }
            self.rough = Some(self.rough.map_or(here, |best| best.better(here)));
        }
    }

    /// Whether smaller steps would tell nothing that matters beside `gradient`.
    fn is_done(&self, floor: T, tolerance: T, gradient: T) -> bool {
        self.settled.is_some_and(|told| {
            let needed = tolerance * gradient.abs().max(told.slope.abs());
            let apart = (gradient - told.slope).abs() > needed;
            let witnesses = if apart { WITNESSES } else { WITNESSES - 1 };
            let exact = told.error <= floor || told.error <= T::of(0.25) * needed;
            told.rows >= witnesses && exact
        })
    }
}

impl<T: Real> Told<T> {
    fn better(self, other: Self) -> Self {
        if other.error < self.error {
            other
        } else {
            self
        }
    }

    /// With a less accurate row of smaller steps: `None` where the two contradict each other.
    fn borne_out(self, newer: Self) -> Option<Self> {
        let consistent = self.apart(newer) <= self.error + newer.error;
        consistent.then_some(self.kept(newer))
    }

    /// With a row of smaller steps, which wins where the two contradict each other; but then its error is at least their
    /// distance, since one of the two was told too small.
    fn joined(self, newer: Self) -> Self {
        let apart = self.apart(newer);
        if apart > self.error + newer.error {
            Told {
                error: apart,
                ..newer
            }
        } else if newer.error < self.error {
            Told {
                rows: self.rows + 1,
                ..newer
            }
        } else {
            self.kept(newer)
        }
    }

    /// Borne out by a row of smaller steps. What parts the two is noise in the newer one, whether told of or not; here,
    /// where steps are larger, the same noise does less.
    fn kept(self, newer: Self) -> Self {
        let noise = self.apart(newer) * newer.step / self.step;
        Told {
            error: self.error.max(T::of(SAFETY) * noise),
            rows: self.rows + 1,
            ..self
        }
    }

    fn apart(self, other: Self) -> T {
        (self.slope - other.slope).abs()
    }
}
