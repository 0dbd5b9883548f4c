//! The path of one ray through a design, surface by surface.

use driver::design_file::DesignFile;
use serde::Serialize;
use surface_model::design::ZoomState;
use surface_model::document::Address;
use surface_model::fault::{FaultReason, RayFault};
use surface_model::glass::{Glass, GlassError};
use surface_model::place::Place;
use surface_model::sequence::SurfaceId;
use surface_model::skew::{RayPath, RayStart, trace_ray};

/// What `trace --json` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct RayReport {
    /// Always `drawtube-ray/1`.
    pub format: &'static str,
    /// Name of the zoom state.
    pub state: String,
    /// Wavelength, nm.
    pub wavelength_nm: f64,
    /// Where the ray enters.
    pub start: RayEntry,
    /// One entry a surface, from left to right.
    pub surfaces: Vec<RayAtSurface>,
    /// How it leaves.
    pub exit: RayExit,
    /// What a careful reader should know.
    pub warnings: Vec<String>,
}

/// Where a ray enters: a point of the plane through the first vertex, and its angles to the axis.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct RayEntry {
    /// Across the plane of the paper, mm.
    pub x_mm: f64,
    /// In the plane of the paper, mm.
    pub height_mm: f64,
    /// Angle in x, mrad: the direction cosine is its sine.
    pub angle_x_mrad: f64,
    /// Angle in y, mrad, positive when the height grows.
    pub angle_mrad: f64,
}

/// A ray at one surface.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct RayAtSurface {
    /// The surface's address.
    pub at: Address,
    /// Group, element and surface for people.
    #[serde(skip)]
    pub label: String,
    /// The medium behind the surface.
    pub into: String,
    /// Across the plane of the paper, mm.
    pub x_mm: f64,
    /// In the plane of the paper, mm.
    pub y_mm: f64,
    /// From the surface's vertex along the axis, mm.
    pub sag_mm: f64,
    /// Geometric path from the surface before, or from the entrance plane, mm.
    pub path_mm: f64,
    /// Angle of incidence, degrees.
    pub incidence_deg: f64,
    /// Angle of refraction, degrees.
    pub refraction_deg: f64,
    /// Slope behind the surface in x, mrad: 1000 times dx/dz.
    pub slope_x_mrad: f64,
    /// Slope behind the surface in y, mrad.
    pub slope_y_mrad: f64,
    /// Whether the ray meets the surface outside its clear diameter.
    #[serde(rename = "outside_clear_diameter")]
    pub outside: bool,
}

/// How a ray leaves, in the plane through the last vertex.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct RayExit {
    /// Across the plane of the paper, mm.
    pub x_mm: f64,
    /// In the plane of the paper, mm.
    pub y_mm: f64,
    /// Slope in x, mrad.
    pub slope_x_mrad: f64,
    /// Slope in y, mrad.
    pub slope_y_mrad: f64,
    /// Optical path less that of the axial ray, waves.
    pub path_waves: f64,
}

/// Why a ray has no path to tell.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum RayError {
    /// A glass is not known at the wavelength.
    #[error(transparent)]
    Glass(#[from] GlassError),
    /// The angles leave no direction forward.
    #[error("angles of {x} and {y} mrad leave the ray no direction towards the lens")]
    Direction {
        /// Angle in x, mrad.
        x: f64,
        /// Angle in y, mrad.
        y: f64,
    },
    /// The ray does not get through.
    #[error("in state {state} at {wavelength_nm} nm {reason} at {at}")]
    Fault {
        /// Name of the zoom state.
        state: String,
        /// Wavelength, nm.
        wavelength_nm: f64,
        /// What happened.
        reason: FaultReason,
        /// At which surface.
        at: Address,
    },
}

