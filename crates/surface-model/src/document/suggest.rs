//! The nearest known spelling of a word.

/// Words longer than this are not misspellings of anything worth comparing them with.
const LONGEST_WORD: usize = 80;

/// Least normalised similarity (1 is equal) at which a word counts as a misspelling.
const ALIKE: f64 = 0.6;

/// The candidate that `word` most likely stands for: the same but for upper and lower case, else
/// the nearest in Damerau-Levenshtein distance (strsim's, normalised by length), else the first
/// that `word` abbreviates. `None` when nothing comes near; the first of equals wins.
pub fn nearest<'a>(
    word: &str,
    candidates: impl IntoIterator<Item = &'a str> + Clone,
) -> Option<&'a str> {
    if word.chars().nth(LONGEST_WORD).is_some() {
        return None;
    }
    let lower = word.to_lowercase();
    let mut best = None;
    let mut best_likeness = ALIKE;
    for candidate in candidates.clone() {
        if candidate.chars().nth(LONGEST_WORD).is_some() {
            continue;
        }
        let likeness = strsim::normalized_damerau_levenshtein(&lower, &candidate.to_lowercase());
        if likeness > best_likeness || (best.is_none() && likeness >= ALIKE) {
            (best, best_likeness) = (Some(candidate), likeness);
        }
    }
    best.or_else(|| {
        let long_enough = lower.chars().nth(2).is_some();
        candidates.into_iter().find(|c| long_enough && c.to_lowercase().starts_with(&lower))
    })
}

/// The known key that a wrong one most likely stands for: as [`nearest`], else the one that shares
/// most words with it, else the only one in the same unit, which is a key's last word.
pub(super) fn nearest_key<'a>(key: &str, known: &[&'a str]) -> Option<&'a str> {
    if key.chars().nth(LONGEST_WORD).is_some() {
        return None;
    }
    let words = |key: &str| key.to_lowercase().split('_').map(str::to_owned).collect::<Vec<_>>();
    let own = words(key);
    let shared = |candidate: &str| {
        let others = words(candidate);
        let common = own.iter().filter(|word| others.contains(word)).count();
        2.0 * common as f64 / (own.len() + others.len()) as f64
    };
    // One word may be a unit alone, which names nothing.
    let by_words = || {
        let known = known.iter().filter(|_| own.len() > 1);
        let likely = known.map(|key| (shared(key), *key));
        let likely = likely.filter(|(likeness, _)| *likeness > ALIKE);
        likely.reduce(|best, other| if other.0 > best.0 { other } else { best }).map(|(_, key)| key)
    };
    let by_unit = || {
        let unit = own.last().filter(|_| own.len() > 1)?;
        let mut same = known.iter().filter(|key| words(key).last() == Some(unit));
        same.next().filter(|_| same.next().is_none()).copied()
    };
    nearest(key, known.iter().copied()).or_else(by_words).or_else(by_unit)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_key_is_known_by_its_words_and_its_unit() {
        let goals = ["wavefront_rms_waves", "ratio_percent", "exit_slope_urad"];
        assert_eq!(nearest_key("rms_wavefront_waves", &goals), Some("wavefront_rms_waves"));
        assert_eq!(nearest_key("collimation_urad", &goals), Some("exit_slope_urad"));
        assert_eq!(nearest_key("length_mm", &["track_mm", "fixed"]), Some("track_mm"));
        assert_eq!(nearest_key("length_mm", &["track_mm", "travel_mm"]), None, "either");
        assert_eq!(nearest_key("mm", &["track_mm"]), None, "a unit alone names nothing");
    }

    #[test]
    fn finds_what_was_meant_and_nothing_far_fetched() {
        let keys = ["wavelengths_nm", "diameter_mm", "traced_to", "radii_mm", "airs_mm"];
        assert_eq!(nearest("wavelength_nm", keys), Some("wavelengths_nm"));
        assert_eq!(nearest("radius_mm", keys), Some("radii_mm"));
        assert_eq!(nearest("daimeter_mm", keys), Some("diameter_mm"));
        assert_eq!(nearest("wave", keys), Some("wavelengths_nm"));
        assert_eq!(nearest("Traced_To", keys), Some("traced_to"));
        assert_eq!(nearest("colour", keys), None);
        assert_eq!(nearest("", keys), None);
    }

    #[test]
    fn case_alone_beats_a_near_miss() {
        assert_eq!(nearest("n-bk7", ["N-BK8", "N-BK7"]), Some("N-BK7"));
        assert_eq!(nearest("N-BK8", ["N-BK7", "N-SF6"]), Some("N-BK7"));
        assert_eq!(nearest("3x", ["2x", "6x"]), None, "half of two letters is not a likeness");
    }

    #[test]
    fn a_very_long_word_costs_nothing() {
        let long = "x".repeat(10_000_000);
        assert_eq!(nearest(&long, ["radii"]), None);
        assert_eq!(nearest("radij", [long.as_str(), "radii"]), Some("radii"));
    }
}
