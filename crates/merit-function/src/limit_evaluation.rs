//! Values and gradients of the limit rows at a point.

use nalgebra::DVector;
use surface_model::design::Design;
use surface_model::gaussian::{GaussianPath, GaussianWeights, peak_per_cm2};
use surface_model::ghost::GhostWay;
use surface_model::glass::GlassError;
use surface_model::paraxial::{ParaxialRay, ParaxialWeights};
use surface_model::quantities::Quantities;
use surface_model::skew::{RayPath, RayStart, trace_ray};
use surface_model::train::Train;

use crate::block::LimitRow;
use crate::edge::{edge_gradient, edge_mm};
use crate::fault::EvaluationFault;
use crate::limit_rows::{Measured, RowRule};
use crate::limits::Limits;
use crate::sight::Sight;
use crate::state_optics::StateOptics;
use crate::variables::Variables;
use crate::way_rows::WayRows;

/// Evaluates the limit rows of a problem. Buffers are kept from call to call.
#[derive(Debug)]
pub(crate) struct LimitEvaluator {
    rules: Vec<RowRule>,
    edge_mm: f64,
    pulse_energy_j: f64,
    sight: Sight,
    ghosts_looked_at: bool,
    rays: Vec<StateRays>,
    /// Per rule, the way of its ghost, once it has been looked at.
    ways: Vec<Option<GhostWay>>,
    /// The way between the states, where a row is about it.
    way: Option<WayRows>,
    /// Per rule, where on the way its value is met.
    places: Vec<f64>,
    gradient: Vec<f64>,
    values: Vec<f64>,
}

/// What stands for the distance of a focus that there is not, mm.
const NO_FOCUS_MM: f64 = 1e6;

/// The value of a row about the way while that is not looked at.
const NOT_LOOKED_AT: f64 = 1.0;

/// The rays that the rows of one state have in common, traced once a point.
#[derive(Debug, Default)]
struct StateRays {
    paraxial: ParaxialRay,
    gaussian: GaussianPath,
    edge: Option<RayPath>,
}

impl LimitEvaluator {
    /// The rows of these limits on `design` over these variables.
    ///
    /// # Errors
    /// A glass is not known at the wavelength of the way between the states.
    pub(crate) fn of(
        design: &Design,
        limits: &Limits,
        variables: &Variables,
    ) -> Result<Self, GlassError> {
        let rules = RowRule::all(design, limits, variables);
        let on_the_way = rules.iter().any(|rule| matches!(rule.measured, Measured::OnTheWay(_)));
        Ok(Self {
            way: if on_the_way { WayRows::of(design, variables)? } else { None },
            places: vec![0.0; rules.len()],
            ways: vec![None; rules.len()],
            rules,
            edge_mm: design.beam.edge_mm(),
            pulse_energy_j: 1e-3 * design.beam.laser.pulse_energy_mj.unwrap_or(0.0),
            sight: Sight::USUAL,
            ghosts_looked_at: true,
            rays: Vec::new(),
            gradient: Vec::new(),
            values: Vec::new(),
        })
    }

    /// Height of the ray whose incidence is limited, mm.
    pub(crate) fn set_edge_mm(&mut self, edge_mm: f64) {
        self.edge_mm = edge_mm;
    }

    /// Whether rows about ghosts are looked at; else they count as kept.
    pub(crate) fn look_at_ghosts(&mut self, looked_at: bool) {
        self.ghosts_looked_at = looked_at;
    }

    /// Keeps the outermost traced ray from a focus too, wherever the paraxial one is kept from it.
    pub(crate) fn keep_the_edge_ray_from_a_focus(&mut self) {
        let exact = |rule: &RowRule| {
            let Measured::MarginalHeight(surface) = rule.measured else { return None };
            Some(RowRule { measured: Measured::EdgeRayHeight(surface), ..rule.clone() })
        };
        let rules: Vec<RowRule> = self.rules.iter().filter_map(exact).collect();
        self.rules.extend(rules);
        self.places.resize(self.rules.len(), 0.0);
        self.ways.resize(self.rules.len(), None);
    }

