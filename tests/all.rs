//! All integration tests, in one binary.

mod suite {
    mod batch;
    mod case;
    mod cli;
    mod documents;
    mod imports;
    mod language;
    mod local;
    mod oracle;
    mod published;
    mod statement;
    mod uk;
}
