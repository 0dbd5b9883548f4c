//! A design at other temperatures than the 20 °C it is drawn at: what it does there untouched,
//! how fast it drifts, and how its spacings bring it back.
//!
//! Re-adjusted is what the design's `tolerances` say, or its free spacings, towards the goals, as
//! after an error of the workshop ([`mod@crate::tolerance`]). Wavefronts are those of the whole
//! beam, by the same rays as there.

use serde::Serialize;
use surface_model::document::Address;
use surface_model::glass::REFERENCE_C;
use surface_model::temperature::TemperatureError;

use crate::design_file::DesignFile;
use crate::tolerance::{Bench, Gauges, Levers, Mounts, StateNumbers, ToleranceError};

/// Kelvins to either side of 20 °C between which the drift is taken: its curvature over them is
/// far below what is printed.
const AROUND_K: f64 = 1.0;

/// What a design does at other temperatures.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct TemperatureReport {
    /// Spacings that are re-adjusted.
    pub readjusted: Vec<Address>,
    /// Drift of every state around 20 °C.
    pub drift: Vec<StateDrift>,
    /// One entry a temperature, in the order asked for.
    pub temperatures: Vec<AtTemperature>,
}

/// How fast a state drifts around 20 °C.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StateDrift {
    /// Name of the state.
    pub state: String,
    /// Ratio, per cent a kelvin.
    pub ratio_percent_per_k: f64,
    /// Exit slope, µrad a kelvin.
    pub exit_slope_urad_per_k: f64,
    /// What each re-adjusted spacing has to follow, mm a kelvin, beyond the growth of the tube.
    pub readjustment_mm_per_k: Vec<f64>,
}

/// The design at one temperature.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct AtTemperature {
    /// Which, °C.
    pub temperature_c: f64,
    /// One entry a state.
    pub states: Vec<StateAtTemperature>,
}

/// A state at one temperature.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StateAtTemperature {
    /// Name of the state.
    pub state: String,
    /// Untouched.
    pub untouched: TemperatureNumbers,
    /// With its spacings re-adjusted.
    pub readjusted: TemperatureNumbers,
    /// By how much each was, mm, beyond the growth of the tube.
    pub readjustment_mm: Vec<f64>,
    /// Whether one of them stopped at its bound.
    pub at_bound: bool,
}

/// What a state is like.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct TemperatureNumbers {
    /// Error of the ratio, per cent.
    pub ratio_percent: f64,
    /// Exit slope at the 1/e² radius, µrad.
    pub exit_slope_urad: f64,
    /// RMS wavefront error, the worst of the wavelengths, waves.
    pub wavefront_rms_waves: f64,
}

/// Why a design cannot be told at a temperature.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum AtTemperatureError {
    /// Something does not say how it changes.
    #[error(transparent)]
    Temperature(#[from] TemperatureError),
    /// The design at a temperature cannot be measured.
    #[error("at {temperature_c} °C: {error}")]
    Measure {
        /// Which temperature.
        temperature_c: f64,
        /// Why.
        error: Box<ToleranceError>,
    },
}

/// Tells what a design does at these temperatures, °C.
///
/// # Errors
/// See [`AtTemperatureError`].
pub fn at_temperatures(
    file: &DesignFile,
    temperatures_c: &[f64],
) -> Result<TemperatureReport, AtTemperatureError> {
    let at = |temperature_c| at_temperature(file, temperature_c);
    let (below, above) = (at(REFERENCE_C - AROUND_K)?, at(REFERENCE_C + AROUND_K)?);
    let drift = below.states.iter().zip(&above.states).map(|(below, above)| {
        let per_k = |above: f64, below: f64| (above - below) / (2.0 * AROUND_K);
        let (a, b) = (&above.untouched, &below.untouched);
        let moved = above.readjustment_mm.iter().zip(&below.readjustment_mm);
        StateDrift {
            state: above.state.clone(),
            ratio_percent_per_k: per_k(a.ratio_percent, b.ratio_percent),
            exit_slope_urad_per_k: per_k(a.exit_slope_urad, b.exit_slope_urad),
            readjustment_mm_per_k: moved.map(|(&above, &below)| per_k(above, below)).collect(),
        }
    });
    let temperatures: Result<Vec<AtTemperature>, _> =
        temperatures_c.iter().map(|&temperature_c| at(temperature_c)).collect();
    let bench = bench(file, REFERENCE_C)?;
    Ok(TemperatureReport {
        readjusted: bench.readjusted_addresses(),
        drift: drift.collect(),
        temperatures: temperatures?,
    })
}

fn measured(temperature_c: f64) -> impl Fn(ToleranceError) -> AtTemperatureError {
    move |error| AtTemperatureError::Measure { temperature_c, error: Box::new(error) }
}

/// The bench with nothing spoilt.
fn bench(file: &DesignFile, temperature_c: f64) -> Result<Bench<'_>, AtTemperatureError> {
    Bench::new(file, &file.tolerances, Vec::new()).map_err(measured(temperature_c))
}

fn at_temperature(
    file: &DesignFile,
    temperature_c: f64,
) -> Result<AtTemperature, AtTemperatureError> {
    let mut warm = file.clone();
    warm.design = file.design.at_temperature(temperature_c)?;
    let bench = bench(&warm, temperature_c)?;
    let built = bench.build(&[]);
    let mut gauges = Gauges::default();
    let mut states = Vec::with_capacity(bench.states.len());
    for (k, drawn) in bench.states.iter().enumerate() {
        let levers = Levers::of(&bench, k);
        let mut packed = built.packed.clone();
        let mut state = bench.state_of(&built, k, Mounts::AsGiven);
        let stopped = |fault: String| {
            let error = ToleranceError::Nominal { state: drawn.name.clone(), fault };
            measured(temperature_c)(error)
        };
        let untouched =
            bench.measure(k, &state, &mut gauges).map_err(|fault| stopped(fault.to_string()))?;
        let (readjusted, moved) = bench
            .readjust(k, &levers, &mut packed, &mut state, &mut gauges)
            .map_err(|fault| stopped(fault.to_string()))?;
        states.push(StateAtTemperature {
            state: drawn.name.clone(),
            untouched: untouched.into(),
            readjusted: readjusted.into(),
            readjustment_mm: moved.moved_mm,
            at_bound: moved.at_bound,
        });
    }
    Ok(AtTemperature { temperature_c, states })
}

impl From<StateNumbers> for TemperatureNumbers {
    fn from(numbers: StateNumbers) -> Self {
        Self {
            ratio_percent: numbers.ratio_percent,
            exit_slope_urad: numbers.exit_slope_urad,
            wavefront_rms_waves: numbers.wavefront_rms_waves,
        }
    }
}
