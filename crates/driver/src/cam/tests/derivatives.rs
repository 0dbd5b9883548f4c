//! Slopes and sensitivities against differences.

use super::*;

#[test]
fn slopes_are_those_of_the_positions() {
    for name in ["river-lidar-2x-6x", "four-groups-asphere"] {
        let file = shipped(name);
        let curve = curve(&file);
        for five in curve.fine.windows(5).step_by(17) {
            let even = five[4].ratio - 2.0 * five[2].ratio + five[0].ratio;
            if even.abs() > 1e-9 {
                continue;
            }
            let h = five[1].ratio - five[0].ratio;
            for g in curve.moving() {
                // The five-point rule for a derivative (Abramowitz and Stegun, 25.3.6).
                let z = |i: usize| five[i].groups[g].position_mm;
                let slope = (8.0 * (z(3) - z(1)) - (z(4) - z(0))) / (12.0 * h);
                let told = five[2].groups[g].slope_mm_per_ratio;
                assert!((slope - told).abs() < 1e-5 * told.abs().max(1.0), "{name} {slope} {told}");
            }
        }
    }
}

#[test]
fn collimation_is_what_a_displaced_group_changes_it_by() {
    let file = shipped("river-lidar-2x-6x");
    let design = &file.design;
    let mut gauge = Gauge::new(design, &design.states[0], 532.0).unwrap();
    let at = curve(&file).points[3].clone();
    let mut collimation = |group: usize, by_mm: f64| {
        let mut spacings = at.spacings_mm.clone();
        if group > 0 {
            spacings[group - 1] += by_mm;
        }
        if group < spacings.len() {
            spacings[group] -= by_mm;
        }
        gauge.measure(&spacings).unwrap().collimation_rad * 1e6
    };
    for group in 0..3 {
        let difference = (collimation(group, 1e-3) - collimation(group, -1e-3)) / 2.0;
        let told = at.groups[group].collimation_urad_per_um;
        assert!((difference - told).abs() < 1e-5 * told.abs().max(1.0), "{difference} {told}");
    }
}

#[test]
fn a_focus_is_held_through_the_sphere_around_it() {
    // W + S by the ray's own numbers against the whole beam's spacing derivatives by differences.
    let file = shipped("river-lidar-2x-6x");
    let state = &file.design.states[2];
    let mut gauge = Gauge::new(&file.design, state, 532.0).unwrap();
    gauge.want_vergence(1e-3 / 40.0);
    let mut at = |by: [f64; 2]| {
        let spacings: Vec<f64> = state.spacings_mm.iter().zip(by).map(|(d, by)| d + by).collect();
        gauge.measure(&spacings).unwrap()
    };
    let told = at([0.0; 2]).collimation_by_spacing;
    for (k, told) in told.iter().enumerate() {
        let by = |h: f64| if k == 0 { [h, 0.0] } else { [0.0, h] };
        let difference = at(by(1e-4)).collimation_rad - at(by(-1e-4)).collimation_rad;
        assert!((difference / 2e-4 / told - 1.0).abs() < 1e-6, "{difference} {told}");
    }
    // A flat sphere is none.
    let collimated = {
        let mut gauge = Gauge::new(&file.design, state, 532.0).unwrap();
        gauge.measure(&state.spacings_mm).unwrap().collimation_rad
    };
    gauge.want_vergence(1e-15);
    let nearly = gauge.measure(&state.spacings_mm).unwrap().collimation_rad;
    assert!((nearly - collimated).abs() < 1e-12, "{nearly} {collimated}");
}
