//! Which numbers an optimisation moved.

use driver::design_file::DesignFile;
use surface_model::design::Design;
use surface_model::place::Place;

use super::number::{fixed, significant};
use super::states::spacing_heads;
use super::table::{ARROW, Column, Table};

/// The shared numbers that moved, and the spacings of every state.
pub(crate) fn moved(before: &DesignFile, after: &DesignFile) -> Vec<String> {
    vec![shared(before, after), spacings(before, after)]
}

/// A number as people know it: a radius instead of a curvature.
fn told(place: Place, design: &Design) -> String {
    let value = place.value(design);
    match place {
        Place::Radius(_) if value == 0.0 => "flat".to_owned(),
        Place::Radius(_) => fixed(1.0 / value, 3),
        Place::Conic(_) | Place::Asphere(..) => significant(value, 6),
        _ => fixed(value, 3),
    }
}

fn moved_places<'a>(
    before: &'a DesignFile,
    after: &'a DesignFile,
) -> impl Iterator<Item = Place> + 'a {
    let moved = |place: &Place| {
        place.value(&before.design).to_bits() != place.value(&after.design).to_bits()
    };
    Place::all(&before.design).into_iter().filter(moved)
}

fn shared(before: &DesignFile, after: &DesignFile) -> String {
    let mut table = Table::new([
        (Column::Left, "moved"),
        (Column::From, "from"),
        (Column::Arrow, ""),
        (Column::Right, "to"),
    ]);
    let document = before.document().value();
    for place in moved_places(before, after) {
        if !matches!(place, Place::Spacing { .. }) {
            table.row([
                place.address().with_names(document).to_string(),
                told(place, &before.design),
                ARROW.to_owned(),
                told(place, &after.design),
            ]);
        }
    }
    table.text()
}

fn spacings(before: &DesignFile, after: &DesignFile) -> String {
    let any = moved_places(before, after).any(|place| matches!(place, Place::Spacing { .. }));
    if !any {
        return String::new();
    }
    let heads = spacing_heads(&before.design);
    let mut columns = vec![(Column::Left, "spacing")];
    for head in &heads {
        columns.extend([(Column::From, head.as_str()), (Column::Arrow, ""), (Column::Right, "")]);
    }
    let mut table = Table::new(columns);
    for (old, new) in before.design.states.iter().zip(&after.design.states) {
        let mut row = vec![old.name.clone()];
        for (&from, &to) in old.spacings_mm.iter().zip(&new.spacings_mm) {
            row.extend([fixed(from, 3), ARROW.to_owned(), fixed(to, 3)]);
        }
        table.row(row);
    }
    table.text()
}
