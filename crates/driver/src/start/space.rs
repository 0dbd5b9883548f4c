//! The space of layouts of a brief: what its points mean, and what bounds them.

use merit_function::limits::{LimitKind, Range};
use surface_model::housing::Housing;

use crate::brief::BriefFile;

use super::error::StartError;
use super::glasses::Glasses;
use super::scheme::{Kind, Scheme, schemes};
use super::spacings::MOST;

/// Coordinates of a point in front of those of the elements.
const FRONT: usize = 10;
/// Coordinates of an element: bending and glass.
const OF_ELEMENT: usize = 2;

/// A brief as the space of its layouts.
#[derive(Debug, Clone)]
pub(super) struct Space {
    pub(super) brief: BriefFile,
    pub(super) schemes: Vec<Scheme>,
    pub(super) glasses: Glasses,
    /// How many numbers a point has.
    pub(super) dimensions: usize,
    /// Largest and smallest ratio without their signs, as logarithms.
    log_ratios: (f64, f64),
}

impl Space {
    pub(super) fn of(brief: &BriefFile) -> Result<Self, StartError> {
        let glasses = Glasses::of(brief);
        let schemes = schemes(brief, glasses.has_pairs())?;
        let elements =
            |scheme: &Scheme| scheme.groups.iter().map(|group| group.elements.len()).sum();
        let most: usize = schemes.iter().map(elements).max().unwrap_or(0);
        let logs = brief.ratios.iter().map(|ratio| ratio.ratio.abs().ln());
        let log_ratios = logs.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), log| {
            (low.min(log), high.max(log))
        });
        let dimensions = FRONT + OF_ELEMENT * most;
        Ok(Self { brief: brief.clone(), schemes, glasses, dimensions, log_ratios })
    }

    /// The range of a limit, or everything.
    pub(super) fn range(&self, kind: LimitKind) -> Range {
        let all = Range { min: f64::NEG_INFINITY, max: f64::INFINITY };
        self.brief.wishes.limits.range(kind).unwrap_or(all)
    }

    /// The housing with the fixed groups of a scheme.
    pub(super) fn housing(&self, scheme: &Scheme) -> Housing {
        let track_mm = self.brief.written().housing.track_mm;
        let expansion_per_k = self.brief.written().housing.expansion_per_k;
        Housing { track_mm, fixed: scheme.fixed.clone(), expansion_per_k }
    }

    /// How far a state's ratio lies on the way from the lowest to the highest, 0 to 1 on a
    /// logarithmic scale; 0 where all are the same.
    pub(super) fn way(&self, state: usize) -> f64 {
        let (low, high) = self.log_ratios;
        if high > low {
            (self.brief.ratios[state].ratio.abs().ln() - low) / (high - low)
        } else {
            0.0
        }
    }

    /// Largest height a ray has at a group, over all ratios, for height 1 at entry, as far as the
    /// ends of the train tell: for rough allowances only.
    pub(super) fn likely_height(&self, scheme: &Scheme, group: usize) -> f64 {
        if group + 1 == scheme.groups.len() { self.log_ratios.1.exp() } else { 1.0 }
    }

    /// Length that the glass of a group will take up, mm, roughly.
    pub(super) fn likely_length_mm(&self, scheme: &Scheme, group: usize) -> f64 {
        let diameter_mm = 2.0 * self.brief.beam.edge_mm() * self.likely_height(scheme, group);
        let least = self.range(LimitKind::CentreThicknessMm).min.max(1.0);
        let air = self.range(LimitKind::AirMm).min.max(0.5);
        let length = |kind: &Kind| match kind {
            Kind::Singlet => least + 0.08 * diameter_mm,
            Kind::Pair => 2.0 * least + 0.12 * diameter_mm,
        };
        let elements = &scheme.groups[group].elements;
        elements.iter().map(length).sum::<f64>() + air * (elements.len() - 1) as f64
    }
}

/// A point of the unit cube, read as choices. Whatever the list of numbers, every reading is
/// within [0, 1); one that is missing or no number reads as the middle.
#[derive(Debug, Clone, Copy)]
pub(super) struct Point<'a>(pub(super) &'a [f64]);

impl Point<'_> {
    fn at(&self, place: usize) -> f64 {
        let number = self.0.get(place).copied().filter(|number| number.is_finite());
        number.unwrap_or(0.5).clamp(0.0, 1.0 - f64::EPSILON)
    }

    fn choice(&self, place: usize, count: usize) -> usize {
        ((self.at(place) * count as f64) as usize).min(count.saturating_sub(1))
    }

    pub(super) fn scheme(&self, count: usize) -> usize {
        self.choice(0, count)
    }

    pub(super) fn family(&self, count: usize) -> usize {
        self.choice(1, count)
    }

    /// Which distance varies where that is open.
    pub(super) fn tie(&self, count: usize) -> usize {
        self.choice(2, count)
    }

    /// Which of two solutions is looked at first.
    pub(super) fn second_root(&self) -> bool {
        self.at(3) >= 0.5
    }

    /// Focal length of a group behind the first over that of the first, its sign apart.
    pub(super) fn focal_ratio(&self, group: usize) -> f64 {
        (WIDEST_FOCAL_RATIO.ln() * (2.0 * self.at(3 + group.min(MOST - 1)) - 1.0)).exp()
    }

    /// Where in their ranges two heights are, 0 to 1: of three groups those at the second one, at
    /// the highest ratio and at the lowest; of four those at the second and the third.
    pub(super) fn heights(&self) -> (f64, f64) {
        (self.at(4), self.at(5))
    }

    /// Where in their ranges the second and the third of three spacings are, 0 to 1.
    pub(super) fn spacings(&self) -> (f64, f64) {
        (self.at(6), self.at(8))
    }

    /// Where in its range the change of a tied distance is, 0 to 1.
    pub(super) fn tie_change(&self) -> f64 {
        self.at(9)
    }

    /// Where in the range of sizes, 0 to 1.
    pub(super) fn scale(&self) -> f64 {
        self.at(7)
    }

    /// The tied distance at the lowest and at the highest ratio, over the first focal length.
    pub(super) fn tied(&self) -> (f64, f64) {
        let length = |place| LEAST_TIED * (MOST_TIED / LEAST_TIED).powf(self.at(place));
        (length(8), length(9))
    }

    /// Where in its range the shape factor of an element is first looked for, 0 to 1.
    pub(super) fn bending(&self, element: usize) -> f64 {
        self.at(FRONT + OF_ELEMENT * element)
    }

    /// Which glass, or which ordered pair of glasses, an element is made of.
    pub(super) fn glass(&self, element: usize, count: usize) -> usize {
        self.choice(FRONT + OF_ELEMENT * element + 1, count)
    }
}

/// Groups differ in focal length by this factor at most.
const WIDEST_FOCAL_RATIO: f64 = 25.0;
/// Ends of the range of tied distances, in first focal lengths.
const LEAST_TIED: f64 = 0.02;
const MOST_TIED: f64 = 30.0;

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn any_list_of_numbers_is_a_point() {
        for numbers in [&[][..], &[f64::NAN; 30], &[1e300; 30], &[-5.0; 30], &[1.0; 30]] {
            let point = Point(numbers);
            assert!(point.scheme(3) < 3 && point.glass(4, 7) < 7 && point.family(1) == 0);
            assert!((0.0..1.0).contains(&point.scale()));
            assert!(point.focal_ratio(3).is_finite() && point.tied().1 <= MOST_TIED);
        }
    }
}
