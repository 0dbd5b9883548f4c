//! Layouts of a brief as a document, and what stands against a brief that has none.

use driver::start::{Family, Layout, Ranked, Ranking, Relaxed, Score, Starts};
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

/// Words for a ranking without a layout, and for the relaxations that would admit one.
#[must_use]
pub fn impossible(ranking: &Ranking, relaxed: &[Relaxed]) -> Impossible {
    let share = |points: usize| significant(100.0 * points as f64 / ranking.tried as f64, 2);
    let mut reasons = ranking.refusals.reasons.iter();
    let mut message = format!("no layout fits: all {} looked at fail", ranking.tried);
    if let Some((reason, points)) = reasons.next() {
        message.push_str(&format!("; most ({} %) because {reason}", share(*points)));
    }
    if let Some((reason, points)) = reasons.next() {
        message.push_str(&format!(", then ({} %) because {reason}", share(*points)));
    }
    let lines: Vec<String> = relaxed
        .iter()
        .take(MOST_RELAXATIONS)
        .map(|relaxed| {
            format!(
                "{}: {} instead of {} (\"{}\")",
                relaxed.relaxation.what,
                as_written(relaxed.to),
                as_written(relaxed.from),
                relaxed.relaxation.at
            )
        })
        .collect();
    let advice = match lines.as_slice() {
        [] => "no single number of the brief, relaxed up to eightfold, admits one: relax several, \
               or ask for another number of groups"
            .to_owned(),
        [first] => format!("a layout was found with {first}"),
        [first, rest @ ..] => {
            format!("a layout was found with {first}\n  or with {}", rest.join("\n  or with "))
        }
    };
    Impossible { message, advice }
}
