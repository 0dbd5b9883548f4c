//! What a shop is handed: a sheet an element, after the tabular form of ISO 10110-10 (left
//! surface, material, right surface side by side under the drawing), and the same as tables.
//!
//! Only what the design says is filled in: its own tolerances, those of a grade it names, and what
//! `tolerances.shop` says of chamfers, imperfections, coatings and material. What it does not give
//! stays open ("–"), to be filled in by whoever answers for it: a number that nobody chose is worse
//! than none. The code numbers are those of ISO 10110:
//! 0 stress birefringence, 1 bubbles and inclusions, 2 inhomogeneity and striae, 3 surface form,
//! 4 centring, 5 surface imperfections (from memory of the standard's parts 2, 3, 4, 5, 6 and 7).

mod sheet;
mod tables;

use driver::design_file::DesignFile;

/// Name and text of every file for the shop: the sheets of all elements as one HTML document that
/// prints an element a page, and tables of surfaces and of elements.
///
/// # Errors
/// None in practice: tables are written to memory.
pub fn shop_files(file: &DesignFile) -> Result<Vec<(String, String)>, csv::Error> {
    Ok(vec![
        ("elements.html".to_owned(), sheet::sheets(file)),
        ("surfaces.csv".to_owned(), tables::surfaces(file)?),
        ("elements.csv".to_owned(), tables::elements(file)?),
    ])
}

/// Stands where the design says nothing.
const OPEN: &str = "–";
