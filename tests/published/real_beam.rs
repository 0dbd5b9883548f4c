//! The real beam, its far field, what it may damage, and ghosts, against closed forms.

use std::f64::consts::{PI, TAU};

use merit_function::assessment::assess;
use surface_model::far_field::far_field;
use surface_model::gaussian::{GaussianBeam, GaussianPath, clipped, peak_per_cm2};
use surface_model::ghost::{Ghost, GhostFocus, GhostWay, fresnel_reflectance, mode_overlap};
use surface_model::pointing::pointing;
use surface_model::quadrature::gauss_legendre;
use surface_model::surface::Surface;
use surface_model::traced_beam::TracedBeam;
use surface_model::train::Train;

const NM: f64 = 1064.0;

/// An equi-convex or -concave lens without thickness.
fn thin_lens(focal_mm: f64, index: f64) -> Train {
    let c = 1.0 / (2.0 * (index - 1.0) * focal_mm);
    let surfaces = vec![Surface::sphere(c, 20.0), Surface::sphere(-c, 20.0)];
    Train::new(surfaces, vec![0.0], vec![1.0, index, 1.0]).unwrap()
}

fn beam(waist_radius_mm: f64, m_squared: f64, distance_mm: f64) -> GaussianBeam {
    let half_divergence_rad = m_squared * NM * 1e-6 / (PI * waist_radius_mm);
    GaussianBeam { waist_radius_mm, half_divergence_rad, waist_at_mm: -distance_mm }
}

/// S. A. Self, Appl. Opt. 22, 658 (1983), eqs. (9b) and (10), numbers from memory:
/// s″/f = 1 + (s/f − 1)/((s/f − 1)² + (z_R/f)²), m = 1/√((1 − s/f)² + (z_R/f)²).
#[test]
fn selfs_formula_for_a_lens() {
    let f = 250.0;
    let lens = thin_lens(f, 1.6);
    for (waist, m_squared) in [(0.2, 1.0), (0.35, 1.0), (0.5, 1.7), (0.1, 4.0)] {
        for s in [-100.0, 0.0, 100.0, f, 300.0, 1000.0] {
            let beam = beam(waist, m_squared, s);
            let rayleigh = PI * waist * waist / (m_squared * NM * 1e-6);
            assert!((beam.rayleigh_length_mm() / rayleigh - 1.0).abs() < 1e-12);
            let (x, z) = (s / f - 1.0, rayleigh / f);
            let image = f * (1.0 + x / (x * x + z * z));
            let magnification = 1.0 / (x * x + z * z).sqrt();
            let mut path = GaussianPath::default();
            path.trace(&lens, &beam).unwrap();
            let exit = path.exit().unwrap();
            assert!((exit.waist_at_mm - image).abs() < 1e-9 * f, "{s}: {exit:?} {image}");
            assert!((exit.waist_radius_mm / waist / magnification - 1.0).abs() < 1e-10);
            assert!((exit.m_squared(NM) - m_squared).abs() < 1e-10);
        }
    }
}

