//! The readings: a CSV file in, rows out, or the line and column at fault.

use std::fmt;

/// The header that a file must have, in this order.
pub(crate) const HEADER: [&str; 6] = [
    "minute",
    "air_c",
    "product_c",
    "outside_c",
    "cooling",
    "defrost",
];

const MINUTE: usize = 0;
const AIR: usize = 1;
const PRODUCT: usize = 2;
const OUTSIDE: usize = 3;
const COOLING: usize = 4;
const DEFROST: usize = 5;

/// Fewer readings than this cannot carry the model's seven parameters.
const LEAST_AIR: usize = 20;
const LEAST_PRODUCT: usize = 10;

/// The longest stretch between two rows, in minutes: beyond it one mean share of cooling says too little.
const LONGEST_GAP: f64 = 1440.0;

/// Degrees Celsius that a sensor could mean; a file in kelvin or with failure codes falls outside.
const PLAUSIBLE: std::ops::RangeInclusive<f64> = -150.0..=150.0;

/// One row of the file.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Row {
    /// Line in the file, from 1.
    pub(crate) line: usize,
    /// Time in minutes.
    pub(crate) minute: f64,
    /// Air and product in degrees Celsius, where the sensors said something.
    pub(crate) air: Option<f64>,
    pub(crate) product: Option<f64>,
    /// Outside temperature in degrees Celsius.
    pub(crate) outside: f64,
    /// Share of the time since the row before in which the plant cooled, 0 to 1.
    pub(crate) cooling: f64,
    /// Share of that time in which the defrost heater was on, 0 to 1.
    pub(crate) defrost: f64,
}

/// Where a file is at fault, and what to do about it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct BadFile {
    /// Line in the file, from 1.
    pub(crate) line: usize,
    /// Column in the line, counted in cells from 1.
    pub(crate) column: usize,
    what: String,
}

impl fmt::Display for BadFile {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "line {}, column {}", self.line, self.column)?;
        if let Some(name) = HEADER.get(self.column - 1) {
            write!(f, " ({name})")?;
        }
        write!(f, ": {}", self.what)
    }
}

impl std::error::Error for BadFile {}

fn at(line: usize, index: usize, what: impl Into<String>) -> BadFile {
    BadFile {
        line,
        column: index + 1,
        what: what.into(),
    }
}

/// Reads a whole file. Lines that begin with `#` and blank lines are passed over; cells may have spaces around them.
pub(crate) fn parse(bytes: &[u8]) -> Result<Vec<Row>, BadFile> {
    let text = text(bytes)?;
    let mut lines = text
        .lines()
        .enumerate()
        .map(|(i, line)| (i + 1, line.trim()))
        .filter(|(_, line)| !line.is_empty() && !line.starts_with('#'));
    match lines.next() {
        Some((line, header)) => check_header(line, header)?,
        None => {
            return Err(at(
                last_line(text),
                0,
                format!(
                    "the file has no header: begin it with `{}`",
                    HEADER.join(",")
                ),
            ));
        }
    }
    let mut rows: Vec<Row> = Vec::new();
    for (line, content) in lines {
        let row = row(line, content)?;
        if let Some(before) = rows.last() {
            check_time(before, &row)?;
        }
        rows.push(row);
    }
    check_number(&rows, last_line(text))?;
    Ok(rows)
}

fn text(bytes: &[u8]) -> Result<&str, BadFile> {
    let bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
    std::str::from_utf8(bytes).map_err(|error| {
        let good = &bytes[..error.valid_up_to()];
        let line = good.iter().filter(|&&b| b == b'\n').count() + 1;
        let here = good.iter().rev().take_while(|&&b| b != b'\n');
        let index = here.filter(|&&b| b == b',').count();
        at(
            line,
            index,
            "this is not UTF-8 text: save the file as CSV in UTF-8",
        )
    })
}

fn last_line(text: &str) -> usize {
    text.lines().count().max(1)
}

fn check_header(line: usize, header: &str) -> Result<(), BadFile> {
    let found: Vec<&str> = header.split(',').map(str::trim).collect();
    for (index, expected) in HEADER.iter().enumerate() {
        let whole = HEADER.join(",");
        match found.get(index) {
            Some(name) if name == expected => {}
            Some(name) => {
                return Err(at(
                    line,
                    index,
                    format!(
                        "the header says `{name}` here; it must read `{whole}`, with commas between"
                    ),
                ));
            }
            None => {
                return Err(at(
                    line,
                    index,
                    format!("the header ends too early; it must read `{whole}`"),
                ));
            }
        }
    }
    match found.get(HEADER.len()) {
        Some(name) => Err(at(
            line,
            HEADER.len(),
            format!("the header has a column too many, `{name}`: take it out of the file"),
        )),
        None => Ok(()),
    }
}

