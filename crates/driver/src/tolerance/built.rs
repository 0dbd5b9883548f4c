//! A system as it was built: errors in, the spoilt trains of every state out.

use merit_function::block::Bounds;
use surface_model::paraxial::ParaxialRay;
use surface_model::pupil::{PupilFault, PupilWavefront};
use surface_model::spoilt::SpoiltTrain;
use surface_model::train::Train;

use super::bench::Bench;
use super::effect::Effect;

/// One error in the unit of its kind: a number alone (the second is unused), a vector across the
/// axis, or a size and a direction in rad.
pub(crate) type Error = [f64; 2];

/// The errors of one system, sorted by what they are about. Angles in rad.
#[derive(Debug, Clone)]
pub(crate) struct Built {
    /// Per surface, what its curvature is multiplied by, and what is added.
    curvature: Vec<(f64, f64)>,
    irregularity: Vec<Error>,
    wedge: Vec<Error>,
    /// Per medium: index shift, Abbe number in per cent.
    glass: Vec<[f64; 2]>,
    element_decentre: Vec<Error>,
    element_tilt: Vec<Error>,
    group_decentre: Vec<Error>,
    group_tilt: Vec<Error>,
    /// The packed variables with the errors of glass and air.
    pub(crate) packed: Vec<f64>,
    /// Packed variables that are set wrong, each time.
    pub(crate) settings: Vec<(usize, f64)>,
}

/// How the mounts of groups that rotate are taken.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Mounts {
    /// As the file says.
    AsGiven,
    /// All slide.
    Sliding,
}

/// A state of a built system.
#[derive(Debug, Clone)]
pub(crate) struct BuiltState {
    /// One a wavelength.
    spoilt: Vec<SpoiltTrain>,
    /// The first of them without what is not round.
    round: Train,
}

/// What a state of a built system is like.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct StateNumbers {
    /// The worst of the wavelengths.
    pub(crate) wavefront_rms_waves: f64,
    pub(crate) ratio_percent: f64,
    pub(crate) exit_slope_urad: f64,
    pub(crate) boresight_urad: [f64; 2],
}

/// Why a state cannot be measured.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub(crate) enum StateFault {
    #[error(transparent)]
    Pupil(#[from] PupilFault),
    #[error("the first-order numbers overflow")]
    Overflow,
}

/// Buffers of a measurement.
#[derive(Debug, Default)]
pub(crate) struct Gauges {
    wavefront: PupilWavefront,
    paraxial: ParaxialRay,
    /// What was measured, in the order of the bench.
    pub(crate) row: Vec<f64>,
}

