//! All integration tests, in one binary.

mod suite {
    mod batch;
    mod case;
    mod cli;
    mod published;
    mod statement;
    mod uk;
}
