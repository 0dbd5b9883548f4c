//! The trace beside the least it can cost: a bare loop over the same numbers with the same square
//! roots and divisions a ray and surface, and nothing else.
//!
//! At a sphere a ray needs two square roots (to meet it, to refract) and one division. The loop
//! does them on numbers that do not depend on each other, so that only the processor's dividers
//! hold it up; a second one chains them from surface to surface as a ray must. Beside them the
//! trace of a meridional ray makes 46 additions and multiplications a surface: a third loop makes
//! as many, which matters where the dividers are fast.

use std::fmt::Write;
use std::hint::black_box;
use std::time::Duration;

use multiversion::multiversion;
use surface_model::bundle::Bundle;
use surface_model::real::{LANES, Lanes, Real};
use surface_model::surface::Surface;
use surface_model::train::Train;

use crate::Failure;
use crate::page::{Section, Verdict};
use crate::spread::{Spread, interleaved, ratios};

const SURFACES: usize = 6;
type Eight = [f64; LANES];

const INTRODUCTION: &str = "## The trace beside a bare loop

Meridional rays through six spheres, ns a ray and surface, beside bare vector loops with the same
two square roots and one division a ray and surface, in the same vectors. *Free*: all independent of
each other. *Arithmetic*: the same with 46 additions and multiplications, as many as the trace makes. *Chained*: each surface waits for the one before, as a ray does, but the processor may work
on several blocks of eight rays at a time. *Alone*: each block waits for the one before, too, as it
does when there is but one. Wanted: at most 1.5 times the free loop. The trace gives optical paths
and keeps what the reverse sweep needs.

| rays | trace, ns | free, ns | arithmetic, ns | chained, ns | alone, ns | over free | over arithmetic | over chained | over alone |
|---|---|---|---|---|---|---|---|---|---|
";

/// Independent square roots and divisions: two and one, over and over.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
fn free(numbers: &[Eight], out: &mut [Eight]) {
    for (number, out) in numbers.iter().zip(out) {
        for surface in 0..SURFACES {
            let shift = surface as f64;
            for lane in 0..LANES {
                let x = number[lane] + shift;
                out[lane] += x.sqrt() + (1.0 + x).sqrt() + 1.0 / x;
            }
        }
    }
}

/// The same with the 46 additions and multiplications that a sphere takes besides, in two chains.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
fn arithmetic(numbers: &[Eight], out: &mut [Eight]) {
    let one = Lanes::splat(1.0);
    for (number, out) in numbers.iter().zip(out) {
        let mut sum = Lanes(*out);
        for surface in 0..SURFACES {
            let x = Lanes(*number) + Lanes::splat(surface as f64);
            let (mut a, mut b) = (x, one + x);
            for _ in 0..11 {
                a = a * Lanes::splat(0.7) + Lanes::splat(0.3);
                b = b * Lanes::splat(0.6) + Lanes::splat(0.4);
            }
            sum = sum + (x.sqrt() + (one + x).sqrt() + one / x) + (a + b);
        }
        *out = sum.0;
    }
}

/// The same work, each surface's on the result of the one before.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
fn chained(numbers: &[Eight], out: &mut [Eight]) {
    for (number, out) in numbers.iter().zip(out) {
        let mut x = *number;
        for _ in 0..SURFACES {
            for x in &mut x {
                *x = (1.0 + 1.0 / (1.0 + x.sqrt())).sqrt();
            }
        }
        *out = x;
    }
}

/// The same work, each block's on the result of the one before.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
fn alone(numbers: &[Eight], out: &mut [Eight]) {
    let mut x = [1.5; LANES];
    for (number, out) in numbers.iter().zip(out) {
        for (x, number) in x.iter_mut().zip(number) {
            *x += *number;
        }
        for _ in 0..SURFACES {
            for x in &mut x {
                *x = (1.0 + 1.0 / (1.0 + x.sqrt())).sqrt();
            }
        }
        *out = x;
    }
}

/// Six spheres about as bent as those of an expander.
pub(crate) fn train() -> Result<Train, Failure> {
    let curvatures = [1.0 / 75.0, -1.0 / 20.0, -1.0 / 24.0, 1.0 / 9.0, 1.0 / 400.0, -1.0 / 85.0];
    let surfaces = curvatures.map(|curvature| Surface::sphere(curvature, 4.0)).to_vec();
    let gaps = vec![3.0, 6.5, 2.0, 121.0, 5.0];
    Ok(Train::new(surfaces, gaps, vec![1.0, 1.46, 1.0, 1.46, 1.0, 1.46, 1.0])?)
}

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    let train = train()?;
    for rays in [64, 512] {
        let heights: Vec<f64> = (0..rays).map(|i| 1.8 * (i as f64 + 0.5) / rays as f64).collect();
        let mut paths = vec![0.0; rays];
        let mut bundle = Bundle::new();
        bundle.load([&train], &heights);
        bundle.trace(&mut paths)?;
        let numbers: Vec<Eight> = heights
            .chunks(LANES)
            .map(|chunk| std::array::from_fn(|lane| 1.0 + chunk[lane]))
            .collect();
        let mut sums = vec![[0.0; LANES]; numbers.len()];
        let (mut more, mut ends, mut last) = (sums.clone(), sums.clone(), sums.clone());
        let mut trace = || {
            let _ = black_box(&mut bundle).trace(&mut paths);
        };
        let mut independent = || free(black_box(&numbers), black_box(&mut sums));
        let mut besides = || arithmetic(black_box(&numbers), black_box(&mut more));
        let mut in_turn = || chained(black_box(&numbers), black_box(&mut ends));
        let mut one_by_one = || alone(black_box(&numbers), black_box(&mut last));
        let jobs: &mut [&mut dyn FnMut()] =
            &mut [&mut trace, &mut independent, &mut besides, &mut in_turn, &mut one_by_one];
        let times = interleaved(25, Duration::from_millis(15), jobs);
        let nano =
            |times: &Vec<f64>| Spread::of(times.clone()).scaled(1e9 / (rays * SURFACES) as f64);
        let ratio = ratios(&times[0], &times[1]);
        let what = format!("trace over a bare loop of square roots and divisions, {rays} rays");
        page.verdicts.push(Verdict::at_most(what, 1.5, ratio));
        writeln!(
            page.text,
            "| {rays} | {} | {} | {} | {} | {} | **{}** | {} | {} | {} |",
            nano(&times[0]),
            nano(&times[1]),
            nano(&times[2]),
            nano(&times[3]),
            nano(&times[4]),
            ratio,
            ratios(&times[0], &times[2]),
            ratios(&times[0], &times[3]),
            ratios(&times[0], &times[4])
        )?;
    }
    Ok(page)
}