/// After the same paper, the waist behind a lens is widest, and so the divergence least, when the
/// waist before it is in the front focal plane, s = f; it then lies at s″ = f. That is where the
/// re-adjustment must put a lens that moves before a laser.
#[test]
fn the_least_divergence_has_the_waist_in_the_front_focal_plane() {
    let text = r#"{ "format": "drawtube/1", "title": "one lens",
        "beam": { "wavelengths_nm": [1064.0], "diameter_mm": 0.8, "m_squared": 1.3,
                  "waist_diameter_mm": 0.6 },
        "glasses": { "medium": { "index": 1.6 } },
        "groups": [ { "name": "lens", "elements": [ { "radii_mm": [300.0, -300.0],
            "glasses": ["medium"], "thicknesses_mm": [2.0], "diameter_mm": 20.0 } ] } ],
        "housing": { "track_mm": 900.0 },
        "states": [ { "name": "only", "ratio": 1.0, "spacings_mm": [] } ] }"#;
    let document = surface_model::document::Document::parse("lens", text.as_bytes()).unwrap();
    let file = driver::design_file::DesignFile::read(document).unwrap();
    let assessment = assess(&file.design, &file.wishes);
    let told = &assessment.real_beam.as_ref().unwrap()[0];
    let way = told.readjust[0].to_least_divergence_mm.unwrap();
    // Thick lens: front focal distance n(1 − (n − 1)d/(nR₂)…) by Hecht, *Optics*, §6.1.
    let (n, r, d) = (1.6, 300.0, 2.0);
    let f = 1.0 / ((n - 1.0) * (2.0 / r - (n - 1.0) * d / (n * r * r)));
    let front = f - f * (n - 1.0) * d / (n * r);
    let distance = -1e3 * told.entrance.waist_at_m;
    assert!((distance + way - front).abs() < 1e-6, "{distance} + {way}, {front}");
    let least = 2e3 * 0.3 / f;
    assert!((told.readjust[0].least_divergence_mrad.unwrap() / least - 1.0).abs() < 1e-9);
}

/// A flat window whose back departs from the plane by an r⁴ term alone: C₄r⁴ of optical path.
fn quartic_window(c4: f64) -> Train {
    let mut back = Surface::sphere(0.0, 20.0);
    back.asphere[0] = c4 / 0.5;
    let surfaces = vec![Surface::sphere(0.0, 20.0), back];
    Train::new(surfaces, vec![2.0], vec![1.0, 1.5, 1.0]).unwrap()
}

/// A. E. Siegman, Appl. Opt. 32, 5893 (1993), formula from memory: for a phase 2πC₄r⁴/λ,
/// (M²_q)² = (8πC₄/λ)² (⟨r²⟩⟨r⁶⟩ − ⟨r⁴⟩²); a Gaussian beam has ⟨r²ⁿ⟩ = n!(w²/2)ⁿ, hence
/// M²_q = 8πC₄w⁴/(√8 λ).
#[test]
fn siegmans_quartic_phase() {
    let (w, lambda) = (2.0_f64, NM * 1e-6);
    for waves_at_w in [0.02, 0.3, 2.0] {
        let c4 = waves_at_w * lambda / w.powi(4);
        let beam = TracedBeam::new(w, 4.0, NM).unwrap();
        let far = far_field(&quartic_window(c4), &beam).unwrap();
        let expected = 8.0 * PI * waves_at_w / 8.0_f64.sqrt();
        assert!((far.m_squared_added / expected - 1.0).abs() < 1e-3, "{far:?} {expected}");
        let m_squared = (1.2_f64.powi(4) + expected * expected).sqrt();
        assert!((far.m_squared(1.44) / m_squared - 1.0).abs() < 1e-3);
    }
}

/// A. Maréchal, Rev. d'Opt. 26, 257 (1947): the peak falls to 1 − (2πσ)² (exp(−(2πσ)²): V. N.
/// Mahajan, J. Opt. Soc. Am. 73, 860 (1983); both from memory), σ in waves. For a Gaussian beam the
/// mean is weighted with the field exp(−r²/w²): of W = a(r/w)⁴ it has the variance 20a², of which
/// focus takes away 16a² (r⁴ = 2L₀ − 4L₁ + 2L₂ in Laguerre polynomials of r²/w²).
#[test]
fn marechals_relation_by_direct_diffraction_integral() {
    let w = 2.0_f64;
    for a in [0.0005, 0.001, 0.002] {
        let beam = TracedBeam::new(w, 4.0, NM).unwrap();
        let far = far_field(&quartic_window(a * NM * 1e-6 / w.powi(4)), &beam).unwrap();
        for (intensity, variance) in
            [(far.on_axis, 20.0 * a * a), (far.on_axis_refocused, 4.0 * a * a)]
        {
            let lost = TAU * TAU * variance;
            // What is left out grows with the square, and with the long tail of r⁴ over the beam.
            let off = (1.0 - intensity) / lost - 1.0;
            assert!(off.abs() < 0.005 + 25.0 * lost, "{intensity} {lost} {off}");
        }
    }
}

