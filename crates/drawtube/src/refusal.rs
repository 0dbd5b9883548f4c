//! What is wrong with a command line, in the words of every other message.

use clap::error::{ContextKind, ContextValue, ErrorKind};
use surface_model::document::{did_you_mean, nearest, one_of, quoted};

use crate::arguments::Arguments;

/// A command line that was not taken.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{message}")]
pub(crate) struct Refusal {
    message: String,
    /// What to do about it.
    pub(crate) advice: Option<String>,
}

/// Words that people use for a command.
const MEANT: [(&str, &str); 10] = [
    ("evaluate", "assess"),
    ("analyse", "assess"),
    ("analyze", "assess"),
    ("check", "assess"),
    ("design", "start"),
    ("new", "start"),
    ("optimize", "optimise"),
    ("search", "overnight"),
    ("zoom", "cam"),
    ("ray", "trace"),
];

impl Refusal {
    /// What the parser found in the words of a command line; `command` is the command they name.
    pub(crate) fn of(error: &clap::Error, command: Option<&str>) -> Self {
        let parts = Parts { error };
        let (message, advice) = match error.kind() {
            ErrorKind::InvalidSubcommand => parts.no_command(),
            ErrorKind::UnknownArgument => parts.unknown(command),
            ErrorKind::ValueValidation => parts.unreadable(),
            ErrorKind::InvalidValue => parts.no_choice(),
            ErrorKind::MissingRequiredArgument => parts.missing(),
            ErrorKind::ArgumentConflict => parts.conflict(),
            _ => (parts.first_line(), None),
        };
        Self { message, advice }
    }
}

/// What the parser says of an error.
struct Parts<'e> {
    error: &'e clap::Error,
}

impl Parts<'_> {
    fn all(&self, kind: ContextKind) -> Vec<String> {
        match self.error.get(kind) {
            Some(ContextValue::String(one)) => vec![one.clone()],
            Some(ContextValue::Strings(several)) => several.clone(),
            _ => Vec::new(),
        }
    }

    fn one(&self, kind: ContextKind) -> String {
        self.all(kind).into_iter().next().unwrap_or_default()
    }

    /// The option without the sign of its value.
    fn option(&self) -> String {
        named(&self.one(ContextKind::InvalidArg))
    }

    fn no_command(&self) -> (String, Option<String>) {
        let word = self.one(ContextKind::InvalidSubcommand);
        let grammar = Arguments::grammar();
        let names: Vec<&str> = grammar.get_subcommands().map(clap::Command::get_name).collect();
        let meant = MEANT.iter().find(|(used, _)| *used == word).map(|(_, name)| *name);
        let advice = match meant.or_else(|| nearest(&word, names.iter().copied())) {
            Some(name) => did_you_mean(name),
            None => format!("the commands are {}", names.join(", ")),
        };
        (format!("there is no command {}", quoted(&word)), Some(advice))
    }

    fn unknown(&self, command: Option<&str>) -> (String, Option<String>) {
        let word = self.one(ContextKind::InvalidArg);
        let is_option = word.starts_with('-') && word.parse::<f64>().is_err();
        let message = if is_option {
            format!("there is no option {} here", quoted(&word))
        } else {
            format!("{} is not expected here", quoted(&word))
        };
        let near = self.one(ContextKind::SuggestedArg);
        let advice = match (near.is_empty(), command) {
            (false, _) => did_you_mean(&bare(&near)),
            (true, Some(command)) => format!("drawtube {command} --help tells what there is"),
            (true, None) => "drawtube --help tells what there is".to_owned(),
        };
        (message, Some(advice))
    }

    fn unreadable(&self) -> (String, Option<String>) {
        let (option, value) = (self.option(), self.one(ContextKind::InvalidValue));
        let told = std::error::Error::source(self.error).map(ToString::to_string);
        let told = told.unwrap_or_default();
        let quoted = quoted(&value);
        let message = match told.as_str() {
            "invalid float literal" | "cannot parse float from empty string" => {
                format!("{option}: {quoted} is not a number")
            }
            told if told.contains("digit found in string") || told.contains("integer") => {
                format!("{option}: {quoted} is not a whole number")
            }
            told if told.starts_with(&value) => match range(told) {
                Some(range) => format!("{option} must be {range}, not {value}"),
                None => format!("{option}: {told}"),
            },
            told => format!("{option}: {quoted} was given, but {told}"),
        };
        let several = self.one(ContextKind::InvalidArg).ends_with("...");
        let is_number = message.ends_with(" is not a number");
        (message, number_advice(&value, several).filter(|_| is_number))
    }

    fn no_choice(&self) -> (String, Option<String>) {
        let (option, value) = (self.option(), self.one(ContextKind::InvalidValue));
        let choices = self.all(ContextKind::ValidValue);
        let choices: Vec<&str> = choices.iter().map(String::as_str).collect();
        let listed = (!choices.is_empty()).then(|| one_of(choices.iter().copied()));
        if value.is_empty() {
            return (format!("{option} needs a value"), listed);
        }
        let near = nearest(&value, choices.iter().copied()).map(did_you_mean);
        let advice = near.or_else(|| listed.map(|listed| format!("it may be {listed}")));
        (format!("{option} cannot be {}", quoted(&value)), advice)
    }

    fn missing(&self) -> (String, Option<String>) {
        let missing: Vec<String> =
            self.all(ContextKind::InvalidArg).iter().map(|argument| named(argument)).collect();
        let verb = if missing.len() == 1 { "is" } else { "are" };
        let usage = match self.error.get(ContextKind::Usage) {
            Some(ContextValue::StyledStr(usage)) => Some(usage.to_string()),
            _ => None,
        };
        let usage = usage.map(|usage| usage.trim().replacen("Usage: ", "write ", 1));
        (format!("{} {verb} missing", missing.join(" and ")), usage)
    }

    fn conflict(&self) -> (String, Option<String>) {
        let option = self.option();
        let others: Vec<String> =
            self.all(ContextKind::PriorArg).iter().map(|other| bare(other)).collect();
        if others.is_empty() || others.contains(&option) {
            return (format!("{option} may be given once only"), None);
        }
        (format!("{option} cannot be given together with {}", others.join(" or ")), None)
    }

    /// What the parser says, in one line.
    fn first_line(&self) -> String {
        let told = self.error.render().to_string();
        let first = told.split("\n\n").next().unwrap_or_default();
        let words: Vec<&str> = first.split_whitespace().collect();
        words.join(" ").trim_start_matches("error: ").to_owned()
    }
}

