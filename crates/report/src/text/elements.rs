//! The table of elements.

use driver::design_file::DesignFile;
use merit_function::assessment::Assessment;
use surface_model::glass::Glass;

use super::number::{NONE, as_written, fixed, fixed_or_dash};
use super::table::{Column, Table};

/// Every piece of glass: what it is made of, how thick, how strong.
pub(crate) fn elements(file: &DesignFile, assessment: &Assessment) -> String {
    let mut table = Table::new([
        (Column::Left, "element"),
        (Column::Left, "glass"),
        (Column::Right, "clear\nØ mm"),
        (Column::Right, "rays\nØ mm"),
        (Column::Right, "centre\nmm"),
        (Column::Right, "edge\nmm"),
        (Column::Right, "focal\nlength mm"),
    ]);
    let parts = file.design.groups.iter().flat_map(|group| {
        group.elements.iter().enumerate().map(move |(index, element)| (group, index, element))
    });
    for (told, (group, index, part)) in assessment.elements.iter().zip(parts) {
        let name = part.name.clone().unwrap_or_else(|| index.to_string());
        let glasses: Vec<String> = part.glasses.iter().map(Glass::full_name).collect();
        let centres: Vec<String> =
            told.centre_thicknesses_mm.iter().map(|&centre| fixed(centre, 3)).collect();
        let edges: Vec<String> =
            told.edge_thicknesses_mm.iter().map(|&edge| fixed_or_dash(edge, 3)).collect();
        let lines = |list: Vec<String>| list.join("\n");
        table.row([
            format!("{} {name}", group.name),
            lines(glasses),
            as_written(part.diameter_mm),
            fixed_or_dash(told.footprint_mm, 2),
            lines(centres),
            lines(edges),
            told.focal_length_mm.map_or_else(|| NONE.to_owned(), |focal| fixed(focal, 2)),
        ]);
    }
    table.text()
}