    /// Per row, what it tells of the way between the states, if it is about that.
    #[cfg(test)]
    pub(crate) fn on_the_way(&self) -> Vec<Option<crate::movement::Aspect>> {
        let aspect = |rule: &RowRule| match &rule.measured {
            Measured::OnTheWay(row) => Some(row.measure.aspect()),
            _ => None,
        };
        self.rules.iter().map(aspect).collect()
    }

    /// Whether rows about the way between the states are looked at; else they count as kept.
    pub(crate) fn look_at_the_way(&mut self, looked_at: bool) {
        if let Some(way) = &mut self.way {
            way.look(looked_at);
        }
    }

    /// Holds collimation along the way over the inner `fraction` of the beam.
    pub(crate) fn set_aperture_of_the_way(&mut self, fraction: f64) {
        if let Some(way) = &mut self.way {
            way.set_aperture(fraction);
        }
    }

    /// Gives every row its gradient, however far from its limit.
    #[cfg(test)]
    pub(crate) fn see_everything(&mut self) {
        self.sight = Sight::EVERYTHING;
    }

    /// Values of all rows.
    pub(crate) fn values(
        &mut self,
        states: &[StateOptics],
        variables: &[f64],
        out: &mut Vec<f64>,
    ) -> Result<(), EvaluationFault> {
        out.clear();
        self.trace(states)?;
        if let Some(way) = &mut self.way {
            way.solve(states, variables)?;
        }
        let places = self.ways.iter_mut().zip(&mut self.places);
        for (rule, (way, place)) in self.rules.iter().zip(places) {
            let k = rule.state.unwrap_or(0);
            let train = &states[k].train;
            let measured = match &rule.measured {
                Measured::Sum { gaps, shared } => sum(train, variables, gaps, shared),
                Measured::Edge(gap) => edge_mm_or_fault(train, *gap)?,
                Measured::Incidence(surface) => incidence_deg(self.rays[k].edge.as_ref(), *surface),
                Measured::MarginalHeight(surface) => self.rays[k].paraxial.heights()[*surface],
                Measured::EdgeRayHeight(surface) => {
                    let mut heights = self.rays[k].edge.iter().flat_map(RayPath::heights_mm);
                    heights.nth(*surface).unwrap_or(self.edge_mm) / self.edge_mm
                }
                Measured::Fluence(surface) => {
                    let radius_squared = self.rays[k].gaussian.radius_squared(*surface);
                    peak_per_cm2(self.pulse_energy_j, radius_squared.sqrt())
                }
                Measured::GhostClearance(_) if !self.ghosts_looked_at => NO_FOCUS_MM,
                Measured::GhostClearance(ghost) => {
                    let way = way.get_or_insert_with(|| GhostWay::new(train, *ghost));
                    way.follow(train);
                    let beam = states[k].beam()?;
                    way.trace(beam).map_err(|_| EvaluationFault::overflow(&states[k].name))?;
                    way.closest().map_or(NO_FOCUS_MM, |focus| focus.clearance_mm.min(NO_FOCUS_MM))
                }
                Measured::OnTheWay(row) => {
                    let way = self.way.as_ref();
                    let met = way.map(|way| way.measured(*row, rule.sign, states, variables));
                    // What is not looked at is kept.
                    let kept = (rule.sign * (NOT_LOOKED_AT - rule.constant), f64::NAN);
                    let (value, at) = met.transpose()?.flatten().unwrap_or(kept);
                    *place = at;
                    value
                }
            };
            out.push(rule.constant + rule.sign * measured);
        }
        Ok(())
    }

