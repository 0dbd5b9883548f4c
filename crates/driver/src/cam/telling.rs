//! What is told of each point of a curve, and of each group over all of it.

use merit_function::assessment::Assessment;
use merit_function::movement::{Point, Slide};
use surface_model::design::{Design, Group};

use super::document::{CurvePoint, GroupAtRatio, GroupWay, Part};
use super::exit::Exit;
use super::settings::CamSettings;
use super::stations::Station;

/// Puts together what is told of each point.
pub(super) struct Teller<'a> {
    pub(super) design: &'a Design,
    pub(super) slide: &'a Slide,
    pub(super) settings: &'a CamSettings,
    /// Smallest and largest ratio.
    pub(super) ends: [f64; 2],
    /// How the beam should leave.
    pub(super) exit: Exit,
}

impl Teller<'_> {
    pub(super) fn point(
        &self,
        station: &Station,
        point: &Point,
        assessment: &Assessment,
        k: usize,
    ) -> CurvePoint {
        let [low, high] = self.ends;
        let barrel = self.settings.barrel;
        let positions = self.slide.positions_mm(&point.moving_mm);
        let by_position = self.slide.by_position(&point.held.collimation_by_spacing);
        let moving = self.slide.moving();
        let groups = self.design.groups.iter().enumerate().map(|(g, group)| {
            let place = moving.iter().position(|&other| other == g);
            let slope = place.map_or(0.0, |place| point.slopes_mm[place]);
            GroupAtRatio {
                name: group.name.clone(),
                position_mm: positions[g],
                slope_mm_per_ratio: slope,
                collimation_urad_per_um: by_position[g] * 1e3,
                groove: barrel.filter(|_| place.is_some()).map(|b| b.groove(slope, low, high)),
            }
        });
        let state = &assessment.states[k];
        CurvePoint {
            ratio: station.ratio,
            state: station.state.map(|k| self.design.states[k].name.clone()),
            barrel_deg: barrel.map(|barrel| barrel.turned_deg(station.ratio, low, high)),
            groups: groups.collect(),
            spacings_mm: state.spacings_mm.clone(),
            collimation_urad: point.held.collimation_rad * 1e6,
            ratio_error_percent: state.ratio_error_percent,
            exit_slope_urad: state.exit_slope_urad,
            // A ray at the height h comes to the focus with the slope −h V.
            paraxial_off_urad: state.exit_slope_urad.zip(state.ratio).map(|(slope, ratio)| {
                let height_mm = ratio * self.design.beam.radius_mm();
                slope + 1e6 * height_mm * self.exit.vergence_per_mm()
            }),
            exit_focus_m: state.exit_focus_m,
            wavefront: state.wavefront.clone(),
        }
    }

    pub(super) fn ways(&self, fine: &[CurvePoint], guided: &[usize]) -> Vec<GroupWay> {
        let way = |(g, group): (usize, &Group)| {
            let at = fine.iter().map(|point| &point.groups[g]);
            let (mut low, mut high, mut steepest) = (f64::INFINITY, f64::NEG_INFINITY, 0.0_f64);
            for place in at {
                low = low.min(place.position_mm);
                high = high.max(place.position_mm);
                steepest = steepest.max(place.slope_mm_per_ratio.abs());
            }
            GroupWay {
                name: group.name.clone(),
                part: if !self.slide.moving().contains(&g) {
                    Part::Still
                } else if guided.contains(&g) {
                    Part::Guided
                } else {
                    Part::Solved
                },
                from_to_mm: [low, high],
                travel_mm: high - low,
                steepest_mm_per_ratio: steepest,
            }
        };
        self.design.groups.iter().enumerate().map(way).collect()
    }
}
