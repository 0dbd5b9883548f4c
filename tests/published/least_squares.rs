//! The solver on the test functions of Moré, Garbow and Hillstrom, ACM Trans. Math. Softw. 7, 17
//! (1981): standard starts, published minima. The data of numbers 8, 9, 10, 15, 17 and 19 and
//! the minima are from memory of that paper; that each minimum is met to the six figures
//! published is what confirms them.

use driver::solve::{Settings, Unwatched, run};

use crate::smooth::{C, Smooth};

type Function = fn(&[C]) -> Vec<C>;

struct Published {
    name: &'static str,
    start: &'static [f64],
    function: Function,
    /// Published minima of the sum of squares; any of them counts.
    minima: &'static [f64],
}

const FUNCTIONS: &[Published] = &[
    Published { name: "Rosenbrock", start: &[-1.2, 1.0], function: rosenbrock, minima: &[0.0] },
    Published {
        name: "Freudenstein and Roth",
        start: &[0.5, -2.0],
        function: freudenstein_roth,
        minima: &[0.0, 48.9842],
    },
    Published {
        name: "Powell badly scaled",
        start: &[0.0, 1.0],
        function: powell_badly_scaled,
        minima: &[0.0],
    },
    Published {
        name: "Brown badly scaled",
        start: &[1.0, 1.0],
        function: brown_badly_scaled,
        minima: &[0.0],
    },
    Published { name: "Beale", start: &[1.0, 1.0], function: beale, minima: &[0.0] },
    Published {
        name: "Jennrich and Sampson",
        start: &[0.3, 0.4],
        function: jennrich_sampson,
        minima: &[124.362],
    },
    Published {
        name: "Helical valley",
        start: &[-1.0, 0.0, 0.0],
        function: helical_valley,
        minima: &[0.0],
    },
    Published { name: "Bard", start: &[1.0, 1.0, 1.0], function: bard, minima: &[8.21487e-3] },
    Published {
        name: "Gaussian",
        start: &[0.4, 1.0, 0.0],
        function: gaussian,
        minima: &[1.12793e-8],
    },
    Published { name: "Meyer", start: &[0.02, 4000.0, 250.0], function: meyer, minima: &[87.9458] },
    Published { name: "Box", start: &[0.0, 10.0, 20.0], function: box_three, minima: &[0.0] },
    Published {
        name: "Powell singular",
        start: &[3.0, -1.0, 0.0, 1.0],
        function: powell_singular,
        minima: &[0.0],
    },
    Published { name: "Wood", start: &[-3.0, -1.0, -3.0, -1.0], function: wood, minima: &[0.0] },
    Published {
        name: "Kowalik and Osborne",
        start: &[0.25, 0.39, 0.415, 0.39],
        function: kowalik_osborne,
        minima: &[3.07505e-4],
    },
    Published {
        name: "Brown and Dennis",
        start: &[25.0, 5.0, -5.0, -1.0],
        function: brown_dennis,
        minima: &[85822.2],
    },
    Published {
        name: "Osborne 1",
        start: &[0.5, 1.5, -1.0, 0.01, 0.02],
        function: osborne_one,
        minima: &[5.46489e-5],
    },
    Published {
        name: "Osborne 2",
        start: &[1.3, 0.65, 0.65, 0.7, 0.6, 3.0, 5.0, 7.0, 2.0, 4.5, 5.5],
        function: osborne_two,
        minima: &[4.01377e-2],
    },
    Published { name: "Watson, n = 6", start: &[0.0; 6], function: watson, minima: &[2.28767e-3] },
    Published { name: "Watson, n = 9", start: &[0.0; 9], function: watson, minima: &[1.39976e-6] },
];

fn real(x: f64) -> C {
    C::new(x, 0.0)
}

fn rosenbrock(x: &[C]) -> Vec<C> {
    vec![(x[1] - x[0] * x[0]) * 10.0, real(1.0) - x[0]]
}

fn freudenstein_roth(x: &[C]) -> Vec<C> {
    let second = x[1];
    vec![
        x[0] - 13.0 + ((real(5.0) - second) * second - 2.0) * second,
        x[0] - 29.0 + ((second + 1.0) * second - 14.0) * second,
    ]
}

fn powell_badly_scaled(x: &[C]) -> Vec<C> {
    vec![x[0] * x[1] * 1e4 - 1.0, (-x[0]).exp() + (-x[1]).exp() - 1.0001]
}

fn brown_badly_scaled(x: &[C]) -> Vec<C> {
    vec![x[0] - 1e6, x[1] - 2e-6, x[0] * x[1] - 2.0]
}

