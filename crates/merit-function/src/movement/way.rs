//! The whole way of the groups from the lowest ratio to the highest, as polynomials.
//!
//! Positions are solved for at Chebyshev points and known everywhere between them (see
//! [`Interpolant`]). The curve is that of the designed states: each point is looked for near the
//! line through their positions, and where Newton's method leads elsewhere the curve is followed
//! from the first state.

use surface_model::design::Design;
use surface_model::glass::GlassError;

use super::follow::{Equations, FROM_A_STATE, Point, Stop};
use super::interpolant::{Aspect, Interpolant, Lowest, Polynomial};
use super::knots::knots;

/// Points that are tried, the fewest first.
pub(crate) const COUNTS: [usize; 3] = [12, 24, 48];
/// What polynomials may be off the curve, mm, and what they may be off at worst.
const TOLD_TO_MM: f64 = 1e-5;
const LEAST_TOLD_TO_MM: f64 = 1e-3;
/// Newton steps to a point from the line through the states.
const STEPS: usize = 16;
/// A tail larger than this part of the way of a group is no smooth curve: points lie on several.
const JUMP: f64 = 0.02;

/// The way of the groups that move.
#[derive(Debug)]
pub(crate) struct Way {
    /// What is solved at every point.
    pub(crate) equations: Equations,
    /// States the way goes through, by ascending ratio.
    knots: Vec<usize>,
    /// t at each of them.
    knots_at: Vec<f64>,
    interpolant: Interpolant,
    /// The curve at the points of the interpolant.
    points: Vec<Point>,
}

impl Way {
    /// The way over the states of a design, not yet solved, with so many points; `None` where there
    /// is none: no two ratios, nothing that moves.
    ///
    /// # Errors
    /// A glass is not known at the wavelength.
    pub(crate) fn of(design: &Design, count: usize) -> Result<Option<Self>, GlassError> {
        let Ok(knots) = knots(design) else { return Ok(None) };
        let Some(equations) = Equations::of(design, &knots)? else { return Ok(None) };
        let ratio = |k: usize| design.states[k].ratio;
        let interpolant = Interpolant::over(ratio(knots[0]), ratio(knots[knots.len() - 1]), count);
        let knots_at = knots.iter().map(|&k| interpolant.place(ratio(k))).collect();
        Ok(Some(Self { equations, knots, knots_at, interpolant, points: Vec::new() }))
    }

    /// The way over the states of a design as they stand, with as many points as it takes to tell it
    /// to a hundredth of a micrometre; `None` where there is none, or where even the most points do
    /// not tell it to a micrometre.
    pub(crate) fn solved(design: &Design) -> Option<Self> {
        let positions = design.all_positions_mm();
        let mut told = None;
        for count in COUNTS {
            let mut way = Self::of(design, count).ok()??;
            let slide = &way.equations.slide;
            let starts: Vec<Vec<f64>> =
                way.knots.iter().map(|&k| slide.pick(&positions[k])).collect();
            way.solve(&starts).ok()?;
            let to_mm = way.told_to_mm();
            told = Some((way, to_mm));
            if to_mm <= TOLD_TO_MM {
                break;
            }
        }
        told.filter(|(_, to_mm)| *to_mm <= LEAST_TOLD_TO_MM).map(|(way, _)| way)
    }

    /// The states it goes through, by ascending ratio.
    pub(crate) fn knots(&self) -> &[usize] {
        &self.knots
    }

    /// The parts of the way between neighbouring states.
    pub(crate) fn panels(&self) -> usize {
        self.knots_at.len() - 1
    }

    pub(crate) fn interpolant(&self) -> &Interpolant {
        &self.interpolant
    }

    /// The curve at the points of the interpolant.
    pub(crate) fn points(&self) -> &[Point] {
        &self.points
    }

