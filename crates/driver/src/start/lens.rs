//! Thick groups: elements with real thicknesses, their power and principal planes.

use merit_function::limits::{LimitKind, Range};

use super::no_layout::NoLayout;
use super::space::Space;

/// An element as glass: one more curvature than glasses.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct ThickElement {
    /// Places of its glasses among the allowed ones.
    pub(super) glasses: Vec<usize>,
    pub(super) curvatures_per_mm: Vec<f64>,
    pub(super) thicknesses_mm: Vec<f64>,
    pub(super) diameter_mm: f64,
}

/// A group as glass.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct ThickGroup {
    pub(super) elements: Vec<ThickElement>,
    pub(super) airs_mm: Vec<f64>,
}

/// Power and principal planes of a group in air.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Cardinal {
    pub(super) power_per_mm: f64,
    /// From the first vertex to the front principal plane, mm, positive to the right.
    pub(super) front_mm: f64,
    /// From the last vertex to the rear principal plane, mm, positive to the right.
    pub(super) rear_mm: f64,
}

/// What thicknesses and airs have to keep, from the limits or, where there are none, from common
/// practice: lenses that can be held and do not splinter.
#[derive(Debug, Clone, Copy)]
pub(super) struct Rules {
    edge: Range,
    centre: Range,
    air: Range,
    edge_gap: Range,
}

/// How far inside a limit a start keeps, so that the optimiser can move both ways.
const MARGIN_MM: f64 = 0.05;
/// Common practice, no published source: a lens is at least so thick for its diameter on axis and
/// at its edge.
const CENTRE_OF_DIAMETER: f64 = 0.08;
const EDGE_OF_DIAMETER: f64 = 0.03;
const LEAST_EDGE_MM: f64 = 0.8;
const LEAST_CENTRE_MM: f64 = 1.0;
const LEAST_AIR_MM: f64 = 0.3;

impl Rules {
    pub(super) fn of(space: &Space) -> Self {
        Self {
            edge: space.range(LimitKind::EdgeThicknessMm),
            centre: space.range(LimitKind::CentreThicknessMm),
            air: space.range(LimitKind::AirMm),
            edge_gap: space.range(LimitKind::EdgeGapMm),
        }
    }

    /// Thickness of a glass on axis, where its rear edge lies `sags_mm` behind its front edge if
    /// it had none.
    fn thickness(self, sags_mm: f64, diameter_mm: f64) -> Result<f64, NoLayout> {
        let least = |range: Range, usual: f64| {
            if range.min.is_finite() { range.min + MARGIN_MM } else { usual }
        };
        let edge = least(self.edge, LEAST_EDGE_MM).max(EDGE_OF_DIAMETER * diameter_mm);
        let centre = least(self.centre, LEAST_CENTRE_MM).max(CENTRE_OF_DIAMETER * diameter_mm);
        let (edge, centre) = (edge.min(self.edge.max), centre.min(self.centre.max));
        let thickness = centre.max(edge - sags_mm);
        let fits = thickness <= self.centre.max && thickness + sags_mm <= self.edge.max;
        if fits { Ok(thickness) } else { Err(NoLayout::Thickness) }
    }

    /// Air on axis, where the facing surfaces come nearer by `closing_mm` towards their edges.
    fn air(self, closing_mm: f64) -> Result<f64, NoLayout> {
        let axial = if self.air.min.is_finite() { self.air.min + MARGIN_MM } else { LEAST_AIR_MM };
        let edge = self.edge_gap.min.max(0.0) + MARGIN_MM;
        let air = axial.min(self.air.max).max(edge + closing_mm);
        let fits = air <= self.air.max && air - closing_mm <= self.edge_gap.max;
        if fits { Ok(air) } else { Err(NoLayout::Air) }
    }
}

/// Sag of a sphere at a height; an error where it does not reach that far.
fn sag_mm(curvature: f64, height: f64) -> Result<f64, NoLayout> {
    let inside = 1.0 - (curvature * height).powi(2);
    if inside <= 0.0 {
        return Err(NoLayout::Curvature);
    }
    Ok(curvature * height * height / (1.0 + inside.sqrt()))
}