/// An error of focus of a waves at r = w leaves 1/(1 + (2πa)²) of the peak of a Gaussian beam: its
/// Rayleigh range (A. E. Siegman, *Lasers*, ch. 17), and the integral in closed form. Focused again,
/// nothing is lost.
#[test]
fn a_gaussian_beam_out_of_focus_on_axis() {
    let w = 2.0_f64;
    for a in [0.05, 0.3, 1.0] {
        let curvature = -4.0 * a * NM * 1e-6 / (w * w);
        let surfaces = vec![Surface::sphere(0.0, 20.0), Surface::sphere(curvature, 20.0)];
        let weak = Train::new(surfaces, vec![2.0], vec![1.0, 1.5, 1.0]).unwrap();
        let far = far_field(&weak, &TracedBeam::new(w, 4.0, NM).unwrap()).unwrap();
        let expected = 1.0 / (1.0 + (TAU * a).powi(2));
        assert!((far.on_axis - expected).abs() < 1e-5, "{far:?} {expected}");
        assert!(far.on_axis_refocused > 1.0 - 1e-6 && far.m_squared_added < 1e-4, "{far:?}");
    }
}

fn focus(train: &Train, ghost: Ghost, beam: &GaussianBeam) -> GhostFocus {
    let mut way = GhostWay::new(train, ghost);
    way.trace(beam).unwrap();
    way.foci().last().unwrap()
}

/// A converging beam behind a plane-parallel plate of thickness t and index n: two reflections
/// inside take two more passes of the reduced thickness t/n, so that the ghost's focus is 2t/n
/// nearer to the plate than the beam's own, which is t(1 − 1/n) further than without the plate
/// (Hecht, *Optics*, ch. 6; common practice).
#[test]
fn the_ghost_of_a_plane_parallel_plate() {
    let (t, n) = (6.0, 1.5);
    let surfaces = vec![Surface::sphere(0.0, 10.0); 2];
    let plate = Train::new(surfaces, vec![t], vec![1.0, n, 1.0]).unwrap();
    // A waist so narrow that it is a point.
    let converging =
        GaussianBeam { waist_radius_mm: 1e-6, half_divergence_rad: 0.02, waist_at_mm: 100.0 };
    let ghost = focus(&plate, Ghost::Double { first: 1, second: 0 }, &converging);
    assert!((ghost.from_surface_mm - (100.0 - 3.0 * t / n)).abs() < 1e-6, "{ghost:?}");
    let mut path = GaussianPath::default();
    path.trace(&plate, &converging).unwrap();
    let own = path.exit().unwrap().waist_at_mm;
    assert!((own - ghost.from_surface_mm - 2.0 * t / n).abs() < 1e-6);
}

/// A thin lens in a collimated beam. Reflected at its front it has its focus at R₁/2 (a mirror's,
/// Hecht, *Optics*, §5.4); at its rear, through the front twice, at 1/(2(n − 1)c₁ − 2nc₂) before
/// the lens; twice inside, at f(n − 1)/(3n − 1) behind it, formula from memory (W. J. Smith, *Modern
/// Optical Engineering*, on ghost images).
#[test]
fn the_ghosts_of_a_single_lens() {
    let (f, n) = (120.0, 1.6);
    let lens = thin_lens(f, n);
    let c = lens.surfaces()[0].curvature;
    let collimated =
        GaussianBeam { waist_radius_mm: 1.0, half_divergence_rad: 1e-9, waist_at_mm: 0.0 };
    let twice = focus(&lens, Ghost::Double { first: 1, second: 0 }, &collimated);
    assert!((twice.from_surface_mm - f * (n - 1.0) / (3.0 * n - 1.0)).abs() < 1e-9, "{twice:?}");
    let rear = focus(&lens, Ghost::Single { at: 1 }, &collimated);
    let power = 2.0 * (n - 1.0) * c + 2.0 * n * c;
    assert!((rear.from_surface_mm + 1.0 / power).abs() < 1e-9, "{rear:?}");
    assert!((rear.clearance_mm - 1.0 / power).abs() < 1e-9);
    let concave = thin_lens(-f, n);
    let front = focus(&concave, Ghost::Single { at: 0 }, &collimated);
    let radius = 1.0 / concave.surfaces()[0].curvature;
    assert!((front.from_surface_mm - radius / 2.0).abs() < 1e-9, "{front:?}");
}

