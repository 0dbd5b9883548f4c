//! Materials as workshops call them, by formula or in a word, and what the catalogue calls them.

use super::suggestion::loosened;

/// Names in use and the catalogue's own, small letters without hyphens first.
const NAMES: [(&str, &[&str]); 13] = [
    ("sio2", &["fused-silica"]),
    ("silica", &["fused-silica"]),
    ("quartz", &["fused-silica"]),
    ("caf2", &["calcium-fluoride", "LITHOTEC-CAF2"]),
    ("fluorite", &["calcium-fluoride", "LITHOTEC-CAF2"]),
    ("mgf2", &["magnesium-fluoride-o"]),
    ("magnesiumfluoride", &["magnesium-fluoride-o"]),
    ("al2o3", &["sapphire-o"]),
    ("sapphire", &["sapphire-o"]),
    ("baf2", &["barium-fluoride"]),
    ("znse", &["zinc-selenide"]),
    ("ge", &["germanium"]),
    ("si", &["silicon"]),
];

/// What the catalogue calls a material; nothing if the name is not a common one.
pub(super) fn in_the_catalogue(name: &str) -> &'static [&'static str] {
    let loose = loosened(name);
    NAMES.iter().find(|(common, _)| *common == loose).map_or(&[], |(_, names)| *names)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::glass::find;

    #[test]
    fn every_common_name_leads_to_glasses_that_are_there() {
        for (common, names) in NAMES {
            assert_eq!(in_the_catalogue(&common.to_uppercase()), names);
            assert!(!names.is_empty());
            for name in names {
                assert!(find(name).is_ok(), "{common}: {name}");
            }
        }
        assert!(in_the_catalogue("unobtainium").is_empty());
    }
}
