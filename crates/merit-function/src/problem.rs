//! The merit function as a least-squares problem in blocks: residuals, block Jacobian, limits.
//!
//! For a state of weight v, each goal that is present gives residuals whose squares add up to its
//! share of the merit:
//!
//! ```text
//! wavefront   √v/within · √wⱼ (Wⱼ − Σ wᵢWᵢ)   one a ray j and wavelength, W in waves
//! ```
//!
//! with wⱼ the share of the beam's power that ray stands for; ratio and exit slope in
//! `paraxial_rows`; those about the real beam in `beam_rows`; the wavefront of a beam that should
//! come to a focus in `focus_rows`.

mod along;

use surface_model::bundle::Bundle;
use surface_model::design::Design;
use surface_model::glass::GlassError;
use surface_model::quadrature::{BeamSample, beam_sample};
use surface_model::temperature::TemperatureError;
use surface_model::train::Train;

use crate::beam_rows::BeamRows;
use crate::block::{BlockProblem, BlockShape, Bounds, Linearisation, StateBlock};
use crate::climates::Climate;
use crate::fault::EvaluationFault;
use crate::focus_rows::FocusFan;
use crate::limit_evaluation::LimitEvaluator;
use crate::paraxial_rows::ParaxialRows;
use crate::ray_weights::RayWeights;
use crate::state_optics::StateOptics;
use crate::variables::Variables;
use crate::wishes::Wishes;

/// Rays from the axis to the edge of the beam, if nothing else is asked for.
pub const RAYS: usize = 6;

/// The traced part of the beam.
#[derive(Debug, Clone, Copy)]
struct TracedPart {
    radius_mm: f64,
    reach: f64,
    rays: usize,
}

impl TracedPart {
    fn sample(self, fraction: f64) -> BeamSample {
        beam_sample(self.radius_mm, self.reach * fraction, self.rays)
    }
}

/// A design's merit function over its variables.
#[derive(Debug)]
pub struct MeritFunction {
    variables: Variables,
    shape: BlockShape,
    states: Vec<StateOptics>,
    /// Every state's train at every wavelength: what the bundle traces.
    trains: Vec<Train>,
    /// Per train of the bundle, its state and wavelength in nm.
    traced_in: Vec<(usize, f64)>,
    beam: TracedPart,
    sample: BeamSample,
    weights: RayWeights,
    pub(crate) limit_rows: LimitEvaluator,
    bundle: Bundle,
    paraxial_rows: ParaxialRows,
    beam_rows: BeamRows,
    /// The same goals at other temperatures; their rows follow a state's own.
    climates: Vec<Climate>,
    /// Per state, the number of its rows at 20 °C.
    rows_here: Vec<usize>,
    paths: Vec<f64>,
}

impl MeritFunction {
    /// The merit of `design` as a function of `variables`, with `rays` rays across the beam.
    ///
    /// # Errors
    /// A glass is not known at a wavelength.
    pub fn new(
        design: &Design,
        wishes: &Wishes,
        variables: Variables,
        rays: usize,
    ) -> Result<Self, GlassError> {
        let limit_rows = LimitEvaluator::of(design, &wishes.limits, &variables)?;
        let mut states = Vec::with_capacity(design.states.len());
        let (mut trains, mut traced_in) = (Vec::new(), Vec::new());
        for (k, goals) in (0..design.states.len()).zip(&wishes.states) {
            let state = StateOptics::new(design, k, *goals, &variables, &mut trains)?;
            let wavelengths = state.bundled.clone().zip(&state.wavelengths_nm);
            traced_in.extend(wavelengths.map(|(_, &nm)| (k, nm)));
            states.push(state);
        }
        let rows_here: Vec<usize> = states.iter().map(|state| state.rows(rays)).collect();
        let (radius_mm, reach) = (design.beam.radius_mm(), design.beam.traced_to);
        let beam = TracedPart { radius_mm, reach, rays };
        let sample = beam.sample(1.0);
        let mut bundle = Bundle::new();
        bundle.load(&trains, &sample.heights_mm);
        Ok(Self {
            climates: Vec::new(),
            shape: variables.shape(rows_here.clone()),
            rows_here,
            paraxial_rows: ParaxialRows::new(radius_mm, variables.quantities()),
            beam_rows: BeamRows::default(),
            variables,
            states,
            paths: vec![0.0; rays * trains.len()],
            trains,
            traced_in,
            beam,
            weights: RayWeights::new(&sample.weights),
            sample,
            limit_rows,
            bundle,
        })
    }