/// The peak 2E/(πw²) is what makes a Gaussian cross-section hold the energy E (ISO 21254-1: an
/// effective area of πw²/2), and a hole of radius a lets 1 − exp(−2a²/w²) of it through (A. E.
/// Siegman, *Lasers*, ch. 17): both by quadrature of the cross-section.
#[test]
fn peak_fluence_and_clipped_power() {
    let (energy_j, w) = (0.03, 1.7_f64);
    let peak = peak_per_cm2(energy_j, w);
    assert!((peak * PI * (0.1 * w).powi(2) / 2.0 - energy_j).abs() < 1e-15);
    let within = |radius: f64| -> f64 {
        let rule = gauss_legendre(40);
        let ring = |r: f64| peak / 100.0 * (-2.0 * r * r / (w * w)).exp() * TAU * r;
        rule.iter().map(|&(x, weight)| weight * radius * ring(x * radius)).sum()
    };
    assert!((within(6.0 * w) / energy_j - 1.0).abs() < 1e-12);
    for a in [0.5, 1.7, 2.5] {
        assert!((within(a) / energy_j - (1.0 - clipped(a, w))).abs() < 1e-12);
    }
}

/// An afocal telescope that widens a beam M times turns it 1/M as far (Hecht, *Optics*, §5.7), and
/// the Helmholtz invariant holds.
#[test]
fn a_tilted_beam_leaves_tilted_by_the_ratio() {
    let (first, second, n) = (-40.0, 200.0, 1.6);
    let lenses = [first, second].map(|f| 1.0 / (2.0 * (n - 1.0) * f));
    let surfaces =
        lenses.into_iter().flat_map(|c| [Surface::sphere(c, 30.0), Surface::sphere(-c, 30.0)]);
    let gaps = vec![0.0, first + second, 0.0];
    let telescope = Train::new(surfaces.collect(), gaps, vec![1.0, n, 1.0, n, 1.0]).unwrap();
    let narrow = TracedBeam::new(0.1, 1.5, NM).unwrap();
    let turned = pointing(&telescope, &narrow, 1e-3).unwrap();
    assert!((turned.exit_angle_rad / (1e-3 / 5.0) - 1.0).abs() < 1e-3, "{turned:?}");
    // The beam turns about the first vertex and is off the axis by the angle times the distance.
    assert!((turned.exit_shift_mm - 160.0 * 1e-3).abs() < 1e-4, "{turned:?}");
    assert!(turned.rms_waves < 1e-4 && turned.vignetted == 0.0);
}

/// Past its waist a beam widens as d² = d₀² + θ²z², with θ = 4λM²/(πd₀) (ISO 11146-1): what is told
/// of the beam behind an expander and at a range.
#[test]
fn a_beam_widens_with_its_range() {
    for (waist, m_squared, at) in [(0.4, 1.0, 0.0), (3.0, 1.4, -2000.0), (8.0, 2.2, 5000.0)] {
        let beam = beam(waist, m_squared, -at);
        let full_angle = 4.0 * NM * 1e-6 * m_squared / (PI * 2.0 * waist);
        assert!((2.0 * beam.half_divergence_rad / full_angle - 1.0).abs() < 1e-12);
        for range in [0.0, 1e3, 1e5, 1e6] {
            let diameter = (4.0 * waist * waist + (full_angle * (range - at)).powi(2)).sqrt();
            assert!((2.0 * beam.radius_mm(range) / diameter - 1.0).abs() < 1e-12);
        }
    }
}

