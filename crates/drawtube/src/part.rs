//! Which part of a run this process takes, as asked or as a job engine's variables say.

use driver::run::Share;

use crate::failure::Failure;

/// Where an engine tells a job's index and, if it does, how many there are.
struct Engine {
    index: &'static str,
    /// The least index, if a variable tells it.
    first: Option<&'static str>,
    /// What the least index is otherwise.
    usual_first: u64,
    step: Option<&'static str>,
    count: Option<&'static str>,
    last: Option<&'static str>,
}

/// Variables of job engines, as their manuals give them: Slurm's `sbatch`, Kubernetes' indexed jobs,
/// Grid Engine's `qsub`, PBS' `qsub`, GNU parallel.
const ENGINES: [Engine; 5] = [
    Engine {
        index: "SLURM_ARRAY_TASK_ID",
        first: Some("SLURM_ARRAY_TASK_MIN"),
        usual_first: 1,
        step: Some("SLURM_ARRAY_TASK_STEP"),
        count: Some("SLURM_ARRAY_TASK_COUNT"),
        last: None,
    },
    Engine {
        index: "JOB_COMPLETION_INDEX",
        first: None,
        usual_first: 0,
        step: None,
        count: None,
        last: None,
    },
    Engine {
        index: "SGE_TASK_ID",
        first: Some("SGE_TASK_FIRST"),
        usual_first: 1,
        step: Some("SGE_TASK_STEPSIZE"),
        count: None,
        last: Some("SGE_TASK_LAST"),
    },
    Engine {
        index: "PBS_ARRAY_INDEX",
        first: None,
        usual_first: 1,
        step: None,
        count: None,
        last: None,
    },
    Engine {
        index: "PARALLEL_SEQ",
        first: None,
        usual_first: 1,
        step: None,
        count: None,
        last: None,
    },
];

/// The part that was asked for.
pub(crate) fn share(
    asked: Option<&str>,
    variable: &dyn Fn(&str) -> Option<String>,
) -> Result<Share, Failure> {
    match asked {
        None => Ok(Share::WHOLE),
        Some("auto") => automatic(None, variable),
        Some(text) => match text.strip_prefix("auto/") {
            Some(of) => automatic(Some(number("--part auto/N", of)?), variable),
            None => Ok(text.parse()?),
        },
    }
}

fn automatic(of: Option<u64>, variable: &dyn Fn(&str) -> Option<String>) -> Result<Share, Failure> {
    let read = |name: Option<&'static str>| -> Result<Option<u64>, Failure> {
        let text = name.and_then(|name| Some((name, variable(name)?)));
        text.map(|(name, text)| number(name, &text)).transpose()
    };
    for engine in &ENGINES {
        // Some engines give a word to jobs that are not part of an array.
        let value = variable(engine.index).filter(|text| text != "undefined");
        let Some(value) = value else { continue };
        let index = number(engine.index, &value)?;
        // With N given, an array of which only some members run again keeps its numbering.
        let first = match of {
            Some(_) => engine.usual_first,
            None => read(engine.first)?.unwrap_or(engine.usual_first),
        };
        let step = read(engine.step)?.filter(|_| of.is_none()).unwrap_or(1).max(1);
        let last = read(engine.last)?;
        let counted = last.map(|last| last.saturating_sub(first) / step + 1);
        let Some(of) = of.or(read(engine.count)?).or(counted) else {
            let told = format!("{} is {index}, but no variable tells of how many", engine.index);
            return Err(Failure::NoPart(told));
        };
        let nth = index.checked_sub(first).ok_or_else(|| {
            Failure::NoPart(format!("{} is {index}, below the first, {first}", engine.index))
        })?;
        return Ok(Share::new(nth / step + 1, of)?);
    }
    let names: Vec<&str> = ENGINES.iter().map(|engine| engine.index).collect();
    Err(Failure::NoPart(format!("none of {} is set", names.join(", "))))
}

fn number(name: &str, text: &str) -> Result<u64, Failure> {
    text.trim().parse().map_err(|_| Failure::NoPart(format!("{name} is {text:?}, not a number")))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn part(asked: &str, variables: &[(&str, &str)]) -> String {
        let variable = |name: &str| {
            let found = variables.iter().find(|(known, _)| *known == name);
            found.map(|(_, value)| (*value).to_owned())
        };
        match share(Some(asked), &variable) {
            Ok(share) => share.to_string(),
            Err(failure) => failure.to_string(),
        }
    }

    #[test]
    fn engines_number_their_jobs_each_in_its_way() {
        let slurm = [
            ("SLURM_ARRAY_TASK_ID", "7"),
            ("SLURM_ARRAY_TASK_COUNT", "4"),
            ("SLURM_ARRAY_TASK_MIN", "1"),
            ("SLURM_ARRAY_TASK_STEP", "2"),
        ];
        assert_eq!(part("auto", &slurm), "4/4");
        let again = [
            ("SLURM_ARRAY_TASK_ID", "3"),
            ("SLURM_ARRAY_TASK_COUNT", "1"),
            ("SLURM_ARRAY_TASK_MIN", "3"),
            ("SLURM_ARRAY_TASK_STEP", "1"),
        ];
        assert_eq!(part("auto/16", &again), "3/16", "one of sixteen is run again");
        assert_eq!(part("auto/8", &[("JOB_COMPLETION_INDEX", "0")]), "1/8");
        let grid = [("SGE_TASK_ID", "2"), ("SGE_TASK_FIRST", "1"), ("SGE_TASK_LAST", "5")];
        assert_eq!(part("auto", &grid), "2/5");
        assert_eq!(part("auto/3", &[("PARALLEL_SEQ", "3")]), "3/3");
        assert_eq!(part("2/5", &grid), "2/5");
    }

    #[test]
    fn what_cannot_be_told_is_not_guessed() {
        assert!(part("auto", &[]).contains("none of SLURM_ARRAY_TASK_ID"));
        assert!(part("auto", &[("PARALLEL_SEQ", "3")]).contains("no variable tells of how many"));
        assert!(part("auto/2", &[("PARALLEL_SEQ", "3")]).contains("no part 3 of 2"));
        assert!(part("auto/x", &[("PARALLEL_SEQ", "3")]).contains("not a number"));
        assert!(part("auto", &[("SGE_TASK_ID", "undefined")]).contains("none of"));
        assert!(part("auto/4", &[("SLURM_ARRAY_TASK_ID", "0")]).contains("below the first"));
        assert!(part("3of4", &[]).contains("not of the form I/N"));
    }
}
