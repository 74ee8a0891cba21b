//! A household as bytes: to send it to a worker, and to know one again. Same household, same bytes. Imports nothing outside `case`.

use super::household::Household;
use sha2::{Digest, Sha256};

/// The bytes of a household, by the order of its fields.
///
/// # Panics
/// Never: a household is plain data.
pub fn to_bytes(household: &Household) -> Vec<u8> {
    postcard::to_stdvec(household).expect("a household is plain data")
}

/// A household from the bytes that [`to_bytes`] made.
///
/// # Errors
/// Where they are no such bytes.
pub fn from_bytes(bytes: &[u8]) -> Result<Household, postcard::Error> {
    let (household, rest) = postcard::take_from_bytes(bytes)?;
    if rest.is_empty() {
        Ok(household)
    } else {
        Err(postcard::Error::DeserializeBadEncoding)
    }
}

/// The SHA-256 of what a household says, wherever it stands in its list: the row does not count.
pub fn digest(household: &Household) -> [u8; 32] {
    let mut anywhere = household.clone();
    anywhere.row = 0;
    Sha256::digest(to_bytes(&anywhere)).into()
}