fn beale(x: &[C]) -> Vec<C> {
    let power = |n: i32| x[0] * (real(1.0) - x[1].powi(n));
    vec![real(1.5) - power(1), real(2.25) - power(2), real(2.625) - power(3)]
}

fn jennrich_sampson(x: &[C]) -> Vec<C> {
    (1..=10)
        .map(f64::from)
        .map(|i| real(2.0 + 2.0 * i) - ((x[0] * i).exp() + (x[1] * i).exp()))
        .collect()
}

/// The library's complex arctangent loses a tiny imaginary part in its logarithms.
fn arctangent(z: C) -> C {
    C::new(z.re.atan(), z.im / (1.0 + z.re * z.re))
}

fn helical_valley(x: &[C]) -> Vec<C> {
    let turn = arctangent(x[1] / x[0]) / std::f64::consts::TAU;
    let theta = if x[0].re < 0.0 { turn + 0.5 } else { turn };
    let radius = (x[0] * x[0] + x[1] * x[1]).sqrt();
    vec![(x[2] - theta * 10.0) * 10.0, (radius - 1.0) * 10.0, x[2]]
}

fn bard(x: &[C]) -> Vec<C> {
    let observed =
        [0.14, 0.18, 0.22, 0.25, 0.29, 0.32, 0.35, 0.39, 0.37, 0.58, 0.73, 0.96, 1.34, 2.10, 4.39];
    (1_u32..)
        .zip(observed)
        .map(|(i, y)| {
            let (u, v) = (f64::from(i), 16.0 - f64::from(i));
            real(y) - (x[0] + real(u) / (x[1] * v + x[2] * u.min(v)))
        })
        .collect()
}

fn gaussian(x: &[C]) -> Vec<C> {
    let observed = [
        0.0009, 0.0044, 0.0175, 0.0540, 0.1295, 0.2420, 0.3521, 0.3989, 0.3521, 0.2420, 0.1295,
        0.0540, 0.0175, 0.0044, 0.0009,
    ];
    (1_u32..)
        .zip(observed)
        .map(|(i, y)| {
            let away = real((8.0 - f64::from(i)) / 2.0) - x[2];
            x[0] * (-x[1] * away * away / 2.0).exp() - y
        })
        .collect()
}

fn meyer(x: &[C]) -> Vec<C> {
    let observed = [
        34780.0, 28610.0, 23650.0, 19630.0, 16370.0, 13720.0, 11540.0, 9744.0, 8261.0, 7030.0,
        6005.0, 5147.0, 4427.0, 3820.0, 3307.0, 2872.0,
    ];
    (1_u32..)
        .zip(observed)
        .map(|(i, y)| x[0] * (x[1] / (x[2] + 45.0 + 5.0 * f64::from(i))).exp() - y)
        .collect()
}

fn box_three(x: &[C]) -> Vec<C> {
    (1..=10)
        .map(|i| 0.1 * f64::from(i))
        .map(|t| (-x[0] * t).exp() - (-x[1] * t).exp() - x[2] * ((-t).exp() - (-10.0 * t).exp()))
        .collect()
}

fn powell_singular(x: &[C]) -> Vec<C> {
    let square = |z: C| z * z;
    vec![
        x[0] + x[1] * 10.0,
        (x[2] - x[3]) * 5.0_f64.sqrt(),
        square(x[1] - x[2] * 2.0),
        square(x[0] - x[3]) * 10.0_f64.sqrt(),
    ]
}

fn wood(x: &[C]) -> Vec<C> {
    vec![
        (x[1] - x[0] * x[0]) * 10.0,
        real(1.0) - x[0],
        (x[3] - x[2] * x[2]) * 90.0_f64.sqrt(),
        real(1.0) - x[2],
        (x[1] + x[3] - 2.0) * 10.0_f64.sqrt(),
        (x[1] - x[3]) / 10.0_f64.sqrt(),
    ]
}

fn kowalik_osborne(x: &[C]) -> Vec<C> {
    let observed = [
        (0.1957, 4.0),
        (0.1947, 2.0),
        (0.1735, 1.0),
        (0.1600, 0.5),
        (0.0844, 0.25),
        (0.0627, 0.167),
        (0.0456, 0.125),
        (0.0342, 0.1),
        (0.0323, 0.0833),
        (0.0235, 0.0714),
        (0.0246, 0.0625),
    ];
    observed
        .iter()
        .map(|&(y, u)| real(y) - x[0] * (x[1] * u + u * u) / (x[2] * u + x[3] + u * u))
        .collect()
}

