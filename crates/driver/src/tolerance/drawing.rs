//! What a drawing for the shop says of an element: the tolerances the file gives, by its grade or
//! its own, and what `tolerances.shop` says besides. What the file does not give is `None`.

use surface_model::design::Design;
use surface_model::document::Address;

use super::document::Tolerances;
use super::item::{Item, Target};
use super::kind::Kind;
use super::shop::{ChamferDocument, ImperfectionsDocument, ScratchesDocument, ShopDocument};
use surface_model::sequence::SurfaceId;

/// What a drawing says of one element.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct ElementDrawing {
    /// Its surfaces, from left to right.
    pub surfaces: Vec<SurfaceDrawing>,
    /// Its pieces of glass, from left to right.
    pub glasses: Vec<GlassDrawing>,
    /// Diameter it is ground to, mm.
    pub outer_diameter_mm: Option<f64>,
    /// How far that may be off, lower and upper, mm.
    pub outer_diameter_off_mm: Option<[f64; 2]>,
}

/// What a drawing says of a surface.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct SurfaceDrawing {
    /// Radius, per cent of it.
    pub radius_percent: Option<f64>,
    /// Radius, fringes against the test plate over the clear diameter.
    pub radius_fringes: Option<f64>,
    /// Irregularity, fringes from peak to valley.
    pub irregularity_fringes: Option<f64>,
    /// Width of the protective chamfer.
    pub chamfer_mm: Option<ChamferDocument>,
    /// Surface imperfections.
    pub imperfections: Option<ImperfectionsDocument>,
    /// Long scratches.
    pub scratches: Option<ScratchesDocument>,
    /// How far edge chips reach in, mm.
    pub edge_chips_mm: Option<f64>,
    /// Coating, in the user's words.
    pub coating: Option<String>,
}

/// What a drawing says of a piece of glass.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct GlassDrawing {
    /// Centre thickness, mm.
    pub thickness_mm: Option<f64>,
    /// Index.
    pub index: Option<f64>,
    /// Abbe number, per cent of it.
    pub abbe_percent: Option<f64>,
    /// Turn of the right surface against the left one, mrad.
    pub wedge_mrad: Option<f64>,
    /// Stress birefringence, nm of path difference a cm.
    pub stress_birefringence_nm_cm: Option<f64>,
    /// Bubbles and inclusions.
    pub bubbles: Option<ImperfectionsDocument>,
    /// Class of inhomogeneity.
    pub inhomogeneity_class: Option<u8>,
    /// Class of striae.
    pub striae_class: Option<u8>,
}

impl Tolerances {
    /// What a drawing says of an element.
    #[must_use]
    pub fn drawing(&self, design: &Design, group: usize, element: usize) -> ElementDrawing {
        let items = Item::given(design, self);
        let tolerance = |kind: Kind, target: Target| {
            let item = items.iter().find(|item| item.kind == kind && item.target == target);
            item.map(|item| item.tolerance).filter(|&tolerance| tolerance > 0.0)
        };
        let elements = Address::root().key("groups").index(group).key("elements");
        let at = elements.index(element);
        let (surfaces, glasses) = design
            .groups
            .get(group)
            .and_then(|group| group.elements.get(element))
            .map_or((0, 0), |element| (element.surfaces.len(), element.glasses.len()));
        let surface = |s: usize| {
            let target = Target::Surface(SurfaceId { group, element, surface: s });
            let at = at.clone().key("radii_mm").index(s);
            SurfaceDrawing {
                radius_percent: tolerance(Kind::RadiusPercent, target),
                radius_fringes: tolerance(Kind::RadiusFringes, target),
                irregularity_fringes: tolerance(Kind::IrregularityFringes, target),
                chamfer_mm: self.shop_says(&at, |shop| shop.chamfer_mm),
                imperfections: self.shop_says(&at, |shop| shop.imperfections),
                scratches: self.shop_says(&at, |shop| shop.scratches),
                edge_chips_mm: self.shop_says(&at, |shop| shop.edge_chips_mm),
                coating: self.shop_says(&at, |shop| shop.coating.clone()),
            }
        };
        let glass = |k: usize| {
            let target = Target::Glass { group, element, glass: k };
            let at = at.clone().key("glasses").index(k);
            GlassDrawing {
                thickness_mm: tolerance(Kind::ThicknessMm, target),
                index: tolerance(Kind::Index, target),
                abbe_percent: tolerance(Kind::AbbePercent, target),
                wedge_mrad: tolerance(Kind::WedgeMrad, target),
                stress_birefringence_nm_cm: self
                    .shop_says(&at, |shop| shop.stress_birefringence_nm_cm),
                bubbles: self.shop_says(&at, |shop| shop.bubbles),
                inhomogeneity_class: self.shop_says(&at, |shop| shop.inhomogeneity_class),
                striae_class: self.shop_says(&at, |shop| shop.striae_class),
            }
        };
        ElementDrawing {
            surfaces: (0..surfaces).map(surface).collect(),
            glasses: (0..glasses).map(glass).collect(),
            outer_diameter_mm: self.shop_says(&at, |shop| shop.outer_diameter_mm),
            outer_diameter_off_mm: self.shop_says(&at, |shop| shop.outer_diameter_off_mm),
        }
    }

    /// The last entry for the shop that is about an address, or about something around it, and says
    /// this.
    fn shop_says<T>(&self, at: &Address, says: impl Fn(&ShopDocument) -> Option<T>) -> Option<T> {
        let entries = self.shop.iter().rev();
        let mut about = entries.filter(|(targets, _)| {
            let mut around = std::iter::successors(Some(at.clone()), Address::parent);
            around.any(|at| targets.contains(&at))
        });
        about.find_map(|(_, shop)| says(shop))
    }
}
