//! Limits along the way between the states, as the solver sees them.
//!
//! Where one or two groups move, ratio and collimation F(z, q) = 0 fix their positions z at every
//! ratio by the glass q alone: the spacings of the designed states do not come in. A row about the
//! way therefore depends on shared variables only, and needs neither variables nor residuals of its
//! own. Its gradient is exact: by the implicit function theorem
//!
//! ```text
//! dz/dq = −(∂F/∂z)⁻¹ ∂F/∂q
//! ```
//!
//! at every point of the way's polynomials; what lies between is a sum over the points. A row holds
//! the lowest value between two neighbouring states, whose gradient is that of the value at its
//! place, which moves without changing the value to first order (the envelope theorem).

use nalgebra::{DMatrix, DVector};
use surface_model::design::Design;
use surface_model::glass::GlassError;
use surface_model::housing::Anchor;
use surface_model::sequence::{GapId, Sequence};

use crate::edge::edge_gradient;
use crate::fault::EvaluationFault;
use crate::limit_item::edge_constant_mm;
use crate::movement::{COUNTS, Slide, Stop, Way, WayMeasure};
use crate::state_optics::StateOptics;
use crate::variables::{Column, SharedVariable, Variables};

/// A row about the way: the lowest value of a sign times what is measured, less a variable.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct OnTheWay {
    pub(crate) measure: WayMeasure,
    /// Between which state and the next one, by ascending ratio.
    pub(crate) panel: usize,
    /// A shared variable that is taken from it.
    pub(crate) less: Option<usize>,
}

/// How many groups may move for the way to follow from the glass alone.
pub(crate) const MOST_MOVERS: usize = 2;

/// What the rows about the way have in common.
#[derive(Debug)]
pub(crate) struct WayRows {
    way: Way,
    sequence: Sequence,
    track_mm: f64,
    traced_to: f64,
    /// Per group that does not move, where it stands.
    still: Vec<Still>,
    /// Per shared variable, the quantities of glass that follow it, with factors.
    glass: Vec<Vec<(usize, f64)>>,
    /// Per shared variable, the derivatives of all lengths, and of the positions of all groups that
    /// do not move.
    lengths_by: Vec<Vec<f64>>,
    positions_by: Vec<Vec<f64>>,
    /// Per point of the way and shared variable, the derivatives of the positions of all groups.
    gradients: Vec<Vec<Vec<f64>>>,
    /// The variables that the way is solved for.
    solved_for: Vec<f64>,
    /// Whether the way is looked at: not while a start is brought to where there is one.
    looked_at: bool,
}

/// Where a group stands that does not move.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Still {
    /// At a place, mm from the front datum.
    At(f64),
    /// Where a shared variable says.
    Variable(usize),
    /// Its last vertex at the rear of the housing.
    Rear,
}

impl WayRows {
    /// What the rows of a design need; `None` where there is no way.
    ///
    /// # Errors
    /// A glass is not known at the wavelength.
    pub(crate) fn of(design: &Design, variables: &Variables) -> Result<Option<Self>, GlassError> {
        // As many points as the start needs.
        let solved = Way::solved(design).map(|way| way.points().len());
        let Some(way) = Way::of(design, solved.unwrap_or(COUNTS[1]))? else { return Ok(None) };
        let sequence = design.sequence();
        let positions_mm = design.positions_mm(&design.states[way.knots()[0]]);
        let last = design.groups.len() - 1;
        let still = (0..=last).map(|group| {
            let variable = SharedVariable::FixedPosition(group);
            match variables.shared().iter().position(|&shared| shared == variable) {
                Some(number) => Still::Variable(number),
                None if group == last && design.housing.anchor() == Anchor::Rear => Still::Rear,
                None => Still::At(positions_mm[group]),
            }
        });
        let mut rows = Self {
            still: still.collect(),
            glass: Vec::new(),
            lengths_by: Vec::new(),
            positions_by: Vec::new(),
            gradients: Vec::new(),
            solved_for: Vec::new(),
            looked_at: true,
            track_mm: design.housing.track_mm,
            traced_to: design.beam.traced_to,
            way,
            sequence,
        };
        for number in 0..variables.shared().len() {
            rows.follow(variables, number);
        }
        Ok(Some(rows))
    }

