//! The whole chain, file to minimum, against an independent program: `benchmarks/peers/expander.py`
//! computes the same merit from its definitions in NumPy, and SciPy minimises it. What it found is
//! in `data/scipy/`, one file a design of `benchmarks/designs/`; each names the script and the
//! versions that made it.
//!
//! Residuals, and their Jacobian by imaginary steps, were computed there in extended precision, with
//! another way of meeting surfaces.

use driver::design_file::DesignFile;
use driver::optimise::merit_of;
use driver::solve::{Outcome, Settings, Unwatched, run};
use merit_function::block::{BlockProblem, Linearisation};
use nalgebra::{DMatrix, DVector};
use serde_json::Value;
use surface_model::document::Document;

/// With one minimum inside all bounds.
const HELD: [&str; 4] = ["cemented-pairs", "four-singlets", "one-mover", "three-singlets"];

/// The shipped designs and two more, everything free that they free.
const FREE: [&str; 6] = [
    "four-groups-asphere",
    "four-singlets-six-states",
    "moving-collimator",
    "one-mover-three-states",
    "river-lidar-2x-6x",
    "two-colour-pairs",
];

fn designs() -> impl Iterator<Item = &'static str> {
    HELD.into_iter().chain(FREE)
}

fn read(path: &str) -> Vec<u8> {
    let root = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("..");
    std::fs::read(root.join(path)).unwrap_or_else(|error| panic!("{path}: {error}"))
}

fn design(name: &str) -> DesignFile {
    let path = format!("benchmarks/designs/{name}.json");
    let document = Document::parse(&path, &read(&path)).unwrap();
    DesignFile::read(document).unwrap()
}

fn reference(name: &str) -> Value {
    serde_json::from_slice(&read(&format!("tests/published/data/scipy/{name}.json"))).unwrap()
}

fn vector(value: &Value) -> DVector<f64> {
    let numbers = value.as_array().unwrap().iter().map(|number| number.as_f64().unwrap());
    DVector::from_vec(numbers.collect())
}

fn residuals(file: &DesignFile) -> DVector<f64> {
    let mut merit = merit_of(file).unwrap();
    let start = merit.variables().start().to_vec();
    let mut residuals = DVector::zeros(merit.shape().residuals());
    merit.residuals(&start, residuals.as_mut_slice()).unwrap();
    residuals
}

/// The whole Jacobian at the start, zeros between the blocks and all.
fn jacobian(file: &DesignFile) -> DMatrix<f64> {
    let mut merit = merit_of(file).unwrap();
    let shape = merit.shape().clone();
    let start = merit.variables().start().to_vec();
    let mut linear = Linearisation::zeros(&shape);
    merit.linearise(&start, &mut linear).unwrap();
    let mut jacobian = DMatrix::zeros(shape.residuals(), shape.variables());
    let mut row = 0;
    for (k, block) in linear.states.iter().enumerate() {
        let rows = block.residuals.len();
        let own = shape.own_range(k);
        jacobian.view_mut((row, 0), (rows, shape.shared)).copy_from(&block.by_shared);
        jacobian.view_mut((row, own.start), (rows, own.len())).copy_from(&block.by_own);
        row += rows;
    }
    jacobian
}

fn minimum(file: &DesignFile) -> Outcome {
    let mut merit = merit_of(file).unwrap();
    let start = merit.variables().start().to_vec();
    run(&mut merit, &start, &Settings::default(), &mut Unwatched).unwrap()
}

fn at_end(name: &str, reference: &Value) -> DesignFile {
    DesignFile::read(Document::from_value(name, reference["end"]["design"].clone())).unwrap()
}

/// Rounding of an optical path of 200 mm, in units of a goal's `within`: 3e-14 mm is 1e-10 waves,
/// and the goals are hundredths of a wave. Slopes in microradians round alike.
const ROUNDING: f64 = 5e-9;

#[test]
fn residuals_are_those_of_the_independent_program() {
    for name in designs() {
        let reference = reference(name);
        let pairs = [
            ("start", residuals(&design(name)), vector(&reference["start"]["residuals"])),
            ("end", residuals(&at_end(name, &reference)), vector(&reference["end"]["residuals"])),
        ];
        for (place, ours, theirs) in pairs {
            assert_eq!(ours.len(), theirs.len(), "{name}, {place}");
            let off = (&ours - &theirs).amax();
            let allowed = ROUNDING + 1e-11 * theirs.amax();
            assert!(off < allowed, "{name}, {place}: off by {off:e}, {allowed:e} allowed");
        }
    }
}