impl ThickElement {
    /// Gives thin curvatures thickness.
    pub(super) fn of(
        glasses: &[usize],
        curvatures: Vec<f64>,
        diameter_mm: f64,
        rules: Rules,
    ) -> Result<Self, NoLayout> {
        let sags = curvatures.iter().map(|&c| sag_mm(c, 0.5 * diameter_mm));
        let sags = sags.collect::<Result<Vec<f64>, _>>()?;
        let thicknesses =
            sags.windows(2).map(|pair| rules.thickness(pair[1] - pair[0], diameter_mm));
        Ok(Self {
            glasses: glasses.to_vec(),
            thicknesses_mm: thicknesses.collect::<Result<_, _>>()?,
            curvatures_per_mm: curvatures,
            diameter_mm,
        })
    }

    fn end_curvatures(&self) -> (f64, f64) {
        let at = |curvature: Option<&f64>| curvature.copied().unwrap_or(0.0);
        (at(self.curvatures_per_mm.first()), at(self.curvatures_per_mm.last()))
    }
}

impl ThickGroup {
    /// Puts elements behind one another.
    pub(super) fn of(elements: Vec<ThickElement>, rules: Rules) -> Result<Self, NoLayout> {
        let air = |pair: &[ThickElement]| {
            let height = 0.5 * pair[0].diameter_mm.min(pair[1].diameter_mm);
            let closing = sag_mm(pair[0].end_curvatures().1, height)?
                - sag_mm(pair[1].end_curvatures().0, height)?;
            rules.air(closing)
        };
        let airs_mm = elements.windows(2).map(air).collect::<Result<_, _>>()?;
        Ok(Self { elements, airs_mm })
    }

    /// First vertex to last vertex, mm.
    pub(super) fn length_mm(&self) -> f64 {
        let glass: f64 = self.elements.iter().flat_map(|element| &element.thicknesses_mm).sum();
        glass + self.airs_mm.iter().sum::<f64>()
    }

    /// Its power and principal planes at a wavelength, by place.
    pub(super) fn cardinal(&self, space: &Space, wavelength: usize) -> Result<Cardinal, NoLayout> {
        // The system matrix of `surface_model::first_order`, without its train.
        let (mut a, mut b, mut c, mut d) = (1.0, 0.0, 0.0, 1.0);
        for (e, element) in self.elements.iter().enumerate() {
            let mut before = 1.0;
            for (s, curvature) in element.curvatures_per_mm.iter().enumerate() {
                let glass = element.glasses.get(s);
                let behind = glass.map_or(1.0, |&glass| space.glasses.index(glass, wavelength));
                let power = curvature * (behind - before);
                c -= power * a;
                d -= power * b;
                let gap = element.thicknesses_mm.get(s).or_else(|| self.airs_mm.get(e));
                let reduced = gap.map_or(0.0, |gap| gap / behind);
                a += reduced * c;
                b += reduced * d;
                before = behind;
            }
        }
        let power_per_mm = -c;
        let cardinal = Cardinal {
            power_per_mm,
            front_mm: (1.0 - d) / power_per_mm,
            rear_mm: (a - 1.0) / power_per_mm,
        };
        let numbers = [power_per_mm, cardinal.front_mm, cardinal.rear_mm];
        if numbers.iter().all(|number| number.is_finite()) && power_per_mm != 0.0 {
            Ok(cardinal)
        } else {
            Err(NoLayout::Curvature)
        }
    }

    /// By how much the surfaces that face each other across the gap to the next group come nearer
    /// towards their edges, mm; negative where they part.
    pub(super) fn closing_mm(&self, next: &Self) -> Result<f64, NoLayout> {
        let (Some(last), Some(first)) = (self.elements.last(), next.elements.first()) else {
            return Ok(0.0);
        };
        let height = 0.5 * last.diameter_mm.min(first.diameter_mm);
        let (front, back) = (last.end_curvatures().1, first.end_curvatures().0);
        Ok(sag_mm(front, height)? - sag_mm(back, height)?)
    }
}
