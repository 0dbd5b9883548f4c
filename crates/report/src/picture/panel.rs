//! A panel: a rectangle that is drawn on, and what panels are put together to.

use svg::Document;
use svg::node::element::{Circle, Group, Line, Path, Polyline, Rectangle, Text};

use super::ink::{FAINT, INK, Stroke, TITLE, TYPE, WORDS};

/// A rectangle that is drawn on; x to the right, y down, in px.
#[derive(Debug, Clone)]
pub(crate) struct Panel {
    /// Width, px.
    pub(crate) width: f64,
    /// Height, px.
    pub(crate) height: f64,
    group: Group,
}

/// Where a word stands to its point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Anchor {
    Start,
    Middle,
    End,
}

/// How a word is written.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Word {
    pub(crate) anchor: Anchor,
    pub(crate) size: f64,
    pub(crate) colour: &'static str,
    pub(crate) bold: bool,
}

impl Word {
    pub(crate) const PLAIN: Self =
        Self { anchor: Anchor::Start, size: WORDS, colour: INK, bold: false };
    pub(crate) const SMALL: Self = Self { size: WORDS - 1.0, colour: FAINT, ..Self::PLAIN };
    pub(crate) const TITLE: Self = Self { size: TITLE, bold: true, ..Self::PLAIN };

    pub(crate) const fn at(self, anchor: Anchor) -> Self {
        Self { anchor, ..self }
    }

    pub(crate) const fn in_colour(self, colour: &'static str) -> Self {
        Self { colour, ..self }
    }
}

/// Roughly how wide a text is, px: as wide as the widest of the types it may be set in.
pub(crate) fn width_of(text: &str, size: f64) -> f64 {
    0.62 * size * text.chars().count() as f64
}

/// A coordinate in hundredths: enough for any print, and no noise in the file.
fn px(value: f64) -> f64 {
    let rounded = (value * 100.0).round() / 100.0;
    if rounded == 0.0 || !rounded.is_finite() { 0.0 } else { rounded }
}

fn points(list: &[[f64; 2]]) -> String {
    let pairs: Vec<String> = list.iter().map(|[x, y]| format!("{},{}", px(*x), px(*y))).collect();
    pairs.join(" ")
}

impl Panel {
    pub(crate) fn new(width: f64, height: f64) -> Self {
        Self { width, height, group: Group::new() }
    }

    fn add(&mut self, node: impl Into<Box<dyn svg::Node>>) {
        let group = std::mem::replace(&mut self.group, Group::new());
        self.group = group.add(node);
    }

    pub(crate) fn line(&mut self, from: [f64; 2], to: [f64; 2], stroke: Stroke) {
        let mut line = Line::new()
            .set("x1", px(from[0]))
            .set("y1", px(from[1]))
            .set("x2", px(to[0]))
            .set("y2", px(to[1]))
            .set("stroke", stroke.colour)
            .set("stroke-width", stroke.width);
        if !stroke.dash.is_empty() {
            line = line.set("stroke-dasharray", stroke.dash);
        }
        self.add(line);
    }

    pub(crate) fn polyline(&mut self, list: &[[f64; 2]], stroke: Stroke) {
        if list.len() < 2 {
            return;
        }
        let mut line = Polyline::new()
            .set("points", points(list))
            .set("fill", "none")
            .set("stroke", stroke.colour)
            .set("stroke-width", stroke.width)
            .set("stroke-linejoin", "round");
        if !stroke.dash.is_empty() {
            line = line.set("stroke-dasharray", stroke.dash);
        }
        self.add(line);
    }

    /// A closed outline, filled translucently.
    pub(crate) fn outline(&mut self, list: &[[f64; 2]], fill: &str, opacity: f64, stroke: Stroke) {
        if list.is_empty() {
            return;
        }
        let path = Path::new()
            .set("d", format!("M{}Z", points(list)))
            .set("fill", fill)
            .set("fill-opacity", opacity)
            .set("stroke", stroke.colour)
            .set("stroke-width", stroke.width)
            .set("stroke-linejoin", "round");
        self.add(path);
    }