    /// Works out what follows a shared variable, whatever the state.
    fn follow(&mut self, variables: &Variables, number: usize) {
        let quantities = variables.quantities();
        let spacing = |quantity: usize| {
            let gaps = self.sequence.gaps.iter().enumerate();
            let mut spacings = gaps.filter(|(_, id)| matches!(id, GapId::Spacing { .. }));
            spacings.any(|(gap, _)| quantities.gap(gap) == quantity)
        };
        let mut glass = Vec::new();
        for binding in variables.bindings(self.way.knots()[0]) {
            let terms = binding.terms.iter().filter(|term| term.0 == Column::Shared(number));
            if !spacing(binding.quantity) {
                glass.extend(terms.map(|&(_, factor)| (binding.quantity, factor)));
            }
        }
        let groups = self.still.len();
        let length = |group: usize| -> f64 {
            let gaps = self.gaps_in(group).map(|gap| quantities.gap(gap));
            let by = |gap| glass.iter().filter(move |(quantity, _)| *quantity == gap);
            gaps.flat_map(by).map(|&(_, factor)| factor).sum()
        };
        let lengths: Vec<f64> = (0..groups).map(length).collect();
        let position = |group: usize| match self.still[group] {
            Still::Variable(other) if other == number => 1.0,
            Still::Rear => -lengths[group],
            _ => 0.0,
        };
        self.positions_by.push((0..groups).map(position).collect());
        self.lengths_by.push(lengths);
        self.glass.push(glass);
    }

    /// The gaps within a group.
    fn gaps_in(&self, group: usize) -> std::ops::Range<usize> {
        let first = self.sequence.first_surface(group);
        let end = if group + 1 < self.still.len() {
            self.sequence.first_surface(group + 1) - 1
        } else {
            self.sequence.gaps.len()
        };
        first..end
    }

    pub(crate) fn look(&mut self, looked_at: bool) {
        self.looked_at = looked_at;
    }

    pub(crate) fn set_aperture(&mut self, fraction: f64) {
        self.way.equations.gauge.set_aperture(self.traced_to, fraction);
        self.solved_for.clear();
    }

    /// Solves the way at these variables, at which the states' trains are.
    pub(crate) fn solve(
        &mut self,
        states: &[StateOptics],
        variables: &[f64],
    ) -> Result<(), EvaluationFault> {
        if !self.looked_at || self.solved_for == variables {
            return Ok(());
        }
        self.solved_for.clear();
        self.gradients.clear();
        let knots = self.way.knots();
        let train = &states[knots[0]].train;
        self.way.equations.gauge.take_shape(train);
        for group in 0..self.still.len() {
            let length_mm = train.gaps()[self.gaps_in(group)].iter().sum();
            let still_mm = match self.still[group] {
                Still::At(at_mm) => at_mm,
                Still::Variable(number) => variables[number],
                Still::Rear => self.track_mm - length_mm,
            };
            self.way.equations.slide.fit(group, length_mm, still_mm);
        }
        let slide = &self.way.equations.slide;
        let starts: Vec<Vec<f64>> = self
            .way
            .knots()
            .iter()
            .map(|&k| slide.pick(&self.positions_mm(slide, states[k].train.gaps())))
            .collect();
        self.way.solve(&starts).map_err(EvaluationFault::Way)?;
        self.solved_for.extend_from_slice(variables);
        Ok(())
    }

    /// Where all groups stand in a state whose train has these gaps.
    fn positions_mm(&self, slide: &Slide, gaps_mm: &[f64]) -> Vec<f64> {
        let groups = 0..self.still.len();
        let from_front: Vec<f64> = groups
            .clone()
            .map(|group| gaps_mm[..self.sequence.first_surface(group)].iter().sum())
            .collect();
        let stands = groups.into_iter().find_map(|group| Some((group, slide.still_mm(group)?)));
        let (group, at_mm) = stands.unwrap_or((0, 0.0));
        from_front.iter().map(|z| at_mm + z - from_front[group]).collect()
    }

    /// What a row measures: the value whose `sign`-fold is lowest, and its place on the way.
    pub(crate) fn measured(
        &self,
        row: OnTheWay,
        sign: f64,
        states: &[StateOptics],
        variables: &[f64],
    ) -> Result<Option<(f64, f64)>, EvaluationFault> {
        if !self.looked_at {
            return Ok(None);
        }
        let constant_mm = match row.measure {
            WayMeasure::EdgeGap(after) => {
                let train = &states[self.way.knots()[0]].train;
                let surface = self.sequence.first_surface(after + 1) - 1;
                edge_constant_mm(train, &self.sequence, after)
                    .ok_or(EvaluationFault::Edge { surface })?
            }
            WayMeasure::Rear => self.track_mm,
            _ => 0.0,
        };
        let polynomial = self.way.polynomial(row.measure, constant_mm);
        let lowest = self.way.lowest_in(row.panel, &polynomial, row.measure.aspect(), sign);
        let less = row.less.map_or(0.0, |number| variables[number]);
        Ok(Some((sign * lowest.value - less, lowest.at)))
    }

