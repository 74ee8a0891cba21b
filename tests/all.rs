//! All integration tests, in one binary.

mod suite {
    pub mod statement;
}
