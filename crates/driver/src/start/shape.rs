//! Glasses, powers and bendings of the elements of a thin layout.

use merit_function::limits::LimitKind;

use super::bending::{ThinElement, ThinLens, bend, curvature_steps};
use super::no_layout::NoLayout;
use super::scheme::Kind;
use super::space::{Point, Space};
use super::thin::Thin;

/// An element as thin surfaces.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct ElementShape {
    /// Places of its glasses among the allowed ones.
    pub(super) glasses: Vec<usize>,
    pub(super) curvatures_per_mm: Vec<f64>,
    /// Clear diameter, mm.
    pub(super) diameter_mm: f64,
}

/// Clear diameter over the diameter the traced rays take up, and what is added to it: room for
/// the optimiser to move in, and for a mount.
const CLEAR: f64 = 1.15;
const CLEAR_MORE_MM: f64 = 1.0;
/// Clear diameters are whole multiples of this, mm.
const CLEAR_STEP_MM: f64 = 0.5;
/// Strongest curve where no limit says so: clear semi-diameter over radius. Common practice, no
/// published source.
const STEEPEST: f64 = 0.7;
/// How far within a limit on curves a thin lens keeps: thickness changes its curves a little.
const CURVE_MARGIN: f64 = 0.95;
/// Shape factors q = (c₁ + c₂)/(c₁ − c₂) that are looked at first.
const SHAPE_FACTORS: (f64, f64) = (-3.0, 3.0);
/// The goal where a brief has none for the wavefront: a fourteenth of a wave, after A. Maréchal
/// (M. Born and E. Wolf, *Principles of Optics*, section 9.3).
pub(super) const MARECHAL_WAVES: f64 = 1.0 / 14.0;

/// The elements of every group.
pub(super) fn shapes(
    space: &Space,
    thin: &Thin<'_>,
    point: Point<'_>,
) -> Result<Vec<Vec<ElementShape>>, NoLayout> {
    let mut raw = Vec::new();
    for (g, group) in thin.scheme.groups.iter().enumerate() {
        for (e, &kind) in group.elements.iter().enumerate() {
            let share = 1.0 / group.elements.len() as f64;
            let power = thin.powers_per_mm[g] * share;
            raw.push(Raw::of(space, thin, g, kind, power, e as f64 * power, point, raw.len())?);
        }
    }
    let weights = weights(space);
    let elements: Vec<ThinElement> = raw.iter().map(|raw| raw.thin.clone()).collect();
    let from: Vec<f64> = raw.iter().map(|raw| raw.from).collect();
    let kappas = bend(&elements, &from, &weights);
    let mut bent = raw.into_iter().zip(kappas).map(|(raw, kappa)| {
        let steps = curvature_steps(&raw.thin.lenses);
        ElementShape {
            curvatures_per_mm: steps.iter().map(|step| kappa + step).collect(),
            glasses: raw.glasses,
            diameter_mm: raw.diameter_mm,
        }
    });
    let counts = thin.scheme.groups.iter().map(|group| group.elements.len());
    Ok(counts.map(|count| bent.by_ref().take(count).collect()).collect())
}

/// The smallest size, over that of `thin`, at which every element can be bent at all within the
/// limits on curves.
pub(super) fn least_size(
    space: &Space,
    thin: &Thin<'_>,
    point: Point<'_>,
) -> Result<f64, NoLayout> {
    let (mut least, mut number) = (0.0_f64, 0);
    for (g, group) in thin.scheme.groups.iter().enumerate() {
        let power_per_mm = thin.powers_per_mm[g] / group.elements.len() as f64;
        let strongest = strongest_curvature(space, diameter_mm(space, thin, g));
        for &kind in &group.elements {
            let (_, lenses) = glass(space, kind, power_per_mm, point, number)?;
            let steps = curvature_steps(&lenses);
            let ends = steps
                .iter()
                .fold((0.0_f64, 0.0_f64), |(low, high), &step| (low.min(step), high.max(step)));
            least = least.max((ends.1 - ends.0) / (2.0 * strongest));
            number += 1;
        }
    }
    Ok(least)
}

/// Clear diameter of a group's elements, mm.
fn diameter_mm(space: &Space, thin: &Thin<'_>, group: usize) -> f64 {
    let heights = thin.passages.iter().map(|passage| passage.heights[group].abs());
    let highest = space.brief.beam.edge_mm() * heights.fold(0.0, f64::max);
    ((2.0 * highest * CLEAR + CLEAR_MORE_MM) / CLEAR_STEP_MM).ceil() * CLEAR_STEP_MM
}

/// Strongest curvature of a thin lens of this clear diameter, 1/mm.
fn strongest_curvature(space: &Space, diameter_mm: f64) -> f64 {
    let radius = space.range(LimitKind::RadiusMm).min;
    let steep = space.range(LimitKind::Steepness).max.min(STEEPEST);
    CURVE_MARGIN * (2.0 * steep / diameter_mm).min(1.0 / radius.max(1e-9))
}

