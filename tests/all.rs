//! All integration tests, in one binary.

mod suite {
    mod batch;
    mod case;
    mod cli;
    mod language;
    mod statement;
    mod uk;
}
