//! ref
