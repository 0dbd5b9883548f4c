//! Axes: from values to places, and round numbers along the way.

use super::axis_name::raised;

/// What an axis is about.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Axis {
    /// What is told along it.
    pub(crate) name: String,
    /// Its unit; empty for a pure number.
    pub(crate) unit: String,
    /// Whether equal ways are equal factors; only for values above zero.
    pub(crate) logarithmic: bool,
}

impl Axis {
    /// An axis with equal ways for equal differences.
    #[must_use]
    pub(crate) fn linear(name: &str, unit: &str) -> Self {
        Self { name: name.into(), unit: unit.into(), logarithmic: false }
    }

    /// An axis with equal ways for equal factors.
    #[must_use]
    pub(crate) fn logarithmic(name: &str, unit: &str) -> Self {
        Self { logarithmic: true, ..Self::linear(name, unit) }
    }

    /// Name and unit as a caption.
    #[must_use]
    pub(crate) fn caption(&self) -> String {
        match (self.name.is_empty(), self.unit.is_empty()) {
            (true, _) => self.unit.clone(),
            (_, true) => self.name.clone(),
            _ => format!("{}, {}", self.name, self.unit),
        }
    }
}

/// From values to places along one axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Scale {
    low: f64,
    high: f64,
    logarithmic: bool,
    from: f64,
    to: f64,
}

impl Scale {
    /// A scale that holds all these values, from the place `from` to `to`, px.
    pub(crate) fn holding(
        axis: &Axis,
        values: impl IntoIterator<Item = f64>,
        from: f64,
        to: f64,
    ) -> Self {
        let fits = |value: &f64| value.is_finite() && (!axis.logarithmic || *value > 0.0);
        let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
        for value in values.into_iter().filter(fits) {
            (low, high) = (low.min(value), high.max(value));
        }
        if low > high {
            (low, high) = (1.0, 10.0);
        }
        if axis.logarithmic {
            (low, high) = (low.log10(), high.log10());
        }
        // What is flat but for noise is drawn flat.
        let least = if axis.logarithmic { 0.3 } else { 1e-9 * low.abs().max(high.abs()) };
        if high - low <= least {
            let by = if axis.logarithmic { 0.5 } else { (0.1 * high.abs()).max(0.5) };
            (low, high) = (low - by, high + by);
        }
        Self { low, high, logarithmic: axis.logarithmic, from, to }
    }

    /// The same with a little room beyond both ends.
    pub(crate) fn roomy(mut self, part: f64) -> Self {
        let by = part * (self.high - self.low);
        (self.low, self.high) = (self.low - by, self.high + by);
        self
    }

    pub(crate) fn place(&self, value: f64) -> f64 {
        let value = if self.logarithmic { value.max(1e-300).log10() } else { value };
        self.from + (value - self.low) / (self.high - self.low) * (self.to - self.from)
    }

    /// Round values along the axis, about so many, with their labels.
    pub(crate) fn ticks(&self, about: usize) -> Vec<(f64, String)> {
        if self.logarithmic { self.decades(about) } else { self.round(about) }
    }

    fn round(&self, about: usize) -> Vec<(f64, String)> {
        let raw = (self.high - self.low) / about.max(1) as f64;
        let power = 10.0_f64.powf(raw.log10().floor());
        // A few more ticks rather than far fewer.
        let steps = [1.0, 2.0, 5.0, 10.0].map(|by| by * power);
        let step = steps.into_iter().find(|step| *step >= 0.75 * raw);
        let step = step.unwrap_or(raw);
        let decimals = (-step.log10().floor()).max(0.0) as usize;
        let first = (self.low / step).ceil() as i64;
        let last = (self.high / step + 1e-9).floor() as i64;
        let label = |value: f64| {
            if value == 0.0 {
                "0".to_owned()
            } else if self.high.abs().max(self.low.abs()) >= 1e6 || step < 1e-6 {
                format!("{value:.1e}").replace('-', "\u{2212}")
            } else {
                let text = format!("{value:.decimals$}");
                // U+2212, the sign that is as wide as a plus.
                text.replace('-', "\u{2212}")
            }
        };
        (first..=last).map(|k| k as f64 * step).map(|value| (value, label(value))).collect()
    }

