//! `report`: the page, and the sheets for the shop.

use std::path::{Path, PathBuf};

use driver::cam::{CamError, CamSettings, MovementCurve, movement_curve};
use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, assess};
use report::page::{Found, Section, Subject, page, preformatted};
use report::shop::shop_files;
use report::text;

use crate::arguments::ReportArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input::{self, STANDARD_STREAM};
use crate::output_file::OutputFile;

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

    fn subject(&self) -> Subject<'_> {
        Subject {
            name: self.name.clone(),
            file: &self.file,
            assessment: &self.assessment,
            curve: self.curve.as_ref().map_err(ToString::to_string),
            found: self.found(),
            sections: self.sections(),
        }
    }

    /// What the assessment tells of the laser, where the design describes one.
    fn sections(&self) -> Vec<Section> {
        let Self { file, assessment, .. } = self;
        let section = |title: &str, text: String| Section {
            title: title.to_owned(),
            body: preformatted(&text),
        };
        let beam = assessment
            .real_beam
            .as_ref()
            .map(|beams| section("The real beam", text::beam::beam(file, beams, assessment)));
        let hazards = assessment
            .hazards
            .as_ref()
            .map(|_| section("Hazards", text::hazards::hazards(file, assessment)));
        beam.into_iter().chain(hazards).collect()
    }

    /// What is known of how the design was found: what its file says of itself.
    fn found(&self) -> Found {
        let note = self.file.document().value().get("note").and_then(|note| note.as_str());
        let mut settings = vec![
            ("design file".to_owned(), self.file.label().to_owned()),
            ("told by".to_owned(), concat!("drawtube ", env!("CARGO_PKG_VERSION")).to_owned()),
        ];
        settings.extend(note.map(|note| ("note in the file".to_owned(), note.to_owned())));
        Found { settings, runs: Vec::new() }
    }
}

pub(crate) fn run(arguments: ReportArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let ReportArguments { designs, output, sheets, force } = arguments;
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
    let told: Vec<Told> = designs.iter().map(|path| Told::of(path)).collect::<Result<_, _>>()?;
    if let (Some(folder), Some(told)) = (&sheets, told.first()) {
        write_sheets(folder, &told.file, force, console)?;
    }
    let subjects: Vec<Subject<'_>> = told.iter().map(Told::subject).collect();
    match destination {
        Destination::Nowhere => {}
        Destination::StandardOutput => console.print_exactly(&page(&subjects))?,
        Destination::File(file) => file.write(&page(&subjects))?,
    }
    Ok(ExitStatus::Done)
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
