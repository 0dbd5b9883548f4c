//! `cam`: movement curves.

use driver::cam::{Barrel, CamSettings, Ratios, USUAL_TURN_DEG, csv_table, movement_curve};
use driver::design_file::DesignFile;
use report::picture::cam_picture;
use report::text;

use crate::arguments::CamArguments;
use crate::console::Console;
use crate::destination::Destination;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input;
use crate::output_file::OutputFile;

/// What is asked for.
struct Request {
    file: DesignFile,
    settings: CamSettings,
    csv: Destination,
    picture: Option<OutputFile>,
    json: bool,
    require: bool,
}

impl Request {
    fn of(arguments: CamArguments) -> Result<Self, Failure> {
        let turn_deg = arguments.barrel_turn_deg.unwrap_or(USUAL_TURN_DEG);
        let barrel = arguments.barrel_radius_mm.map(|radius_mm| Barrel::new(radius_mm, turn_deg));
        let ratios = match (arguments.step, arguments.ratios) {
            (Some(step), _) => Ratios::Step(step),
            (None, Some(count)) => Ratios::Count(count),
            (None, None) => Ratios::default(),
        };
        let settings = CamSettings {
            ratios,
            barrel: barrel.transpose()?,
            steepest_mm: arguments.steepest_mm,
            steepest_deg: arguments.steepest_deg,
        };
        let file = input::design(&arguments.design)?;
        let force = arguments.force;
        let csv = Destination::of(arguments.csv, force);
        csv.check()?;
        let picture = arguments.picture.map(|path| OutputFile::picture(path, force));
        Ok(Self {
            file,
            settings,
            csv,
            picture: picture.transpose()?,
            json: arguments.json,
            require: arguments.require,
        })
    }
}

pub(crate) fn run(arguments: CamArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let Request { file, settings, csv, picture, json, require } = Request::of(arguments)?;
    let curve = movement_curve(&file.design, &file.wishes, &settings)?;
    if csv != Destination::Nowhere {
        let table = csv_table(&curve).map_err(|error| Failure::Table(error.into()))?;
        csv.save("table of curves", table.as_bytes(), console)?;
    }
    if let Some(output) = picture {
        output.write(&cam_picture(&file, &curve))?;
    }
    let aside = csv == Destination::StandardOutput;
    match (json, aside) {
        (true, false) => console.print_json(&curve)?,
        (true, true) => {
            console.say(&serde_json::to_string_pretty(&curve).map_err(Failure::Document)?);
        }
        (false, false) => console.print(&text::cam::cam(&file, &curve))?,
        (false, true) => console.say(&text::cam::cam(&file, &curve)),
    }
    Ok(if require && !curve.sound { ExitStatus::Missed } else { ExitStatus::Done })
}
