//! Looking through the catalogue by words and numbers.

use super::common_names::in_the_catalogue;
use super::suggestion::loosened;
use super::{Glass, SearchError, catalogue};

/// How far nd may lie from the value in `nd=1.5168`.
const NEAR_ND: f64 = 0.0005;
/// How far vd may lie from the value in `vd=64.2`.
const NEAR_VD: f64 = 0.2;

/// The glasses of the catalogue that suit every word; all of them if there is none.
///
/// - A plain word is looked for in the name, the maker, the six-digit code and the status, whatever its capitals; in the
///   name, whatever its spaces and hyphens. A code may be written 517642, 517-642 or 517.642.
/// - `nd=1.7..1.8`, `nd=1.7..` and `vd=..30` ask for a range, ends included; `nd=1.5168` and `vd=64.2` for a value within
///   0.0005 and 0.2.
/// - `nd>1.7`, `vd<30`, `nd>=1.7` and `vd<=30` ask for one side. (A shell needs these in quotes.)
///
/// Glasses whose whole name is one of the words come first; then by name and maker.
///
/// # Errors
/// [`SearchError`] for a comparison that cannot be understood.
pub fn search(words: &[impl AsRef<str>]) -> Result<Vec<Glass>, SearchError> {
    let wishes: Vec<Wish> = words
        .iter()
        .flat_map(|word| word.as_ref().split_whitespace())
        .map(Wish::read)
        .collect::<Result<_, _>>()?;
    let glasses = catalogue::entries().iter().map(catalogue::Entry::glass);
    let mut found: Vec<Glass> =
        glasses.filter(|glass| wishes.iter().all(|wish| wish.suits(glass))).cloned().collect();
    found.sort_by_key(|glass| {
        let named = wishes.iter().any(|wish| wish.is_whole_name(glass));
        (!named, glass.name().to_owned(), glass.maker().map(str::to_owned))
    });
    Ok(found)
}