    /// Derivatives of the positions at every point, if they are not there yet.
    pub(crate) fn differentiate(&mut self, variables: &Variables) -> Result<(), EvaluationFault> {
        if !self.looked_at || !self.gradients.is_empty() {
            return Ok(());
        }
        let points: Result<Vec<_>, Stop> =
            (0..self.way.points().len()).map(|point| self.at_point(variables, point)).collect();
        self.gradients = points.map_err(EvaluationFault::Way)?;
        Ok(())
    }

    /// Per shared variable, the derivatives of all positions at a point.
    fn at_point(&mut self, variables: &Variables, point: usize) -> Result<Vec<Vec<f64>>, Stop> {
        let quantities = variables.quantities();
        let equations = &mut self.way.equations;
        let held_collimation = equations.hold_collimation;
        let moving_mm = self.way.points()[point].moving_mm.clone();
        let equations = &mut self.way.equations;
        let spacings_mm = equations.slide.spacings_mm(&moving_mm);
        let rows = equations.gauge.gradients(&spacings_mm, quantities.shapes());
        let [ratio, collimation] = rows.map_err(Stop::Fault)?;
        let held = if held_collimation { vec![ratio, collimation] } else { vec![ratio] };

        let slide = &equations.slide;
        let by_spacing = |row: &[f64]| -> Vec<f64> {
            let spacings = 0..spacings_mm.len();
            let gaps =
                spacings.filter_map(|after| self.sequence.place_of_gap(GapId::Spacing { after }));
            gaps.map(|gap| row[quantities.gap(gap)]).collect()
        };
        let count = slide.moving().len();
        let mut jacobian = DMatrix::zeros(count, count);
        for (i, row) in held.iter().enumerate() {
            let by = slide.pick(&slide.by_position(&by_spacing(row)));
            for (j, by) in by.iter().enumerate() {
                jacobian[(i, j)] = *by;
            }
        }
        let lu = jacobian.lu();
        let shared = self.glass.iter().zip(&self.positions_by).zip(&self.lengths_by);
        let gradients = shared.map(|((glass, positions), lengths)| {
            // With the groups that move held where they are.
            let held_still = held.iter().map(|row| {
                let by_glass: f64 =
                    glass.iter().map(|&(quantity, factor)| factor * row[quantity]).sum();
                let spacings = by_spacing(row).into_iter().enumerate();
                let by_spacings: f64 = spacings
                    .map(|(k, by)| by * (positions[k + 1] - positions[k] - lengths[k]))
                    .sum();
                -(by_glass + by_spacings)
            });
            let right = DVector::from_iterator(count, held_still);
            let moved = lu.solve(&right).filter(|moved| moved.iter().all(|by| by.is_finite()))?;
            let mut all = positions.clone();
            for (&group, by) in slide.moving().iter().zip(moved.iter()) {
                all[group] = *by;
            }
            Some(all)
        });
        gradients.collect::<Option<_>>().ok_or(Stop::NoSolution)
    }

    /// Adds `sign` times the gradient of what a row measures at its place on the way.
    pub(crate) fn gradient(
        &self,
        row: OnTheWay,
        (sign, at): (f64, f64),
        states: &[StateOptics],
        variables: &Variables,
        by_shared: &mut DVector<f64>,
    ) -> Result<(), EvaluationFault> {
        let counts = self.way.interpolant().counts(row.measure.aspect(), at);
        // Lengths do not depend on the ratio: their counts add up to what a constant's do.
        let whole: f64 = counts.iter().sum();
        let groups = self.still.len();
        let mut positions = vec![0.0; groups];
        for (number, by) in by_shared.iter_mut().enumerate() {
            positions.fill(0.0);
            for (count, point) in counts.iter().zip(&self.gradients) {
                for (sum, position) in positions.iter_mut().zip(&point[number]) {
                    *sum += count * position;
                }
            }
            let lengths: Vec<f64> = self.lengths_by[number].iter().map(|by| whole * by).collect();
            *by += sign * row.measure.by(&positions, &lengths);
        }
        if let Some(number) = row.less {
            by_shared[number] -= sign;
        }
        let WayMeasure::EdgeGap(after) = row.measure else { return Ok(()) };
        let state = &states[self.way.knots()[0]];
        let surface = self.sequence.first_surface(after + 1) - 1;
        let quantities = variables.quantities();
        let mut own = DVector::zeros(variables.own(self.way.knots()[0]).len());
        // The air itself is measured above.
        let put = |quantity: usize, by: f64| {
            if quantity != quantities.gap(surface) {
                state.follow(quantity, sign * by, by_shared, &mut own);
            }
        };
        edge_gradient(&state.train, surface, quantities, put)
            .ok_or(EvaluationFault::Edge { surface })?;
        Ok(())
    }
}
