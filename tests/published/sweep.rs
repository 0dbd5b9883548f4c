//! A fixed sweep, point by point, against SciPy: `benchmarks/peers/sweep.py` minimises the same
//! residuals (of an independent program) at every point, each from the design's own start.

use driver::design_file::DesignFile;
use driver::optimise::merit_of;
use driver::run::Interrupt;
use driver::sweep::{PlanFile, Sweep};
use merit_function::block::BlockProblem;
use serde_json::Value;
use surface_model::document::Document;

fn read(path: &str) -> Document {
    let root = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("..");
    Document::parse(path, &std::fs::read(root.join(path)).unwrap()).unwrap()
}

/// The merit as the solver has it: six rays a state.
fn merit_of_rays(design: &Value) -> f64 {
    let file = DesignFile::read(Document::from_value("point", design.clone())).unwrap();
    let mut merit = merit_of(&file).unwrap();
    let start = merit.variables().start().to_vec();
    let mut residuals = vec![0.0; merit.shape().residuals()];
    merit.residuals(&start, &mut residuals).unwrap();
    residuals.iter().map(|r| r * r).sum()
}

#[test]
fn every_point_is_the_minimum_that_scipy_finds() {
    let reference = read("tests/published/data/scipy-sweep.json").value().clone();
    let plan_file =
        PlanFile::read(Document::from_value("plan", reference["plan"].clone())).unwrap();
    let design = plan_file.read_subject(read(plan_file.subject_name())).unwrap();
    let sweep = Sweep::new(plan_file.resolve(&design).unwrap(), design, 1);
    let theirs = reference["points"].as_array().unwrap();
    assert_eq!(sweep.plan().points.len(), theirs.len());
    for (number, values) in sweep.plan().points.iter().enumerate() {
        let point = sweep.point(number, &Interrupt::default()).unwrap();
        let ours = merit_of_rays(&point.reached.as_ref().unwrap().design);
        let theirs = theirs.iter().find(|point| point["values"] == Value::from(values.clone()));
        let theirs = theirs.unwrap()["merit"].as_f64().unwrap();
        assert!((ours / theirs - 1.0).abs() < 1e-6, "{values:?}: {ours:e}, SciPy {theirs:e}");
    }
}