fn brown_dennis(x: &[C]) -> Vec<C> {
    (1..=20)
        .map(|i| f64::from(i) / 5.0)
        .map(|t| {
            let growth = x[0] + x[1] * t - t.exp();
            let wave = x[2] + x[3] * t.sin() - t.cos();
            growth * growth + wave * wave
        })
        .collect()
}

fn osborne_one(x: &[C]) -> Vec<C> {
    let observed = [
        0.844, 0.908, 0.932, 0.936, 0.925, 0.908, 0.881, 0.850, 0.818, 0.784, 0.751, 0.718, 0.685,
        0.658, 0.628, 0.603, 0.580, 0.558, 0.538, 0.522, 0.506, 0.490, 0.478, 0.467, 0.457, 0.448,
        0.438, 0.431, 0.424, 0.420, 0.414, 0.411, 0.406,
    ];
    (0_u32..)
        .zip(observed)
        .map(|(i, y)| {
            let t = 10.0 * f64::from(i);
            real(y) - (x[0] + x[1] * (-x[3] * t).exp() + x[2] * (-x[4] * t).exp())
        })
        .collect()
}

fn osborne_two(x: &[C]) -> Vec<C> {
    let observed = [
        1.366, 1.191, 1.112, 1.013, 0.991, 0.885, 0.831, 0.847, 0.786, 0.725, 0.746, 0.679, 0.608,
        0.655, 0.616, 0.606, 0.602, 0.626, 0.651, 0.724, 0.649, 0.649, 0.694, 0.644, 0.624, 0.661,
        0.612, 0.558, 0.533, 0.495, 0.500, 0.423, 0.395, 0.375, 0.372, 0.391, 0.396, 0.405, 0.428,
        0.429, 0.523, 0.562, 0.607, 0.653, 0.672, 0.708, 0.633, 0.668, 0.645, 0.632, 0.591, 0.559,
        0.597, 0.625, 0.739, 0.710, 0.729, 0.720, 0.636, 0.581, 0.428, 0.292, 0.162, 0.098, 0.054,
    ];
    let peak = |height: C, width: C, centre: C, t: f64| {
        let away = real(t) - centre;
        height * (-away * away * width).exp()
    };
    (0_u32..)
        .zip(observed)
        .map(|(i, y)| {
            let t = f64::from(i) / 10.0;
            real(y)
                - x[0] * (-x[4] * t).exp()
                - peak(x[1], x[5], x[8], t)
                - peak(x[2], x[6], x[9], t)
                - peak(x[3], x[7], x[10], t)
        })
        .collect()
}

fn watson(x: &[C]) -> Vec<C> {
    let mut residuals: Vec<C> = (1..=29)
        .map(|i| f64::from(i) / 29.0)
        .map(|t| {
            let (mut value, mut slope, mut power) = (real(0.0), real(0.0), 1.0);
            for (j, &coefficient) in x.iter().enumerate() {
                value += coefficient * power;
                if let Some(&next) = x.get(j + 1) {
                    slope += next * (j + 1) as f64 * power;
                }
                power *= t;
            }
            slope - value * value - 1.0
        })
        .collect();
    residuals.push(x[0]);
    residuals.push(x[1] - x[0] * x[0] - 1.0);
    residuals
}

/// Published to six figures; a zero minimum counts as met below 1e-14.
fn is_met(found: f64, published: f64) -> bool {
    if published == 0.0 { found < 1e-14 } else { (found / published - 1.0).abs() < 1e-5 }
}

#[test]
fn published_minima_are_met_with_and_without_acceleration() {
    for acceleration in [Some(0.75), None] {
        let settings = Settings::default().with_acceleration(acceleration).unwrap();
        let (mut steps, mut evaluations, mut linearisations) = (0, 0, 0);
        for published in FUNCTIONS {
            let mut problem = Smooth::new(published.start, published.function);
            let outcome = run(&mut problem, published.start, &settings, &mut Unwatched).unwrap();
            steps += outcome.iterations;
            evaluations += outcome.evaluations;
            linearisations += outcome.linearisations;
            let found = outcome.sum_of_squares;
            let met = published.minima.iter().any(|&minimum| is_met(found, minimum));
            assert!(met, "{}: {found:e} is none of {:?}", published.name, published.minima);
            assert!(outcome.stopped.was_successful(), "{}: {}", published.name, outcome.stopped);
        }
        println!(
            "acceleration {acceleration:?}: {steps} steps, {evaluations} residuals, \
             {linearisations} Jacobians"
        );
    }
}
