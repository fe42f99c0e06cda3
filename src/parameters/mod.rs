//! The parameter file: records, provenance, covariance, as TOML and JSON.
