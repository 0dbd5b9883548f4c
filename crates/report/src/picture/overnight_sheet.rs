//! The picture of a search: merit against time, and the best design.

use driver::cam::MovementCurve;
use driver::design_file::DesignFile;
use driver::overnight::{Finds, StartEnd};

use super::axis::{Axis, Scale};
use super::ink::{FAINT, Stroke, WORDS};
use super::layout::layout;
use super::panel::{Anchor, Panel, Word, width_of};
use super::sheets::{file_of, heading};
use super::{PICTURE_WIDTH, chart};

/// Draws how the merit fell and where every start ended, and the best design, as SVG.
#[must_use]
pub fn overnight_picture(
    best: &DesignFile,
    curve: Option<&MovementCurve>,
    finds: &Finds,
) -> String {
    let panels = [fall_of_merit(finds, PICTURE_WIDTH), layout(&best.design, curve, PICTURE_WIDTH)];
    file_of(heading(&best.design.title).into_iter().chain(panels))
}

const BEST: &str = "best so far";
const LEFT: f64 = 58.0;
const TOP: f64 = 50.0;
const HEIGHT: f64 = 280.0;
const BOTTOM: f64 = HEIGHT - 38.0;

/// Units of time: name, and from how many of its own on it is used, in seconds.
const TIMES: [(&str, f64, f64); 3] = [("h", 3600.0, 2.0), ("min", 60.0, 2.0), ("s", 1.0, 0.0)];

/// A mark for every start at the time and merit of its end, and a stair along the best so far.
fn fall_of_merit(finds: &Finds, width: f64) -> Panel {
    let (ends, falls) = (finds.ends(), finds.falls());
    let last = ends.iter().map(|end| end.seconds).fold(0.0, f64::max);
    let (unit, unit_s, _) =
        TIMES.into_iter().find(|(_, unit_s, from)| last >= unit_s * from).unwrap_or(TIMES[2]);
    let right = width - width_of(BEST, WORDS) - 24.0;
    let times = ends.iter().map(|end| end.seconds / unit_s).chain([0.0]);
    let merits = ends.iter().map(|end| end.merit).chain(falls.iter().map(|fall| fall.merit));
    let (across, up) = (Axis::linear("time of the run", unit), Axis::logarithmic("merit", ""));
    let x = Scale::holding(&across, times, LEFT, right).roomy(0.01);
    let y = Scale::holding(&up, merits, BOTTOM, TOP).roomy(0.06);
    let mut panel = Panel::new(width, HEIGHT);
    panel.word([0.0, 12.0], "Merit against time, a mark for the end of every start", Word::TITLE);
    panel.word([0.0, 28.0], &up.caption(), Word::PLAIN.in_colour(FAINT));
    let caption = Word::PLAIN.at(Anchor::End).in_colour(FAINT);
    panel.word([right, BOTTOM + 30.0], &across.caption(), caption);
    chart::frame(&mut panel, &x, &y, [LEFT, BOTTOM], right);
    let place = |seconds: f64, merit: f64| [x.place(seconds / unit_s), y.place(merit).min(BOTTOM)];
    for end in &ends {
        mark(&mut panel, place(end.seconds, end.merit), end.limits_kept);
    }
    let mut stair: Vec<[f64; 2]> = Vec::new();
    for fall in &falls {
        let here = place(fall.seconds, fall.merit);
        if let Some(&[_, before]) = stair.last() {
            stair.push([here[0], before]);
        }
        stair.push(here);
    }
    if let Some(&[_, lowest]) = stair.last() {
        stair.push([right, lowest]);
        let name = Word::PLAIN.in_colour(Stroke::series(0).colour);
        panel.word([right + 8.0, lowest + 3.5], BEST, name);
    }
    panel.polyline(&stair, Stroke::series(0));
    key(&mut panel, &ends, finds.starts(), right);
    panel
}

/// A ring where all limits are kept, a cross where one is crossed.
fn mark(panel: &mut Panel, at: [f64; 2], limits_kept: bool) {
    if limits_kept {
        panel.dot(at, 2.4, "#ffffff", Stroke::solid(FAINT, 1.0));
        return;
    }
    chart::cross(panel, at);
}

/// What the marks mean, and whether they are all there are.
fn key(panel: &mut Panel, ends: &[StartEnd], starts: u64, right: f64) {
    let mut words = vec![(Some(true), "every limit kept".to_owned())];
    if ends.iter().any(|end| !end.limits_kept) {
        words.push((Some(false), "a limit crossed".to_owned()));
    }
    if (ends.len() as u64) < starts {
        words.push((None, format!("{} of {starts} starts are marked", ends.len())));
    }
    let mut x = right;
    for (limits_kept, told) in words.iter().rev() {
        x -= width_of(told, WORDS - 1.0);
        panel.word([x, 28.0], told, Word::SMALL);
        if let Some(limits_kept) = limits_kept {
            mark(panel, [x - 8.0, 24.5], *limits_kept);
        }
        x -= 24.0;
    }
}
