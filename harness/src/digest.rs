//! What tells a file from every other: the hash of its bytes.

use std::io::{self, Read};

use sha2::{Digest as _, Sha256};

/// The bytes of a file, counted and hashed.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Digest {
    /// How many there are.
    pub(crate) bytes: u64,
    /// Their SHA-256 (FIPS 180-4), in hexadecimal.
    pub(crate) sha256: String,
}

impl Digest {
    /// Reads to the end, however long that is: only a part of it is held in memory.
    ///
    /// # Errors
    /// Those of `source`.
    pub(crate) fn of(mut source: impl Read) -> io::Result<Self> {
        let (mut hash, mut bytes, mut part) = (Sha256::new(), 0, vec![0; 1 << 16]);
        loop {
            let read = source.read(&mut part)?;
            if read == 0 {
                break;
            }
            hash.update(&part[..read]);
            bytes += read as u64;
        }
        let sha256 = hash.finalize().iter().map(|byte| format!("{byte:02x}")).collect();
        Ok(Self { bytes, sha256 })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Published by NIST beside FIPS 180-4: the messages "abc" and of a million "a".
    #[test]
    fn digest_of_the_standards_messages_is_the_published_one() {
        let abc = Digest::of(&b"abc"[..]).expect("readable");
        let expected = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        assert_eq!((abc.sha256.as_str(), abc.bytes), (expected, 3));
        let million = Digest::of(io::repeat(b'a').take(1_000_000)).expect("readable");
        let expected = "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0";
        assert_eq!((million.sha256.as_str(), million.bytes), (expected, 1_000_000));
    }
}
