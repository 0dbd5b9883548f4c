//! Layouts of a brief as a table.

use driver::start::{Layout, Ranked, Ranking, Sign, Starts};

use crate::start::narrowing;

use super::number::{NONE, as_written, counted, fixed, significant};
use super::table::{Column, Table};
use super::{WIDTH, paragraph, sections};

/// The ranking of a brief's layouts: its title, a table, and what the numbers are.
#[must_use]
pub fn layouts(starts: &Starts, ranking: &Ranking) -> String {
    sections([heading(starts), table(ranking), legend(), searched(ranking)])
}

fn heading(starts: &Starts) -> String {
    let brief = starts.brief();
    let ratios: Vec<String> = brief.ratios.iter().map(|ratio| as_written(ratio.ratio)).collect();
    let title = &brief.written().title;
    let about = format!(
        "Layouts for {} ({}) in a tube of {} mm, beam {} mm (1/e²).",
        counted(ratios.len(), "ratio"),
        ratios.join(", "),
        as_written(brief.written().housing.track_mm),
        as_written(brief.beam.diameter_mm),
    );
    let narrowing = narrowing(starts).unwrap_or_default();
    let lines = [title.as_str(), &about, &narrowing].map(|line| paragraph(line, WIDTH, ""));
    lines.into_iter().filter(|line| !line.is_empty()).collect::<Vec<_>>().join("\n")
}

fn table(ranking: &Ranking) -> String {
    let mut table = Table::new([
        (Column::Right, "no"),
        (Column::Left, "group"),
        (Column::Left, "sign"),
        (Column::Right, "focal\nmm"),
        (Column::Right, "air\nfrom mm"),
        (Column::Right, "to mm"),
        (Column::Right, "travel\nmm"),
        (Column::Right, "rays\nØ mm"),
        (Column::Right, "train\nmm"),
        (Column::Right, "score"),
    ]);
    for (place, ranked) in ranking.best.iter().enumerate() {
        rows(place + 1, &ranked.layout, &mut table);
    }
    table.text()
}

/// Longest name of a group that is told in full, so that the table fits.
const LONGEST_NAME: usize = 12;

fn rows(rank: usize, layout: &Layout, table: &mut Table) {
    let airs = layout.spacing_ranges_mm();
    let (travels, rays) = (layout.travels_mm(), layout.ray_diameters_mm());
    for (g, group) in layout.design.groups.iter().enumerate() {
        let first = |text: String| if g == 0 { text } else { String::new() };
        let still = layout.design.housing.fixed[g];
        let air = |end: fn(&(f64, f64)) -> f64| {
            airs.get(g).map_or_else(String::new, |range| fixed(end(range), 2))
        };
        let name: String = group.name.chars().take(LONGEST_NAME).collect();
        table.row([
            first(rank.to_string()),
            name,
            sign(layout.family.0[g]).to_owned(),
            fixed(layout.focal_lengths_mm[g], 2),
            air(|range| range.0),
            air(|range| range.1),
            if still { NONE.to_owned() } else { fixed(travels[g], 2) },
            fixed(rays[g], 2),
            first(fixed(layout.lengths_mm().1, 2)),
            first(significant(layout.score.total, 3)),
        ]);
    }
}

/// The sign of a power, short.
fn sign(sign: Sign) -> &'static str {
    match sign {
        Sign::Positive => "plus",
        Sign::Negative => "minus",
    }
}

fn legend() -> String {
    let text = "Every layout is collimated, at its ratio and inside its limits in every state. \
                Score: the wavefront error that third and fifth order foretell, in units of the \
                goal, with a share for sensitive powers; the smaller the better. Air is that \
                behind the group; the train is told at its longest, first to last vertex.";
    paragraph(text, WIDTH, "")
}

fn searched(ranking: &Ranking) -> String {
    let mut text =
        format!("Of {} points looked at {} have a layout.", ranking.tried, ranking.fitting);
    if let Some((reason, points)) = ranking.refusals.reasons.first() {
        text.push_str(&format!(" Most of the others fail because {reason} ({points})."));
    }
    paragraph(&text, WIDTH, "")
}

/// The remark that a layout's design file bears.
#[must_use]
pub fn note(ranked: &Ranked, rank: usize, seed: u64) -> String {
    format!(
        "First-order layout {rank} (point {} of seed {seed}): {}; a start for optimise, not yet a \
         design.",
        ranked.number,
        ranked.layout.family.in_words()
    )
}
