mod suite {
    pub mod batch;
}