    /// Adds the goals at every other temperature that `wishes` names, of the same design.
    ///
    /// # Errors
    /// Something does not say how it changes with temperature.
    pub fn with_temperatures(
        mut self,
        design: &Design,
        wishes: &Wishes,
    ) -> Result<Self, TemperatureError> {
        self.climates = Climate::all(design, wishes, &self.variables, self.beam.rays)?;
        for climate in &self.climates {
            for (rows, more) in self.shape.rows.iter_mut().zip(&climate.shape().rows) {
                *rows += more;
            }
        }
        Ok(self)
    }

    /// The variables.
    #[must_use]
    pub fn variables(&self) -> &Variables {
        &self.variables
    }

    /// Traces only the inner `fraction` (0 to 1) of the beam from now on, so that a start in
    /// which outer rays fail can be brought in.
    pub fn set_aperture(&mut self, fraction: f64) {
        self.sample = self.beam.sample(fraction);
        self.weights = RayWeights::new(&self.sample.weights);
        self.bundle.load(&self.trains, &self.sample.heights_mm);
        self.limit_rows.set_edge_mm(self.beam.radius_mm * self.beam.reach * fraction);
        self.limit_rows.set_aperture_of_the_way(fraction);
        for climate in &mut self.climates {
            climate.set_aperture(fraction);
        }
    }

    /// Whether limits along the way between the states are looked at from now on, or count as kept,
    /// so that a start can be brought to where there is a way.
    pub fn look_at_the_way(&mut self, looked_at: bool) {
        self.limit_rows.look_at_the_way(looked_at);
    }

    /// Whether limits on ghosts are looked at from now on, or count as kept.
    pub fn look_at_ghosts(&mut self, looked_at: bool) {
        self.limit_rows.look_at_ghosts(looked_at);
    }

    /// Keeps the outermost ray from an internal focus too, where one is forbidden. Rows about the
    /// paraxial ray do in all but strongly aberrated designs, and cost less.
    pub fn keep_the_edge_ray_from_a_focus(&mut self) {
        self.limit_rows.keep_the_edge_ray_from_a_focus();
    }

    /// Brings every train to these values of the variables. Bounds keep spheres within reach of
    /// their clear diameter, but cannot do so where a conic constant changes too.
    fn place(&mut self, variables: &[f64]) -> Result<(), EvaluationFault> {
        let quantities = self.variables.quantities();
        for (k, state) in self.states.iter_mut().enumerate() {
            for binding in self.variables.bindings(k) {
                let mut value = binding.offset;
                for &(column, factor) in &binding.terms {
                    value += factor * self.variables.value(variables, k, column);
                }
                let quantity = quantities.at(binding.quantity);
                state.train.set(quantity, value);
                // The bundle's glass is set by the first state for all.
                let trains = if quantity.is_shape() {
                    0..usize::from(k == 0)
                } else {
                    state.bundled.clone()
                };
                for train in &mut state.focused {
                    train.set(quantity, value);
                }
                for train in trains {
                    self.bundle.set_quantity(train, quantity, value);
                }
            }
        }
        if self.variables.quantities().shapes().any() { self.reach() } else { Ok(()) }
    }

    /// Whether every surface reaches its clear diameter; all trains have the same surfaces.
    fn reach(&self) -> Result<(), EvaluationFault> {
        let surfaces = self.states.first().map_or(&[][..], |state| state.train.surfaces());
        match surfaces.iter().position(|surface| surface.sag(surface.semi_diameter).is_none()) {
            Some(surface) => Err(EvaluationFault::Edge { surface }),
            None => Ok(()),
        }
    }

    /// Traces every state's rays; with `kept`, so that they can be differentiated.
    fn trace(&mut self, kept: bool) -> Result<(), EvaluationFault> {
        let traced = if kept {
            self.bundle.trace_kept(&mut self.paths)
        } else {
            self.bundle.trace(&mut self.paths)
        };
        traced.map_err(|failed| {
            let height_mm = self.sample.heights_mm[failed.ray];
            let (state, nm) = self.traced_in[failed.train];
            EvaluationFault::ray(&self.states[state].name, nm, height_mm, failed.fault)
        })
    }

