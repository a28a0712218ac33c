//! What can be wrong with a scenario.

/// Why a scenario cannot be used.
#[derive(Debug, thiserror::Error)]
pub enum ScenarioFault {
    /// Neither in the catalogue nor a file.
    #[error(
        "{name} is neither a scenario of the catalogue nor a file; `humward-sim list` shows the catalogue{}",
        near.as_ref().map(|near| format!(", did you mean {near}?")).unwrap_or_default()
    )]
    Unknown {
        /// What was asked for.
        name: String,
        /// The nearest name there is.
        near: Option<String>,
    },
    /// The file cannot be read.
    #[error("{name} cannot be read: {cause}; check the path and its permissions")]
    Unreadable {
        /// The file.
        name: String,
        /// Why.
        #[source]
        cause: std::io::Error,
    },
    /// Not TOML, an unknown key or a wrong type; the cause shows the line.
    #[error("{name}: {cause}")]
    Syntax {
        /// The scenario.
        name: String,
        /// What and where.
        #[source]
        cause: Box<toml::de::Error>,
    },
    /// Values that do not fit each other or the physics, all of them.
    #[error("{name}:{}", faults.iter().map(|fault| format!("\n  {fault}")).collect::<String>())]
    Values {
        /// The scenario.
        name: String,
        /// Where, what was read, what is allowed.
        faults: Vec<String>,
    },
}
