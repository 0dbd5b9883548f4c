//! What must hold of any sweep plan, however it is spoilt.

use driver::run::Interrupt;
use driver::sweep::{PlanFile, Sweep, SweepResults};
use report::picture::sweep_picture;
use report::text;
use surface_model::document::Document;

use super::brief::BRIEFS;
use super::shipped::DESIGNS;
use super::verdict::{finite, printed, refusal};

/// Name and text of each plan that is shipped.
pub const PLANS: [(&str, &str); 4] = [
    ("track", include_str!("../../configs/track-and-ratio.json")),
    ("wider", include_str!("../../configs/wider-beam.json")),
    ("glass", include_str!("../../configs/exit-glass.json")),
    ("tube", include_str!("../../configs/river-tube.json")),
];

/// Points that are optimised.
const POINTS: usize = 2;
/// Points of plans that are listed.
const LISTED: usize = 2000;

/// Reads a plan, lists its points, and optimises the first; how many points it has, or `None` if
/// it was refused.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn judge(bytes: &[u8]) -> Result<Option<usize>, String> {
    let file = match Document::parse("spoilt.json", bytes).and_then(PlanFile::read) {
        Ok(file) => file,
        Err(complaints) => return refusal(&complaints).map(|()| None),
    };
    // A point of a brief takes a search of its own, so those are only listed.
    let (text, most) = match file.subject_key() {
        "brief" => (BRIEFS[0].1, 0),
        _ => (DESIGNS[0].1, POINTS),
    };
    let subject = Document::parse("subject.json", text.as_bytes())
        .and_then(|document| file.read_subject(document))
        .map_err(|complaints| complaints.to_string())?;
    let plan = match file.resolve(&subject) {
        Ok(plan) => plan,
        Err(complaints) => return refusal(&complaints).map(|()| None),
    };
    let count = plan.points.len();
    if count <= LISTED {
        finite("the plan", &plan)?;
        printed("the list of points", &text::sweep::points(&plan))?;
    }
    let sweep = Sweep::new(plan, subject, 1);
    let mut points = Vec::new();
    for number in 0..count.min(most) {
        let point = sweep.point(number, &Interrupt::default()).map_err(|_| "interrupted")?;
        finite("the point", &point)?;
        points.push(point.as_ref().clone());
    }
    let results = SweepResults::new(sweep.plan(), points);
    printed("the results", &text::sweep::results(&results))?;
    results.files().map_err(|error| error.to_string())?;
    if let Some(picture) = sweep_picture(&results) {
        printed("the picture", &picture)?;
    }
    Ok(Some(count))
}
