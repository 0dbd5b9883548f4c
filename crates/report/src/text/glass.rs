//! Glasses as a table.

use surface_model::glass::{Equivalent, Glass};

use super::number::{NONE, as_written, fixed_or_dash};
use super::table::{Column, Table};

const LEADING: [(Column, &str); 7] = [
    (Column::Left, "name"),
    (Column::Left, "maker"),
    (Column::Left, "code"),
    (Column::Right, "nd"),
    (Column::Right, "vd"),
    (Column::Right, "g/cm³"),
    (Column::Left, "status"),
];

/// A table of glasses, with a column of the index at each of the wavelengths, nm.
#[must_use]
pub fn glasses(glasses: &[Glass], wavelengths_nm: &[f64]) -> String {
    let heads = index_heads(wavelengths_nm);
    let indices = heads.iter().map(|head| (Column::Right, head.as_str()));
    let mut table = Table::new(LEADING.into_iter().chain(indices));
    for glass in glasses {
        table.row(leading(glass).into_iter().chain(indices_of(glass, wavelengths_nm)));
    }
    table.text()
}

/// A table of the glasses nearest to another, nearest first.
#[must_use]
pub fn equivalents(found: &[Equivalent], wavelengths_nm: &[f64]) -> String {
    let heads = index_heads(wavelengths_nm);
    let indices = heads.iter().map(|head| (Column::Right, head.as_str()));
    let distance = (Column::Right, "off by");
    let mut table = Table::new(LEADING.into_iter().chain([distance]).chain(indices));
    for equivalent in found {
        let off = format!("{:.6}", equivalent.rms_index_difference);
        let row = leading(&equivalent.glass).into_iter().chain([off]);
        table.row(row.chain(indices_of(&equivalent.glass, wavelengths_nm)));
    }
    table.text()
}

/// A table of the glasses of a design: between which wavelengths each is known, too.
pub(crate) fn of_a_design(glasses: &[&Glass], wavelengths_nm: &[f64]) -> Table {
    let heads = index_heads(wavelengths_nm);
    let indices = heads.iter().map(|head| (Column::Right, head.as_str()));
    let known = (Column::Right, "known\nnm");
    let mut table = Table::new(LEADING.into_iter().chain([known]).chain(indices));
    for glass in glasses {
        let range = glass.range().map_or_else(
            || "everywhere".to_owned(),
            |range| format!("{}–{}", as_written(range.low_nm()), as_written(range.high_nm())),
        );
        let row = leading(glass).into_iter().chain([range]);
        table.row(row.chain(indices_of(glass, wavelengths_nm)));
    }
    table
}

fn index_heads(wavelengths_nm: &[f64]) -> Vec<String> {
    wavelengths_nm.iter().map(|&nm| format!("n at\n{} nm", as_written(nm))).collect()
}

fn leading(glass: &Glass) -> [String; 7] {
    let word = |text: Option<&str>| text.unwrap_or(NONE).to_owned();
    [
        glass.full_name(),
        word(glass.maker()),
        word(glass.code()),
        fixed_or_dash(glass.nd(), 5),
        fixed_or_dash(glass.vd(), 2),
        fixed_or_dash(glass.density_g_cm3(), 2),
        glass.status().word().to_owned(),
    ]
}

fn indices_of(glass: &Glass, wavelengths_nm: &[f64]) -> impl Iterator<Item = String> {
    wavelengths_nm.iter().map(|&nm| fixed_or_dash(glass.index(nm).ok(), 6))
}
