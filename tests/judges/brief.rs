//! What must hold of any brief, however it is spoilt.

use std::time::{Duration, Instant};

use driver::brief::BriefFile;
use driver::start::Starts;
use report::start::{StartDocument, impossible};
use report::text;
use surface_model::document::Document;

use super::verdict::{finite, holds, printed, quiet, refusal};

/// Name and text of each brief that is shipped.
pub const BRIEFS: [(&str, &str); 3] = [
    ("river", include_str!("../../configs/river-brief.json")),
    ("two colours", include_str!("../../configs/two-colour-brief.json")),
    ("quay", include_str!("../../configs/quay-brief.json")),
];

/// Points of the space that are looked at.
const POINTS: u64 = 40;
/// Longest a brief may take, with room for a slow or busy machine.
const LONGEST: Duration = Duration::from_secs(10);

/// Reads a brief and looks at some of its layouts; how many there were, or `None` if it was
/// refused.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn judge(bytes: &[u8]) -> Result<Option<usize>, String> {
    let began = Instant::now();
    let brief = match Document::parse("spoilt.json", bytes).and_then(BriefFile::read) {
        Ok(brief) => brief,
        Err(complaints) => return refusal(&complaints).map(|()| None),
    };
    let starts = match Starts::of(&brief) {
        Ok(starts) => starts,
        Err(error) => return quiet(&error.to_string()).map(|()| Some(0)),
    };
    let mut found = 0;
    let points = starts.points(1);
    for number in 0..POINTS {
        if let Ok(layout) = starts.layout(&points.point(number)) {
            found += 1;
            finite("the layout", &layout)?;
            let file = starts.design_file(&layout, &layout.design, "");
            file.map_err(|complaints| format!("no design file: {complaints}"))?;
        }
    }
    told(&starts)?;
    holds(began.elapsed() < LONGEST, || format!("took {:?}", began.elapsed()))?;
    Ok(Some(found))
}

/// What `start` prints.
fn told(starts: &Starts) -> Result<(), String> {
    let ranking = starts.ranked(POINTS, 1, 3);
    if ranking.best.is_empty() {
        // A few points are enough to look for what could be relaxed.
        let told = impossible(starts, &ranking, &starts.relaxations(2, 1));
        return quiet(&told.message).and_then(|()| quiet(&told.advice));
    }
    finite("the list of layouts", &StartDocument::of(starts, &ranking, 1))?;
    printed("the table of layouts", &text::start::layouts(starts, &ranking))
}
