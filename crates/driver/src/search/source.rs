//! Where candidates come from: a design file or a brief.

use rand::RngExt;
use surface_model::design::Design;

use super::brief_source::{BriefSource, Layouts};
use super::candidate::{Candidate, keep_best};
use super::design_source::{DesignBench, DesignSource};
use super::workbench::{Effort, Workbench};
use crate::design_file::DesignFile;
use crate::optimise::OptimiseError;
use crate::run::Interrupted;
use crate::sampling::{RandomStream, Sobol};
use crate::start::{Layout, NoLayout, Refusals};

/// Of how many points of a design file one is drawn around its own numbers.
const AROUND_THE_FILE: u64 = 8;
/// Points a start may look at.
const POINTS_OF_A_DESIGN: u64 = 96;
const POINTS_OF_A_BRIEF: u64 = 16_384;
/// How often clear diameters are made larger; more than once is rare.
const MOST_REFITS: usize = 3;

/// A design file or a brief.
#[derive(Debug)]
pub(super) enum Source {
    Design(Box<DesignSource>),
    Brief(Box<BriefSource>),
}

/// A source with what one start needs of it.
pub(super) struct Quarry<'p> {
    kind: Kind<'p>,
    /// The points that all starts of a seed share.
    sobol: Sobol,
    number: u64,
    /// What a design file begun from a brief says of where it comes from.
    note: String,
    /// Why points of a brief have no layout, and how many have one.
    refused: Vec<NoLayout>,
    layouts: usize,
}

enum Kind<'p> {
    Design(&'p DesignSource, Box<DesignBench>),
    Brief(&'p BriefSource, Layouts),
}

impl Source {
    /// Opens the source for a start.
    pub(super) fn open<'p>(
        &'p self,
        bench: &mut Workbench<'_>,
        seed: u64,
        number: u64,
    ) -> Result<Quarry<'p>, OptimiseError> {
        let (kind, sobol) = match self {
            Self::Design(source) => {
                let sobol = Sobol::shifted(source.dimensions(), seed);
                (Kind::Design(source, Box::new(source.bench(bench)?)), sobol)
            }
            Self::Brief(source) => {
                (Kind::Brief(source, Layouts::new()), source.starts.points(seed))
            }
        };
        let note = format!("Found by start {number} of a search, seed {seed}.");
        Ok(Quarry { kind, sobol, number, note, refused: Vec::new(), layouts: 0 })
    }
}

/// Point `i` of start `number` in a sequence of which every start takes `points`.
fn stretch(number: u64, points: u64, i: u64) -> u64 {
    number.wrapping_mul(points).wrapping_add(i)
}

