//! What an overnight search has found, as tables and sentences.

use driver::overnight::{Fall, MissingPart, RankedList};

use super::number::{NONE, counted, fixed, significant, significant_or_dash};
use super::table::{Column, Table};
use super::{WIDTH, paragraph, sections, warnings};

/// Most rows of the table of how the merit fell.
const FALLS: usize = 12;
/// Widest list of glasses.
const GLASSES: usize = 30;

/// The list with what is worth saying about it.
#[must_use]
pub fn ranking(list: &RankedList) -> String {
    if list.best.is_empty() {
        let starts = counted(list.starts as usize, "start");
        return paragraph(&format!("No design was found yet by {starts}."), WIDTH, "");
    }
    let limits_crossed = list.best.iter().any(|best| !best.limits_kept);
    let signs = if limits_crossed { "! a limit is crossed" } else { "" };
    sections([table(list), signs.to_owned(), remarks(list), warnings(&advice(list))])
}

fn table(list: &RankedList) -> String {
    let mut table = Table::new([
        (Column::Right, "rank"),
        (Column::Right, "merit"),
        (Column::Right, "worst\nwavefront\nRMS waves"),
        (Column::Right, "track\nmm"),
        (Column::Right, "ele-\nments"),
        (Column::Left, "glasses"),
        (Column::Right, "start"),
    ]);
    for best in &list.best {
        let sign = if best.limits_kept { "" } else { "!" };
        table.row([
            best.rank.to_string(),
            format!("{}{sign}", significant(best.merit, 4)),
            significant_or_dash(best.worst_rms_waves, 3),
            fixed(best.track_mm, 2),
            best.elements.to_string(),
            glasses(&best.glasses),
            best.start.to_string(),
        ]);
    }
    table.text()
}

/// Glasses from left to right, the same ones in a row once with their number; where that is too
/// long, each once.
fn glasses(names: &[String]) -> String {
    let mut runs: Vec<(&str, usize)> = Vec::new();
    for name in names {
        match runs.last_mut() {
            Some((last, count)) if last == name => *count += 1,
            _ => runs.push((name, 1)),
        }
    }
    let told: Vec<String> = runs
        .into_iter()
        .map(|(name, count)| match count {
            1 => name.to_owned(),
            _ => format!("{count} {name}"),
        })
        .collect();
    let told = told.join(", ");
    if told.chars().count() <= GLASSES {
        return told;
    }
    let told = distinct(names).join(", ");
    if told.chars().count() <= GLASSES {
        return told;
    }
    let cut: String = told.chars().take(GLASSES - 1).collect();
    format!("{cut}…")
}

/// Each glass once, in the order they come, with its number where it is more than one.
fn distinct(names: &[String]) -> Vec<String> {
    let count = |name: &String| names.iter().filter(|other| *other == name).count();
    let first = |k: usize| !names[..k].contains(&names[k]);
    let firsts = (0..names.len()).filter(|&k| first(k)).map(|k| (&names[k], count(&names[k])));
    firsts.map(|(name, n)| if n == 1 { name.clone() } else { format!("{n} {name}") }).collect()
}

fn remarks(list: &RankedList) -> String {
    let listed = list.best.len();
    let meeting = match list.best.iter().filter(|best| best.meets).count() {
        0 => "None of those listed meets every goal and limit: more starts, one more element in a \
              group, other glasses, a longer tube or wider goals may help."
            .to_owned(),
        all if all == listed => "Every one listed meets every goal and limit.".to_owned(),
        some => format!("{some} of the {listed} listed meet every goal and limit."),
    };
    let told = format!(
        "Of {}, {} ended in the best design or one much like it. {meeting}",
        counted(list.starts as usize, "start"),
        list.times_best_found,
    );
    paragraph(&told, WIDTH, "")
}

