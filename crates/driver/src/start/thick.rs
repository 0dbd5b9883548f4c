//! From thin groups to glass: every group made of its elements at its power, the spacings of
//! every state from principal plane to principal plane.
//!
//! The closed form of [`super::spacings`] holds for thick groups as it stands, so that ratio and
//! collimation are exact to rounding in every state, whatever the thicknesses.

use super::lens::{Cardinal, Rules, ThickElement, ThickGroup};
use super::no_layout::NoLayout;
use super::scheme::Movement;
use super::shape::ElementShape;
use super::space::Space;
use super::spacings::{MOST, Tie};
use super::thin::{Thin, passage};

/// A layout as glass.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Thick {
    pub(super) groups: Vec<ThickGroup>,
    /// Powers at the first wavelength of the first state, 1/mm.
    pub(super) powers_per_mm: Vec<f64>,
    /// Per state, vertex to vertex, mm.
    pub(super) spacings_mm: Vec<Vec<f64>>,
}

/// How nearly a train that has to fill the tube fills it, mm; a thousandth of what the housing
/// of a design file is held to.
const FILLED_MM: f64 = 1e-9;
const MOST_STEPS: usize = 40;

impl Thick {
    /// Gives a thin layout glass.
    pub(super) fn of(
        space: &Space,
        thin: &Thin<'_>,
        shapes: &[Vec<ElementShape>],
    ) -> Result<Self, NoLayout> {
        if thin.scheme.movement != Movement::Filling {
            return Self::scaled(space, thin, shapes, 1.0);
        }
        let track_mm = space.brief.written().housing.track_mm;
        let excess = |thick: &Self| thick.length_mm(0) - track_mm;
        let mut last = (1.0, Self::scaled(space, thin, shapes, 1.0)?);
        let mut scale = last.0 * track_mm / last.1.length_mm(0);
        for _ in 0..MOST_STEPS {
            let thick = Self::scaled(space, thin, shapes, scale)?;
            let off = excess(&thick);
            if off.abs() <= FILLED_MM {
                let all = (0..thick.spacings_mm.len())
                    .all(|state| (thick.length_mm(state) - track_mm).abs() <= 100.0 * FILLED_MM);
                return if all { Ok(thick) } else { Err(NoLayout::Housing) };
            }
            let slope = (off - excess(&last.1)) / (scale - last.0);
            let next = scale - off / slope;
            last = (scale, thick);
            scale = next;
            if !(scale.is_finite() && scale > 0.0) {
                return Err(NoLayout::Housing);
            }
        }
        Err(NoLayout::Housing)
    }

    /// The layout with all powers divided by `scale`.
    fn scaled(
        space: &Space,
        thin: &Thin<'_>,
        shapes: &[Vec<ElementShape>],
        scale: f64,
    ) -> Result<Self, NoLayout> {
        let rules = Rules::of(space);
        let powers = thin.powers_per_mm.map(|power| power / scale);
        let groups = shapes.iter().zip(powers).map(|(elements, power_per_mm)| {
            of_power(space, elements, 1.0 / scale, power_per_mm, rules)
        });
        let groups = groups.collect::<Result<Vec<_>, _>>()?;
        let cardinals = |wavelength| {
            groups
                .iter()
                .map(|group| group.cardinal(space, wavelength))
                .collect::<Result<Vec<_>, _>>()
        };
        let reference = cardinals(0)?;
        let track_mm = space.brief.written().housing.track_mm;
        let glass_mm: f64 = groups.iter().map(ThickGroup::length_mm).sum();
        let mut spacings_mm = Vec::with_capacity(thin.passages.len());
        for (state, ratio) in space.brief.ratios.iter().enumerate() {
            let wavelength =
                ratio.wavelengths_nm.first().map_or(0, |&nm| space.glasses.place_of(nm));
            let own = cardinals(wavelength)?;
            let tied = thin.tied.as_ref().map(|tied| {
                let between = match tied.tie {
                    Tie::Whole if thin.scheme.movement == Movement::Whole => track_mm - glass_mm,
                    tie => tied.values_mm[state] * scale + between_planes(&reference, tie),
                };
                (tied.tie, between - between_planes(&own, tied.tie), tied.root)
            });
            let mut powers = [0.0; MOST];
            powers.iter_mut().zip(&own).for_each(|(power, own)| *power = own.power_per_mm);
            let passage = passage(&powers, groups.len(), ratio.ratio, tied);
            let passage = passage.ok_or(NoLayout::Passing)?;
            let vertex = own.windows(2).zip(passage.spacings_mm);
            let vertex = vertex.map(|(pair, planes)| planes + pair[0].rear_mm - pair[1].front_mm);
            spacings_mm.push(vertex.collect());
        }
        let thick = Self {
            groups,
            powers_per_mm: reference.iter().map(|cardinal| cardinal.power_per_mm).collect(),
            spacings_mm,
        };
        thick.clear(space)?;
        Ok(thick)
    }

