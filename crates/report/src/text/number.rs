//! Numbers as people read them.

/// Stands where a number has no meaning.
pub(crate) const NONE: &str = "-";

/// Above this a fixed number of decimals is noise.
const LARGEST_FIXED: f64 = 1e7;

/// A number with so many decimals, without a sign on zero; very large ones in powers of ten.
pub(crate) fn fixed(value: f64, decimals: usize) -> String {
    if !value.is_finite() {
        return NONE.to_owned();
    }
    if value.abs() >= LARGEST_FIXED {
        return format!("{value:.3e}");
    }
    let text = format!("{value:.decimals$}");
    match text.strip_prefix('-') {
        Some(digits) if digits.bytes().all(|byte| matches!(byte, b'0' | b'.')) => digits.to_owned(),
        _ => text,
    }
}

/// As [`fixed`], or a dash.
pub(crate) fn fixed_or_dash(value: Option<f64>, decimals: usize) -> String {
    value.map_or_else(|| NONE.to_owned(), |value| fixed(value, decimals))
}

/// As [`fixed_or_dash`], but what is not zero is not told as zero.
pub(crate) fn fixed_or_less(value: Option<f64>, decimals: usize) -> String {
    let least = 10_f64.powi(-(decimals as i32));
    match value {
        Some(value) if value != 0.0 && value.abs() < 0.5 * least => format!("<{least:.decimals$}"),
        value => fixed_or_dash(value, decimals),
    }
}

/// How well a wavefront error is known where it is small, in waves.
const WAVEFRONT_KNOWN_TO: f64 = 1e-6;

/// A wavefront error in waves: what lies below its accuracy is told so.
pub(crate) fn wavefront(waves: Option<f64>) -> String {
    match waves {
        Some(waves) if waves.abs() < WAVEFRONT_KNOWN_TO => "<1e-6".to_owned(),
        waves => significant_or_dash(waves, 3),
    }
}

/// A number with so many significant digits.
pub(crate) fn significant(value: f64, digits: usize) -> String {
    if !value.is_finite() {
        return NONE.to_owned();
    }
    if value == 0.0 {
        return "0".to_owned();
    }
    let magnitude = value.abs().log10().floor() as i32;
    if (-4..7).contains(&magnitude) {
        let decimals = (digits as i32 - 1 - magnitude).max(0) as usize;
        fixed(value, decimals)
    } else {
        format!("{value:.*e}", digits.saturating_sub(1))
    }
}

/// As [`significant`], or a dash.
pub(crate) fn significant_or_dash(value: Option<f64>, digits: usize) -> String {
    value.map_or_else(|| NONE.to_owned(), |value| significant(value, digits))
}

/// A number as its owner wrote it: the shortest text that reads back the same.
pub(crate) fn as_written(value: f64) -> String {
    if value != 0.0 && !(1e-5..1e9).contains(&value.abs()) {
        format!("{value:e}")
    } else {
        format!("{value}")
    }
}

/// "1 goal", "3 goals".
pub(crate) fn counted(count: usize, noun: &str) -> String {
    let ending = if count == 1 { "" } else { "s" };
    format!("{count} {noun}{ending}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fixed_numbers_have_no_negative_zero_and_no_endless_digits() {
        assert_eq!(fixed(-0.000_04, 4), "0.0000");
        assert_eq!(fixed(-0.000_05, 4), "-0.0001");
        assert_eq!(fixed(1e308, 2), "1.000e308");
        assert_eq!(fixed(f64::NAN, 2), "-");
        assert_eq!(fixed_or_dash(None, 3), "-");
    }

    #[test]
    fn what_is_not_zero_is_not_told_as_zero() {
        assert_eq!(fixed_or_less(Some(-4e-5), 4), "<0.0001");
        assert_eq!(fixed_or_less(Some(-6e-5), 4), "-0.0001");
        assert_eq!(fixed_or_less(Some(0.0), 4), "0.0000");
        assert_eq!(wavefront(Some(4e-7)), "<1e-6");
        assert_eq!(wavefront(Some(1.234_5e-3)), "0.00123");
        assert_eq!(wavefront(None), "-");
    }

    #[test]
    fn significant_digits_hold_over_the_whole_range() {
        let told: Vec<String> = [123_456.7, 12.345_67, 0.012_345, 1.5e-9, 0.0, -2.5e12]
            .map(|x| significant(x, 4))
            .into();
        insta::assert_snapshot!(told.join(" "), @"123457 12.35 0.01235 1.500e-9 0 -2.500e12");
    }

    #[test]
    fn written_numbers_are_the_shortest() {
        assert_eq!(as_written(0.05), "0.05");
        assert_eq!(as_written(1.0), "1");
        assert_eq!(as_written(1e-7), "1e-7");
    }
}