/// What one word asks for.
#[derive(Debug, PartialEq)]
enum Wish {
    Text { small: String, loose: String, common: &'static [&'static str] },
    Code(String),
    Between { quantity: Quantity, low: Bound, high: Bound },
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Quantity {
    Nd,
    Vd,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Bound {
    None,
    Included(f64),
    Excluded(f64),
}

impl Wish {
    fn read(word: &str) -> Result<Self, SearchError> {
        if let Some(sign) = word.find(['<', '>', '=']) {
            let (quantity, comparison) = word.split_at(sign);
            return Self::comparison(word, quantity, comparison);
        }
        if let Some(code) = code(word) {
            return Ok(Self::Code(code));
        }
        let common = in_the_catalogue(word);
        Ok(Self::Text { small: word.to_lowercase(), loose: loosened(word), common })
    }

    fn comparison(word: &str, quantity: &str, comparison: &str) -> Result<Self, SearchError> {
        let quantity = match quantity.to_lowercase().as_str() {
            "nd" => Quantity::Nd,
            "vd" => Quantity::Vd,
            _ => {
                return Err(SearchError::Quantity { word: word.into(), found: quantity.into() });
            }
        };
        let number = |text: &str| number(word, text);
        let (low, high) = if let Some(text) = comparison.strip_prefix(">=") {
            (Bound::Included(number(text)?), Bound::None)
        } else if let Some(text) = comparison.strip_prefix("<=") {
            (Bound::None, Bound::Included(number(text)?))
        } else if let Some(text) = comparison.strip_prefix('>') {
            (Bound::Excluded(number(text)?), Bound::None)
        } else if let Some(text) = comparison.strip_prefix('<') {
            (Bound::None, Bound::Excluded(number(text)?))
        } else {
            quantity.range(word, comparison.trim_start_matches('='))?
        };
        Ok(Self::Between { quantity, low, high })
    }

    fn suits(&self, glass: &Glass) -> bool {
        match self {
            Self::Text { small, loose, common } => {
                let has = |text: &str| text.to_lowercase().contains(small);
                has(glass.name())
                    || (!loose.is_empty() && loosened(glass.name()).contains(loose))
                    || glass.maker().is_some_and(has)
                    || glass.code().is_some_and(has)
                    || has(glass.status().word())
                    || common.contains(&glass.name())
            }
            Self::Code(code) => glass.code() == Some(code),
            Self::Between { quantity, low, high } => {
                quantity.of(glass).is_some_and(|value| low.is_below(value) && high.is_above(value))
            }
        }
    }

    fn is_whole_name(&self, glass: &Glass) -> bool {
        matches!(self, Self::Text { small, loose, common }
            if glass.name().to_lowercase() == *small
                || loosened(glass.name()) == *loose
                || common.contains(&glass.name()))
    }
}

impl Quantity {
    fn of(self, glass: &Glass) -> Option<f64> {
        match self {
            Self::Nd => glass.nd(),
            Self::Vd => glass.vd(),
        }
    }

    /// `1.7..1.8`, open at either end, or one value give or take the usual.
    fn range(self, word: &str, text: &str) -> Result<(Bound, Bound), SearchError> {
        let end = |text: &str| {
            if text.is_empty() { Ok(Bound::None) } else { number(word, text).map(Bound::Included) }
        };
        match text.split_once("..") {
            Some(("", "")) => Err(SearchError::Number { word: word.into(), found: text.into() }),
            Some((low, high)) => match (end(low)?, end(high)?) {
                (Bound::Included(low), Bound::Included(high)) if low > high => {
                    Err(SearchError::Downwards { word: word.into(), low, high })
                }
                ends => Ok(ends),
            },
            None => {
                let value = number(word, text)?;
                let near = match self {
                    Self::Nd => NEAR_ND,
                    Self::Vd => NEAR_VD,
                };
                Ok((Bound::Included(value - near), Bound::Included(value + near)))
            }
        }
    }
}

impl Bound {
    fn is_below(self, value: f64) -> bool {
        match self {
            Self::None => true,
            Self::Included(bound) => bound <= value,
            Self::Excluded(bound) => bound < value,
        }
    }

    fn is_above(self, value: f64) -> bool {
        match self {
            Self::None => true,
            Self::Included(bound) => value <= bound,
            Self::Excluded(bound) => value < bound,
        }
    }
}

fn number(word: &str, text: &str) -> Result<f64, SearchError> {
    text.parse()
        .ok()
        .filter(|value: &f64| value.is_finite())
        .ok_or_else(|| SearchError::Number { word: word.into(), found: text.into() })
}

/// The six digits of 517642, 517-642 or 517.642.
fn code(word: &str) -> Option<String> {
    let (first, second) = match word.split_once(['-', '.']) {
        Some(halves) => halves,
        None => word.split_at_checked(3)?,
    };
    let three = |half: &str| half.len() == 3 && half.bytes().all(|byte| byte.is_ascii_digit());
    (three(first) && three(second)).then(|| format!("{first}{second}"))
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn names(words: &str) -> Vec<String> {
        search(&[words]).unwrap().iter().map(Glass::full_name).collect()
    }

    #[test]
    fn words_narrow_down() {
        assert_eq!(names("schott nbk7")[0], "N-BK7");
        assert!(names("hoya").len() > 100);
        assert!(names("").len() == 1090);
        assert!(search(&["crystal"]).unwrap().iter().all(|g| g.status().word() == "crystal"));
        assert_eq!(names("f2")[..2], ["CDGM:F2", "Schott:F2"]);
    }

    #[test]
    fn a_code_is_read_in_three_spellings() {
        let found = names("517642");
        assert!(found.contains(&"N-BK7".to_owned()));
        assert_eq!(found, names("517-642"));
        assert_eq!(found, names("517.642"));
        // N-PK52A and the like: letters are a name.
        assert_eq!(code("abc-def"), None);
        assert_eq!(code("5176420"), None);
    }

    #[test]
    fn comparisons_hold_for_everything_found() {
        let found = search(&["nd>1.7", "vd=..30"]).unwrap();
        assert!(!found.is_empty());
        assert!(found.iter().all(|g| g.nd().unwrap() > 1.7 && g.vd().unwrap() <= 30.0));
        assert_eq!(
            names("nd=1.7..").len() + names("nd<1.7").len() + names("nd<=9").len(),
            2 * names("nd>0").len()
        );
        assert!(names("nd=1.5168 vd=64.2").contains(&"N-BK7".to_owned()));
    }

    #[test]
    fn a_bad_comparison_is_told() {
        let told = |word: &str| search(&[word]).unwrap_err().to_string();
        insta::assert_snapshot!(told("maker=Hoya"), @r#""maker" in "maker=Hoya" cannot be compared; nd and vd can"#);
        insta::assert_snapshot!(told("nd>high"), @r#""high" in "nd>high" is not a number"#);
        insta::assert_snapshot!(told("vd=.."), @r#"".." in "vd=.." is not a number"#);
        insta::assert_snapshot!(told("nd="), @r#""" in "nd=" is not a number"#);
    }

    proptest! {
        #[test]
        fn any_words_are_answered(words in "(nd|vd|\\PC{0,3})(<|>|=|<=|>=|)\\PC{0,6}") {
            if let Err(error) = search(&[words]) {
                prop_assert!(error.advice().is_some());
            }
        }
    }
}
