//! The embedded catalogue: 1090 glasses and crystals, found by name.
//!
//! A run asks for a handful of them. So the names are picked out of the text at the first question (each glass is one
//! line), and a glass's numbers are read when that glass is asked for.

use std::sync::{LazyLock, OnceLock};

use super::common_names::in_the_catalogue;
use super::suggestion::{loosened, nearest};
use super::{Glass, LookupError, record};

static TEXT: &str = include_str!("../../data/glasses.json");

static ENTRIES: LazyLock<Vec<Entry>> =
    LazyLock::new(|| TEXT.lines().filter_map(Entry::from_line).collect());

/// A glass known by name, read when wanted.
pub(super) struct Entry {
    pub(super) name: &'static str,
    /// Empty for crystals.
    maker: &'static str,
    json: &'static str,
    glass: OnceLock<Glass>,
}

impl Entry {
    fn from_line(line: &'static str) -> Option<Self> {
        let (name, rest) = line.strip_prefix(r#"{"name": ""#)?.split_once(r#"", "maker": ""#)?;
        let (maker, _) = rest.split_once('"')?;
        let json = line.trim_end_matches(',');
        Some(Self { name, maker, json, glass: OnceLock::new() })
    }

    pub(super) fn glass(&self) -> &Glass {
        #[expect(clippy::expect_used, reason = "part of the program; a test reads every entry")]
        self.glass.get_or_init(|| record::read(self.json).expect("an embedded glass is readable"))
    }

    fn with_maker(&self) -> String {
        format!("{}:{}", self.maker, self.name)
    }

    fn full_name(&self) -> String {
        if is_shared(self.name) { self.with_maker() } else { self.name.to_owned() }
    }

    fn is_called(&self, wanted: &str) -> bool {
        self.name == wanted
            || wanted
                .split_once(':')
                .is_some_and(|(maker, name)| maker == self.maker && name == self.name)
    }

    fn is_loosely_called(&self, loose: &str) -> bool {
        loosened(self.name) == loose || loosened(&self.with_maker()) == loose
    }
}

/// Every glass of the catalogue.
pub(super) fn entries() -> &'static [Entry] {
    &ENTRIES
}

/// Whether two makers have a glass of this name.
pub(super) fn is_shared(name: &str) -> bool {
    entries().iter().filter(|entry| entry.name == name).nth(1).is_some()
}

/// Whether the name, or `Maker:name`, already means something in the catalogue.
pub(super) fn is_taken(name: &str) -> bool {
    entries().iter().any(|entry| entry.is_called(name))
}

/// The catalogue's glass of this name, or of this `Maker:name`.
///
/// # Errors
/// [`LookupError::Ambiguous`] where two makers share the name, [`LookupError::NotExact`] where only capitals, spaces or
/// hyphens differ, and [`LookupError::Unknown`] with the nearest names.
pub fn find(name: &str) -> Result<Glass, LookupError> {
    let hits: Vec<&Entry> = entries().iter().filter(|entry| entry.is_called(name)).collect();
    match hits.as_slice() {
        [] => Err(missing(name)),
        [entry] => Ok(entry.glass().clone()),
        several => Err(LookupError::Ambiguous {
            name: name.to_owned(),
            choices: several.iter().map(|entry| entry.with_maker()).collect(),
        }),
    }
}

