//! Names near a name that was not found.

/// How many names are offered at most.
const MOST: usize = 5;

/// The name in small letters, without spaces, hyphens and underscores.
pub(super) fn loosened(name: &str) -> String {
    name.chars()
        .filter(|c| !c.is_whitespace() && !matches!(c, '-' | '_'))
        .flat_map(char::to_lowercase)
        .collect()
}

/// The names nearest to the wanted one by Damerau-Levenshtein distance of their loosened forms: one slip is forgiven in
/// up to three letters, two in more. Of equals, names that contain the wanted one come first. Each candidate is its bare name and what to call it in the answer.
pub(super) fn nearest<'a>(
    wanted: &str,
    candidates: impl Iterator<Item = (&'a str, String)>,
) -> Vec<String> {
    let wanted = loosened(wanted);
    let length = wanted.chars().count();
    let slips = match length {
        0 => return Vec::new(),
        1..=3 => 1,
        _ => 2,
    };
    let mut near: Vec<(usize, bool, String)> = candidates
        .filter_map(|(bare, answer)| {
            let bare = loosened(bare);
            if bare.chars().count().abs_diff(length) > slips {
                return None;
            }
            let distance = strsim::damerau_levenshtein(&wanted, &bare);
            let in_part = !bare.contains(&wanted);
            (distance <= slips).then_some((distance, in_part, answer))
        })
        .collect();
    near.sort();
    near.truncate(MOST);
    near.into_iter().map(|(.., answer)| answer).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn among(wanted: &str, names: &[&str]) -> Vec<String> {
        nearest(wanted, names.iter().map(|name| (*name, (*name).to_owned())))
    }

    #[test]
    fn nearest_first_then_by_name() {
        assert_eq!(
            among("N-SF11", &["N-SF6", "SF11", "N-SF15", "N-SF1"]),
            ["N-SF1", "N-SF15", "SF11", "N-SF6"]
        );
    }

    #[test]
    fn a_name_that_was_shortened_comes_first() {
        assert_eq!(among("BK7", &["H-K7", "K7", "N-BK7"]), ["N-BK7", "H-K7", "K7"]);
    }

    #[test]
    fn far_names_are_not_offered() {
        assert!(among("bench", &["N-BK7", "silicon"]).is_empty());
        assert!(among(&"x".repeat(100_000), &["N-BK7"]).is_empty());
    }
}