/// An option without the sign of its value, an argument as it is.
fn bare(argument: &str) -> String {
    argument.split(' ').next().unwrap_or_default().split('=').next().unwrap_or_default().to_owned()
}

/// An argument by its name alone.
fn named(argument: &str) -> String {
    match argument.strip_prefix(['<', '[']).and_then(|rest| rest.split(['>', ']']).next()) {
        Some(name) => name.to_owned(),
        None => bare(argument),
    }
}

/// The range that the parser says a whole number is not in, in words.
fn range(told: &str) -> Option<String> {
    let (low, high) = told.split_once(" is not in ")?.1.split_once("..")?;
    let high = high.trim_start_matches('=');
    let open = high.is_empty() || high == u64::MAX.to_string();
    Some(if open { format!("at least {low}") } else { format!("from {low} to {high}") })
}

/// What to write instead of something that is not a number.
fn number_advice(value: &str, several: bool) -> Option<String> {
    let is_number = |text: &str| text.parse::<f64>().is_ok();
    let pointed = value.replacen(',', ".", 1);
    if pointed != value && is_number(&pointed) {
        return Some(format!("decimals take a point: {pointed}"));
    }
    let (low, high) = value.get(1..)?.split_once('-')?;
    let low = format!("{}{low}", value.get(..1)?);
    (several && is_number(&low) && is_number(high))
        .then(|| format!("several stand with commas between: {low},{high}"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges_are_told_in_words() {
        assert_eq!(range("0 is not in 1..=4096").as_deref(), Some("from 1 to 4096"));
        let open = format!("0 is not in 1..={}", u64::MAX);
        assert_eq!(range(&open).as_deref(), Some("at least 1"));
        assert_eq!(range("0 is not in 1..").as_deref(), Some("at least 1"));
        assert_eq!(range("a range is a number of metres"), None);
    }

    #[test]
    fn numbers_are_put_right() {
        assert_eq!(number_advice("1,2", false).as_deref(), Some("decimals take a point: 1.2"));
        let several = "several stand with commas between: -10,40";
        assert_eq!(number_advice("-10-40", true).as_deref(), Some(several));
        assert_eq!(number_advice("0-40", false), None);
        assert_eq!(number_advice("", true), None);
        assert_eq!(number_advice("é-4", true), None);
    }

    #[test]
    fn every_word_that_people_use_means_a_command() {
        let grammar = Arguments::grammar();
        for (_, name) in MEANT {
            assert!(grammar.find_subcommand(name).is_some(), "{name}");
        }
    }
}
