//! What a run may be told, checked when it is told.

/// Which method solves.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Method {
    /// Damped least squares with exact derivatives: the method of choice.
    #[default]
    DampedLeastSquares,
    /// The simplex of Nelder and Mead (Comput. J. 7, 308 (1965)): no derivatives, far slower,
    /// sometimes past a barrier that stops the other.
    NelderMead,
}

impl Method {
    /// Its name for people and documents.
    #[must_use]
    pub fn name(self) -> &'static str {
        match self {
            Self::DampedLeastSquares => "damped least squares",
            Self::NelderMead => "Nelder-Mead",
        }
    }
}

/// A setting is out of range.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{name} is {value}, but must be {constraint}")]
pub struct SettingsError {
    name: &'static str,
    value: f64,
    constraint: &'static str,
}

/// When to stop and how boldly to step.
#[derive(Debug, Clone, PartialEq)]
pub struct Settings {
    method: Method,
    max_iterations: u64,
    target: f64,
    reduction: f64,
    gradient: f64,
    acceleration: Option<f64>,
}

impl Default for Settings {
    fn default() -> Self {
        Self::new(Method::default())
    }
}

impl Settings {
    /// The defaults for a method.
    #[must_use]
    pub fn new(method: Method) -> Self {
        Self {
            method,
            max_iterations: match method {
                Method::DampedLeastSquares => 1_000,
                Method::NelderMead => 20_000,
            },
            target: 1e-20,
            reduction: 1e-10,
            gradient: 1e-10,
            acceleration: Some(0.75),
        }
    }

    /// Most iterations (steps tried). Default 1000 for damped least squares, which needs 20 to
    /// 150 on beam expanders, and 20 000 for Nelder-Mead. At least 1.
    ///
    /// # Errors
    /// The value is 0.
    pub fn with_max_iterations(mut self, iterations: u64) -> Result<Self, SettingsError> {
        check("the iteration limit", iterations as f64, iterations > 0, "at least 1")?;
        self.max_iterations = iterations;
        Ok(self)
    }

    /// Stops when the limits are kept and `|r|² ≤ target`. Default 1e-20: with residuals in
    /// units of what is wanted, ten orders below anything that can be made. Zero or positive.
    ///
    /// # Errors
    /// The value is negative or not finite.
    pub fn with_target(mut self, target: f64) -> Result<Self, SettingsError> {
        check("the target", target, (0.0..f64::MAX).contains(&target), "zero or positive")?;
        self.target = target;
        Ok(self)
    }

    /// Stops when both the actual and the predicted reduction of the merit `φ` stay at or below
    /// `reduction · φ` for several steps in a row (Moré's first test, Lecture Notes in
    /// Mathematics 630, 105 (1978), asked for repeatedly because optical merit functions creep
    /// along flat valleys). Default 1e-10. From 0 to below 1. Nelder-Mead takes it for the
    /// spread of its simplex.
    ///
    /// # Errors
    /// The value is out of range.
    pub fn with_reduction(mut self, reduction: f64) -> Result<Self, SettingsError> {
        check("the reduction", reduction, (0.0..1.0).contains(&reduction), "from 0 to below 1")?;
        self.reduction = reduction;
        Ok(self)
    }

    /// Stops when the residuals are all but orthogonal to every column of the Jacobian, what the
    /// active bounds and limits take up put aside:
    /// `|(Jᵀr − N u)ⱼ| ≤ gradient · |Jⱼ| |r|` for every variable (Moré's fourth test, with
    /// multipliers `u`). Default 1e-10. From 0 to below 1.
    ///
    /// # Errors
    /// The value is out of range.
    pub fn with_gradient(mut self, gradient: f64) -> Result<Self, SettingsError> {
        check("the gradient", gradient, (0.0..1.0).contains(&gradient), "from 0 to below 1")?;
        self.gradient = gradient;
        Ok(self)
    }

    /// Geodesic acceleration `a` of a step `v` is kept to `2|a|/|v| ≤ ratio`, else the straight
    /// step is tried (Transtrum and Sethna, arXiv:1201.5885, who recommend 0.75, the default).
    /// `None` switches acceleration off, which takes several times the steps on beam expanders.
    ///
    /// # Errors
    /// The ratio is not positive or not finite.
    pub fn with_acceleration(mut self, ratio: Option<f64>) -> Result<Self, SettingsError> {
        if let Some(ratio) = ratio {
            let sound = ratio > 0.0 && ratio < f64::MAX;
            check("the acceleration ratio", ratio, sound, "positive")?;
        }
        self.acceleration = ratio;
        Ok(self)
    }

    /// Which method solves.
    #[must_use]
    pub(crate) fn method(&self) -> Method {
        self.method
    }

    pub(crate) fn max_iterations(&self) -> u64 {
        self.max_iterations
    }

    pub(crate) fn target(&self) -> f64 {
        self.target
    }

    pub(crate) fn reduction(&self) -> f64 {
        self.reduction
    }

    pub(crate) fn gradient(&self) -> f64 {
        self.gradient
    }

    pub(crate) fn acceleration(&self) -> Option<f64> {
        self.acceleration
    }
}

fn check(
    name: &'static str,
    value: f64,
    sound: bool,
    constraint: &'static str,
) -> Result<(), SettingsError> {
    if sound { Ok(()) } else { Err(SettingsError { name, value, constraint }) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_setting_names_what_is_wrong_with_it() {
        let settings = Settings::default;
        let messages = [
            settings().with_max_iterations(0),
            settings().with_target(-1.0),
            settings().with_reduction(f64::NAN),
            settings().with_gradient(-1e-3),
            settings().with_acceleration(Some(f64::INFINITY)),
        ]
        .map(|result| result.map_err(|error| error.to_string()).unwrap_err());
        insta::assert_snapshot!(messages.join("\n"), @r"
        the iteration limit is 0, but must be at least 1
        the target is -1, but must be zero or positive
        the reduction is NaN, but must be from 0 to below 1
        the gradient is -0.001, but must be from 0 to below 1
        the acceleration ratio is inf, but must be positive
        ");
    }

    #[test]
    fn good_settings_are_taken() {
        let settings = Settings::new(Method::NelderMead)
            .with_max_iterations(5)
            .and_then(|s| s.with_target(0.0))
            .and_then(|s| s.with_acceleration(None))
            .unwrap();
        assert_eq!(settings.max_iterations(), 5);
        assert_eq!(settings.acceleration(), None);
        assert_eq!(settings.method(), Method::NelderMead);
    }
}
