//! SHA-256 digests and their one spelling: 64 lower-case hexadecimal digits.
//!
//! Source of the function: FIPS 180-4, by the `sha2` crate.

use std::fmt;

use sha2::{Digest as _, Sha256};

/// A SHA-256 digest.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Digest([u8; 32]);

/// Why a text is not a digest.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum DigestFault {
    Length { found: usize },
    UpperCase,
    NotHexadecimal,
}

impl Digest {
    pub fn of(bytes: &[u8]) -> Digest {
        Digest(Sha256::digest(bytes).into())
    }

    /// Reads the one accepted spelling; upper case is refused so that equal digests are equal text.
    pub fn parse(text: &str) -> Result<Digest, DigestFault> {
        if text.len() != 64 {
            return Err(DigestFault::Length {
                found: text.chars().count(),
            });
        }
        let mut bytes = [0; 32];
        for (byte, pair) in bytes.iter_mut().zip(text.as_bytes().chunks_exact(2)) {
            *byte = hex_value(pair[0])? << 4 | hex_value(pair[1])?;
        }
        Ok(Digest(bytes))
    }

    pub fn as_bytes(&self) -> &[u8; 32] {
        &self.0
    }

    /// `sha256:` and the 64 digits, as the record and the problem file spell a fingerprint.
    pub fn prefixed(&self) -> String {
        format!("sha256:{self}")
    }

    /// The first 8 hexadecimal digits, for the name of a folder.
    pub fn first_8(&self) -> String {
        self.0[..4]
            .iter()
            .map(|byte| format!("{byte:02x}"))
            .collect()
    }
}

impl fmt::Display for Digest {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.0.iter().try_for_each(|byte| write!(f, "{byte:02x}"))
    }
}

impl fmt::Debug for Digest {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "Digest({self})")
    }
}

impl fmt::Display for DigestFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            DigestFault::Length { found } => {
                write!(f, "the digest has {found} characters instead of 64")
            }
            DigestFault::UpperCase => f.write_str("the digest is written in upper case"),
            DigestFault::NotHexadecimal => f.write_str("the digest is not hexadecimal"),
        }
    }
}

/// A digest that grows with the bytes as they pass.
#[derive(Clone, Default)]
pub struct Hasher(Sha256);

impl Hasher {
    pub fn update(&mut self, bytes: &[u8]) {
        self.0.update(bytes);
    }

    pub fn finish(self) -> Digest {
        Digest(self.0.finalize().into())
    }
}

fn hex_value(digit: u8) -> Result<u8, DigestFault> {
    match digit {
        b'0'..=b'9' => Ok(digit - b'0'),
        b'a'..=b'f' => Ok(digit - b'a' + 10),
        b'A'..=b'F' => Err(DigestFault::UpperCase),
        _ => Err(DigestFault::NotHexadecimal),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// FIPS 180-2, appendix B.1 and B.2.
    #[test]
    fn val_digests_of_the_standard() {
        let abc = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        let two_blocks = "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1";
        let message = b"abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq";
        assert_eq!(Digest::of(b"abc").to_string(), abc);
        assert_eq!(Digest::of(message).to_string(), two_blocks);
        assert_eq!(Digest::parse(abc), Ok(Digest::of(b"abc")));
        assert_eq!(Digest::of(b"abc").first_8(), "ba7816bf");
        assert_eq!(Digest::of(b"abc").prefixed(), format!("sha256:{abc}"));
    }

    #[test]
    fn prop_pieces_give_the_digest_of_the_whole() {
        let bytes: Vec<u8> = (0..1000).map(|k| (k % 251) as u8).collect();
        for piece in [1, 7, 64, 999] {
            let mut hasher = Hasher::default();
            bytes.chunks(piece).for_each(|chunk| hasher.update(chunk));
            assert_eq!(hasher.finish(), Digest::of(&bytes));
        }
    }

    #[test]
    fn hand_only_one_spelling_is_read() {
        let good = Digest::of(b"abc").to_string();
        assert_eq!(
            Digest::parse(&good.to_uppercase()),
            Err(DigestFault::UpperCase)
        );
        assert_eq!(
            Digest::parse(&good[1..]),
            Err(DigestFault::Length { found: 63 })
        );
        assert_eq!(
            Digest::parse(&format!("g{}", &good[1..])),
            Err(DigestFault::NotHexadecimal)
        );
        assert_eq!(
            Digest::parse(&format!("é{}", &good[2..])),
            Err(DigestFault::NotHexadecimal)
        );
    }
}