/// Uncoated glass of index 1.5 reflects 4 % (E. Hecht, *Optics*, §4.6); light that two surfaces
/// reflect is at most the product.
#[test]
fn a_ghost_is_as_strong_as_its_reflections() {
    assert!((fresnel_reflectance(1.0, 1.5) - 0.04).abs() < 1e-15);
    assert!((fresnel_reflectance(1.5, 1.0) - 0.04).abs() < 1e-15);
    assert!((Ghost::Single { at: 1 }.strength(&[0.04, 0.01]) - 0.01).abs() < 1e-15);
    assert!((Ghost::Double { first: 1, second: 0 }.strength(&[0.04, 0.01]) - 4e-4).abs() < 1e-15);
}

/// The share that couples back, against the overlap integral |∫E₁E₂* 2πr dr|² of two Gaussian
/// fields of unit power (H. Kogelnik, *Coupling and conversion coefficients for optical modes*,
/// 1964) by quadrature.
#[test]
fn mode_overlap_by_quadrature() {
    let wavenumber = TAU / (NM * 1e-6);
    for ((w1, c1), (w2, c2)) in
        [((1.0, 0.0), (2.0, 0.0)), ((1.0, 1e-4), (1.5, -3e-4)), ((0.3, 2e-3), (0.25, 5e-4))]
    {
        let (mut real, mut imaginary) = (0.0, 0.0);
        let reach = 8.0 * f64::min(w1, w2);
        for (x, weight) in gauss_legendre(400) {
            let r = x * reach;
            let size = 4.0 * r * weight * reach / (w1 * w2);
            let size = size * (-r * r * (1.0 / (w1 * w1) + 1.0 / (w2 * w2))).exp();
            let (sin, cos) = (0.5 * wavenumber * r * r * (c1 - c2)).sin_cos();
            real += size * cos;
            imaginary += size * sin;
        }
        let share = real * real + imaginary * imaginary;
        let told = mode_overlap((w1, c1), (w2, c2), NM);
        assert!((told - share).abs() < 1e-9, "{told} {share}");
    }
}

/// A tilted beam is off the axis behind a long tube of air, where a clear diameter cuts it: its
/// share by summing the cross-section over a fine square grid.
#[test]
fn a_displaced_beam_is_vignetted() {
    let (radius, clear, length, angle) = (1.0, 1.6, 400.0, 2e-3_f64);
    let surfaces = vec![Surface::sphere(0.0, 20.0), Surface::sphere(0.0, clear)];
    let train = Train::new(surfaces, vec![length], vec![1.0, 1.0, 1.0]).unwrap();
    let traced = TracedBeam::new(radius, 1.5, NM).unwrap();
    let told = pointing(&train, &traced, angle).unwrap();
    let (mut all, mut missing) = (0.0, 0.0);
    let cells = 1500;
    for i in 0..cells {
        for k in 0..cells {
            let at = |n: i32| 1.5 * (2.0 * (f64::from(n) + 0.5) / f64::from(cells) - 1.0);
            let (x, y) = (at(i), at(k));
            let r2 = x * x + y * y;
            if r2 > 1.5 * 1.5 {
                continue;
            }
            let power = (-2.0 * r2 / (radius * radius)).exp();
            all += power;
            if x.hypot(y + length * angle.tan()) > clear {
                missing += power;
            }
        }
    }
    assert!((told.vignetted - missing / all).abs() < 3e-4, "{told:?} {}", missing / all);
    assert!((told.exit_shift_mm - length * angle.tan()).abs() < 1e-6);
}
