//! All integration tests, in one binary.

mod suite {
    mod batch;
    mod case;
    mod oracle;
    mod statement;
    mod uk;
}
