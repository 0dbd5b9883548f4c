//! A brief is checked as the design it will become: beam, own glasses, housing, ratios and the
//! allowed glasses are put into a design of plane plates, goals and limits beside it, and whatever
//! is wrong with those is found by the code that reads design files. What is found is told at the
//! place of the brief it comes from.

use merit_function::wishes::{StateWishesDocument, WishesDocument};
use surface_model::document::Address;
use surface_model::optics_document::{
    DesignFormat, ElementDocument, FlatWord, GroupDocument, OpticsDocument, RadiusDocument,
    StateDocument,
};

use super::document::{BriefDocument, RatioDocument};

/// The groups of which a brief may speak without naming any.
const UNNAMED: [&str; 2] = ["entry", "exit"];

/// The plates take up no room in the tube.
const PLATE_MM: f64 = f64::MIN_POSITIVE;

/// The optics of a brief, as a design of plane plates. The first plate is a stack of all allowed
/// glasses.
pub(super) fn optics(brief: &BriefDocument) -> OpticsDocument {
    let names: Vec<String> = match &brief.groups {
        Some(groups) => groups.iter().map(|group| group.name.clone()).collect(),
        None => UNNAMED.map(str::to_owned).into(),
    };
    let gaps = names.len().saturating_sub(1);
    let spacings_mm = vec![(brief.housing.track_mm / gaps as f64).max(0.0); gaps];
    let allowed = brief.glasses_allowed.as_slice();
    let glasses =
        |group: usize| if group == 0 { allowed } else { &allowed[..1.min(allowed.len())] };
    let group = |(g, name): (usize, String)| GroupDocument {
        name,
        elements: vec![plate(glasses(g))],
        airs_mm: Vec::new(),
        mount_expansion_per_k: None,
    };
    OpticsDocument {
        format: DesignFormat::V1,
        title: brief.title.clone(),
        beam: brief.beam.clone(),
        coating: brief.coating,
        damage_thresholds: brief.damage_thresholds,
        glasses: brief.glasses.clone(),
        groups: names.into_iter().enumerate().map(group).collect(),
        housing: brief.housing.clone(),
        states: brief.ratios.iter().map(|ratio| state(ratio, &spacings_mm)).collect(),
    }
}

fn plate(glasses: &[String]) -> ElementDocument {
    ElementDocument {
        name: None,
        radii_mm: vec![RadiusDocument::Flat(FlatWord::Flat); glasses.len() + 1],
        glasses: glasses.to_vec(),
        thicknesses_mm: vec![PLATE_MM; glasses.len()],
        diameter_mm: 1.0,
        shapes: None,
    }
}

fn state(ratio: &RatioDocument, spacings_mm: &[f64]) -> StateDocument {
    StateDocument {
        name: ratio.name(),
        ratio: ratio.ratio(),
        spacings_mm: spacings_mm.to_vec(),
        wavelengths_nm: ratio.own().and_then(|own| own.wavelengths_nm.clone()),
    }
}

/// What a brief wants, as a design file that comes of it says it.
pub(super) fn wishes(brief: &BriefDocument) -> WishesDocument {
    let own = |ratio: &RatioDocument| StateWishesDocument {
        weight: ratio.own().and_then(|own| own.weight),
        goals: ratio.own().and_then(|own| own.goals),
    };
    let mut groups = brief.groups.iter().flatten();
    let airs = groups.any(|group| group.elements.or(group.pairs).unwrap_or(1) > 1);
    WishesDocument {
        goals: brief.goals,
        limits: super::usual::completed(&brief.limits, airs),
        temperatures_c: brief.temperatures_c.clone(),
        states: brief.ratios.iter().map(own).collect(),
    }
}

/// Where in the brief the thing stands that made a place of the design what it is; `None` for
/// what the plates repeat.
pub(super) fn place_in_brief(at: &Address, brief: &BriefDocument) -> Option<Address> {
    let steps = at.steps();
    let (front, rest) = match steps.as_slice() {
        [
            "beam" | "coating" | "damage_thresholds" | "glasses" | "housing" | "goals" | "limits"
            | "temperatures_c",
            ..,
        ] => return Some(at.clone()),
        ["groups", _, "name"] if brief.groups.is_some() => return Some(at.clone()),
        ["groups", "0", "elements", "0", "glasses", rest @ ..] => {
            (Address::root().key("glasses_allowed"), rest)
        }
        ["states", number, rest @ ..] => {
            let here = Address::root().key("ratios").key(*number);
            let entry = number.parse().ok().and_then(|number: usize| brief.ratios.get(number));
            match (entry.and_then(RatioDocument::own), rest) {
                (_, ["spacings_mm", ..]) => return None,
                (None, _) => return Some(here),
                (Some(own), ["name"]) if own.name.is_none() => return Some(here),
                (Some(_), rest) => (here, rest),
            }
        }
        _ => return None,
    };
    Some(rest.iter().fold(front, |at, step| at.key(*step)))
}
