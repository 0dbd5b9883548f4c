//! What the targets share: a judge's objection is a panic, and JSON is spoilt as JSON every other
//! time.

use std::path::Path;

/// The search over any bytes.
#[macro_export]
macro_rules! inputs {
    ($judge:expr) => {
        libfuzzer_sys::fuzz_target!(|bytes: &[u8]| {
            if let Err(what) = $judge(bytes) {
                panic!("{what}");
            }
        });
    };
}

/// The search over documents.
#[macro_export]
macro_rules! documents {
    ($judge:expr) => {
        $crate::inputs!($judge);
        libfuzzer_sys::fuzz_mutator!(|bytes: &mut [u8], size: usize, most: usize, seed: u32| {
            $crate::mutated(bytes, size, most, seed)
        });
    };
}

/// Spoils one value of a document; bytes where it is no JSON, or where the seed says so.
pub fn mutated(bytes: &mut [u8], size: usize, most: usize, seed: u32) -> usize {
    if seed % 4 != 0
        && let Ok(root) = serde_json::from_slice::<serde_json::Value>(&bytes[..size])
    {
        let choice = |shift: u32| move |of: usize| (mixed(seed, shift) % of as u64) as usize;
        let text = checks::judges::mutants::one(&root, choice(0), choice(1));
        if text.len() <= most {
            bytes[..text.len()].copy_from_slice(text.as_bytes());
            return text.len();
        }
    }
    libfuzzer_sys::fuzzer_mutate(bytes, size, most)
}

/// A number of 64 bits from one of 32 (the finaliser of splitmix64).
fn mixed(seed: u32, shift: u32) -> u64 {
    let mut x =
        u64::from(seed).wrapping_add(0x9E37_79B9_7F4A_7C15_u64.wrapping_mul(u64::from(shift) + 1));
    x = (x ^ (x >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    x = (x ^ (x >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    x ^ (x >> 31)
}

/// A folder for this process alone, in memory where the system has such.
pub fn in_memory<T>(work: impl FnOnce(&Path) -> T) -> T {
    let memory = Path::new("/dev/shm");
    let temporary = std::env::temp_dir();
    let place = if memory.is_dir() { memory } else { temporary.as_path() };
    let place = place.join(format!("drawtube-fuzz-{}", std::process::id()));
    std::fs::create_dir_all(&place).unwrap();
    let result = work(&place);
    let _ = std::fs::remove_dir_all(&place);
    result
}
