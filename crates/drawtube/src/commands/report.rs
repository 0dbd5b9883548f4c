//! `report`: the page, and the sheets for the shop.

mod found;

use std::path::{Path, PathBuf};

use driver::cam::{CamError, CamSettings, MovementCurve, movement_curve};
use driver::design_file::DesignFile;
use driver::temperature::at_temperatures;
use driver::tolerance::{ToleranceSettings, Unwatched, tolerance};
use merit_function::assessment::{Assessment, assess};
use report::page::{
    Found, Section, Subject, beam_section, hazards_section, page, silent_section,
    temperature_section, tolerance_section,
};
use report::shop::shop_files;

use crate::arguments::ReportArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input::{self, STANDARD_STREAM};
use crate::output_file::OutputFile;

use found::{Source, found};

/// Where the page goes.
enum Destination {
    Nowhere,
    StandardOutput,
    File(OutputFile),
}

/// A design and all that is told of it.
struct Told {
    name: String,
    file: DesignFile,
    assessment: Assessment,
    curve: Result<MovementCurve, CamError>,
}

impl Told {
    fn of(path: &Path) -> Result<Self, Failure> {
        let file = input::design(path)?;
        let assessment = assess(&file.design, &file.wishes);
        let curve = movement_curve(&file.design, &file.wishes, &CamSettings::default());
        let name = path.file_stem().map_or_else(String::new, |stem| stem.display().to_string());
        Ok(Self { name, file, assessment, curve })
    }

    fn subject(&self, found: Found, systems: &ToleranceSettings) -> Subject<'_> {
        Subject {
            name: self.name.clone(),
            file: &self.file,
            assessment: &self.assessment,
            curve: self.curve.as_ref().map_err(ToString::to_string),
            found,
            sections: self.sections(systems),
        }
    }

    /// What is told of the laser, of the workshop and of temperature, where the design says
    /// anything of them.
    fn sections(&self, systems: &ToleranceSettings) -> Vec<Section> {
        let Self { file, assessment, .. } = self;
        let beam = beam_section(file, assessment);
        let hazards = hazards_section(file, assessment);
        let sections = [beam, hazards, self.tolerances(systems), self.temperatures()];
        sections.into_iter().flatten().collect()
    }

    fn tolerances(&self, settings: &ToleranceSettings) -> Option<Section> {
        let file = &self.file;
        file.document().value().get("tolerances")?;
        Some(match tolerance(file, settings, &mut Unwatched) {
            Ok(report) => tolerance_section(file, &report),
            Err(error) => silent_section("Tolerances", &error.to_string()),
        })
    }

    fn temperatures(&self) -> Option<Section> {
        let file = &self.file;
        let temperatures_c = file.wishes.temperatures_c.as_slice();
        if temperatures_c.is_empty() {
            return None;
        }
        Some(match at_temperatures(file, temperatures_c) {
            Ok(report) => temperature_section(file, &report),
            Err(error) => silent_section("Temperature", &error.to_string()),
        })
    }
}

pub(crate) fn run(arguments: ReportArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let ReportArguments { designs, output, sheets, found: sources, systems, seed, force } =
        arguments;
    let destination = match output {
        None => Destination::Nowhere,
        Some(path) if path.as_os_str() == STANDARD_STREAM => Destination::StandardOutput,
        Some(path) => Destination::File(OutputFile::page(path, force)?),
    };
    if sheets.is_some() && designs.len() > 1 {
        return Err(Failure::Argument {
            option: "--sheets",
            found: format!("{} designs", designs.len()),
            constraint: "given with one design",
        });
    }
    let sources: Vec<Source> = sources.into_iter().map(Source::of).collect::<Result<_, _>>()?;
    let systems =
        ToleranceSettings { systems, seed, grade: None, readjusted: None, balance_percent: None };
    let told: Vec<Told> = designs.iter().map(|path| Told::of(path)).collect::<Result<_, _>>()?;
    if let (Some(folder), Some(told)) = (&sheets, told.first()) {
        write_sheets(folder, &told.file, force, console)?;
    }
    match destination {
        Destination::Nowhere => {}
        Destination::StandardOutput => {
            console.print_exactly(&page_of(&told, &sources, &systems)?)?;
        }
        Destination::File(file) => file.write(&page_of(&told, &sources, &systems)?)?,
    }
    Ok(ExitStatus::Done)
}

fn page_of(
    told: &[Told],
    sources: &[Source],
    systems: &ToleranceSettings,
) -> Result<String, Failure> {
    let designs: Vec<_> = told.iter().map(|told| (&told.file, &told.assessment)).collect();
    let found = found(sources, &designs)?;
    let pairs = told.iter().zip(found);
    let subjects: Vec<Subject<'_>> =
        pairs.map(|(told, found)| told.subject(found, systems)).collect();
    Ok(page(&subjects))
}

/// Every sheet and table, once all are known to be writable.
fn write_sheets(
    folder: &Path,
    file: &DesignFile,
    force: bool,
    console: &Console,
) -> Result<(), Failure> {
    let files = shop_files(file).map_err(|error| Failure::Table(error.into()))?;
    std::fs::create_dir_all(folder)
        .map_err(|source| Failure::Folder { path: folder.to_owned(), source })?;
    let checked: Vec<(OutputFile, PathBuf, String)> = files
        .into_iter()
        .map(|(name, text)| {
            let path = folder.join(name);
            Ok((OutputFile::checked(path.clone(), force)?, path, text))
        })
        .collect::<Result<_, Failure>>()?;
    for (output, path, text) in checked {
        output.write(&text)?;
        console.say(&format!("{}", path.display()));
    }
    Ok(())
}