fn row(line: usize, content: &str) -> Result<Row, BadFile> {
    let cells: Vec<&str> = content.split(',').map(str::trim).collect();
    if cells.len() < HEADER.len() {
        let what = format!(
            "the row has {} cells where {} are expected: write an empty cell for a silent sensor",
            cells.len(),
            HEADER.len()
        );
        return Err(at(line, cells.len(), what));
    }
    if cells.len() > HEADER.len() {
        let what = format!(
            "the row has {} cells where {} are expected: is a decimal comma among them? Write a point",
            cells.len(),
            HEADER.len()
        );
        return Err(at(line, HEADER.len(), what));
    }
    let minute = number(line, MINUTE, cells[MINUTE])?;
    Ok(Row {
        line,
        minute,
        air: reading(line, AIR, cells[AIR])?,
        product: reading(line, PRODUCT, cells[PRODUCT])?,
        outside: temperature(line, OUTSIDE, cells[OUTSIDE])?,
        cooling: share(line, COOLING, cells[COOLING])?,
        defrost: share(line, DEFROST, cells[DEFROST])?,
    })
}

fn number(line: usize, index: usize, cell: &str) -> Result<f64, BadFile> {
    if cell.is_empty() {
        return Err(at(
            line,
            index,
            "the cell is empty: only air_c and product_c may be; fill it, or leave out the row",
        ));
    }
    match cell.parse::<f64>() {
        Ok(x) if x.is_finite() => Ok(x),
        Ok(_) => Err(at(
            line,
            index,
            format!("`{cell}` is not a finite number: leave the cell of a silent sensor empty"),
        )),
        Err(_) => Err(at(
            line,
            index,
            format!("`{cell}` is not a number: write digits with a decimal point, such as -18.25"),
        )),
    }
}

fn temperature(line: usize, index: usize, cell: &str) -> Result<f64, BadFile> {
    let x = number(line, index, cell)?;
    if PLAUSIBLE.contains(&x) {
        Ok(x)
    } else {
        let (low, high) = (PLAUSIBLE.start(), PLAUSIBLE.end());
        Err(at(
            line,
            index,
            format!(
                "{x} is no temperature between {low} and {high} degrees Celsius: convert it, or leave a failed reading empty"
            ),
        ))
    }
}

fn reading(line: usize, index: usize, cell: &str) -> Result<Option<f64>, BadFile> {
    if cell.is_empty() {
        Ok(None)
    } else {
        temperature(line, index, cell).map(Some)
    }
}

fn share(line: usize, index: usize, cell: &str) -> Result<f64, BadFile> {
    let x = number(line, index, cell)?;
    if (0.0..=1.0).contains(&x) {
        Ok(x)
    } else {
        Err(at(
            line,
            index,
            format!(
                "{x} is no share between 0 and 1: divide per cent by 100, minutes by the length of the stretch"
            ),
        ))
    }
}

fn check_time(before: &Row, row: &Row) -> Result<(), BadFile> {
    let gap = row.minute - before.minute;
    if !(gap > 0.0) {
        let what = format!(
            "minute {} does not come after {} of line {}: sort the rows and take out doubles",
            row.minute, before.minute, before.line
        );
        Err(at(row.line, MINUTE, what))
    } else if gap > LONGEST_GAP {
        let what = format!(
            "{gap} minutes since line {}: rows may lie {LONGEST_GAP} apart at most; fit the parts on their own",
            before.line
        );
        Err(at(row.line, MINUTE, what))
    } else {
        Ok(())
    }
}

fn check_number(rows: &[Row], last: usize) -> Result<(), BadFile> {
    let air = rows.iter().filter(|r| r.air.is_some()).count();
    let product = rows.iter().filter(|r| r.product.is_some()).count();
    for (index, found, least) in [(AIR, air, LEAST_AIR), (PRODUCT, product, LEAST_PRODUCT)] {
        if found < least {
            let what = format!(
                "the file ends with {found} readings of {}, and the model needs {least} at least: log for longer",
                HEADER[index]
            );
            return Err(at(last, index, what));
        }
    }
    Ok(())
}
