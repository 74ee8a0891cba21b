use super::args::ProveArgs;
use super::exit::{Exit, Failure};
pub(super) fn prove(_: &ProveArgs) -> Result<Exit, Failure> { Ok(Exit::Done) }