    /// Solves for the positions at every point. `at_knots` are those of the groups that move in the
    /// designed states, from which they are looked for.
    ///
    /// # Errors
    /// The curve breaks off, or there is none.
    pub(crate) fn solve(&mut self, at_knots: &[Vec<f64>]) -> Result<(), Stop> {
        if let Ok(points) = self.solve_from_the_states(at_knots)
            && self.is_one_curve(&points)
        {
            self.points = points;
            return Ok(());
        }
        let ratios: Vec<f64> =
            self.interpolant.points().iter().map(|&t| self.interpolant.ratio(t)).collect();
        let first = self.equations.solve(ratios[0], &at_knots[0], FROM_A_STATE)?;
        let (mut points, stopped) = self.equations.follow(&first, &ratios[1..]);
        if let Some((_, stop)) = stopped {
            return Err(stop);
        }
        points.insert(0, first);
        self.points = points;
        Ok(())
    }

    fn solve_from_the_states(&mut self, at_knots: &[Vec<f64>]) -> Result<Vec<Point>, Stop> {
        let mut points = Vec::with_capacity(self.interpolant.points().len());
        for &t in self.interpolant.points() {
            let from_mm = self.between_states(at_knots, t);
            points.push(self.equations.solve(self.interpolant.ratio(t), &from_mm, STEPS)?);
        }
        Ok(points)
    }

    /// Positions at t on the straight line between two states.
    fn between_states(&self, at_knots: &[Vec<f64>], t: f64) -> Vec<f64> {
        let behind = self.knots_at.partition_point(|&at| at <= t).clamp(1, self.panels());
        let (from, to) = (self.knots_at[behind - 1], self.knots_at[behind]);
        let share = (t - from) / (to - from);
        let pairs = at_knots[behind - 1].iter().zip(&at_knots[behind]);
        pairs.map(|(a, b)| a + share * (b - a)).collect()
    }

    /// Whether the points lie on one smooth curve.
    fn is_one_curve(&self, points: &[Point]) -> bool {
        let one_sense = points.windows(2).all(|pair| pair[0].sense == pair[1].sense);
        let moving = points.first().map_or(0, |point| point.moving_mm.len());
        one_sense
            && (0..moving).all(|j| {
                let at: Vec<f64> = points.iter().map(|point| point.moving_mm[j]).collect();
                let (low, high) = at
                    .iter()
                    .fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), &z| (l.min(z), h.max(z)));
                self.interpolant.through(&at).tail() <= JUMP * (high - low) + 1e-6
            })
    }

    /// About how far the polynomials are off the curve, mm.
    pub(crate) fn told_to_mm(&self) -> f64 {
        let moving = self.equations.slide.moving().len();
        let tails = (0..moving).map(|j| self.through(|point| point.moving_mm[j]).tail());
        tails.fold(0.0, f64::max)
    }

    /// Which way a group goes, on the whole, from the smallest ratio to the largest: 1 or −1.
    pub(crate) fn direction(&self, group: usize) -> f64 {
        let position = |point: Option<&Point>| {
            let slide = &self.equations.slide;
            point.map_or(0.0, |point| slide.positions_mm(&point.moving_mm)[group])
        };
        direction(position(self.points.first()), position(self.points.last()))
    }

    /// The polynomial through what is measured at every point.
    pub(crate) fn through(&self, measure: impl Fn(&Point) -> f64) -> Polynomial {
        let values: Vec<f64> = self.points.iter().map(measure).collect();
        self.interpolant.through(&values)
    }

    /// The lowest value of `sign` times what is measured between a state and the next one.
    pub(crate) fn lowest_in(
        &self,
        panel: usize,
        polynomial: &Polynomial,
        aspect: Aspect,
        sign: f64,
    ) -> Lowest {
        let panel = self.knots_at[panel]..self.knots_at[panel + 1];
        self.interpolant.lowest(polynomial, aspect, sign, panel)
    }
}

/// The sign of a way, 1 where there is none.
pub(crate) fn direction(from_mm: f64, to_mm: f64) -> f64 {
    if to_mm < from_mm { -1.0 } else { 1.0 }
}
