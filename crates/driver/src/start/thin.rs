//! From a point of the space to a thin-lens layout: powers, and spacings in every state.

use merit_function::limits::{LimitKind, Range};
use surface_model::housing::Anchor;

use super::by_heights::by_heights;
use super::family::Family;
use super::four_groups::four_groups;
use super::no_layout::NoLayout;
use super::scheme::{Movement, Scheme};
use super::shape::least_size;
use super::space::{Point, Space};
use super::spacings::{MOST, Passage, Tie, four, three, two};

/// A layout of thin groups.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Thin<'a> {
    pub(super) scheme: &'a Scheme,
    pub(super) family: Family,
    pub(super) powers_per_mm: [f64; MOST],
    /// One entry a state.
    pub(super) passages: Vec<Passage>,
    pub(super) tied: Option<Tied>,
}

/// Four groups: what is tied, by how much in each state, and which of the two solutions it is.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Tied {
    pub(super) tie: Tie,
    pub(super) values_mm: Vec<f64>,
    pub(super) root: usize,
}

/// The smallest height, over that at entry, at which a beam is still no focus; in a design file
/// that forbids one it is a hundredth.
pub(super) const NO_FOCUS: f64 = 0.05;

/// The distances tied where that is open.
pub(super) const TIES: [Tie; 6] =
    [Tie::First, Tie::Second, Tie::Third, Tie::FirstTwo, Tie::LastTwo, Tie::Whole];

impl<'a> Thin<'a> {
    /// The layout at a point.
    pub(super) fn at(space: &'a Space, point: Point<'_>) -> Result<Self, NoLayout> {
        let scheme = &space.schemes[point.scheme(space.schemes.len())];
        let shape = Self::shape(space, scheme, point)?;
        for (passage, ratio) in shape.passages.iter().zip(&space.brief.ratios) {
            no_focus(&passage.heights[..scheme.groups.len()], ratio.ratio)?;
        }
        let scale = Sizes::of(space, &shape, point)?.pick(&shape, point.scale())?;
        Ok(shape.scaled(scale))
    }

    /// The layout at some size or other.
    fn shape(space: &Space, scheme: &'a Scheme, point: Point<'_>) -> Result<Self, NoLayout> {
        let count = scheme.groups.len();
        let ratios: Vec<f64> = space.brief.ratios.iter().map(|ratio| ratio.ratio).collect();
        let (powers_per_mm, mut tied) = Self::powers(space, scheme, &ratios, point)?;
        let passages = passages(&powers_per_mm, count, &ratios, tied.as_ref());
        let passages = match (passages, &mut tied) {
            (None, Some(tied)) => {
                tied.root = 1 - tied.root;
                self::passages(&powers_per_mm, count, &ratios, Some(tied))
            }
            (passages, _) => passages,
        };
        let passages = passages.ok_or(NoLayout::Passing)?;
        let family = Family::of(&powers_per_mm[..count]);
        Ok(Self { scheme, family, powers_per_mm, passages, tied })
    }

    /// Powers, and what ties the spacings of four groups.
    fn powers(
        space: &Space,
        scheme: &Scheme,
        ratios: &[f64],
        point: Point<'_>,
    ) -> Result<([f64; MOST], Option<Tied>), NoLayout> {
        let found = match (scheme.groups.len(), &scheme.movement) {
            (3, Movement::Determined) => {
                by_heights(scheme, ratios, point)?.map(|found| (found, None))
            }
            (MOST, _) => four_groups(space, scheme, ratios, point)
                .map(|(powers_per_mm, tied)| (powers_per_mm, Some(tied))),
            _ => None,
        };
        if let Some(found) = found {
            return Ok(found);
        }
        let powers_per_mm = by_family(scheme, ratios, point).ok_or(NoLayout::Passing)?;
        Ok((powers_per_mm, Self::tied(space, scheme, point)))
    }

