//! The tables of what the beam may damage.

use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, Exposure, GhostHazard, StateHazards};

use super::number::{NONE, fixed, fixed_or_dash, significant, significant_or_dash};
use super::table::{Column, Table};
use super::{WIDTH, paragraph, sections, surface_name};

/// What `assess --hazards` prints: every surface, focus and ghost.
#[must_use]
pub fn hazards(file: &DesignFile, assessment: &Assessment) -> String {
    let Some(states) = &assessment.hazards else {
        return paragraph(
            "The file gives neither power_w nor pulse_energy_mj in \"beam\": there is no hazard to \
             tell.",
            WIDTH,
            "",
        );
    };
    sections([
        super::assessment::heading(file),
        surfaces(file, states).text(),
        foci(file, states).text(),
        ghosts(file, states).text(),
        paragraph(EXPLAINED, WIDTH, ""),
        super::warnings(&assessment.warnings),
        cautions(assessment),
    ])
}

/// What `assess` prints of it: the hardest hit, and the ghosts that matter most.
pub(crate) fn summary(file: &DesignFile, assessment: &Assessment) -> String {
    let Some(states) = &assessment.hazards else { return String::new() };
    let note = "Where the way clear of glass is negative, the focus lies inside glass.";
    let note = if states.iter().any(StateHazards::has_ghost_in_glass) { note } else { "" };
    sections([
        hardest(file, states).text(),
        foci(file, states).text(),
        worst_ghosts(file, states).text(),
        note.to_owned(),
    ])
}

/// What must be said wherever power is.
#[must_use]
pub(crate) fn cautions(assessment: &Assessment) -> String {
    assessment.cautions.iter().map(|text| caution(text)).collect::<Vec<_>>().join("\n")
}

/// The first of them: what an account of something else says.
#[must_use]
pub(crate) fn first_caution(assessment: &Assessment) -> String {
    assessment.cautions.first().map_or_else(String::new, |text| caution(text))
}

fn caution(text: &str) -> String {
    paragraph(&format!("caution: {text}"), WIDTH, "  ")
}

const EXPOSURE: [(Column, &str); 4] = [
    (Column::Right, "beam\nmm"),
    (Column::Right, "fluence\nJ/cm²"),
    (Column::Right, "irradiance\nW/cm²"),
    (Column::Right, "of thres-\nhold %"),
];

fn told(exposure: &Exposure) -> [String; 4] {
    [
        significant(exposure.diameter_mm, 3),
        significant_or_dash(exposure.fluence_j_cm2, 3),
        significant_or_dash(exposure.irradiance_w_cm2, 3),
        of_threshold(exposure),
    ]
}

fn of_threshold(exposure: &Exposure) -> String {
    let Some(share) = exposure.of_threshold else { return NONE.to_owned() };
    let mark = if share > 1.0 { "!" } else { "" };
    format!("{}{mark}", significant(100.0 * share, 2))
}

/// How hard light is, for choosing the worst: by threshold where there is one, else by width.
fn hardness(exposure: &Exposure) -> (f64, f64) {
    (exposure.of_threshold.unwrap_or(0.0), -exposure.diameter_mm)
}

/// In each state the surface that is hit hardest.
pub(crate) fn hardest(file: &DesignFile, states: &[StateHazards]) -> Table {
    let heads = [(Column::Left, "state"), (Column::Left, "hardest hit")];
    let mut table = Table::new(heads.into_iter().chain(EXPOSURE));
    for state in states {
        let worst = state.surfaces.iter().max_by(|a, b| {
            let (a, b) = (hardness(&a.exposure), hardness(&b.exposure));
            a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1))
        });
        if let Some(worst) = worst {
            let names = [state.state.clone(), surface_name(file, &worst.at)];
            table.row(names.into_iter().chain(told(&worst.exposure)));
        }
    }
    table
}