/// Units of the goal a mm of S_I at the outermost ray is, per state: W = S_I/8 there, and the
/// weighted RMS of (r/edge)⁴ over the beam is about a fifth of that.
fn weights(space: &Space) -> Vec<f64> {
    let states = space.brief.ratios.iter().zip(&space.brief.wishes.states);
    let weight = |(ratio, goals): (&crate::brief::RatioBrief, &merit_function::goals::Goals)| {
        let within = goals.wavefront_rms_waves.unwrap_or(MARECHAL_WAVES);
        let wavelength_mm = ratio.wavelengths_nm.first().map_or(1.0, |nm| nm * 1e-6);
        goals.weight.max(1e-3).sqrt() * RMS_OF_FOURTH_POWER / (8.0 * wavelength_mm * within)
    };
    states.map(weight).collect()
}

/// RMS of (r/edge)⁴ for a beam traced to 1.5 of its 1/e² radius, weighted by its intensity: with
/// x = (r/edge)² the square root of ⟨x⁴⟩ − ⟨x²⟩² under exp(−4.5x) from 0 to 1.
pub(super) const RMS_OF_FOURTH_POWER: f64 = 0.1445;

/// An element before it is bent.
struct Raw {
    glasses: Vec<usize>,
    thin: ThinElement,
    diameter_mm: f64,
    from: f64,
}

impl Raw {
    #[expect(clippy::too_many_arguments, reason = "all of them say which element it is")]
    fn of(
        space: &Space,
        thin: &Thin<'_>,
        group: usize,
        kind: Kind,
        power_per_mm: f64,
        power_before: f64,
        point: Point<'_>,
        number: usize,
    ) -> Result<Self, NoLayout> {
        let edge_mm = space.brief.beam.edge_mm();
        let rays: Vec<(f64, f64)> = thin
            .passages
            .iter()
            .map(|passage| {
                let h = passage.heights[group];
                let u = match group {
                    0 => 0.0,
                    g => (h - passage.heights[g - 1]) / passage.spacings_mm[g - 1],
                };
                (edge_mm * h, edge_mm * (u - h * power_before))
            })
            .collect();
        let diameter_mm = diameter_mm(space, thin, group);
        let (glasses, lenses) = glass(space, kind, power_per_mm, point, number)?;
        let range = kappa_range(space, &lenses, diameter_mm)?;
        let q = SHAPE_FACTORS.0 + (SHAPE_FACTORS.1 - SHAPE_FACTORS.0) * point.bending(number);
        // The first surface of a singlet of the same power and this shape factor; of a pair, one
        // between its outer surfaces.
        let whole = curvature_steps(&lenses).last().copied().unwrap_or(0.0);
        let from = (-0.5 * whole * (q + 1.0)).clamp(range.0, range.1);
        let thin = ThinElement { lenses, rays, range };
        Ok(Self { glasses, thin, diameter_mm, from })
    }
}

fn glass(
    space: &Space,
    kind: Kind,
    power_per_mm: f64,
    point: Point<'_>,
    number: usize,
) -> Result<(Vec<usize>, Vec<ThinLens>), NoLayout> {
    let lens = |glass: usize, power_per_mm: f64| {
        let index = space.glasses.index(glass, 0);
        ThinLens { index, power_per_mm }
    };
    let (glasses, lenses) = match kind {
        Kind::Singlet => {
            let glass = point.glass(number, space.glasses.count());
            (vec![glass], vec![lens(glass, power_per_mm)])
        }
        Kind::Pair => {
            let pairs = &space.glasses.pairs;
            let pair = pairs.get(point.glass(number, pairs.len())).ok_or(NoLayout::NoPair)?;
            let parts = pair.glasses.iter().zip(pair.shares);
            let lenses = parts.map(|(&glass, share)| lens(glass, share * power_per_mm));
            (pair.glasses.to_vec(), lenses.collect())
        }
    };
    // A medium like air cannot bend light: its curves would be endless.
    if lenses.iter().any(|lens: &ThinLens| (lens.index - 1.0).abs() < 1e-3) {
        return Err(NoLayout::Curvature);
    }
    Ok((glasses, lenses))
}

/// What the first curvature may be so that every surface keeps the limits on curves.
fn kappa_range(
    space: &Space,
    lenses: &[ThinLens],
    diameter_mm: f64,
) -> Result<(f64, f64), NoLayout> {
    let strongest = strongest_curvature(space, diameter_mm);
    let steps = curvature_steps(lenses);
    let low = steps.iter().map(|step| -strongest - step).fold(f64::NEG_INFINITY, f64::max);
    let high = steps.iter().map(|step| strongest - step).fold(f64::INFINITY, f64::min);
    if low <= high { Ok((low, high)) } else { Err(NoLayout::Curvature) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_rms_of_the_fourth_power_is_its_integral() {
        // Simpson's rule over x from 0 to 1.
        let mean = |power: i32| {
            let steps = 2000;
            let (mut sum, mut weight) = (0.0, 0.0);
            for i in 0..=steps {
                let x = f64::from(i) / f64::from(steps);
                let simpson = if i == 0 || i == steps {
                    1.0
                } else if i % 2 == 1 {
                    4.0
                } else {
                    2.0
                };
                let w = simpson * (-4.5 * x).exp();
                sum += w * x.powi(power);
                weight += w;
            }
            sum / weight
        };
        let rms = (mean(4) - mean(2).powi(2)).sqrt();
        assert!((rms / RMS_OF_FOURTH_POWER - 1.0).abs() < 0.01, "{rms}");
    }
}