    fn tied(space: &Space, scheme: &Scheme, point: Point<'_>) -> Option<Tied> {
        let (from, to) = point.tied();
        let (tie, to) = match scheme.movement {
            Movement::Determined | Movement::Filling => return None,
            Movement::Held(tie) => (tie, from),
            Movement::Whole => (Tie::Whole, from),
            Movement::Chosen => (TIES[point.tie(TIES.len())], to),
        };
        let states = 0..space.brief.ratios.len();
        let values_mm = states.map(|state| from + (to - from) * space.way(state)).collect();
        Some(Tied { tie, values_mm, root: usize::from(point.second_root()) })
    }

    /// The same layout so many times as large.
    fn scaled(mut self, scale: f64) -> Self {
        self.powers_per_mm = self.powers_per_mm.map(|power| power / scale);
        for passage in &mut self.passages {
            passage.spacings_mm = passage.spacings_mm.map(|spacing| spacing * scale);
        }
        if let Some(tied) = &mut self.tied {
            tied.values_mm.iter_mut().for_each(|value| *value *= scale);
        }
        self
    }

    /// Where each group stands in a state, mm from whatever the housing keeps still.
    fn positions_mm(&self, passage: &Passage, anchor: Anchor) -> [f64; MOST] {
        let count = self.scheme.groups.len();
        let mut positions = [0.0; MOST];
        for g in 1..count {
            positions[g] = positions[g - 1] + passage.spacings_mm[g - 1];
        }
        let still = match anchor {
            Anchor::Front => positions[0],
            Anchor::Rear => positions[count - 1],
            Anchor::Middle(group) => positions[group],
        };
        positions.map(|position| position - still)
    }
}

/// Powers of the family a point names, the first focal length ±1 mm; `None` without a family.
fn by_family(scheme: &Scheme, ratios: &[f64], point: Point<'_>) -> Option<[f64; MOST]> {
    let family = scheme.families.get(point.family(scheme.families.len()))?;
    let mut powers_per_mm = [0.0; MOST];
    for (g, sign) in family.0.iter().enumerate() {
        powers_per_mm[g] = sign.factor() / if g == 0 { 1.0 } else { point.focal_ratio(g) };
    }
    match (family.0.len(), &scheme.movement, ratios) {
        (2, _, [ratio, ..]) => powers_per_mm[1] = -powers_per_mm[0] / ratio,
        (3, Movement::Filling, [one, other]) => {
            powers_per_mm[2] = family.0[2].factor() / (one * other).sqrt();
        }
        _ => {}
    }
    Some(powers_per_mm)
}

/// Spacings of all states, all positive; `None` where a state has none.
fn passages(
    powers: &[f64; MOST],
    count: usize,
    ratios: &[f64],
    tied: Option<&Tied>,
) -> Option<Vec<Passage>> {
    let passage = |(state, &ratio): (usize, &f64)| {
        let passage =
            passage(powers, count, ratio, tied.map(|t| (t.tie, t.values_mm[state], t.root)))?;
        passage.spacings_mm[..count - 1].iter().all(|&spacing| spacing > 0.0).then_some(passage)
    };
    ratios.iter().enumerate().map(passage).collect()
}

/// Spacings of one state.
pub(super) fn passage(
    powers: &[f64; MOST],
    count: usize,
    ratio: f64,
    tied: Option<(Tie, f64, usize)>,
) -> Option<Passage> {
    let &[p1, p2, p3, _] = powers;
    match (count, tied) {
        (2, _) => two([p1, p2]),
        (3, _) => three([p1, p2, p3], ratio),
        (_, Some((tie, value_mm, root))) => {
            let ways = four(*powers, ratio, tie, value_mm);
            // An equation of the first degree has one way only.
            ways[root].or(if ways[1].is_none() { ways[0] } else { None })
        }
        _ => None,
    }
}

/// An upright beam keeps clear of the axis; an inverted one crosses it between groups.
fn no_focus(heights: &[f64], ratio: f64) -> Result<(), NoLayout> {
    let clear = heights.iter().all(|h| h.abs() >= NO_FOCUS);
    let crossings = heights.windows(2).filter(|pair| pair[0] * pair[1] < 0.0).count();
    let wanted = usize::from(ratio < 0.0);
    if clear && crossings == wanted { Ok(()) } else { Err(NoLayout::Focus) }
}