/// Every surface of every state.
pub(crate) fn surfaces(file: &DesignFile, states: &[StateHazards]) -> Table {
    let heads = [(Column::Left, "state"), (Column::Left, "surface")];
    let pulse = (Column::Right, "in a pulse\nMW/cm²");
    let mut table = Table::new(heads.into_iter().chain(EXPOSURE).chain([pulse]));
    for state in states {
        for (k, surface) in state.surfaces.iter().enumerate() {
            let name = if k == 0 { state.state.clone() } else { String::new() };
            let pulse = surface.exposure.pulse_irradiance_w_cm2.map(|peak| 1e-6 * peak);
            let names = [name, surface_name(file, &surface.at)];
            let cells = names.into_iter().chain(told(&surface.exposure));
            table.row(cells.chain([significant_or_dash(pulse, 3)]));
        }
    }
    table
}

/// Every focus inside the design.
pub(crate) fn foci(file: &DesignFile, states: &[StateHazards]) -> Table {
    let heads = [
        (Column::Left, "state"),
        (Column::Left, "internal\nfocus behind"),
        (Column::Right, "by mm"),
        (Column::Left, "in"),
    ];
    let mut table = Table::new(heads.into_iter().chain(EXPOSURE));
    for state in states {
        for focus in &state.internal_foci {
            let place = [
                state.state.clone(),
                surface_name(file, &focus.behind),
                fixed(focus.from_surface_mm, 2),
                medium(focus.in_glass),
            ];
            table.row(place.into_iter().chain(told(&focus.exposure)));
        }
    }
    table
}

fn medium(in_glass: bool) -> String {
    (if in_glass { "glass" } else { "air" }).to_owned()
}

/// What a laser hits with: the peak that is told where there is room for one.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Dose {
    /// Pulses: fluence.
    Pulsed,
    /// No pulse energy is given: irradiance.
    Steady,
}

impl Dose {
    fn of(states: &[StateHazards]) -> Self {
        let mut surfaces = states.iter().flat_map(|state| &state.surfaces);
        let pulsed = surfaces.any(|surface| surface.exposure.fluence_j_cm2.is_some());
        if pulsed { Self::Pulsed } else { Self::Steady }
    }

    fn peak(self, exposure: &Exposure) -> Option<f64> {
        match self {
            Self::Pulsed => exposure.fluence_j_cm2,
            Self::Steady => exposure.irradiance_w_cm2,
        }
    }
}

