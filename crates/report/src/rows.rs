//! Tables for other programs: comma-separated values (RFC 4180), one head line, units in the heads.

use driver::tolerance::ToleranceReport;

/// Why rows could not be made.
#[derive(Debug, thiserror::Error)]
pub enum RowsError {
    /// The writer of rows refuses.
    #[error(transparent)]
    Csv(#[from] csv::Error),
    /// What was written is not a text.
    #[error("the rows are not a text")]
    Text,
}

/// What every tolerance does in every state, a row each.
///
/// # Errors
/// The rows cannot be put together.
pub fn tolerance_rows(report: &ToleranceReport) -> Result<String, RowsError> {
    let mut writer = csv::Writer::from_writer(Vec::new());
    writer.write_record([
        "kind",
        "at",
        "tolerance",
        "by",
        "share_percent",
        "state",
        "wavefront_rms_waves",
        "ratio_percent",
        "exit_slope_urad",
        "boresight_urad",
        "readjustment_mm",
        "wander_urad",
    ])?;
    for sensitivity in &report.sensitivities {
        for state in &sensitivity.states {
            let readjustment: Vec<String> =
                state.readjustment_mm.iter().map(f64::to_string).collect();
            writer.write_record([
                sensitivity.kind.word().to_owned(),
                sensitivity.at.to_string(),
                sensitivity.tolerance.to_string(),
                sensitivity.by.word().to_owned(),
                sensitivity.share_percent.to_string(),
                state.state.clone(),
                state.wavefront_rms_waves.to_string(),
                state.ratio_percent.to_string(),
                state.exit_slope_urad.to_string(),
                state.boresight_urad.to_string(),
                readjustment.join(" "),
                sensitivity.wander_urad.to_string(),
            ])?;
        }
    }
    let bytes = writer.into_inner().map_err(|_| RowsError::Text)?;
    String::from_utf8(bytes).map_err(|_| RowsError::Text)
}
