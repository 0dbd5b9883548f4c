//! The ratios that are looked at: those of the designed states, and between them.

use surface_model::design::Design;

use super::error::CamError;
use super::settings::CamSettings;

/// At least so many ratios are looked at on the whole way, told or not.
const LOOKED_AT: f64 = 200.0;
/// Ratios nearer than this part of the way are one.
const SAME: f64 = 1e-9;

/// A ratio on the way.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Station {
    pub(super) ratio: f64,
    /// The designed state that stands here.
    pub(super) state: Option<usize>,
    /// Whether it is told, and not only looked at.
    pub(super) told: bool,
}

/// Every ratio that is looked at, ascending.
///
/// # Errors
/// Too many are asked for.
pub(super) fn stations(
    design: &Design,
    knots: &[usize],
    settings: &CamSettings,
) -> Result<Vec<Station>, CamError> {
    let mut stations: Vec<Station> = knots
        .iter()
        .map(|&k| Station { ratio: design.states[k].ratio, state: Some(k), told: true })
        .collect();
    let (low, high) = (stations[0].ratio, stations[stations.len() - 1].ratio);
    let told = settings.between(low, high)?;
    stations.extend(told.into_iter().map(|ratio| Station { ratio, state: None, told: true }));
    // A designed state comes before another station of its ratio, and stands for it.
    stations.sort_by(|a, b| a.ratio.total_cmp(&b.ratio).then(b.state.cmp(&a.state)));
    stations.dedup_by(|b, a| {
        let same = b.ratio - a.ratio <= SAME * (high - low);
        if same && a.state.is_none() && b.state.is_some() {
            *a = *b;
        }
        same
    });
    let mut all = Vec::new();
    for pair in stations.windows(2) {
        all.push(pair[0]);
        let gap = pair[1].ratio - pair[0].ratio;
        let parts = (LOOKED_AT * gap / (high - low)).ceil().max(1.0);
        let inner = (1..parts as usize).map(|i| Station {
            ratio: pair[0].ratio + gap * i as f64 / parts,
            state: None,
            told: false,
        });
        all.extend(inner);
    }
    all.extend(stations.last());
    Ok(all)
}
