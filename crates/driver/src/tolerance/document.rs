//! `tolerances` of a design file.

use std::collections::HashSet;

use merit_function::goals::WithinDocument;
use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use serde_json::Value;
use surface_model::design::Design;
use surface_model::document::{Address, Complaint, Place as PlaceInFile, nearest};
use surface_model::place::Place;

use super::item::{Item, Target};
use super::kind::{Grade, Kind, Spread};
use super::shop::{self, About, ShopDocument};
use crate::freedom;

/// The part of a design file that says how well it can be built.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct TolerancesDocument {
    /// How well the design can be built.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub tolerances: Option<ToleranceDocument>,
}

/// How well a design can be built, and what it must still do then.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ToleranceDocument {
    /// A named set of tolerances; fine if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub grade: Option<Grade>,
    /// How errors are spread within their tolerance; normal if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub spread: Option<Spread>,
    /// Tolerances that differ from the grade's; a later entry goes before an earlier one.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub own: Vec<OwnToleranceDocument>,
    /// What drawings for the shop say besides; a later entry goes before an earlier one.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub shop: Vec<ShopDocument>,
    /// What is re-adjusted in every state once the system is built: the word `spacings` or
    /// addresses of spacings. The free spacings if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub readjusted: Option<Vec<String>>,
    /// Groups whose mount turns as it moves; all others slide.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub rotating: Vec<RotatingDocument>,
    /// What a built system must reach, where it differs from the goals.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub require: Option<RequirementDocument>,
}

/// Tolerances of what stands at an address and within; 0 takes one away.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct OwnToleranceDocument {
    /// What they are about.
    pub at: String,
    /// Radii, per cent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub radius_percent: Option<f64>,
    /// Radii, fringes (273.0 nm) of sag over the clear diameter; instead of per cent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub radius_fringes: Option<f64>,
    /// Irregularity, fringes (273.0 nm) from peak to valley over the clear diameter.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub irregularity_fringes: Option<f64>,
    /// Centre thicknesses, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub thickness_mm: Option<f64>,
    /// Air inside groups, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub air_mm: Option<f64>,
    /// Index of glasses.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub index: Option<f64>,
    /// Abbe number of glasses, per cent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub abbe_percent: Option<f64>,
    /// Wedge of glasses, mrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub wedge_mrad: Option<f64>,
    /// Elements across the axis of their group, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub element_decentre_mm: Option<f64>,
    /// Turn of elements about their middle, mrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub element_tilt_mrad: Option<f64>,
    /// Groups across the axis, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub group_decentre_mm: Option<f64>,
    /// Turn of groups about their middle, mrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub group_tilt_mrad: Option<f64>,
    /// How far off spacings are set each time, after all re-adjustment, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub spacing_mm: Option<f64>,
}

/// A mount that turns as it moves.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct RotatingDocument {
    /// Name of the group.
    pub group: String,
    /// Travel of one whole turn, mm.
    pub lead_mm: f64,
}

/// What a built system must reach in every state.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct RequirementDocument {
    /// RMS wavefront error without tilt, waves.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub wavefront_rms_waves: Option<WithinDocument>,
    /// Ratio error, per cent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ratio_percent: Option<WithinDocument>,
    /// Exit slope at the 1/e² radius, µrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub exit_slope_urad: Option<WithinDocument>,
    /// Direction of the beam against the axis, µrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub boresight_urad: Option<WithinDocument>,
    /// Largest change of direction between any two states, µrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub boresight_wander_urad: Option<WithinDocument>,
}

/// Tolerances of a design, resolved.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Tolerances {
    /// The named set.
    pub grade: Grade,
    /// Whether the file names one.
    pub(crate) graded: bool,
    /// How errors are spread.
    pub(crate) spread: Spread,
    /// Own tolerances in the order of the file: what they are about, and the tolerance.
    pub(crate) own: Vec<(Kind, Target, f64)>,
    /// What drawings say besides, in the order of the file, and what each entry is about.
    pub(crate) shop: Vec<(HashSet<Address>, ShopDocument)>,
    /// Spacings that are re-adjusted, if the file says which.
    pub(crate) readjusted: Option<Vec<Place>>,
    /// Per group, travel of one whole turn of its mount, if it turns, mm.
    pub(crate) leads_mm: Vec<Option<f64>>,
    /// What a built system must reach, where it differs from the goals.
    pub(crate) require: RequirementDocument,
}

