//! `assess`: the numbers of a design as it stands.

use driver::cam::{CamSettings, movement_curve};
use driver::design_file::DesignFile;
use merit_function::assessment::assess;
use report::picture::assessment_picture;
use report::text;
use report::text::assessment::Scope;

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
}

/// What is asked for.
struct Request {
    file: DesignFile,
    form: Form,
    picture: Option<OutputFile>,
    require: bool,
}

impl Request {
    fn of(arguments: AssessArguments) -> Result<Self, Failure> {
        let scope = if arguments.all { Scope::All } else { Scope::Tightest };
        let force = arguments.force;
        let picture = arguments.picture.map(|path| OutputFile::checked(path, force));
        Ok(Self {
            picture: picture.transpose()?,
            file: input::design(&arguments.design)?,
            form: if arguments.json { Form::Json } else { Form::Text(scope) },
            require: arguments.require,
        })
    }
}

pub(crate) fn run(arguments: AssessArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let Request { file, form, picture, require } = Request::of(arguments)?;
    let assessment = assess(&file.design, &file.wishes);
    if let Some(output) = picture {
        let curve = movement_curve(&file.design, &file.wishes, &CamSettings::default());
        output.write(&assessment_picture(&file, curve.as_ref().ok()))?;
    }
    match form {
        Form::Json => console.print_json(&assessment)?,
        Form::Text(scope) => {
            console.print(&text::assessment::assessment(&file, &assessment, scope))?;
        }
    }
    Ok(if require && !assessment.meets { ExitStatus::Missed } else { ExitStatus::Done })
}
