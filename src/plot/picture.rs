//! SVG text, and the file it goes to.

use std::fmt::Write as _;
use std::format;
use std::fs::OpenOptions;
use std::io::{self, ErrorKind, Write as _};
use std::path::{Path, PathBuf};
use std::string::String;

/// A finished picture.
#[derive(Clone, Debug, PartialEq)]
pub struct Picture {
    width: f64,
    height: f64,
    title: String,
    description: String,
    body: String,
}

/// Why a file was not written.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum WriteError {
    /// There is a file already.
    #[error("{} exists already: name another file, or say that it may be overwritten", .0.display())]
    Exists(PathBuf),
    /// The system refused.
    #[error("cannot write {}: {error}; check the folder and the space left", path.display())]
    Io {
        /// The file.
        path: PathBuf,
        /// What the system said.
        error: io::Error,
    },
}

/// Writes text to a new file, or over an old one where that is wished.
pub(crate) fn write_text(path: &Path, text: &str, overwrite: bool) -> Result<(), WriteError> {
    let mut options = OpenOptions::new();
    options.write(true);
    if overwrite {
        options.create(true).truncate(true);
    } else {
        options.create_new(true);
    }
    let written = options
        .open(path)
        .and_then(|mut file| file.write_all(text.as_bytes()));
    written.map_err(|error| match error.kind() {
        ErrorKind::AlreadyExists => WriteError::Exists(path.into()),
        _ => WriteError::Io {
            path: path.into(),
            error,
        },
    })
}

impl Picture {
    /// The classes that elements have: `paper` (filled background), `ink` (filled text), `rule` (stroked frame and marks), `grid`
    /// (stroked), `halo` (stroked around text, in the colour of the paper), and for series and rules `s0` to `s6` (stroked) and
    /// `f0` to `f6` (filled). Parts with fixed colours of their own, such as the cells of a heat map, have none.
    pub const CLASSES: &'static str = "paper ink rule grid halo s0..s6 f0..f6";

    /// An empty picture. `description` says for those who cannot see it what the picture shows.
    pub(super) fn new(width: f64, height: f64, title: &str, description: &str) -> Self {
        let mut picture = Picture {
            width,
            height,
            title: title.into(),
            description: description.into(),
            body: String::new(),
        };
        picture.element(format_args!(
            r##"<rect class="paper" width="{width}" height="{height}" fill="#ffffff"/>"##
        ));
        picture
    }

    /// What it is called.
    pub fn title(&self) -> &str {
        &self.title
    }

    /// What it shows, in words.
    pub fn description(&self) -> &str {
        &self.description
    }

    /// Width and height in CSS pixels.
    pub fn size(&self) -> (f64, f64) {
        (self.width, self.height)
    }

    /// The SVG text. It has no `id`s, so any number of them may stand in one page.
    pub fn svg(&self) -> String {
        let (w, h) = (self.width, self.height);
        let (title, description) = (escaped(&self.title), escaped(&self.description));
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {w} {h}\" width=\"{w}\" height=\"{h}\" role=\"img\" \
             aria-label=\"{title}. {description}\" font-family=\"'DejaVu Sans',Verdana,sans-serif\">\n<title>{title}</title>\n\
             <desc>{description}</desc>\n{}</svg>\n",
            self.body
        )
    }

    /// Writes the SVG to a new file.
    ///
    /// # Errors
    /// [`WriteError::Exists`] where there is a file already and `overwrite` is false, [`WriteError::Io`] if the system refuses.
    pub fn write(&self, path: impl AsRef<Path>, overwrite: bool) -> Result<(), WriteError> {
        write_text(path.as_ref(), &self.svg(), overwrite)
    }

    /// One element, written as it is.
    pub(super) fn element(&mut self, text: core::fmt::Arguments<'_>) {
        // Writing to a string cannot fail.
        let _ = writeln!(self.body, "{text}");
    }

    pub(super) fn text(&mut self, at: (f64, f64), anchor: Anchor, size: f64, text: &str) {
        self.styled_text(at, anchor, size, "", text);
    }

    /// `style`: further attributes.
    pub(super) fn styled_text(
        &mut self,
        (x, y): (f64, f64),
        anchor: Anchor,
        size: f64,
        style: &str,
        text: &str,
    ) {
        let anchor = match anchor {
            Anchor::Start => "start",
            Anchor::Middle => "middle",
            Anchor::End => "end",
        };
        let text = escaped(text);
        self.element(format_args!(
            r##"<text class="ink" x="{x:.1}" y="{y:.1}" font-size="{size}" text-anchor="{anchor}" fill="#1b1b1b" {style}>{text}</text>"##
        ));
    }

    /// Text with a rim in the colour of the paper, legible across lines.
    pub(super) fn haloed_text(&mut self, at: (f64, f64), anchor: Anchor, size: f64, text: &str) {
        self.element(format_args!(
            r##"<g class="halo" stroke="#ffffff" stroke-width="3" stroke-linejoin="round" paint-order="stroke">"##
        ));
        self.text(at, anchor, size, text);
        self.element(format_args!("</g>"));
    }

    /// A line of the frame's kind.
    pub(super) fn rule(&mut self, from: (f64, f64), to: (f64, f64), width: f64, style: &str) {
        let ((x1, y1), (x2, y2)) = (from, to);
        self.element(format_args!(
            r##"<line class="rule" x1="{x1:.1}" y1="{y1:.1}" x2="{x2:.1}" y2="{y2:.1}" stroke="#444444" stroke-width="{width}" {style}/>"##
        ));
    }

    pub(super) fn grid(&mut self, from: (f64, f64), to: (f64, f64)) {
        let ((x1, y1), (x2, y2)) = (from, to);
        self.element(format_args!(
            r##"<line class="grid" x1="{x1:.1}" y1="{y1:.1}" x2="{x2:.1}" y2="{y2:.1}" stroke="#dedede" stroke-width="0.8"/>"##
        ));
    }
}

/// Which end of a text stands at its place.
#[derive(Clone, Copy)]
pub(super) enum Anchor {
    Start,
    Middle,
    End,
}

/// Text that may stand between tags and in attributes; control characters, which XML forbids, become spaces.
pub(crate) fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            c if c.is_control() || matches!(c, '\u{fffe}' | '\u{ffff}') => out.push(' '),
            c => out.push(c),
        }
    }
    out
}