fn missing(name: &str) -> LookupError {
    let loose = loosened(name);
    let common = in_the_catalogue(name).iter().map(|&name| name.to_owned());
    let mut exact: Vec<String> = entries()
        .iter()
        .filter(|entry| entry.is_loosely_called(&loose))
        .map(Entry::full_name)
        .collect();
    let name = name.to_owned();
    if !exact.is_empty() {
        // BaF2 is a crystal, and BAF2 a glass.
        exact.extend(common);
        return LookupError::NotExact { name, exact };
    }
    let common: Vec<String> = common.collect();
    if !common.is_empty() {
        return LookupError::Unknown { name, near: common };
    }
    let bare = name.rsplit(':').next().unwrap_or(&name);
    let near = nearest(bare, entries().iter().map(|entry| (entry.name, entry.full_name())));
    LookupError::Unknown { name, near }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn every_entry_of_the_file_is_found_and_readable() {
        let file: serde_json::Value = serde_json::from_str(TEXT).unwrap();
        let listed = file["glasses"].as_array().unwrap();
        assert_eq!(listed.len(), entries().len());
        for (listed, entry) in std::iter::zip(listed, entries()) {
            assert_eq!(
                (listed["name"].as_str(), listed["maker"].as_str()),
                (Some(entry.name), Some(entry.maker))
            );
            let glass = entry.glass();
            assert_eq!(glass.density_g_cm3(), listed["density_g_cm3"].as_f64());
            assert_eq!(glass.expansion_per_k(), listed["expansion_per_k"].as_f64());
            assert_eq!(glass.code(), listed["code"].as_str());
            assert_eq!(glass.thermal().is_some(), listed["thermal"].is_array());
            assert_eq!(find(&glass.full_name()).as_ref(), Ok(glass));
        }
    }

    #[test]
    fn every_glass_has_a_sane_falling_index_over_its_whole_range() {
        for entry in entries() {
            let glass = entry.glass();
            let indices: Vec<f64> =
                glass.range().unwrap().samples(300).map(|nm| glass.index(nm).unwrap()).collect();
            // Fused silica comes down to 1.16 at 6.7 µm.
            assert!(indices.iter().all(|n| (1.1..4.2).contains(n)), "{}", entry.name);
            assert!(indices.is_sorted_by(|a, b| a > b), "{} is not falling", entry.name);
        }
    }

    #[test]
    fn a_shared_name_needs_its_maker() {
        let Err(error) = find("F2") else { panic!("F2 is Schott's and CDGM's") };
        insta::assert_snapshot!(error, @r#""F2" is the name of more than one glass: Schott:F2, CDGM:F2"#);
        assert_eq!(find("Schott:F2").unwrap().maker(), Some("Schott"));
        assert_eq!(find("CDGM:F2").unwrap().full_name(), "CDGM:F2");
        assert_eq!(find("Schott:N-BK7").unwrap().full_name(), "N-BK7");
    }

    #[test]
    fn a_loosely_written_name_is_told_the_exact_one() {
        let exact = |name: &str| match find(name) {
            Err(LookupError::NotExact { exact, .. }) => exact.join(" "),
            other => panic!("{name}: {other:?}"),
        };
        assert_eq!(exact("nbk7"), "N-BK7");
        assert_eq!(exact("N BK7"), "N-BK7");
        assert_eq!(exact("schott:n-bk7"), "N-BK7");
        assert_eq!(exact("Fused Silica"), "fused-silica");
        assert_eq!(exact("f2"), "Schott:F2 CDGM:F2");
        assert_eq!(exact("BaF2"), "BAF2 barium-fluoride", "a glass and a crystal");
    }

    #[test]
    fn an_unknown_name_is_told_the_nearest() {
        let near = |name: &str| match find(name) {
            Err(LookupError::Unknown { near, .. }) => near,
            other => panic!("{name}: {other:?}"),
        };
        assert!(near("BK7").contains(&"N-BK7".to_owned()));
        assert_eq!(near("Hoya:N-BK7")[0], "N-BK7");
        assert_eq!(near("fusedsilca"), ["fused-silica"]);
        assert!(near("unobtainium").is_empty() && near("").is_empty());
        assert_eq!(near("SiO2"), ["fused-silica"]);
        assert_eq!(near("CaF2"), ["calcium-fluoride", "LITHOTEC-CAF2"]);
    }

    proptest! {
        #[test]
        fn any_text_is_answered(name in "\\PC*") {
            if let Err(error) = find(&name) {
                prop_assert!(!error.to_string().is_empty());
            }
        }

        #[test]
        fn a_name_with_one_letter_gone_leads_back(which in 0usize..1090, at in 0usize..20) {
            let wanted = entries()[which].full_name();
            let bare = entries()[which].name;
            prop_assume!(bare.len() > 4 && at < bare.len());
            let mut typed = bare.to_owned();
            typed.remove(at);
            match find(&typed) {
                Ok(_) | Err(LookupError::Ambiguous { .. }) => {}
                Err(LookupError::NotExact { exact, .. }) => prop_assert!(!exact.is_empty()),
                Err(LookupError::Unknown { near, .. }) => {
                    prop_assert!(near.contains(&wanted) || near.len() == 5, "{typed}: {near:?}");
                }
                Err(other) => prop_assert!(false, "{other:?}"),
            }
        }
    }
}