fn ghost_heads(dose: Dose) -> [(Column, &'static str); 8] {
    let there = match dose {
        Dose::Pulsed => "fluence\nthere\nJ/cm²",
        Dose::Steady => "irradiance\nthere\nW/cm²",
    };
    [
        (Column::Left, "state"),
        (Column::Left, "ghost reflected\nat"),
        (Column::Right, "share\n%"),
        (Column::Right, "focus\nclear of\nglass mm"),
        (Column::Right, "narrowest\non glass\nmm"),
        (Column::Right, there),
        (Column::Right, "of thres-\nhold %"),
        (Column::Right, "into\nlaser\nppm"),
    ]
}

fn ghost_row(file: &DesignFile, name: String, ghost: &GhostHazard, dose: Dose) -> [String; 8] {
    let at = ghost.reflected_at.iter().map(|at| surface_name(file, at)).collect::<Vec<_>>();
    let hardest = ghost.hardest_on_glass.as_ref();
    [
        name,
        at.join(",\n"),
        significant(100.0 * ghost.share, 2),
        fixed_or_dash(ghost.clearance_mm, 2),
        significant_or_dash(hardest.map(|exposure| exposure.diameter_mm), 2),
        significant_or_dash(hardest.and_then(|exposure| dose.peak(exposure)), 2),
        hardest.map_or_else(|| NONE.to_owned(), of_threshold),
        significant_or_dash(ghost.into_laser.map(|share| 1e6 * share), 2),
    ]
}

/// In each state the ghost that hits glass hardest, the one with a focus nearest to glass, and the
/// one that couples best into the laser.
pub(crate) fn worst_ghosts(file: &DesignFile, states: &[StateHazards]) -> Table {
    let dose = Dose::of(states);
    let mut table = Table::new(ghost_heads(dose));
    for state in states {
        let by = |of: &dyn Fn(&GhostHazard) -> Option<f64>| {
            let told = state.ghosts.iter().enumerate().filter_map(|(i, g)| Some((i, of(g)?)));
            told.max_by(|a, b| a.1.total_cmp(&b.1)).map(|(i, _)| i)
        };
        let hits = by(&|ghost| {
            let exposure = ghost.hardest_on_glass.as_ref()?;
            exposure.of_threshold.or(exposure.fluence_j_cm2).or(exposure.irradiance_w_cm2)
        });
        let nearest = by(&|ghost| ghost.clearance_mm.map(|clearance| -clearance));
        let back = by(&|ghost| ghost.into_laser);
        let mut chosen: Vec<usize> = [hits, nearest, back].into_iter().flatten().collect();
        chosen.sort_unstable();
        chosen.dedup();
        for (k, &i) in chosen.iter().enumerate() {
            let name = if k == 0 { state.state.clone() } else { String::new() };
            table.row(ghost_row(file, name, &state.ghosts[i], dose));
        }
    }
    table
}

/// Every ghost, with the place of its focus nearest to glass.
pub(crate) fn ghosts(file: &DesignFile, states: &[StateHazards]) -> Table {
    let hardest = |ghost: &GhostHazard| ghost.hardest_on_glass?.of_threshold;
    let judged = states.iter().flat_map(|state| &state.ghosts).any(|g| hardest(g).is_some());
    let dose = Dose::of(states);
    let on_glass = match dose {
        _ if judged => "of thres-\nhold %",
        Dose::Pulsed => "on glass\nJ/cm²",
        Dose::Steady => "on glass\nW/cm²",
    };
    let mut table = Table::new([
        (Column::Left, "state"),
        (Column::Left, "ghost re-\nflected at"),
        (Column::Right, "share\n%"),
        (Column::Left, "focus\nafter"),
        (Column::Right, "by mm"),
        (Column::Right, "clear of\nglass mm"),
        (Column::Right, on_glass),
        (Column::Right, "into\nlaser\nppm"),
    ]);
    for state in states {
        for (k, ghost) in state.ghosts.iter().enumerate() {
            let name = if k == 0 { state.state.clone() } else { String::new() };
            let [name, at, share, _, _, peak, of_threshold, into_laser] =
                ghost_row(file, name, ghost, dose);
            let nearest = ghost.foci.iter();
            let nearest = nearest.min_by(|a, b| a.clearance_mm.total_cmp(&b.clearance_mm));
            let focus = nearest.map_or_else(
                || [NONE.to_owned(), NONE.to_owned(), NONE.to_owned()],
                |focus| {
                    [
                        surface_name(file, &focus.after),
                        fixed(focus.from_surface_mm, 2),
                        fixed(focus.clearance_mm, 2),
                    ]
                },
            );
            let cells = [name, at, share].into_iter().chain(focus);
            let on_glass = if judged { of_threshold } else { peak };
            table.row(cells.chain([on_glass, into_laser]));
        }
    }
    table
}

/// What the numbers of hazards are.
pub(crate) const EXPLAINED: &str = "Peak values of a Gaussian cross-section, 2E/(πw²) and 2P/(πw²), at the first wavelength. A \
     ghost's share is at most what it says: what other surfaces take away is left out. Where the \
     way clear of glass is negative, the focus lies inside glass; \"by\" is how far behind the surface it left last, \
     negative on the way back. \"Into laser\" is what couples back into the laser's own mode, for a \
     beam with M² of 1 that is perfectly aligned.";
