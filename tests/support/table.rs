//! Data files: comma-separated, lines that begin with `#` are remarks, the first other line names the columns.

use std::fmt::Debug;
use std::str::FromStr;

/// A table of `tests/data`, read from its text.
pub(crate) struct Table {
    columns: Vec<&'static str>,
    lines: Vec<Vec<&'static str>>,
}

/// One line of a table.
#[derive(Clone, Copy)]
pub(crate) struct Line<'t> {
    table: &'t Table,
    number: usize,
}

impl Table {
    pub(crate) fn read(text: &'static str) -> Table {
        let mut lines = text
            .lines()
            .filter(|line| !line.starts_with('#'))
            .map(|line| line.split(',').collect::<Vec<_>>());
        let columns = lines.next().expect("a line with the names of the columns");
        let lines: Vec<_> = lines.collect();
        assert!(
            lines.iter().all(|line| line.len() == columns.len()),
            "a line of another length"
        );
        Table { columns, lines }
    }

    pub(crate) fn lines(&self) -> impl Iterator<Item = Line<'_>> {
        (0..self.lines.len()).map(|number| Line {
            table: self,
            number,
        })
    }
}

impl Line<'_> {
    pub(crate) fn text(&self, column: &str) -> &'static str {
        let at = self.table.columns.iter().position(|name| *name == column);
        self.table.lines[self.number][at.expect("a column of this name")]
    }

    pub(crate) fn get<T: FromStr<Err: Debug>>(&self, column: &str) -> T {
        self.text(column).parse().expect("a number")
    }
}
