//! What an axis is called: the words and the unit of an address or of a result's key.

use surface_model::document::Address;

use super::axis::Axis;

/// Keys of lists by what one of their entries is.
const ONE_OF: [(&str, &str); 7] = [
    ("radii", "radius"),
    ("thicknesses", "thickness"),
    ("spacings", "spacing"),
    ("airs", "air"),
    ("wavelengths", "wavelength"),
    ("ratios", "ratio"),
    ("glasses", "glass"),
];

/// Units as the ends of keys, and as they are written.
const UNITS: [(&str, &str); 13] = [
    ("mm", "mm"),
    ("nm", "nm"),
    ("um", "µm"),
    ("m", "m"),
    ("urad", "µrad"),
    ("mrad", "mrad"),
    ("deg", "°"),
    ("percent", "%"),
    ("waves", "waves"),
    ("c", "°C"),
    ("w", "W"),
    ("mj", "mJ"),
    ("ns", "ns"),
];

/// An axis for what stands at an address, or for a result by its key: `by_factors` where equal
/// ways shall be equal factors.
pub(super) fn axis(word: &str, by_factors: bool) -> Axis {
    let (name, unit) = match word.parse::<Address>() {
        Ok(at) if word.starts_with('/') => of_address(&at),
        _ => of_key(word),
    };
    Axis { name, unit: unit.to_owned(), logarithmic: by_factors }
}

/// An axis with equal ways for equal differences for what stands at an address.
pub(super) fn axis_at(at: &Address) -> Axis {
    let (name, unit) = of_address(at);
    Axis::linear(&name, unit)
}

/// A key without its unit, and the unit.
fn of_key(key: &str) -> (String, &'static str) {
    let split = key.rsplit_once('_').and_then(|(name, end)| {
        let (_, unit) = UNITS.iter().find(|(known, _)| *known == end)?;
        Some((name, *unit))
    });
    let (name, unit) = split.unwrap_or((key, ""));
    (name.replace('_', " ").replace("rms", "RMS"), unit)
}

/// `/groups/entry/elements/0/radii_mm/1` is "entry, element 0, radius 1", in mm: numbers count as
/// in the address, names stand for themselves.
fn of_address(at: &Address) -> (String, &'static str) {
    let (mut words, mut unit) = (Vec::new(), "");
    let steps = at.steps();
    let mut steps = steps.iter().copied().peekable();
    while let Some(step) = steps.next() {
        let (key, key_unit) = of_key(step);
        if !key_unit.is_empty() {
            unit = key_unit;
        }
        match (step, steps.peek().copied()) {
            ("groups" | "states" | "elements" | "glasses" | "shapes" | "asphere", Some(entry)) => {
                steps.next();
                words.push(entry_of(step, entry));
            }
            (_, Some(entry)) if is_number(entry) || entry == "*" => {
                steps.next();
                let known = ONE_OF.iter().find(|(list, _)| *list == key);
                words.push(numbered(known.map_or(key.as_str(), |(_, one)| one), entry));
            }
            _ => words.push(key),
        }
    }
    (words.join(", "), unit)
}

/// An entry of a list whose entries may have names.
fn entry_of(list: &str, entry: &str) -> String {
    let one = match list {
        "groups" => "group",
        "states" => "state",
        "elements" => "element",
        "glasses" => "glass",
        "shapes" => "surface",
        _ => return format!("r{}", raised(entry)),
    };
    if is_number(entry) || entry == "*" { numbered(one, entry) } else { entry.to_owned() }
}

fn numbered(one: &str, entry: &str) -> String {
    if entry == "*" { format!("every {one}") } else { format!("{one} {entry}") }
}

fn is_number(step: &str) -> bool {
    !step.is_empty() && step.bytes().all(|byte| byte.is_ascii_digit())
}

/// A power in raised digits.
pub(super) fn raised(power: &str) -> String {
    let digit = |sign: char| match sign {
        '-' => '⁻',
        '1' => '¹',
        '2' => '²',
        '3' => '³',
        '0' | '4'..='9' => char::from_u32(u32::from(sign) - 48 + 0x2070).unwrap_or(sign),
        other => other,
    };
    power.chars().map(digit).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn caption(word: &str) -> String {
        axis(word, false).caption()
    }

    #[test]
    fn an_address_reads_as_words_with_a_unit() {
        assert_eq!(caption("/housing/track_mm"), "housing, track, mm");
        assert_eq!(caption("/states/6x/ratio"), "6x, ratio");
        assert_eq!(caption("/states/*/spacings_mm/1"), "every state, spacing 1, mm");
        let radius = "/groups/entry/elements/0/radii_mm/1";
        assert_eq!(caption(radius), "entry, element 0, radius 1, mm");
        let fourth = "/groups/exit/elements/pair/shapes/2/asphere/4";
        assert_eq!(caption(fourth), "exit, pair, surface 2, r⁴");
        assert_eq!(caption("/groups/2/elements/*/glasses/0"), "group 2, every element, glass 0");
        assert_eq!(caption("/glasses/melt-4471/index_shift"), "melt-4471, index shift");
        assert_eq!(caption("/glasses_allowed"), "glasses allowed");
        assert_eq!(caption("/ratios/4"), "ratio 4");
    }

    #[test]
    fn a_result_reads_as_words_with_a_unit() {
        assert_eq!(caption("merit"), "merit");
        assert_eq!(caption("worst_rms_waves"), "worst RMS, waves");
        assert_eq!(caption("worst_exit_slope_urad"), "worst exit slope, µrad");
        assert_eq!(caption("track_mm"), "track, mm");
    }
}