/// The sizes in which a shape fits its housing and limits.
struct Sizes {
    least: f64,
    by_curves: f64,
    by_track: f64,
    by_travel: f64,
    by_spacing: f64,
    shortest: f64,
    filling: Option<f64>,
}

impl Sizes {
    fn of(space: &Space, shape: &Thin<'_>, point: Point<'_>) -> Result<Self, NoLayout> {
        let (scheme, count) = (shape.scheme, shape.scheme.groups.len());
        let glass: Vec<f64> = (0..count).map(|g| space.likely_length_mm(scheme, g)).collect();
        let spacing = space.range(LimitKind::SpacingMm);
        let length = space.range(LimitKind::TrackMm);
        let travel = space.range(LimitKind::TravelMm);
        let anchor = space.housing(scheme).anchor();
        let ends = 0.5 * (glass[0] + glass[count - 1]);
        let track_mm = space.brief.written().housing.track_mm.min(length.max) - ends;
        let lengths = shape.passages.iter().map(Passage::length_mm);
        let Range { min: shortest, max: longest } = ends_of(lengths.clone());
        let mut least: f64 = 0.0;
        let mut by_spacing = f64::INFINITY;
        for g in 0..count - 1 {
            let range = ends_of(shape.passages.iter().map(|passage| passage.spacings_mm[g]));
            let glass = 0.5 * (glass[g] + glass[g + 1]);
            least = least.max((spacing.min.max(0.0) + glass) / range.min);
            by_spacing = by_spacing.min((spacing.max + glass) / range.max);
        }
        let positions: Vec<[f64; MOST]> =
            shape.passages.iter().map(|passage| shape.positions_mm(passage, anchor)).collect();
        let travels = (0..count).map(|g| {
            let range = ends_of(positions.iter().map(|positions| positions[g]));
            range.max - range.min
        });
        let way = travels.fold(0.0, f64::max);
        let extent = match anchor {
            Anchor::Front | Anchor::Rear => longest,
            Anchor::Middle(_) => {
                let ahead = ends_of(positions.iter().map(|p| -p[0])).max;
                ahead + ends_of(positions.iter().map(|p| p[count - 1])).max
            }
        };
        let filling = matches!(scheme.movement, Movement::Filling | Movement::Whole);
        Ok(Self {
            least,
            by_curves: least_size(space, shape, point)?,
            by_track: track_mm / extent,
            by_travel: if way > 0.0 { travel.max / way } else { f64::INFINITY },
            by_spacing,
            shortest: (length.min - ends) / shortest,
            filling: filling.then_some(track_mm / longest),
        })
    }

    /// A size, the largest that fits at 1.
    fn pick(&self, shape: &Thin<'_>, place: f64) -> Result<f64, NoLayout> {
        let most = self.by_track.min(self.by_travel).min(self.by_spacing);
        let least = self.least.max(self.by_curves);
        let size = match self.filling {
            Some(size) => size,
            None => least + (most - least) * place,
        };
        let sound = size.is_finite() && size > 0.0;
        if most < self.least || (self.filling.is_some() && size < self.least) || !sound {
            let travel = self.by_travel < self.by_track.min(self.by_spacing);
            return Err(if travel { NoLayout::Travel } else { NoLayout::Track });
        }
        if most < least || size < least {
            return Err(NoLayout::Curvature);
        }
        if self.filling.is_some() && size > self.by_travel {
            return Err(NoLayout::Travel);
        }
        if size < self.shortest && shape.scheme.movement != Movement::Whole {
            return Err(NoLayout::Short);
        }
        Ok(size)
    }
}

/// Smallest and largest of some numbers.
pub(super) fn ends_of(numbers: impl Iterator<Item = f64>) -> Range {
    let none = Range { min: f64::INFINITY, max: f64::NEG_INFINITY };
    numbers.fold(none, |range, number| Range {
        min: range.min.min(number),
        max: range.max.max(number),
    })
}