    pub(crate) fn dot(&mut self, at: [f64; 2], radius: f64, fill: &str, stroke: Stroke) {
        let dot = Circle::new()
            .set("cx", px(at[0]))
            .set("cy", px(at[1]))
            .set("r", px(radius))
            .set("fill", fill)
            .set("stroke", stroke.colour)
            .set("stroke-width", stroke.width);
        self.add(dot);
    }

    /// A circle around what is drawn already.
    pub(crate) fn ring(&mut self, at: [f64; 2], radius: f64, stroke: Stroke) {
        self.dot(at, radius, "none", stroke);
    }

    pub(crate) fn block(&mut self, at: [f64; 2], size: [f64; 2], fill: &str, opacity: f64) {
        let block = Rectangle::new()
            .set("x", px(at[0]))
            .set("y", px(at[1]))
            .set("width", px(size[0].max(0.0)))
            .set("height", px(size[1].max(0.0)))
            .set("fill", fill)
            .set("fill-opacity", opacity);
        self.add(block);
    }

    pub(crate) fn word(&mut self, at: [f64; 2], text: &str, how: Word) {
        let mut node = Text::new(text)
            .set("x", px(at[0]))
            .set("y", px(at[1]))
            .set("font-size", how.size)
            .set("fill", how.colour);
        match how.anchor {
            Anchor::Start => {}
            Anchor::Middle => node = node.set("text-anchor", "middle"),
            Anchor::End => node = node.set("text-anchor", "end"),
        }
        if how.bold {
            node = node.set("font-weight", 600);
        }
        self.add(node);
    }

    /// Puts another panel on this one.
    pub(crate) fn place(&mut self, at: [f64; 2], panel: Self) {
        let moved = panel.group.set("transform", format!("translate({} {})", px(at[0]), px(at[1])));
        self.add(moved);
    }

    /// Panels one below the other.
    #[must_use]
    pub(crate) fn stack(panels: impl IntoIterator<Item = Self>, gap: f64) -> Self {
        let panels: Vec<Self> = panels.into_iter().collect();
        let width = panels.iter().map(|panel| panel.width).fold(0.0, f64::max);
        let gaps = gap * panels.len().saturating_sub(1) as f64;
        let height = panels.iter().map(|panel| panel.height).sum::<f64>() + gaps;
        let mut whole = Self::new(width, height);
        let mut y = 0.0;
        for panel in panels {
            let height = panel.height;
            whole.place([0.0, y], panel);
            y += height + gap;
        }
        whole
    }

    /// Panels in rows of so many.
    pub(crate) fn grid(panels: Vec<Self>, columns: usize, gap: f64) -> Self {
        let mut rows = Vec::new();
        let mut panels = panels.into_iter().peekable();
        while panels.peek().is_some() {
            let row: Vec<Self> = panels.by_ref().take(columns.max(1)).collect();
            let width: f64 = row.iter().map(|panel| panel.width + gap).sum();
            let height = row.iter().map(|panel| panel.height).fold(0.0, f64::max);
            let mut whole = Self::new(width - gap, height);
            let mut x = 0.0;
            for panel in row {
                let width = panel.width;
                whole.place([x, 0.0], panel);
                x += width + gap;
            }
            rows.push(whole);
        }
        Self::stack(rows, gap)
    }

    fn document(self, margin: f64) -> Document {
        let (width, height) = (px(self.width + 2.0 * margin), px(self.height + 2.0 * margin));
        let back =
            Rectangle::new().set("width", width).set("height", height).set("fill", "#ffffff");
        let mut page = Self::new(width, height);
        page.place([margin, margin], self);
        Document::new()
            .set("viewBox", (0, 0, width, height))
            .set("width", width)
            .set("height", height)
            .set("font-family", TYPE)
            .add(back)
            .add(page.group)
    }

    /// The panel as an SVG file.
    #[must_use]
    pub(crate) fn into_file(self) -> String {
        format!("{}\n", self.document(16.0))
    }

    /// The panel as an SVG element of a page, as wide as the page lets it be, with a name for
    /// those who do not see it.
    #[must_use]
    pub(crate) fn into_element(self, name: &str) -> String {
        let document = self.document(2.0).set("role", "img").set("aria-label", name);
        document.to_string()
    }
}