    /// Residuals of one state, whose rays are traced. With `block`, its Jacobian too.
    fn state(
        &mut self,
        k: usize,
        residuals: &mut [f64],
        mut block: Option<&mut StateBlock>,
    ) -> Result<(), EvaluationFault> {
        let state = &self.states[k];
        let root_weight = state.goals.weight.sqrt();
        let rays = self.beam.rays;
        let within = state.goals.wavefront_rms_waves.unwrap_or(1.0);
        let mut row = 0;
        for (train, &nm) in state.bundled.clone().zip(&state.wavelengths_nm) {
            let scale = root_weight / within * 1e6 / nm;
            let paths = &self.paths[train * rays..][..rays];
            self.weights.residuals(paths, scale, &mut residuals[row..row + rays]);
            if let Some(block) = block.as_deref_mut() {
                let from = (&self.bundle, train);
                let rows = row..row + rays;
                let shared = (rows.clone(), &mut block.by_shared);
                self.weights.columns(from, &state.by_shared, scale, shared);
                self.weights.columns(from, &state.by_own, scale, (rows, &mut block.by_own));
            }
            row += rays;
        }
        if !state.focused.is_empty() {
            row += self.focus_rows(k, residuals, block.as_deref_mut())?;
        }
        let beam_rows = state.goals.of_the_real_beam();
        let (paraxial, beam) = residuals.split_at_mut(residuals.len() - beam_rows);
        let quantities = self.variables.quantities();
        if beam_rows > 0 {
            let first = paraxial.len();
            self.beam_rows.evaluate(state, beam, quantities, first, block.as_deref_mut())?;
        }
        self.paraxial_rows.evaluate(state, &mut paraxial[row..], quantities, row, block)
    }

    /// Residuals of the wavefronts about a focus, from row 0 on; how many there are.
    fn focus_rows(
        &self,
        k: usize,
        residuals: &mut [f64],
        mut block: Option<&mut StateBlock>,
    ) -> Result<usize, EvaluationFault> {
        let state = &self.states[k];
        let mut row = 0;
        for (train, &nm) in state.focused.iter().zip(&state.wavelengths_nm) {
            let fan = FocusFan { state, train, wavelength_nm: nm, sample: &self.sample };
            let shapes = self.variables.quantities().shapes();
            fan.evaluate(&mut residuals[row..], row, shapes, block.as_deref_mut())?;
            row += self.beam.rays;
        }
        Ok(row)
    }
}

impl BlockProblem for MeritFunction {
    type Fault = EvaluationFault;

    fn shape(&self) -> &BlockShape {
        &self.shape
    }

    fn bounds(&self) -> &[Bounds] {
        self.variables.bounds()
    }

    fn residuals(&mut self, variables: &[f64], out: &mut [f64]) -> Result<(), EvaluationFault> {
        self.place(variables)?;
        self.trace(false)?;
        for climate in &mut self.climates {
            climate.evaluate(variables)?;
        }
        let mut rest = out;
        for k in 0..self.states.len() {
            let (own, mut behind) = rest.split_at_mut(self.rows_here[k]);
            self.state(k, own, None)?;
            for climate in &self.climates {
                let warm = climate.residuals(k);
                let (here, next) = behind.split_at_mut(warm.len());
                here.copy_from_slice(warm);
                behind = next;
            }
            rest = behind;
        }
        Ok(())
    }

    fn linearise(
        &mut self,
        variables: &[f64],
        out: &mut Linearisation,
    ) -> Result<(), EvaluationFault> {
        self.place(variables)?;
        self.trace(true)?;
        self.bundle.differentiate(self.variables.quantities().shapes());
        for (k, block) in out.states.iter_mut().enumerate() {
            let mut residuals = std::mem::take(&mut block.residuals);
            let here = &mut residuals.as_mut_slice()[..self.rows_here[k]];
            let done = self.state(k, here, Some(block));
            block.residuals = residuals;
            done?;
        }
        let mut first = self.rows_here.clone();
        for climate in &mut self.climates {
            climate.linearise(variables, &mut first, out)?;
        }
        self.limit_rows.linearise(&self.states, &self.variables, variables, &mut out.limits)
    }

    fn limits(&mut self, variables: &[f64], out: &mut Vec<f64>) -> Result<(), EvaluationFault> {
        self.place(variables)?;
        self.limit_rows.values(&self.states, variables, out)
    }
}
