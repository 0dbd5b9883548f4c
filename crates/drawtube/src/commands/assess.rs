//! `assess`: the numbers of a design as it stands.

use driver::cam::{CamSettings, movement_curve};
use driver::design_file::DesignFile;
use driver::temperature::{TemperatureReport, at_temperatures};
use merit_function::assessment::{Assessment, assess, real_beam};
use report::picture::assessment_picture;
use report::text;
use report::text::assessment::Scope;
use serde::Serialize;

use crate::arguments::AssessArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input;
use crate::output_file::OutputFile;

/// What is printed.
enum Form {
    Json,
    Text(Scope),
    Beam,
    Hazards,
}

/// What is asked for.
struct Request {
    file: DesignFile,
    form: Form,
    /// Whether the real beam is told anew, at the ranges.
    beam: bool,
    picture: Option<OutputFile>,
    /// Distances to tell the real beam at, m.
    ranges_m: Vec<f64>,
    require: bool,
    temperatures_c: Vec<f64>,
}

impl Request {
    fn of(arguments: AssessArguments) -> Result<Self, Failure> {
        let form = if arguments.json {
            Form::Json
        } else if arguments.beam || !arguments.ranges_m.is_empty() {
            Form::Beam
        } else if arguments.hazards {
            Form::Hazards
        } else {
            Form::Text(if arguments.all { Scope::All } else { Scope::Tightest })
        };
        let force = arguments.force;
        let picture = arguments.picture.map(|path| OutputFile::picture(path, force));
        Ok(Self {
            picture: picture.transpose()?,
            file: input::design(&arguments.design)?,
            form,
            beam: arguments.beam || !arguments.ranges_m.is_empty(),
            ranges_m: arguments.ranges_m,
            require: arguments.require,
            temperatures_c: arguments.temperatures_c,
        })
    }
}

/// The assessment, with what the design does at other temperatures where that was asked for.
#[derive(Serialize)]
struct Printed<'a> {
    #[serde(flatten)]
    assessment: &'a Assessment,
    #[serde(flatten)]
    warm: Option<&'a TemperatureReport>,
}

pub(crate) fn run(arguments: AssessArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let Request { file, form, beam, picture, ranges_m, require, temperatures_c } =
        Request::of(arguments)?;
    let mut assessment = assess(&file.design, &file.wishes);
    if beam {
        assessment.real_beam = Some(real_beam(&file.design, &file.wishes, &ranges_m));
    }
    let warm = match temperatures_c.as_slice() {
        [] => None,
        temperatures_c => Some(at_temperatures(&file, temperatures_c)?),
    };
    if let Some(output) = picture {
        let curve = movement_curve(&file.design, &file.wishes, &CamSettings::default());
        output.write(&assessment_picture(&file, curve.as_ref().ok()))?;
    }
    match form {
        Form::Json => {
            console.print_json(&Printed { assessment: &assessment, warm: warm.as_ref() })?
        }
        Form::Text(scope) => {
            if let Some(warm) = &warm {
                console.print(&text::temperature::temperatures(&file, warm))?;
                console.print("")?;
            }
            console.print(&text::assessment::assessment(&file, &assessment, scope))?;
        }
        Form::Beam => {
            let beams = assessment.real_beam.as_deref().unwrap_or_default();
            console.print(&text::beam::beam(&file, beams, &assessment))?;
        }
        Form::Hazards => console.print(&text::hazards::hazards(&file, &assessment))?,
    }
    Ok(if require && !assessment.meets { ExitStatus::Missed } else { ExitStatus::Done })
}
