//! Layouts of a brief as a document, and what stands against a brief that has none.

use driver::start::{Family, InVain, Layout, Ranked, Ranking, Relaxations, Score, Starts};
use serde::Serialize;

use crate::text::number::{as_written, significant};

/// What `start --json` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StartDocument {
    /// Always `drawtube-start/1`.
    pub format: &'static str,
    /// The brief's title.
    pub title: String,
    /// The seed the points were drawn with.
    pub seed: u64,
    /// Points of the space of layouts that were looked at.
    pub tried: u64,
    /// How many of them have a layout.
    pub fitting: usize,
    /// The best that differ, best first.
    pub layouts: Vec<LayoutEntry>,
    /// Why the other points have none, the commonest reason first.
    pub refused: Vec<RefusalEntry>,
}

/// One layout.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LayoutEntry {
    /// Its place in the list, from 1.
    pub rank: usize,
    /// Number of its point.
    pub number: u64,
    /// Signs of the groups' powers.
    pub family: Family,
    /// Focal lengths of the groups, mm.
    pub focal_lengths_mm: Vec<f64>,
    /// Smallest and largest of each spacing over all states, mm.
    pub spacings_mm: Vec<[f64; 2]>,
    /// Way of each group over all states, mm.
    pub travels_mm: Vec<f64>,
    /// Largest diameter of the traced rays in each group, paraxial, mm.
    pub ray_diameters_mm: Vec<f64>,
    /// First to last vertex, the shortest and the longest of all states, mm.
    pub lengths_mm: [f64; 2],
    /// Glasses by group and element.
    pub glasses: Vec<Vec<Vec<String>>>,
    /// What it is ranked by.
    pub score: Score,
}

/// One reason and how many points it holds for.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct RefusalEntry {
    /// As a clause.
    pub reason: String,
    /// Number of points.
    pub points: usize,
}

impl StartDocument {
    /// The document of a ranking.
    #[must_use]
    pub fn of(starts: &Starts, ranking: &Ranking, seed: u64) -> Self {
        let refused = ranking
            .refusals
            .reasons
            .iter()
            .map(|(reason, points)| RefusalEntry { reason: reason.to_string(), points: *points });
        let layouts = ranking.best.iter().enumerate();
        Self {
            format: "drawtube-start/1",
            title: starts.brief().written().title.clone(),
            seed,
            tried: ranking.tried,
            fitting: ranking.fitting,
            layouts: layouts.map(|(place, ranked)| entry(starts, place + 1, ranked)).collect(),
            refused: refused.collect(),
        }
    }
}

fn entry(starts: &Starts, rank: usize, ranked: &Ranked) -> LayoutEntry {
    let layout = &ranked.layout;
    let (shortest, longest) = layout.lengths_mm();
    LayoutEntry {
        rank,
        number: ranked.number,
        family: layout.family.clone(),
        focal_lengths_mm: layout.focal_lengths_mm.clone(),
        spacings_mm: layout.spacing_ranges_mm().iter().map(|&(low, high)| [low, high]).collect(),
        travels_mm: layout.travels_mm(),
        ray_diameters_mm: layout.ray_diameters_mm(),
        lengths_mm: [shortest, longest],
        glasses: glasses(starts, layout),
        score: layout.score,
    }
}

/// Names of the glasses as the brief has them.
fn glasses(starts: &Starts, layout: &Layout) -> Vec<Vec<Vec<String>>> {
    let allowed = &starts.brief().glasses_allowed;
    let names = |element: &Vec<usize>| {
        element.iter().map(|&glass| allowed[glass].name.clone()).collect::<Vec<_>>()
    };
    layout.glasses.iter().map(|group| group.iter().map(names).collect()).collect()
}

/// What stands against a brief that no layout fits.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Impossible {
    /// What fails.
    pub message: String,
    /// What would have to give.
    pub advice: String,
}

/// How many relaxations are told.
const MOST_RELAXATIONS: usize = 3;

/// Words for a ranking without a layout, and for what relaxing one number of the brief does.
#[must_use]
pub fn impossible(starts: &Starts, ranking: &Ranking, tried: &Relaxations) -> Impossible {
    let share = |points: usize| significant(100.0 * points as f64 / ranking.tried as f64, 2);
    let mut reasons = ranking.refusals.reasons.iter();
    let mut message = format!("no layout fits: all {} looked at fail", ranking.tried);
    if let Some((reason, points)) = reasons.next() {
        message.push_str(&format!("; most ({} %) because {reason}", share(*points)));
    }
    if let Some((reason, points)) = reasons.next() {
        message.push_str(&format!(", then ({} %) because {reason}", share(*points)));
    }
    let mut lines: Vec<String> = short_tube(starts).into_iter().chain(admitting(tried)).collect();
    let in_vain: Vec<String> = tried.in_vain.iter().map(in_vain).collect();
    if !in_vain.is_empty() {
        lines.push(format!("not enough by itself: {}", in_vain.join("; ")));
    }
    lines.extend(narrowing(starts));
    Impossible { message, advice: lines.join("\n  ") }
}

/// What admits a layout, a line each.
fn admitting(tried: &Relaxations) -> Vec<String> {
    let mut lines: Vec<String> = tried
        .admitting
        .iter()
        .take(MOST_RELAXATIONS)
        .enumerate()
        .map(|(place, relaxed)| {
            let front = if place == 0 { "a layout was found with" } else { "or with" };
            format!(
                "{front} {}: {} instead of {} (\"{}\")",
                relaxed.relaxation.what,
                as_written(relaxed.to),
                as_written(relaxed.from),
                relaxed.relaxation.at
            )
        })
        .collect();
    if lines.is_empty() {
        lines.push(
            "no single number of the brief, relaxed up to eightfold, admits one: relax several, \
             or ask for another number of groups"
                .to_owned(),
        );
    }
    lines
}

fn in_vain(in_vain: &InVain) -> String {
    let furthest = as_written(in_vain.furthest);
    match in_vain.relaxation.what.rsplit_once(", ") {
        Some((what, unit)) => format!("{what}, even at {furthest} {unit}"),
        None => format!("{}, even at {furthest}", in_vain.relaxation.what),
    }
}

/// A tube shorter than the beam is wide: metres, most likely.
fn short_tube(starts: &Starts) -> Option<String> {
    let written = starts.brief().written();
    let (track_mm, beam_mm) = (written.housing.track_mm, written.beam.diameter_mm);
    (track_mm < beam_mm).then(|| {
        format!(
            "A tube of {} mm is shorter than the beam is wide: lengths are mm, {} for {} m.",
            as_written(track_mm),
            as_written(1e3 * track_mm),
            as_written(track_mm)
        )
    })
}

/// A ratio below 1 is allowed, and seldom meant.
pub(crate) fn narrowing(starts: &Starts) -> Option<String> {
    let ratios = starts.brief().ratios.iter().map(|ratio| ratio.ratio);
    let narrow =
        ratios.filter(|ratio| ratio.abs() < 1.0).min_by(|a, b| a.abs().total_cmp(&b.abs()));
    narrow.map(|ratio| {
        format!(
            "A ratio below 1 narrows the beam, and makes a pulse stronger: {} is out over in, {} \
             would widen it as much.",
            as_written(ratio),
            significant(1.0 / ratio, 3)
        )
    })
}