/// Resolves the tolerances of a file.
///
/// # Errors
/// Every entry that makes no sense, as a complaint about its place.
pub(crate) fn resolve(
    document: &TolerancesDocument,
    design: &Design,
    file: &Value,
) -> Result<Tolerances, Vec<Complaint>> {
    let mut resolver = Resolver { design, file, complaints: Vec::new() };
    let leads_mm = vec![None; design.groups.len()];
    let mut tolerances = Tolerances { leads_mm, ..Tolerances::default() };
    let Some(part) = &document.tolerances else { return Ok(tolerances) };
    let at = Address::root().key("tolerances");
    tolerances.graded = part.grade.is_some();
    tolerances.grade = part.grade.unwrap_or_default();
    tolerances.spread = part.spread.unwrap_or_default();
    let items = Item::possible(design);
    for (i, own) in part.own.iter().enumerate() {
        let at = at.clone().key("own").index(i);
        tolerances.own.extend(resolver.own(&at, own, &items));
    }
    let everything = shop::everything(design);
    for (i, entry) in part.shop.iter().enumerate() {
        let at = at.clone().key("shop").index(i);
        let targets = resolver.shop(&at, entry, &everything);
        tolerances.shop.push((targets, entry.clone()));
    }
    tolerances.readjusted = part.readjusted.as_ref().map(|words| {
        let at = at.clone().key("readjusted");
        let places = words.iter().enumerate();
        places.flat_map(|(i, words)| resolver.spacings(at.clone().index(i), words)).collect()
    });
    for (i, mount) in part.rotating.iter().enumerate() {
        resolver.mount(&at.clone().key("rotating").index(i), mount, &mut tolerances.leads_mm);
    }
    if let Some(require) = &part.require {
        resolver.require(&at.key("require"), require);
        tolerances.require = require.clone();
    }
    if resolver.complaints.is_empty() { Ok(tolerances) } else { Err(resolver.complaints) }
}

/// The spacings that words of the command line mean.
///
/// # Errors
/// A word that means none.
pub(crate) fn spacings_of(
    words: &str,
    design: &Design,
    file: &Value,
) -> Result<Vec<Place>, String> {
    let places = freedom::places_of(words, design, file).map_err(|error| error.to_string())?;
    if places.iter().all(|place| matches!(place, Place::Spacing { .. })) {
        Ok(places)
    } else {
        Err(format!("\"{words}\" is about more than spacings, and only those can be re-adjusted"))
    }
}

/// An address and everything around it.
fn around(at: &Address) -> impl Iterator<Item = Address> {
    std::iter::successors(Some(at.clone()), Address::parent)
}

struct Resolver<'a> {
    design: &'a Design,
    file: &'a Value,
    complaints: Vec<Complaint>,
}

