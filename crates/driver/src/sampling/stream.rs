//! Random numbers keyed by a seed and a number.

use rand::SeedableRng;
use rand_chacha::ChaCha12Rng;

/// A stream of random numbers: ChaCha with twelve rounds (D. J. Bernstein, *ChaCha, a variant of
/// Salsa20* (2008)), a counter-based generator whose bits are the same on every machine.
pub(crate) type RandomStream = ChaCha12Rng;

/// The random numbers of job `number` (a start, a trial, a point) under `seed`. Streams of
/// different numbers share a key and differ in the nonce, so none overlaps another.
///
/// The key is the seed in the first eight bytes, little end first, and zeros.
#[must_use]
pub(crate) fn stream(seed: u64, number: u64) -> RandomStream {
    let mut key = [0; 32];
    key[..8].copy_from_slice(&seed.to_le_bytes());
    let mut stream = ChaCha12Rng::from_seed(key);
    stream.set_stream(number);
    stream
}

#[cfg(test)]
mod tests {
    use rand::{Rng, RngExt};

    use super::*;

    /// J. Strombergson, *Test Vectors for the Stream Cipher ChaCha* (draft-strombergson-chacha-
    /// test-vectors-01, 2013), TC1: 256-bit key of zeros, IV of zeros, 12 rounds.
    #[test]
    fn the_published_keystream() {
        let expected = [
            0x9b, 0xf4, 0x9a, 0x6a, 0x07, 0x55, 0xf9, 0x53, 0x81, 0x1f, 0xce, 0x12, 0x5f, 0x26,
            0x83, 0xd5,
        ];
        let mut bytes = [0; 16];
        stream(0, 0).fill_bytes(&mut bytes);
        assert_eq!(bytes, expected);
    }

    #[test]
    fn a_stream_depends_on_seed_and_number_alone() {
        let take = |seed, number| -> Vec<u64> {
            let mut stream = stream(seed, number);
            (0..4).map(|_| stream.random()).collect()
        };
        assert_eq!(take(7, 3), take(7, 3));
        let all = [take(7, 3), take(7, 4), take(8, 3), take(3, 7), take(7, u64::MAX)];
        for (i, one) in all.iter().enumerate() {
            assert!(all[..i].iter().all(|other| other != one), "{i}");
        }
    }
}