    /// Traces, in every state, the rays that some row measures.
    fn trace(&mut self, states: &[StateOptics]) -> Result<(), EvaluationFault> {
        self.rays.resize_with(states.len(), StateRays::default);
        let any =
            |wanted: fn(&Measured) -> bool| self.rules.iter().any(|rule| wanted(&rule.measured));
        let paraxial = any(|measured| matches!(measured, Measured::MarginalHeight(_)));
        let exact =
            any(|measured| matches!(measured, Measured::Incidence(_) | Measured::EdgeRayHeight(_)));
        let gaussian = any(|measured| matches!(measured, Measured::Fluence(_)));
        for (state, rays) in states.iter().zip(&mut self.rays) {
            let train = &state.train;
            if paraxial {
                rays.paraxial
                    .trace(train, 1.0, 0.0)
                    .map_err(|_| EvaluationFault::overflow(&state.name))?;
            }
            if gaussian {
                rays.gaussian
                    .trace(train, state.beam()?)
                    .map_err(|_| EvaluationFault::overflow(&state.name))?;
            }
            if exact {
                let ray = trace_ray(train, RayStart::parallel(self.edge_mm)).map_err(|fault| {
                    let nm = state.first_wavelength_nm();
                    EvaluationFault::ray(&state.name, nm, self.edge_mm, fault)
                })?;
                rays.edge = Some(ray);
            }
        }
        Ok(())
    }

    /// Values and gradients of all rows.
    pub(crate) fn linearise(
        &mut self,
        states: &[StateOptics],
        variables: &Variables,
        at: &[f64],
        out: &mut Vec<LimitRow>,
    ) -> Result<(), EvaluationFault> {
        let mut values = std::mem::take(&mut self.values);
        let done = self.values(states, at, &mut values);
        self.values = values;
        done?;
        if let Some(way) = &mut self.way {
            way.differentiate(variables)?;
        }
        out.resize_with(self.rules.len(), || LimitRow {
            value: 0.0,
            tolerance: 0.0,
            state: None,
            by_shared: DVector::zeros(0),
            by_own: DVector::zeros(0),
        });
        for (i, row) in out.iter_mut().enumerate() {
            row.value = self.values[i];
            self.gradient_of(i, states, variables, row)?;
        }
        Ok(())
    }

    fn gradient_of(
        &mut self,
        i: usize,
        states: &[StateOptics],
        variables: &Variables,
        row: &mut LimitRow,
    ) -> Result<(), EvaluationFault> {
        let rule = &self.rules[i];
        let k = rule.state.unwrap_or(0);
        row.tolerance = rule.tolerance;
        row.state = rule.state;
        reset(&mut row.by_shared, variables.shared().len());
        reset(&mut row.by_own, rule.state.map_or(0, |k| variables.own(k).len()));
        let Measured::OnTheWay(measured) = &rule.measured else {
            if row.value > self.sight.of(rule) {
                return Ok(());
            }
            return self.gradient_in_a_state(i, k, &states[k], variables.quantities(), row);
        };
        let at = self.places[i];
        match &mut self.way {
            Some(way) if at.is_finite() => {
                way.gradient(*measured, (rule.sign, at), states, variables, &mut row.by_shared)
            }
            _ => Ok(()),
        }
    }

