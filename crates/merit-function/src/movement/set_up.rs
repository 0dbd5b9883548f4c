//! The equations of a design's movement: as many as groups that move.

use surface_model::design::Design;
use surface_model::glass::GlassError;

use super::collimation::Gauge;
use super::follow::Equations;
use super::guide::MonotoneCubic;
use super::slide::Slide;

/// The wavelengths, nm, at the first of which ratio and collimation are held: those all states
/// share, or those of the beam.
#[must_use]
pub fn wavelengths_nm(design: &Design) -> Vec<f64> {
    let first = design.states.first().map(|state| &state.wavelengths_nm);
    match first {
        Some(own) if design.states.iter().all(|state| state.wavelengths_nm == *own) => own.clone(),
        _ => design.beam.wavelengths_nm.clone(),
    }
}

impl Equations {
    /// The equations of a design's movement over the states `knots`, for a collimated beam; `None`
    /// where no group moves.
    ///
    /// # Errors
    /// A glass is not known at the wavelength.
    pub fn of(design: &Design, knots: &[usize]) -> Result<Option<Self>, GlassError> {
        Self::leaving_with(design, knots, 0.0)
    }

    /// As [`Self::of`], for a beam that comes to a focus at one over this vergence (1/mm) behind
    /// the last vertex; zero is collimation.
    ///
    /// # Errors
    /// As [`Self::of`].
    pub fn leaving_with(
        design: &Design,
        knots: &[usize],
        vergence_per_mm: f64,
    ) -> Result<Option<Self>, GlassError> {
        let slide = Slide::of(design);
        let moving = slide.moving().len();
        let Some(first) = knots.first().filter(|_| moving > 0) else { return Ok(None) };
        let mut gauge = Gauge::new(design, &design.states[*first], wavelengths_nm(design)[0])?;
        gauge.want_vergence(vergence_per_mm);
        let positions = design.all_positions_mm();
        let starts: Vec<Vec<f64>> = knots.iter().map(|&k| slide.pick(&positions[k])).collect();
        let mut equations = Self { slide, gauge, hold_collimation: moving > 1, guides: Vec::new() };
        if moving > 2 {
            let solved = equations.best_pair(&starts, moving);
            let ratios: Vec<f64> = knots.iter().map(|&k| design.states[k].ratio).collect();
            let guided = (0..moving).filter(|j| !solved.contains(j));
            equations.guides = guided
                .map(|j| {
                    let at_states: Vec<f64> = starts.iter().map(|start| start[j]).collect();
                    (j, MonotoneCubic::through(&ratios, &at_states))
                })
                .collect();
        }
        Ok(Some(equations))
    }

    /// The two moving groups that command ratio and collimation best: those whose determinant of
    /// derivatives is largest at the state where it is smallest.
    fn best_pair(&mut self, starts: &[Vec<f64>], moving: usize) -> [usize; 2] {
        let Self { slide, gauge, .. } = self;
        let mut derivatives = Vec::new();
        for start in starts {
            if let Ok(held) = gauge.measure(&slide.spacings_mm(start)) {
                let by_ratio = slide.pick(&slide.by_position(&held.ratio_by_spacing));
                let by_slope = slide.pick(&slide.by_position(&held.collimation_by_spacing));
                derivatives.push((by_ratio, by_slope));
            }
        }
        let command = |i: usize, j: usize| {
            let determinants = derivatives.iter().map(|(r, c)| (r[i] * c[j] - r[j] * c[i]).abs());
            determinants.fold(f64::INFINITY, f64::min)
        };
        let pairs = (0..moving).flat_map(|i| (i + 1..moving).map(move |j| [i, j]));
        let best = pairs.max_by(|a, b| command(a[0], a[1]).total_cmp(&command(b[0], b[1])));
        best.unwrap_or([0, 1])
    }
}
