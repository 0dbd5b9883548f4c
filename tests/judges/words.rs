//! What must hold of any words on the command line: parts, addresses, glasses.

use driver::run::Share;
use report::text;
use surface_model::document::Address;
use surface_model::glass::{equivalents, find, search};

use super::verdict::{finite, printed, quiet};

/// Takes each line for whatever it may be; how many of them meant something.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn judge(text: &str) -> Result<usize, String> {
    let words: Vec<&str> = text.lines().collect();
    let mut meant = 0;
    match search(&words) {
        Ok(found) => {
            meant += found.len();
            printed("the glasses", &text::glass::glasses(&found, &[532.0]))?;
        }
        Err(error) => quiet(&error.to_string())?,
    }
    for word in words {
        meant += usize::from(told(word.parse::<Share>())?);
        meant += usize::from(told(word.parse::<Address>())?);
        if let Ok(glass) = find(word) {
            meant += 1;
            match equivalents(&glass, &[532.0], 3) {
                Ok(found) => {
                    finite("the nearest glasses", &found)?;
                    printed("them", &text::glass::equivalents(&found, &[532.0]))?;
                }
                Err(error) => quiet(&error.to_string())?,
            }
        }
    }
    Ok(meant)
}

/// Whether it could be read; what is read must be written as it can be read again.
fn told<T, E>(read: Result<T, E>) -> Result<bool, String>
where
    T: std::str::FromStr + ToString + PartialEq,
    E: ToString,
{
    match read {
        Ok(value) => {
            let text = value.to_string();
            let again = text.parse::<T>().is_ok_and(|again| again == value);
            if again { Ok(true) } else { Err(format!("{text:?} does not read again")) }
        }
        Err(error) => quiet(&error.to_string()).map(|()| false),
    }
}
