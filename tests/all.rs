//! All integration tests, in one binary.

mod suite {
    mod batch;
    mod uk;
}
