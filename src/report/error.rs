//! Why a report cannot be written.

/// Fault of a report.
#[derive(Debug, thiserror::Error)]
pub enum ReportError {
    /// The picture could not be encoded.
    #[error(
        "the picture of {width} by {height} pixels cannot be encoded: {reason}; choose a smaller one"
    )]
    Picture {
        /// Pixels across.
        width: u32,
        /// Pixels down.
        height: u32,
        /// What the encoder said.
        reason: image::ImageError,
    },
    /// A figure of the report is not a finite number.
    #[error(
        "the report holds a number that is not finite at {key}: solve again with finer accuracy"
    )]
    NotFinite {
        /// Path of its key.
        key: String,
    },
    /// The chord tolerance asks for more points than a list may have.
    #[error(
        "a chord tolerance of {chord_m} m needs more points than a list may have: choose a larger one"
    )]
    TooFine {
        /// What was asked for, m.
        chord_m: f64,
    },
    /// The report could not be turned into text.
    #[error("the report cannot be turned into JSON: {0}")]
    Json(#[from] serde_json::Error),
}
