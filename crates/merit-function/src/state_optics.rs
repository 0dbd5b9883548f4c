//! One zoom state, ready to be evaluated: its trains, what is wanted of it, and which variables its
//! trains follow.

use std::ops::Range;

use nalgebra::DVector;
use surface_model::design::Design;
use surface_model::gaussian::GaussianBeam;
use surface_model::glass::GlassError;
use surface_model::train::Train;

use crate::fault::EvaluationFault;
use crate::goals::Goals;
use crate::variables::{Column, Variables};

/// One state, ready to be evaluated.
#[derive(Debug, Clone)]
pub(crate) struct StateOptics {
    pub(crate) name: String,
    /// The train at the first wavelength, for what is paraxial and for limits.
    pub(crate) train: Train,
    pub(crate) wavelengths_nm: Vec<f64>,
    /// The real beam at the first wavelength; `None` where its keys make none, which a resolved
    /// design rules out.
    beam: Option<GaussianBeam>,
    /// The trains at every wavelength where a wavefront goal is about the sphere around a focus.
    pub(crate) focused: Vec<Train>,
    /// The state's trains in the bundle, one a wavelength; none without a goal on the wavefront.
    pub(crate) bundled: Range<usize>,
    pub(crate) goals: Goals,
    pub(crate) ratio_wanted: f64,
    /// Per shared variable, the quantities that follow it, with factors.
    pub(crate) by_shared: Vec<Vec<(usize, f64)>>,
    /// The same per own variable.
    pub(crate) by_own: Vec<Vec<(usize, f64)>>,
    /// The other way round: per quantity, the variables it follows, with factors.
    followed: Vec<Vec<(Column, f64)>>,
}

impl StateOptics {
    /// State `k` of the design, with these goals; what the bundle is to trace of it is added to
    /// `bundle`.
    ///
    /// # Errors
    /// A glass is not known at a wavelength.
    pub(crate) fn new(
        design: &Design,
        k: usize,
        goals: Goals,
        variables: &Variables,
        bundle: &mut Vec<Train>,
    ) -> Result<Self, GlassError> {
        let state = &design.states[k];
        let first = bundle.len();
        for &nm in &state.wavelengths_nm {
            bundle.push(design.train(state, nm)?);
        }
        let train = bundle[first].clone();
        let mut focused = Vec::new();
        if goals.wavefront_rms_waves.is_none() {
            bundle.truncate(first);
        } else if goals.exit_focus_m.is_some() {
            focused = bundle.split_off(first);
        }
        Ok(Self {
            name: state.name.clone(),
            train,
            wavelengths_nm: state.wavelengths_nm.clone(),
            beam: design.beam.gaussian(state.wavelengths_nm[0]).ok(),
            focused,
            bundled: first..bundle.len(),
            goals,
            ratio_wanted: state.ratio,
            by_shared: followers(variables, k, variables.shared().len(), Column::Shared),
            by_own: followers(variables, k, variables.own(k).len(), Column::Own),
            followed: followed(variables, k),
        })
    }

    /// How many wavefronts its goals are about: one a wavelength, or none.
    pub(crate) fn wavefronts(&self) -> usize {
        self.bundled.len() + self.focused.len()
    }

    /// How many residuals it has, with `rays` rays across the beam.
    pub(crate) fn rows(&self, rays: usize) -> usize {
        rays * self.wavefronts() + self.goals.paraxial() + self.goals.of_the_real_beam()
    }

    /// The real beam at the first wavelength.
    pub(crate) fn beam(&self) -> Result<&GaussianBeam, EvaluationFault> {
        self.beam.as_ref().ok_or_else(|| EvaluationFault::overflow(&self.name))
    }

    pub(crate) fn first_wavelength_nm(&self) -> f64 {
        self.wavelengths_nm[0]
    }

    /// Adds to a gradient over the variables what a derivative `by` a quantity of the train is
    /// worth to them.
    pub(crate) fn follow(
        &self,
        quantity: usize,
        by: f64,
        shared: &mut DVector<f64>,
        own: &mut DVector<f64>,
    ) {
        for &(column, factor) in &self.followed[quantity] {
            match column {
                Column::Shared(number) => shared[number] += factor * by,
                Column::Own(number) => own[number] += factor * by,
            }
        }
    }
}

/// Per variable, the quantities of a state's train that follow it.
fn followers(
    variables: &Variables,
    state: usize,
    count: usize,
    column: fn(usize) -> Column,
) -> Vec<Vec<(usize, f64)>> {
    let follows = |number: usize| {
        let bindings = variables.bindings(state).iter();
        bindings
            .flat_map(|binding| {
                let terms = binding.terms.iter().filter(move |term| term.0 == column(number));
                terms.map(move |&(_, factor)| (binding.quantity, factor))
            })
            .collect()
    };
    (0..count).map(follows).collect()
}

/// Per quantity of a state's train, the variables it follows.
fn followed(variables: &Variables, state: usize) -> Vec<Vec<(Column, f64)>> {
    let mut followed = vec![Vec::new(); variables.quantities().count()];
    for binding in variables.bindings(state) {
        followed[binding.quantity].clone_from(&binding.terms);
    }
    followed
}