fn advice(list: &RankedList) -> Vec<String> {
    if list.times_best_found == 1 && list.starts > 1 {
        let told = format!(
            "the best design was found by 1 of {}: search longer",
            counted(list.starts as usize, "start")
        );
        vec![told]
    } else {
        Vec::new()
    }
}

/// How the best merit fell with time; of many falls the first and the last ones.
#[must_use]
pub fn falls(falls: &[Fall]) -> String {
    let mut table =
        Table::new([(Column::Right, "time"), (Column::Right, "start"), (Column::Right, "merit")]);
    let left_out = falls.len().saturating_sub(FALLS);
    for (i, fall) in falls.iter().enumerate() {
        if i > 0 && i <= left_out {
            continue;
        }
        table.row([time(fall.seconds), fall.start.to_string(), significant(fall.merit, 4)]);
        if i == 0 && left_out > 0 {
            table.row(["…".to_owned(), String::new(), String::new()]);
        }
    }
    if table.is_empty() { String::new() } else { format!("How the merit fell\n{}", table.text()) }
}

/// The parts that are to be submitted again.
#[must_use]
pub fn missing(missing: &[MissingPart], of_parts: u64) -> String {
    if missing.is_empty() {
        return String::new();
    }
    let mut table = Table::new([(Column::Left, "part"), (Column::Right, "starts\nmissing")]);
    for part in missing {
        let starts = match (part.starts, part.whole) {
            (Some(starts), true) => format!("all {starts}"),
            (Some(starts), false) => starts.to_string(),
            (None, true) => "all".to_owned(),
            (None, false) => "not ended".to_owned(),
        };
        table.row([part.share.to_string(), starts]);
    }
    let parts: Vec<String> = missing.iter().map(|part| format!("--part {}", part.share)).collect();
    let again = format!(
        "Of {}, {} to be run again: {}",
        counted(of_parts as usize, "part"),
        missing.len(),
        parts.join(" ")
    );
    format!("{}\n\n{}", table.text(), paragraph(&again, WIDTH, "  "))
}

/// A stretch of time for people.
#[must_use]
pub fn time(seconds: f64) -> String {
    if !seconds.is_finite() || seconds < 0.0 {
        return NONE.to_owned();
    }
    let whole = seconds as u64;
    match whole {
        0..10 => format!("{seconds:.1} s"),
        10..120 => format!("{whole} s"),
        120..7200 => format!("{} min", whole / 60),
        _ => format!("{}:{:02} h", whole / 3600, whole / 60 % 60),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn times_are_told_in_the_unit_that_suits_them() {
        let told: Vec<String> = [0.04, 9.96, 75.0, 600.0, 7200.0, 36_061.0].map(time).into();
        insta::assert_snapshot!(told.join(", "), @"0.0 s, 10.0 s, 75 s, 10 min, 2:00 h, 10:01 h");
    }

    #[test]
    fn glasses_in_a_row_are_counted() {
        let names = |list: &[&str]| list.iter().map(|&name| name.to_owned()).collect::<Vec<_>>();
        assert_eq!(glasses(&names(&["a", "a", "b", "a"])), "2 a, b, a");
        let long = glasses(&names(&["fused-silica", "N-BK7", "fused-silica", "N-BK7"]));
        assert_eq!(long, "2 fused-silica, 2 N-BK7");
        let longer = glasses(&names(&["fused-silica", "N-BK7", "N-SF6", "N-LAK22"]));
        assert_eq!(longer.chars().count(), GLASSES);
    }

    #[test]
    fn of_many_falls_the_first_and_the_last_are_told() {
        let many: Vec<Fall> = (0..30u32)
            .map(|i| Fall { seconds: f64::from(i), start: 2, merit: 30.0 - f64::from(i) })
            .collect();
        let told = falls(&many);
        assert_eq!(told.lines().count(), 2 + FALLS + 1);
        assert!(told.contains("0.0 s") && told.contains("29 s") && !told.contains("18 s"));
        assert_eq!(falls(&[]), "");
    }
}