    /// The gradient of a row that is measured in one state, number `k`.
    fn gradient_in_a_state(
        &mut self,
        i: usize,
        k: usize,
        state: &StateOptics,
        quantities: Quantities,
        row: &mut LimitRow,
    ) -> Result<(), EvaluationFault> {
        let Self { rules, rays, ways, gradient, .. } = self;
        let rule = &rules[i];
        let train = &state.train;
        let overflow = || EvaluationFault::overflow(&state.name);
        let StateRays { paraxial, gaussian, edge } = &mut rays[k];
        let LimitRow { by_shared, by_own, .. } = row;
        let mut put = |quantity: usize, by: f64| {
            state.follow(quantity, rule.sign * by, by_shared, by_own);
        };
        match &rule.measured {
            Measured::Sum { gaps, shared } => {
                for &(gap, factor) in gaps {
                    put(quantities.gap(gap), factor);
                }
                for &(number, factor) in shared {
                    by_shared[number] += rule.sign * factor;
                }
            }
            Measured::Edge(gap) => {
                edge_gradient(train, *gap, quantities, put)
                    .ok_or(EvaluationFault::Edge { surface: *gap })?;
            }
            Measured::Incidence(surface) => {
                incidence_gradient(edge.as_ref(), quantities, *surface, gradient);
                gradient.iter().enumerate().for_each(|(quantity, &by)| put(quantity, by));
            }
            Measured::EdgeRayHeight(surface) => {
                if let Some(ray) = edge {
                    let by_height = ray.differentiate_height(*surface, quantities);
                    by_height.iter().enumerate().for_each(|(q, by)| put(q, by / self.edge_mm));
                }
            }
            Measured::MarginalHeight(surface) => {
                let weights = ParaxialWeights { heights: &[(*surface, 1.0)], exit_slope: 0.0 };
                gradient.resize(quantities.count(), 0.0);
                let done = paraxial.differentiate(train, weights, quantities, gradient);
                done.map_err(|_| overflow())?;
                gradient.iter().enumerate().for_each(|(quantity, &by)| put(quantity, by));
            }
            Measured::Fluence(surface) => {
                let weights = fluence_weights(gaussian, *surface, self.pulse_energy_j);
                gradient.resize(quantities.count(), 0.0);
                let done = gaussian.differentiate(train, weights, quantities, gradient);
                done.map_err(|_| overflow())?;
                gradient.iter().enumerate().for_each(|(quantity, &by)| put(quantity, by));
            }
            Measured::GhostClearance(_) => {
                if let Some(way) = &mut ways[i]
                    && let Some(focus) = way.closest()
                {
                    way.differentiate(&focus, quantities, put).map_err(|_| overflow())?;
                }
            }
            // Of no one state.
            Measured::OnTheWay(_) => {}
        }
        Ok(())
    }
}

/// How much each of the two rays counts in the derivative of F = 2E/(πw²), with w² = a² + b².
fn fluence_weights(path: &GaussianPath, surface: usize, pulse_energy_j: f64) -> GaussianWeights {
    let [a, b] = path.heights(surface);
    let radius_squared = a * a + b * b;
    let fluence = peak_per_cm2(pulse_energy_j, radius_squared.sqrt());
    let factor = -2.0 * fluence / radius_squared;
    let heights = Some((surface, [factor * a, factor * b]));
    GaussianWeights { heights, exit_slopes: [0.0; 2] }
}

fn reset(vector: &mut DVector<f64>, length: usize) {
    if vector.len() == length {
        vector.fill(0.0);
    } else {
        *vector = DVector::zeros(length);
    }
}

fn sum(train: &Train, variables: &[f64], gaps: &[(usize, f64)], shared: &[(usize, f64)]) -> f64 {
    let gaps = gaps.iter().map(|&(gap, factor)| factor * train.gaps()[gap]);
    let shared = shared.iter().map(|&(number, factor)| factor * variables[number]);
    gaps.chain(shared).sum()
}

fn edge_mm_or_fault(train: &Train, gap: usize) -> Result<f64, EvaluationFault> {
    edge_mm(train, gap).ok_or(EvaluationFault::Edge { surface: gap })
}

fn incidence_deg(edge: Option<&RayPath>, surface: usize) -> f64 {
    let cosine = edge.and_then(|ray| ray.cos_incidences().nth(surface)).unwrap_or(1.0);
    cosine.min(1.0).acos().to_degrees()
}

/// d(angle)/dq = −(d cos/dq)/sin; at normal incidence the angle has no slope and cannot be the
/// one that is too large.
fn incidence_gradient(
    edge: Option<&RayPath>,
    quantities: Quantities,
    surface: usize,
    gradient: &mut Vec<f64>,
) {
    let sine = incidence_deg(edge, surface).to_radians().sin();
    let factor = if sine > 1e-6 { -(1.0 / sine).to_degrees() } else { 0.0 };
    gradient.clear();
    if let Some(ray) = edge {
        let by_cosine = ray.differentiate_cos_incidence(surface, quantities);
        gradient.extend(by_cosine.iter().map(|by| factor * by));
    }
}
