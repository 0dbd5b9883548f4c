//! The movement curve as CSV for a cam maker or a stepper: one line a ratio, units in the heads.

use super::document::{CurvePoint, MovementCurve};

/// The table, heads first, as text with comma-separated fields (RFC 4180 but for the line ends).
///
/// # Errors
/// None in practice: the writer writes to memory.
pub fn csv_table(curve: &MovementCurve) -> Result<String, csv::Error> {
    let mut writer = csv::Writer::from_writer(Vec::new());
    writer.write_record(heads(curve))?;
    for point in &curve.points {
        writer.write_record(row(curve, point))?;
    }
    let bytes = writer.into_inner().map_err(|error| csv::Error::from(error.into_error()))?;
    Ok(String::from_utf8_lossy(&bytes).into_owned())
}

fn heads(curve: &MovementCurve) -> Vec<String> {
    let mut heads = vec!["ratio".to_owned(), "state".to_owned()];
    let name = |g: usize| curve.groups[g].name.as_str();
    heads.extend(curve.moving().map(|g| format!("{} position_mm", name(g))));
    heads.extend(curve.moving().map(|g| format!("{} slope_mm_per_ratio", name(g))));
    if curve.barrel.is_some() {
        heads.push("barrel_deg".to_owned());
        heads.extend(curve.moving().map(|g| format!("{} groove_deg", name(g))));
        heads.extend(curve.moving().map(|g| format!("{} pressure_deg", name(g))));
    }
    let pairs = curve.groups.windows(2);
    heads.extend(pairs.map(|pair| format!("{} to {} spacing_mm", pair[0].name, pair[1].name)));
    heads.extend(["collimation_urad", "exit_slope_urad", "ratio_error_percent"].map(str::to_owned));
    if curve.exit_focus_m.is_some() {
        heads.push("exit_focus_m".to_owned());
    }
    if let Some(point) = curve.points.first() {
        for wavefront in &point.wavefront {
            let nm = wavefront.wavelength_nm;
            heads.extend([format!("rms_waves {nm} nm"), format!("pv_waves {nm} nm")]);
        }
    }
    let groups = curve.groups.iter();
    heads.extend(groups.map(|group| format!("{} collimation_urad_per_um", group.name)));
    heads
}

fn row(curve: &MovementCurve, point: &CurvePoint) -> Vec<String> {
    let number = |value: f64| format!("{value}");
    let or_empty = |value: Option<f64>| value.map_or_else(String::new, number);
    let moving = || curve.moving().map(|g| &point.groups[g]);
    let mut row = vec![number(point.ratio), point.state.clone().unwrap_or_default()];
    row.extend(moving().map(|group| format!("{:.6}", group.position_mm)));
    row.extend(moving().map(|group| format!("{:.6}", group.slope_mm_per_ratio)));
    if curve.barrel.is_some() {
        row.push(or_empty(point.barrel_deg));
        row.extend(moving().map(|group| or_empty(group.groove.map(|g| g.groove_deg))));
        row.extend(moving().map(|group| or_empty(group.groove.map(|g| g.pressure_deg))));
    }
    row.extend(point.spacings_mm.iter().map(|spacing| format!("{spacing:.6}")));
    row.push(number(point.collimation_urad));
    row.push(or_empty(point.exit_slope_urad));
    row.push(or_empty(point.ratio_error_percent));
    if curve.exit_focus_m.is_some() {
        row.push(or_empty(point.exit_focus_m));
    }
    for wavefront in &point.wavefront {
        row.extend([or_empty(wavefront.rms_waves), or_empty(wavefront.pv_waves)]);
    }
    row.extend(point.groups.iter().map(|group| number(group.collimation_urad_per_um)));
    row
}