/// Traces one ray through one state of a design.
///
/// # Errors
/// See [`RayError`].
pub fn ray(
    file: &DesignFile,
    state: &ZoomState,
    wavelength_nm: f64,
    start: RayEntry,
) -> Result<RayReport, RayError> {
    let train = file.design.train(state, wavelength_nm)?;
    let ids = file.design.sequence().surfaces;
    let address = |id: SurfaceId| Place::Radius(id).address().with_names(file.document().value());
    let direction = [start.angle_x_mrad, start.angle_mrad].map(|mrad| (mrad / 1e3).sin());
    let forward = [start.angle_x_mrad, start.angle_mrad]
        .iter()
        .all(|mrad| mrad.abs() < 1e3 * std::f64::consts::FRAC_PI_2)
        && direction[0].hypot(direction[1]) < 1.0;
    if !forward {
        return Err(RayError::Direction { x: start.angle_x_mrad, y: start.angle_mrad });
    }
    let entry = RayStart { position_mm: [start.x_mm, start.height_mm], direction };
    let path = trace_ray(&train, entry).map_err(|fault: RayFault| RayError::Fault {
        state: state.name.clone(),
        wavelength_nm,
        reason: fault.reason,
        at: ids.get(fault.surface).map_or_else(Address::root, |&id| address(id)),
    })?;
    let points = path.points();
    let after = slopes(&path, &points);
    let mut surfaces = Vec::with_capacity(points.len());
    for (i, (point, &id)) in points.iter().zip(&ids).enumerate() {
        let [x_mm, y_mm, sag_mm] = point.position_mm;
        let [slope_x_mrad, slope_y_mrad] = after.get(i).copied().unwrap_or_default();
        surfaces.push(RayAtSurface {
            at: address(id),
            label: label(file, id),
            into: medium_behind(file, id),
            x_mm,
            y_mm,
            sag_mm,
            path_mm: point.path_mm,
            incidence_deg: point.incidence_rad.to_degrees(),
            refraction_deg: point.refraction_rad.to_degrees(),
            slope_x_mrad,
            slope_y_mrad,
            outside: x_mm.hypot(y_mm) > train.surfaces()[i].semi_diameter,
        });
    }
    let exit = path.exit();
    let [slope_x_mrad, slope_y_mrad] = after.last().copied().unwrap_or_default();
    Ok(RayReport {
        format: "drawtube-ray/1",
        state: state.name.clone(),
        wavelength_nm,
        start,
        warnings: outside_warnings(&surfaces),
        surfaces,
        exit: RayExit {
            x_mm: exit.position_mm[0],
            y_mm: exit.position_mm[1],
            slope_x_mrad,
            slope_y_mrad,
            path_waves: exit.path_mm * 1e6 / wavelength_nm,
        },
    })
}

/// Slopes behind every surface, mrad: the direction on arrival at the next one, at last the exit.
fn slopes(path: &RayPath, points: &[surface_model::skew::RayPoint]) -> Vec<[f64; 2]> {
    let [l, m] = path.exit().direction;
    let last = [l, m, (1.0 - l * l - m * m).sqrt()];
    let arrivals = points.iter().skip(1).map(|point| point.direction_in);
    arrivals.chain([last]).map(|[x, y, z]| [1e3 * x / z, 1e3 * y / z]).collect()
}

fn label(file: &DesignFile, id: SurfaceId) -> String {
    let group = &file.design.groups[id.group];
    let element = &group.elements[id.element];
    let name = element.name.clone().unwrap_or_else(|| id.element.to_string());
    format!("{} {name} {}", group.name, id.surface)
}

fn medium_behind(file: &DesignFile, id: SurfaceId) -> String {
    let element = &file.design.groups[id.group].elements[id.element];
    element.glasses.get(id.surface).map_or_else(|| "air".to_owned(), Glass::full_name)
}

fn outside_warnings(surfaces: &[RayAtSurface]) -> Vec<String> {
    let outside: Vec<String> =
        surfaces.iter().filter(|surface| surface.outside).map(|s| s.at.to_string()).collect();
    if outside.is_empty() {
        return Vec::new();
    }
    vec![format!(
        "the ray passes outside the clear diameter at {}; a real lens would block it there",
        outside.join(", ")
    )]
}
