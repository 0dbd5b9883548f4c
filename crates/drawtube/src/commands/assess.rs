//! `assess`: the numbers of a design as it stands.

use driver::design_file::DesignFile;
use driver::temperature::{TemperatureReport, at_temperatures};
use merit_function::assessment::{Assessment, assess};
use report::text;
use report::text::assessment::Scope;
use serde::Serialize;

use crate::arguments::AssessArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input;

/// What is printed.
enum Form {
    Json,
    Text(Scope),
}

/// What is asked for.
struct Request {
    file: DesignFile,
    form: Form,
    require: bool,
    temperatures_c: Vec<f64>,
}

impl Request {
    fn of(arguments: AssessArguments) -> Result<Self, Failure> {
        let scope = if arguments.all { Scope::All } else { Scope::Tightest };
        Ok(Self {
            file: input::design(&arguments.design)?,
            form: if arguments.json { Form::Json } else { Form::Text(scope) },
            require: arguments.require,
            temperatures_c: arguments.temperature,
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
    let Request { file, form, require, temperatures_c } = Request::of(arguments)?;
    let assessment = assess(&file.design, &file.wishes);
    let warm = match temperatures_c.as_slice() {
        [] => None,
        temperatures_c => Some(at_temperatures(&file, temperatures_c)?),
    };
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
    }
    Ok(if require && !assessment.meets { ExitStatus::Missed } else { ExitStatus::Done })
}