    /// Powers of ten; where a scale spans few of them, twos and fives between them; round steps
    /// where it spans less than a factor of two or so.
    fn decades(&self, about: usize) -> Vec<(f64, String)> {
        let (first, last) = (self.low.ceil() as i32, (self.high + 1e-9).floor() as i32);
        let powers = usize::try_from(last - first + 1).unwrap_or(0);
        if powers > 2 {
            let each = powers.div_ceil(about.max(1)).max(1);
            let powers = (first..=last).step_by(each);
            return powers.map(|power| (10.0_f64.powi(power), decade(power))).collect();
        }
        let inside = |value: f64| (self.low..=self.high + 1e-9).contains(&value.log10());
        let between = |by: &[f64]| -> Vec<(f64, String)> {
            let powers = first - 1..=last + 1;
            let values = powers.flat_map(|power| by.iter().map(move |by| (*by, power)));
            let ticks = values.map(|(by, power)| (by * 10.0_f64.powi(power), by, power));
            ticks.filter(|tick| inside(tick.0)).map(|(v, by, power)| (v, part(by, power))).collect()
        };
        let ticks = between(&[1.0, 2.0, 5.0]);
        if ticks.len() >= 2 {
            return ticks;
        }
        let (low, high) = (10.0_f64.powf(self.low), 10.0_f64.powf(self.high));
        Self { low, high, logarithmic: false, ..*self }.round(about)
    }
}

/// A tick `by` times a power of ten.
fn part(by: f64, power: i32) -> String {
    match power {
        -3..=4 => crate::text::as_written(by * 10.0_f64.powi(power)),
        _ if by == 1.0 => decade(power),
        _ => format!("{by}·{}", decade(power)),
    }
}

fn decade(power: i32) -> String {
    if (-3..=4).contains(&power) {
        return format!("{}", 10.0_f64.powi(power));
    }
    format!("10{}", raised(&power.to_string()))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn labels(scale: Scale, about: usize) -> String {
        let labels: Vec<String> = scale.ticks(about).into_iter().map(|(_, label)| label).collect();
        labels.join(" ")
    }

    #[test]
    fn ticks_are_round_and_inside() {
        let axis = Axis::linear("ratio", "");
        assert_eq!(labels(Scale::holding(&axis, [2.0, 6.0], 0.0, 1.0), 5), "2 3 4 5 6");
        assert_eq!(
            labels(Scale::holding(&axis, [-0.031, 0.012], 0.0, 1.0), 4),
            "−0.03 −0.02 −0.01 0 0.01"
        );
        let axis = Axis::logarithmic("merit", "");
        assert_eq!(labels(Scale::holding(&axis, [1e-6, 1e4], 0.0, 1.0), 4), "10⁻⁶ 0.001 1 1000");
        assert_eq!(labels(Scale::holding(&axis, [3.0, 12.0], 0.0, 1.0), 4), "5 10");
        assert_eq!(labels(Scale::holding(&axis, [0.07, 2.0], 0.0, 1.0), 4), "0.1 0.2 0.5 1 2");
        assert_eq!(labels(Scale::holding(&axis, [2e-7, 6e-7], 0.0, 1.0), 4), "2·10⁻⁷ 5·10⁻⁷");
        assert_eq!(labels(Scale::holding(&axis, [0.11, 0.28], 0.0, 1.0), 4), "0.15 0.20 0.25");
    }

    #[test]
    fn a_place_is_where_its_value_belongs() {
        let scale = Scale::holding(&Axis::linear("z", "mm"), [0.0, 150.0], 10.0, 310.0);
        assert_eq!((scale.place(0.0), scale.place(75.0)), (10.0, 160.0));
        let flat = Scale::holding(&Axis::linear("z", "mm"), [3.0, 3.0], 0.0, 1.0);
        assert!((flat.place(3.0) - 0.5).abs() < 1e-12);
        let none = Scale::holding(&Axis::logarithmic("z", ""), [f64::NAN, -1.0], 0.0, 1.0);
        assert!(none.place(2.0).is_finite());
    }
}