impl Resolver<'_> {
    fn complain(&mut self, at: Address, found: String, expected: String, advice: Option<String>) {
        let place = PlaceInFile::Value(at);
        self.complaints.push(Complaint { place, found, expected: Some(expected), advice });
    }

    fn number(&mut self, at: Address, what: &str, found: f64, largest: f64) {
        if !(0.0..=largest).contains(&found) {
            let expected = format!("a number from 0 to {largest}");
            self.complain(at, format!("{what} is {found}"), expected, None);
        }
    }

    /// What an entry's address means.
    fn targets(&mut self, entry: &Address, at: &str) -> Option<HashSet<Address>> {
        let place = || PlaceInFile::Value(entry.clone().key("at"));
        let address: Address = match at.parse() {
            Ok(address) => address,
            Err(error) => {
                let error: surface_model::document::AddressSyntaxError = error;
                self.complaints.push(error.complaint(place()));
                return None;
            }
        };
        match address.resolve(self.file) {
            Ok(targets) => Some(targets.into_iter().collect()),
            Err(error) => {
                self.complaints.push(error.complaint(place()));
                None
            }
        }
    }

    fn shop(
        &mut self,
        at: &Address,
        entry: &ShopDocument,
        everything: &[(About, Address, f64)],
    ) -> HashSet<Address> {
        for (steps, found, expected) in entry.out_of_range() {
            let at = steps.iter().fold(at.clone(), |at, step| at.key(*step));
            let name = steps.last().unwrap_or(&"");
            self.complain(at, format!("\"{name}\" is {found}"), expected, None);
        }
        let Some(targets) = self.targets(at, &entry.at) else { return HashSet::new() };
        let within: Vec<&(About, Address, f64)> = everything
            .iter()
            .filter(|(_, part, _)| around(part).any(|at| targets.contains(&at)))
            .collect();
        for (word, about) in entry.words() {
            if !within.iter().any(|(part, ..)| *part == about) {
                let told = format!("nothing at \"{}\" has \"{word}\"", entry.at);
                let expected = "an address around something that has one";
                self.complain(at.clone().key(word), told, expected.into(), None);
            }
        }
        let clear = within.iter().map(|(.., clear_mm)| *clear_mm).fold(0.0, f64::max);
        if let Some(outer) = entry.outer_diameter_mm.filter(|&outer| outer < clear) {
            let at = at.clone().key("outer_diameter_mm");
            let expected = format!("at least the clear diameter, {clear}");
            let found = format!("\"outer_diameter_mm\" is {outer}");
            self.complain(at, found, expected, None);
        }
        targets
    }

    fn own(
        &mut self,
        at: &Address,
        own: &OwnToleranceDocument,
        items: &[Item],
    ) -> Vec<(Kind, Target, f64)> {
        let Some(targets) = self.targets(at, &own.at) else { return Vec::new() };
        let mut found = Vec::new();
        for (kind, value) in own.values() {
            let at = at.clone().key(kind.word());
            self.number(at.clone(), "a tolerance", value, kind.largest());
            let before = found.len();
            let about = items.iter().filter(|item| {
                item.kind == kind && around(&item.at()).any(|at| targets.contains(&at))
            });
            found.extend(about.map(|item| (kind, item.target, value)));
            if found.len() == before {
                let told = format!("nothing at \"{}\" has a {}", own.at, kind.word());
                self.complain(at, told, "an address around something that has one".into(), None);
            }
        }
        found
    }

    fn spacings(&mut self, at: Address, words: &str) -> Vec<Place> {
        spacings_of(words, self.design, self.file).unwrap_or_else(|found| {
            let expected = "\"spacings\", or an address such as \"/states/*/spacings_mm/1\"";
            self.complain(at, found, expected.into(), None);
            Vec::new()
        })
    }

    fn mount(&mut self, at: &Address, mount: &RotatingDocument, leads_mm: &mut [Option<f64>]) {
        if !(1e-3..=1e6).contains(&mount.lead_mm.abs()) {
            let found = format!("a lead is {}", mount.lead_mm);
            let expected = "a number from 0.001 to 1000000 mm either way".into();
            self.complain(at.clone().key("lead_mm"), found, expected, None);
        }
        let names: Vec<&str> = self.design.groups.iter().map(|group| group.name.as_str()).collect();
        match names.iter().position(|&name| name == mount.group) {
            Some(group) => leads_mm[group] = Some(mount.lead_mm),
            None => {
                let found = format!("no group is called \"{}\"", mount.group);
                let expected = surface_model::document::one_of(names.iter().copied());
                let near = nearest(&mount.group, names.iter().copied());
                let advice = near.map(surface_model::document::did_you_mean);
                self.complain(at.clone().key("group"), found, expected, advice);
            }
        }
    }

    fn require(&mut self, at: &Address, require: &RequirementDocument) {
        let all = [
            ("wavefront_rms_waves", require.wavefront_rms_waves),
            ("ratio_percent", require.ratio_percent),
            ("exit_slope_urad", require.exit_slope_urad),
            ("boresight_urad", require.boresight_urad),
            ("boresight_wander_urad", require.boresight_wander_urad),
        ];
        for (word, within) in all {
            let Some(WithinDocument { within }) = within else { continue };
            if !(within > 1e-12 && within <= 1e12) {
                let at = at.clone().key(word).key("within");
                let found = format!("a requirement's \"within\" is {within}");
                self.complain(at, found, "a number above 0".into(), None);
            }
        }
    }
}

impl OwnToleranceDocument {
    /// The tolerances that are given.
    fn values(&self) -> Vec<(Kind, f64)> {
        let all = [
            (Kind::RadiusPercent, self.radius_percent),
            (Kind::RadiusFringes, self.radius_fringes),
            (Kind::IrregularityFringes, self.irregularity_fringes),
            (Kind::ThicknessMm, self.thickness_mm),
            (Kind::AirMm, self.air_mm),
            (Kind::Index, self.index),
            (Kind::AbbePercent, self.abbe_percent),
            (Kind::WedgeMrad, self.wedge_mrad),
            (Kind::ElementDecentreMm, self.element_decentre_mm),
            (Kind::ElementTiltMrad, self.element_tilt_mrad),
            (Kind::GroupDecentreMm, self.group_decentre_mm),
            (Kind::GroupTiltMrad, self.group_tilt_mrad),
            (Kind::SpacingMm, self.spacing_mm),
        ];
        all.into_iter().filter_map(|(kind, value)| Some((kind, value?))).collect()
    }
}