#[test]
fn derivatives_are_those_of_imaginary_steps() {
    for name in designs() {
        let reference = reference(name);
        let ours = jacobian(&design(name));
        let rows = reference["start"]["jacobian"].as_array().unwrap();
        assert_eq!(ours.nrows(), rows.len(), "{name}");
        let mut theirs = DMatrix::zeros(ours.nrows(), ours.ncols());
        for (i, row) in rows.iter().enumerate() {
            theirs.row_mut(i).copy_from(&vector(row).transpose());
        }
        for (j, (ours, theirs)) in ours.column_iter().zip(theirs.column_iter()).enumerate() {
            let off = (ours - theirs).amax() / theirs.amax();
            assert!(off < 1e-10, "{name}, variable {j}: off by {off:e} of the largest derivative");
        }
    }
}

#[test]
fn the_minimum_from_the_same_start_is_not_above_the_one_scipy_finds() {
    for name in designs().filter(|&name| name != "two-colour-pairs") {
        let theirs = reference(name)["end"]["merit"].as_f64().unwrap();
        let ours = minimum(&design(name)).sum_of_squares;
        assert!(ours <= theirs * (1.0 + 1e-6) + 1e-12, "{name}: {ours:e}, SciPy {theirs:e}");
    }
}

/// Where the minimum is one point and not a valley floor near zero, both programs find the same.
#[test]
fn both_find_the_same_minimum_where_there_is_but_one() {
    let bounded = ["one-mover-three-states", "river-lidar-2x-6x"];
    let unstalled = HELD.into_iter().filter(|&name| name != "four-singlets");
    for name in unstalled.chain(bounded) {
        let theirs = reference(name)["end"]["merit"].as_f64().unwrap();
        let ours = minimum(&design(name)).sum_of_squares;
        assert!((ours / theirs - 1.0).abs() < 1e-6, "{name}: {ours:e}, SciPy {theirs:e}");
    }
}

/// Going on from where SciPy stopped never ends higher, and in its basin of the six-state design
/// and of the pairs much lower.
#[test]
fn going_on_from_where_scipy_stopped_ends_lower() {
    for name in designs() {
        let reference = reference(name);
        let theirs = reference["end"]["merit"].as_f64().unwrap();
        let onwards = minimum(&at_end(name, &reference)).sum_of_squares;
        assert!(onwards <= theirs * (1.0 + 1e-6), "{name}: {onwards:e}, SciPy {theirs:e}");
        let stalled = matches!(name, "four-singlets-six-states" | "two-colour-pairs");
        assert!(!stalled || onwards < 0.98 * theirs, "{name}: {onwards:e}, SciPy {theirs:e}");
    }
}

/// The pairs have neighbouring minima, all below a thousandth of one missed goal. From the file's
/// start the two programs end in different ones: SciPy's is the lower by a tenth. Ours is a
/// minimum nonetheless: it cannot be improved from where it is.
#[test]
fn the_pairs_end_in_a_minimum_if_not_in_the_same() {
    let file = design("two-colour-pairs");
    let mut merit = merit_of(&file).unwrap();
    let start = merit.variables().start().to_vec();
    let first = run(&mut merit, &start, &Settings::default(), &mut Unwatched).unwrap();
    let again = run(&mut merit, &first.variables, &Settings::default(), &mut Unwatched).unwrap();
    assert!(first.stopped.was_successful(), "{}", first.stopped);
    assert!(again.sum_of_squares > first.sum_of_squares * (1.0 - 1e-5));
    assert!(first.sum_of_squares < 1e-3);
}

/// The shipped designs with every limit, derived ones included: SLSQP, begun anew until that no
/// longer helped, ends no lower, and where the minimum is not a valley floor near zero the same.
#[test]
fn with_all_limits_slsqp_ends_no_lower() {
    let reference = reference("shipped");
    let minima = reference["minima"].as_object().unwrap();
    assert!(minima.len() >= 4);
    for (name, theirs) in minima {
        let file = DesignFile::read(Document::from_value(name, theirs["design"].clone())).unwrap();
        let theirs = theirs["merit"].as_f64().unwrap();
        let ours = minimum(&file);
        assert!(ours.limits_kept(), "{name}: a limit is crossed by {} tolerances", ours.violation);
        let ours = ours.sum_of_squares;
        assert!(ours <= theirs * (1.0 + 1e-6), "{name}: {ours:e}, SLSQP {theirs:e}");
        assert!(theirs < 1e-2 || (ours / theirs - 1.0).abs() < 1e-6, "{name}: {ours:e}");
    }
}
