//! What a brief leaves open in the large: how many groups, which elements, and how the fixed
//! groups let the others move.

use merit_function::limits::LimitKind;

use crate::brief::BriefFile;

use super::error::StartError;
use super::family::{Family, Sign};
use super::spacings::Tie;

/// An element before it has a shape.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Kind {
    Singlet,
    /// Two glasses cemented.
    Pair,
}

/// A group before it has lenses.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct GroupScheme {
    pub(super) name: String,
    pub(super) elements: Vec<Kind>,
}

/// How spacings follow from powers and ratio, given the fixed groups.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) enum Movement {
    /// Powers and ratio say it all; the fixed group only says where in the tube.
    Determined,
    /// As before, and the whole has to fill the tube between a first and a last group that are
    /// both fixed: the scale follows. With three groups at two ratios M and M′ this asks for
    /// φ₃² = φ₁²/(MM′) besides: by the closed form the length is 1/φ₁ + 1/φ₃ + 2/φ₂ +
    /// Mφ₃/(φ₁φ₂) + φ₁/(Mφ₂φ₃), the same at both only then.
    Filling,
    /// Four groups, a distance fixed by the housing: the same in all states.
    Held(Tie),
    /// Four groups, first and last fixed: all spacings together fill the tube.
    Whole,
    /// Four groups, at most one fixed: one distance varies evenly from the lowest ratio to the
    /// highest; which one and from what to what is left to the point.
    Chosen,
}

/// One way to set the job up.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Scheme {
    pub(super) groups: Vec<GroupScheme>,
    pub(super) fixed: Vec<bool>,
    pub(super) movement: Movement,
    pub(super) families: Vec<Family>,
}

/// Names of groups that a brief leaves to the program, by their number.
fn names(groups: usize) -> &'static [&'static str] {
    match groups {
        2 => &["entry", "exit"],
        3 => &["entry", "runner", "exit"],
        _ => &["entry", "front runner", "rear runner", "exit"],
    }
}

/// Every way a brief can be set up.
///
/// # Errors
/// None of them can do the job, whatever the powers.
pub(super) fn schemes(brief: &BriefFile, pairs_possible: bool) -> Result<Vec<Scheme>, StartError> {
    let inverted = brief.ratios.iter().any(|ratio| ratio.ratio < 0.0);
    if inverted && brief.wishes.limits.forbid_internal_focus {
        return Err(StartError::Inverted);
    }
    entrance(brief)?;
    let by_colour = brief.ratios.iter().any(|ratio| ratio.wavelengths_nm.len() > 1);
    let standard = if by_colour && pairs_possible { Kind::Pair } else { Kind::Singlet };
    let mut schemes = Vec::new();
    let mut refused = None;
    for groups in group_schemes(brief, standard) {
        match scheme(brief, groups, inverted) {
            Ok(scheme) => schemes.push(scheme),
            Err(error) => refused = refused.or(Some(error)),
        }
    }
    let asked = schemes.iter().flat_map(|scheme| &scheme.groups).flat_map(|group| &group.elements);
    if !pairs_possible && asked.clone().any(|&kind| kind == Kind::Pair) {
        return Err(StartError::NoPair);
    }
    match refused {
        Some(error) if schemes.is_empty() => Err(error),
        _ => Ok(schemes),
    }
}

/// Whether the beam as it enters keeps the limit on pulses: peak 2E/(πw²).
fn entrance(brief: &BriefFile) -> Result<(), StartError> {
    let Some(range) = brief.wishes.limits.range(LimitKind::FluenceJCm2) else { return Ok(()) };
    let Some(energy_mj) = brief.beam.laser.pulse_energy_mj else { return Ok(()) };
    let radius_cm = 0.05 * brief.beam.diameter_mm;
    let fluence_j_cm2 = 2e-3 * energy_mj / (std::f64::consts::PI * radius_cm * radius_cm);
    if fluence_j_cm2 <= range.max {
        return Ok(());
    }
    let wide_enough_mm = brief.beam.diameter_mm * (fluence_j_cm2 / range.max).sqrt();
    Err(StartError::Entrance { fluence_j_cm2, most_j_cm2: range.max, wide_enough_mm })
}

/// The groups that are asked for, or those the program would try.
fn group_schemes(brief: &BriefFile, standard: Kind) -> Vec<Vec<GroupScheme>> {
    if let Some(groups) = &brief.written().groups {
        let group = |group: &crate::brief::GroupBriefDocument| {
            let count = group.elements.or(group.pairs).unwrap_or(1).max(1);
            let all = if standard == Kind::Pair { count } else { 0 };
            let pairs = group.pairs.unwrap_or(all);
            let kind = |e: usize| if e < pairs { Kind::Pair } else { Kind::Singlet };
            GroupScheme { name: group.name.clone(), elements: (0..count).map(kind).collect() }
        };
        return vec![groups.iter().map(group).collect()];
    }
    let counts = if brief.ratios.len() == 1 { [2, 3] } else { [3, 4] };
    let group = |name: &&str| GroupScheme { name: (*name).to_owned(), elements: vec![standard] };
    counts.map(|count| names(count).iter().map(group).collect()).into()
}