impl Quarry<'_> {
    /// Point `i` of the start's own: of its stretch of a low-discrepancy sequence that all starts
    /// of a seed share.
    pub(super) fn point(&self, i: u64, random: &mut RandomStream) -> Vec<f64> {
        let at = stretch(self.number, self.most_points(), i);
        match &self.kind {
            Kind::Design(source, _) => {
                let dimensions = source.dimensions();
                let mut point = self.sobol.point(at);
                // Coordinates beyond the sequence's dimensions are random.
                point.resize_with(dimensions, || random.random());
                point
            }
            Kind::Brief(..) => self.sobol.point(at),
        }
    }

    /// The candidate at a point of the unit cube, if there is one.
    pub(super) fn at(
        &mut self,
        bench: &mut Workbench<'_>,
        point: &[f64],
    ) -> Result<Option<Candidate>, Interrupted> {
        match &mut self.kind {
            Kind::Design(source, problems) => source.at(problems, bench, point),
            Kind::Brief(source, layouts) => source.at(layouts, bench, point),
        }
    }

    /// How many points a start may look at. What has no layout costs a brief a fraction of a
    /// microsecond, and of some briefs few points have one.
    pub(super) fn most_points(&self) -> u64 {
        match &self.kind {
            Kind::Design(..) => POINTS_OF_A_DESIGN,
            Kind::Brief(..) => POINTS_OF_A_BRIEF,
        }
    }

    /// The best `most` candidates at first order among twice as many, or among as many as the
    /// start's points hold.
    pub(super) fn draw(
        &mut self,
        bench: &mut Workbench<'_>,
        most: usize,
        random: &mut RandomStream,
    ) -> Result<Vec<Candidate>, Interrupted> {
        let mut candidates = match &self.kind {
            Kind::Design(..) => self.draw_from_design(bench, 2 * most, random)?,
            Kind::Brief(..) => self.draw_from_brief(bench, most)?,
        };
        keep_best(&mut candidates, most);
        Ok(candidates)
    }

    fn draw_from_design(
        &mut self,
        bench: &mut Workbench<'_>,
        wanted: usize,
        random: &mut RandomStream,
    ) -> Result<Vec<Candidate>, Interrupted> {
        let mut candidates = Vec::with_capacity(wanted);
        for i in 0..POINTS_OF_A_DESIGN {
            if candidates.len() == wanted {
                break;
            }
            let candidate = match &mut self.kind {
                Kind::Design(source, problems) if i % AROUND_THE_FILE == 0 => {
                    source.around(problems, bench, random)?
                }
                _ => {
                    let point = self.point(i, random);
                    self.at(bench, &point)?
                }
            };
            candidates.extend(candidate);
        }
        Ok(candidates)
    }

    /// Layouts are screened by their first-order score before anything is traced.
    fn draw_from_brief(
        &mut self,
        bench: &mut Workbench<'_>,
        most: usize,
    ) -> Result<Vec<Candidate>, Interrupted> {
        let Kind::Brief(source, layouts) = &mut self.kind else { return Ok(Vec::new()) };
        let mut drawn = Vec::with_capacity(2 * most);
        for i in 0..POINTS_OF_A_BRIEF {
            if drawn.len() == 2 * most {
                break;
            }
            bench.watch()?;
            let number = stretch(self.number, POINTS_OF_A_BRIEF, i);
            match source.starts.layout(&self.sobol.point(number)) {
                Ok(layout) => drawn.push(layout),
                Err(reason) => self.refused.push(reason),
            }
        }
        self.layouts += drawn.len();
        drawn.sort_by(|a, b| a.score.total.total_cmp(&b.score.total));
        drawn.truncate(most);
        let stand = |layout: Layout| source.stand(layouts, bench, layout.into());
        Ok(drawn.into_iter().filter_map(stand).collect())
    }

    /// Brings a candidate to convergence. A brief says nothing of clear diameters: where the
    /// beam has outgrown those of a layout, they are made larger and the candidate optimised
    /// again.
    pub(super) fn finish(
        &mut self,
        bench: &mut Workbench<'_>,
        candidate: Candidate,
    ) -> Result<Candidate, Interrupted> {
        let whole = |bench: &mut Workbench<'_>, candidate: Candidate| {
            let improved = bench.improve(candidate.ground, &candidate.variables, Effort::Whole)?;
            Ok(improved.unwrap_or(candidate))
        };
        let mut finished = whole(bench, candidate)?;
        let Kind::Brief(source, layouts) = &mut self.kind else { return Ok(finished) };
        for _ in 0..MOST_REFITS {
            let Some(wider) = source.refitted(layouts, bench, &finished) else { break };
            finished = whole(bench, wider)?;
        }
        Ok(finished)
    }

    /// The lenses of a design that was found for another brief, as a candidate with a remark;
    /// `None` where this brief does not allow them or they lose rays.
    pub(super) fn take_over(
        &mut self,
        bench: &mut Workbench<'_>,
        file: &DesignFile,
        note: &str,
    ) -> Option<Candidate> {
        let Kind::Brief(source, layouts) = &mut self.kind else { return None };
        note.clone_into(&mut self.note);
        source.stand(layouts, bench, source.starts.take_over(file)?)
    }

    /// How many of the points that were looked at have a layout.
    pub(super) fn layouts(&self) -> usize {
        self.layouts
    }

    /// Why the others have none.
    pub(super) fn refusals(&self) -> Refusals {
        Refusals::of(self.refused.iter().copied())
    }

    /// The design file a candidate stands for.
    pub(super) fn file(&self, bench: &Workbench<'_>, candidate: &Candidate) -> Option<DesignFile> {
        let variables = bench.ground(candidate).exact.variables();
        let write = |mut design: Design| {
            variables.write(&candidate.variables, &mut design);
            design
        };
        match &self.kind {
            Kind::Design(source, _) => {
                source.file.with_numbers_of(&write(source.file.design.clone())).ok()
            }
            Kind::Brief(source, layouts) => {
                let begun = layouts.get(candidate.ground)?;
                source.file(begun, &write(begun.design.clone()), &self.note)
            }
        }
    }
}