    /// First vertex to last vertex in a state, mm.
    fn length_mm(&self, state: usize) -> f64 {
        let glass: f64 = self.groups.iter().map(ThickGroup::length_mm).sum();
        glass + self.spacings_mm[state].iter().sum::<f64>()
    }

    /// Lenses of neighbouring groups touch neither on axis nor at their edges.
    fn clear(&self, space: &Space) -> Result<(), NoLayout> {
        use merit_function::limits::LimitKind;
        let least = space.range(LimitKind::SpacingMm).min.max(0.0);
        let least_edge = space.range(LimitKind::EdgeGapMm).min.max(0.0);
        for (g, pair) in self.groups.windows(2).enumerate() {
            let closing = pair[0].closing_mm(&pair[1])?;
            let spacings = self.spacings_mm.iter().map(|spacings| spacings[g]);
            let smallest = spacings.fold(f64::INFINITY, f64::min);
            if smallest < least.max(least_edge + closing) {
                return Err(NoLayout::Air);
            }
        }
        Ok(())
    }
}

/// What the spacings of a tie are more than those between principal planes, mm.
fn between_planes(cardinals: &[Cardinal], tie: Tie) -> f64 {
    let (from, to) = tie.span();
    let pairs = cardinals.windows(2).skip(from).take(to - from);
    pairs.map(|pair| pair[0].rear_mm - pair[1].front_mm).sum()
}

/// A group of exactly this power at the reference wavelength: thickness changes the power a
/// little, and all curvatures together make up for it. They begin at the thin ones times `bend`.
fn of_power(
    space: &Space,
    elements: &[ElementShape],
    bend: f64,
    power_per_mm: f64,
    rules: Rules,
) -> Result<ThickGroup, NoLayout> {
    let bent = |factor: f64| {
        let element = |element: &ElementShape| {
            let curvatures = element.curvatures_per_mm.iter().map(|c| c * factor).collect();
            ThickElement::of(&element.glasses, curvatures, element.diameter_mm, rules)
        };
        let elements = elements.iter().map(element).collect::<Result<_, _>>()?;
        let group = ThickGroup::of(elements, rules)?;
        let off = group.cardinal(space, 0)?.power_per_mm / power_per_mm - 1.0;
        Ok::<_, NoLayout>((group, off))
    };
    let (group, off) = bent(bend)?;
    let (mut last, mut best) = ((bend, off), (off.abs(), group));
    let mut factor = bend / (1.0 + off);
    for _ in 0..MOST_STEPS {
        if best.0 <= f64::EPSILON || factor == last.0 {
            break;
        }
        if !(factor.is_finite() && factor > 0.0) {
            return Err(NoLayout::Curvature);
        }
        let (group, off) = bent(factor)?;
        let slope = (off - last.1) / (factor - last.0);
        last = (factor, off);
        if off.abs() < best.0 {
            best = (off.abs(), group);
        } else if best.0 < 1e-12 {
            break;
        }
        factor -= off / slope;
    }
    if best.0 < 1e-12 { Ok(best.1) } else { Err(NoLayout::Curvature) }
}