fn scheme(
    brief: &BriefFile,
    groups: Vec<GroupScheme>,
    inverted: bool,
) -> Result<Scheme, StartError> {
    let names = brief.written().housing.fixed.as_slice();
    let fixed: Vec<bool> = groups.iter().map(|group| names.contains(&group.name)).collect();
    let movement = movement(&fixed, brief.ratios.len())?;
    if movement == Movement::Chosen && brief.wishes.limits.about_the_way() {
        let standing = fixed.iter().filter(|&&fixed| fixed).count();
        return Err(StartError::TooManyMovers { groups: groups.len(), fixed: standing });
    }
    let mut families = Family::all(groups.len(), inverted);
    let ratios: Vec<f64> = brief.ratios.iter().map(|ratio| ratio.ratio).collect();
    if groups.len() == 2 {
        families.retain(|family| two_groups_do(family, ratios[0]));
    }
    let one_way = ratios.iter().all(|ratio| ratio * ratios[0] > 0.0);
    if groups.len() == 3 && movement == Movement::Filling && !one_way {
        return Err(StartError::TooFewMovers { groups: 3, fixed: 2, ratios: ratios.len() });
    }
    Ok(Scheme { groups, fixed, movement, families })
}

/// Whether two groups of these signs, a positive distance apart, give this ratio: f₂ = −Mf₁ and
/// f₁(1 − M) > 0.
fn two_groups_do(family: &Family, ratio: f64) -> bool {
    let sign = |positive: bool| if positive { Sign::Positive } else { Sign::Negative };
    let first = sign(ratio < 1.0);
    family.0 == [first, sign((first == Sign::Positive) != (ratio > 0.0))]
}

fn movement(fixed: &[bool], ratios: usize) -> Result<Movement, StartError> {
    let groups = fixed.len();
    let standing: Vec<usize> = (0..groups).filter(|&g| fixed[g]).collect();
    let ends = fixed.first() == Some(&true) && fixed.last() == Some(&true);
    let refused = Err(StartError::TooFewMovers { groups, fixed: standing.len(), ratios });
    // At one ratio nothing moves: only the ends of the tube count.
    let standing = if ratios > 1 {
        standing
    } else if ends {
        vec![0, groups - 1]
    } else {
        Vec::new()
    };
    Ok(match (groups, standing.as_slice()) {
        (2, _) if ratios > 1 => return refused,
        (2 | 3, []) | (3, [_]) => Movement::Determined,
        (2, [0, 1]) => Movement::Filling,
        (3, [0, 2]) if ratios <= 2 => Movement::Filling,
        (4, [] | [_]) => Movement::Chosen,
        (4, [0, 1]) => Movement::Held(Tie::First),
        (4, [1, 2]) => Movement::Held(Tie::Second),
        (4, [2, 3]) => Movement::Held(Tie::Third),
        (4, [0, 2]) => Movement::Held(Tie::FirstTwo),
        (4, [1, 3]) => Movement::Held(Tie::LastTwo),
        (4, [0, 3]) => Movement::Whole,
        _ => return refused,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fixed_groups_leave_two_movers_or_a_special_case() {
        let told = |fixed: &[bool], ratios| movement(fixed, ratios).ok();
        assert_eq!(told(&[false, false, true], 5), Some(Movement::Determined));
        assert_eq!(told(&[true, false, true], 2), Some(Movement::Filling));
        assert_eq!(told(&[true, false, true], 3), None);
        assert_eq!(told(&[true, true, false], 2), None);
        assert_eq!(told(&[true, false, false, true], 9), Some(Movement::Whole));
        assert_eq!(told(&[true, true, false, true], 2), None);
        assert_eq!(told(&[true, true, false, true], 1), Some(Movement::Whole));
        assert_eq!(told(&[false, false], 2), None);
        assert_eq!(told(&[false, true, false, false], 2), Some(Movement::Chosen));
    }

    #[test]
    fn two_groups_are_galilean_upright_and_keplerian_inverted() {
        use Sign::{Negative, Positive};
        let does = |signs: [Sign; 2], ratio| two_groups_do(&Family(signs.into()), ratio);
        assert!(does([Negative, Positive], 3.0) && !does([Positive, Negative], 3.0));
        assert!(does([Positive, Negative], 0.3));
        assert!(does([Positive, Positive], -3.0) && !does([Negative, Positive], -3.0));
    }
}
