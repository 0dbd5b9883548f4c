//! How many bytes are allocated at most: an allocator that counts while it is asked to, and passes on.

use std::alloc::{GlobalAlloc, Layout, System};
use std::sync::atomic::{AtomicBool, AtomicIsize, Ordering::Relaxed};

// Counting all the time would have threads wait for each other's totals.
static COUNTS: AtomicBool = AtomicBool::new(false);
static NOW: AtomicIsize = AtomicIsize::new(0);
static MOST: AtomicIsize = AtomicIsize::new(0);

struct Counting;

// SAFETY: every call goes to the system's allocator unchanged; only totals are kept beside it.
unsafe impl GlobalAlloc for Counting {
    unsafe fn alloc(&self, layout: Layout) -> *mut u8 {
        if COUNTS.load(Relaxed) {
            let bytes = layout.size().cast_signed();
            let now = NOW.fetch_add(bytes, Relaxed) + bytes;
            MOST.fetch_max(now, Relaxed);
        }
        // SAFETY: the caller keeps the contract of `alloc`.
        unsafe { System.alloc(layout) }
    }

    unsafe fn dealloc(&self, pointer: *mut u8, layout: Layout) {
        if COUNTS.load(Relaxed) {
            NOW.fetch_sub(layout.size().cast_signed(), Relaxed);
        }
        // SAFETY: the caller keeps the contract of `dealloc`.
        unsafe { System.dealloc(pointer, layout) }
    }
}

#[global_allocator]
static ALLOCATOR: Counting = Counting;

/// Most bytes allocated at a time while `job` runs, beyond what was before.
pub(crate) fn most_during<T>(job: impl FnOnce() -> T) -> (T, usize) {
    NOW.store(0, Relaxed);
    MOST.store(0, Relaxed);
    COUNTS.store(true, Relaxed);
    let result = job();
    COUNTS.store(false, Relaxed);
    (result, MOST.load(Relaxed).unsigned_abs())
}
