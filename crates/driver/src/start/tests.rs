use serde_json::{Value, json};
use surface_model::document::Document;

use super::*;

fn brief(text: &str) -> BriefFile {
    BriefFile::read(Document::parse("b.json", text.as_bytes()).unwrap()).unwrap()
}

const SHIPPED: [&str; 3] = [
    include_str!("../../../../configs/river-brief.json"),
    include_str!("../../../../configs/two-colour-brief.json"),
    include_str!("../../../../configs/quay-brief.json"),
];

#[test]
#[ignore]
fn look() {
    for text in SHIPPED {
        let starts = Starts::of(&brief(text)).unwrap();
        let clock = std::time::Instant::now();
        let ranking = starts.ranked(1 << 15, 0, 30);
        println!(
            "{} dims {} fitting {} of {} in {:?} {:?}",
            starts.brief().label(),
            starts.dimensions(),
            ranking.fitting,
            ranking.tried,
            clock.elapsed(),
            ranking.refusals.reasons
        );
        for r in &ranking.best {
            let l = &r.layout;
            let file = starts.design_file(l, &l.design, "").unwrap_or_else(|c| panic!("{c}"));
            let settings = crate::solve::Settings::new(crate::solve::Method::DampedLeastSquares);
            let end = crate::optimise::optimise(&file, &settings, &mut crate::solve::Unwatched)
                .map(|o| o.report.end.merit.total);
            let a = merit_function::assessment::assess(&file.design, &file.wishes);
            let crossed: Vec<_> = a.limits.iter().filter(|l| !l.met).map(|l| l.limit).collect();
            println!(
                "{:6} {:?} f {:?} L {:.0?} score {:.3} third {:.2} high {:.3} col {:.2} bend {:.1} merit {:.3?} -> {:.4?} {:?} {:?}",
                r.number,
                l.family.0.iter().map(|s| &s.word()[..1]).collect::<String>(),
                l.focal_lengths_mm.iter().map(|f| f.round()).collect::<Vec<_>>(),
                l.lengths_mm(),
                l.score.total,
                l.score.third_order,
                l.score.higher_orders,
                l.score.colour,
                l.score.bending_mrad,
                a.merit.total,
                end.as_ref().map_err(|e| e.to_string()),
                l.glasses,
                crossed
            );
        }
    }
}
