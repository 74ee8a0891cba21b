//! How parent and worker talk: a greeting, then frames of a length and a postcard message.
//! Whatever a worker's process prints before the greeting is skipped.

use serde::de::DeserializeOwned;
use serde::{Deserialize, Serialize};
use std::io::{self, Read, Write};

/// What a worker says first. The number changes whenever a message changes its form.
pub(super) const GREETING: &[u8] = b"\nhourworth worker 1\n";

/// The longest frame that is accepted; a longer one means that something else is talking.
const LONGEST: usize = 512 << 20;

/// How much foreign output is skipped while waiting for the greeting.
const LONGEST_PREAMBLE: usize = 64 << 10;

/// From the parent to a worker.
#[derive(Debug, Serialize, Deserialize)]
pub(super) enum ToWorker {
    /// Comes first, once.
    Setup {
        /// Most address space in bytes that the worker may use.
        memory: Option<u64>,
        /// What the assessor is built from.
        #[serde(with = "bytes")]
        payload: Vec<u8>,
    },
    /// Work this household out.
    Assess(Box<crate::case::Household>),
}

/// From a worker to the parent.
#[derive(Debug, Serialize, Deserialize)]
pub(super) enum FromWorker {
    /// The setup is done.
    Ready,
    /// The setup cannot be used; every other worker would refuse it too.
    Refused(String),
    /// A household is done.
    Done {
        /// What became of it.
        outcome: super::Outcome,
        /// Most memory that the worker has held so far in kilobytes; 0 where the system does not say.
        peak_kb: u64,
        /// Whether the worker ends itself now because it may be in disorder.
        last: bool,
    },
}

/// Writes one frame and flushes.
pub(super) fn write_frame(to: &mut impl Write, message: &impl Serialize) -> io::Result<()> {
    let body = postcard::to_allocvec(message).map_err(io::Error::other)?;
    let length = u32::try_from(body.len()).map_err(io::Error::other)?;
    to.write_all(&length.to_le_bytes())?;
    to.write_all(&body)?;
    to.flush()
}

/// Reads one frame; none at a clean end.
pub(super) fn read_frame<T: DeserializeOwned>(from: &mut impl Read) -> io::Result<Option<T>> {
    let mut length = [0u8; 4];
    let mut have = 0;
    while have < 4 {
        match from.read(&mut length[have..])? {
            0 if have == 0 => return Ok(None),
            0 => return Err(io::ErrorKind::UnexpectedEof.into()),
            more => have += more,
        }
    }
    let length = u32::from_le_bytes(length) as usize;
    if length > LONGEST {
        return Err(io::Error::other("a frame is longer than any message"));
    }
    let mut body = vec![0u8; length];
    from.read_exact(&mut body)?;
    postcard::from_bytes(&body)
        .map(Some)
        .map_err(io::Error::other)
}

/// Skips what comes before the greeting.
pub(super) fn await_greeting(from: &mut impl Read) -> io::Result<()> {
    let mut seen: Vec<u8> = Vec::new();
    let mut byte = [0u8; 1];
    while !seen.ends_with(GREETING) {
        if seen.len() > LONGEST_PREAMBLE {
            return Err(io::Error::other("the process is not a worker"));
        }
        from.read_exact(&mut byte)?;
        seen.push(byte[0]);
    }
    Ok(())
}

/// Byte strings in one piece rather than byte by byte.
pub(super) mod bytes {
    use serde::de::{Deserializer, Visitor};
    use serde::ser::Serializer;

    pub fn serialize<S: Serializer>(value: &[u8], to: S) -> Result<S::Ok, S::Error> {
        to.serialize_bytes(value)
    }

    pub fn deserialize<'de, D: Deserializer<'de>>(from: D) -> Result<Vec<u8>, D::Error> {
        struct Bytes;
        impl Visitor<'_> for Bytes {
            type Value = Vec<u8>;
            fn expecting(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.write_str("bytes")
            }
            fn visit_bytes<E>(self, value: &[u8]) -> Result<Vec<u8>, E> {
                Ok(value.to_vec())
            }
            fn visit_byte_buf<E>(self, value: Vec<u8>) -> Result<Vec<u8>, E> {
                Ok(value)
            }
        }
        from.deserialize_byte_buf(Bytes)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_greeting_is_found_behind_other_output() {
        let mut text = b"running 1 test\ntest x ... ".to_vec();
        text.extend(GREETING);
        write_frame(&mut text, &FromWorker::Ready).unwrap();
        let mut from = &text[..];
        await_greeting(&mut from).unwrap();
        assert!(matches!(read_frame(&mut from), Ok(Some(FromWorker::Ready))));
        assert!(matches!(read_frame::<FromWorker>(&mut from), Ok(None)));
    }

    #[test]
    fn half_a_frame_is_an_error_not_an_end() {
        let mut text = Vec::new();
        write_frame(&mut text, &FromWorker::Refused("no".into())).unwrap();
        text.pop();
        assert!(read_frame::<FromWorker>(&mut &text[..]).is_err());
        assert!(read_frame::<FromWorker>(&mut &text[..2]).is_err());
    }

    #[test]
    fn a_process_that_never_greets_is_refused() {
        let text = vec![b'x'; LONGEST_PREAMBLE + 10];
        assert!(await_greeting(&mut &text[..]).is_err());
    }
}