impl Bench<'_> {
    /// A system with these errors, one an item.
    pub(crate) fn build(&self, errors: &[Error]) -> Built {
        let (surfaces, groups) = (self.elements.last().map_or(0, |e| e.end), self.groups.len());
        let mut built = Built {
            curvature: vec![(1.0, 0.0); surfaces],
            irregularity: vec![[0.0; 2]; surfaces],
            wedge: vec![[0.0; 2]; surfaces],
            glass: vec![[0.0; 2]; surfaces + 1],
            element_decentre: vec![[0.0; 2]; self.elements.len()],
            element_tilt: vec![[0.0; 2]; self.elements.len()],
            group_decentre: vec![[0.0; 2]; groups],
            group_tilt: vec![[0.0; 2]; groups],
            packed: self.variables.start().to_vec(),
            settings: Vec::new(),
        };
        for (item, &error) in self.items.iter().zip(errors) {
            built.suffer(item.effect, error);
        }
        built
    }

    /// A state of a built system, its spacings as designed.
    pub(crate) fn state_of(&self, built: &Built, k: usize, mounts: Mounts) -> BuiltState {
        let state = &self.states[k];
        let gaps = self.gaps(k, &built.packed);
        let made = state.trains.iter().map(|train| self.made(built, train, &gaps));
        let trains: Vec<Train> = made.collect();
        let still = vec![0.0; state.turns.len()];
        let turns = if mounts == Mounts::AsGiven { &state.turns } else { &still };
        let spoilt = trains.iter().map(|train| self.mounted(built, train, turns)).collect();
        let round = trains.into_iter().next().unwrap_or_else(|| state.trains[0].clone());
        BuiltState { spoilt, round }
    }

    /// A train with its errors of shape, length and glass.
    fn made(&self, built: &Built, train: &Train, gaps: &[f64]) -> Train {
        let mut made = train.clone();
        for (surface, &(times, plus)) in made.surfaces_mut().iter_mut().zip(&built.curvature) {
            surface.curvature = surface.curvature * times + plus;
        }
        made.gaps_mut().copy_from_slice(gaps);
        for (medium, &[shift, abbe]) in built.glass.iter().enumerate() {
            if shift != 0.0 || abbe != 0.0 {
                let spread = 1.0 / (1.0 + 0.01 * abbe) - 1.0;
                let index = train.indices()[medium] + shift;
                made.set_index(medium, index + self.dispersion(train, medium) * spread);
            }
        }
        made
    }

    /// A train with its errors of form and mounting: wedges about the vertices, then elements and
    /// groups about their middles.
    fn mounted(&self, built: &Built, train: &Train, turns: &[f64]) -> SpoiltTrain {
        let mut spoilt = SpoiltTrain::of(train);
        let drawn = spoilt.drawn_at_mm().to_vec();
        let surfaces = spoilt.surfaces_mut();
        for (group, range) in self.groups.iter().enumerate() {
            let (sin, cos) = turns[group].sin_cos();
            let turned = |[x, y]: Error| [x * cos - y * sin, x * sin + y * cos];
            for surface in range.clone() {
                let spoilt = &mut surfaces[surface];
                let [fringes, at_rad] = built.irregularity[surface];
                spoilt.irregularity_fringes = fringes;
                spoilt.irregularity_at_rad = at_rad + turns[group];
                spoilt.pose = spoilt.pose.turned_at_vertex(turned(built.wedge[surface]));
            }
            let middle =
                |part: &std::ops::Range<usize>| 0.5 * (drawn[part.start] + drawn[part.end - 1]);
            let mine = |part: &&std::ops::Range<usize>| range.contains(&part.start);
            let elements = self.elements.iter().enumerate();
            for (element, part) in elements.filter(|(_, part)| mine(part)) {
                let pivot_mm = middle(part);
                for surface in part.clone() {
                    let pose = surfaces[surface].pose;
                    surfaces[surface].pose = pose
                        .turned(turned(built.element_tilt[element]), pivot_mm)
                        .decentred(turned(built.element_decentre[element]));
                }
            }
            let pivot_mm = middle(range);
            for surface in range.clone() {
                let pose = surfaces[surface].pose;
                surfaces[surface].pose = pose
                    .turned(turned(built.group_tilt[group]), pivot_mm)
                    .decentred(turned(built.group_decentre[group]));
            }
        }
        spoilt
    }

    /// Moves a state's groups to these values of the packed variables.
    pub(crate) fn move_to(&self, k: usize, packed: &[f64], state: &mut BuiltState) {
        let gaps = self.gaps(k, packed);
        state.round.gaps_mut().copy_from_slice(&gaps);
        for spoilt in &mut state.spoilt {
            spoilt.set_gaps(&gaps);
        }
    }

    /// Measures a state exactly.
    pub(crate) fn measure(
        &self,
        k: usize,
        built: &BuiltState,
        gauges: &mut Gauges,
    ) -> Result<StateNumbers, StateFault> {
        let state = &self.states[k];
        gauges.row.clear();
        let (mut rms_waves, mut boresight_urad) = (0.0_f64, None);
        for (spoilt, waves) in built.spoilt.iter().zip(&state.waves_per_mm) {
            self.pupil.trace(spoilt, &mut gauges.wavefront)?;
            rms_waves = rms_waves.max(waves * gauges.wavefront.rms_mm(&self.pupil));
            boresight_urad.get_or_insert(gauges.wavefront.boresight_rad().map(|rad| 1e6 * rad));
            let rays = gauges.wavefront.rest_mm().iter().zip(&self.roots);
            gauges.row.extend(rays.map(|(rest, root)| root * waves * rest));
        }
        gauges.paraxial.trace(&built.round, 1.0, 0.0).map_err(|_| StateFault::Overflow)?;
        let ratio = gauges.paraxial.ratio().ok_or(StateFault::Overflow)?;
        let slope = gauges.paraxial.exit_slope().ok_or(StateFault::Overflow)?;
        let numbers = StateNumbers {
            wavefront_rms_waves: rms_waves,
            ratio_percent: (ratio / state.ratio_wanted - 1.0) * 100.0,
            exit_slope_urad: slope * 1e6 * self.design.beam.radius_mm(),
            boresight_urad: boresight_urad.unwrap_or_default(),
        };
        gauges.row.extend([numbers.ratio_percent, numbers.exit_slope_urad]);
        let sound = gauges.row.iter().all(|number| number.is_finite());
        if sound { Ok(numbers) } else { Err(StateFault::Overflow) }
    }

    /// The bounds and packed places of what is re-adjusted in a state.
    pub(crate) fn readjusted(&self, k: usize) -> &[(usize, Bounds)] {
        &self.states[k].readjusted
    }
}

impl Built {
    fn suffer(&mut self, effect: Effect, error: Error) {
        let [size, at] = error;
        let rad = error.map(|mrad| 1e-3 * mrad);
        let plus = |vector: &mut Error, by: Error| {
            vector[0] += by[0];
            vector[1] += by[1];
        };
        match effect {
            Effect::RadiusPercent { surface } => {
                self.curvature[surface].0 /= 1.0 + 0.01 * size;
            }
            Effect::RadiusFringes { surface, by } => self.curvature[surface].1 += by * size,
            Effect::Irregularity { surface } => self.irregularity[surface] = [size, at],
            Effect::Length { packed } => self.packed[packed] += size,
            Effect::Setting { packed } => self.settings.push((packed, size)),
            Effect::Index { medium } => self.glass[medium][0] += size,
            Effect::Abbe { medium } => self.glass[medium][1] += size,
            Effect::Wedge { surface } => plus(&mut self.wedge[surface], rad),
            Effect::ElementDecentre { element } => {
                plus(&mut self.element_decentre[element], error);
            }
            Effect::ElementTilt { element } => plus(&mut self.element_tilt[element], rad),
            Effect::GroupDecentre { group } => plus(&mut self.group_decentre[group], error),
            Effect::GroupTilt { group } => plus(&mut self.group_tilt[group], rad),
        }
    }
}

impl StateNumbers {
    /// Length of the boresight, µrad.
    pub(crate) fn off_axis_urad(&self) -> f64 {
        self.boresight_urad[0].hypot(self.boresight_urad[1])
    }
}
