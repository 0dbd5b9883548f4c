//! How many bytes are allocated at most: an allocator that counts and passes on.

use std::alloc::{GlobalAlloc, Layout, System};
use std::sync::atomic::{AtomicUsize, Ordering::Relaxed};

static NOW: AtomicUsize = AtomicUsize::new(0);
static MOST: AtomicUsize = AtomicUsize::new(0);

struct Counting;

// SAFETY: every call goes to the system's allocator unchanged; only totals are kept beside it.
unsafe impl GlobalAlloc for Counting {
    unsafe fn alloc(&self, layout: Layout) -> *mut u8 {
        let now = NOW.fetch_add(layout.size(), Relaxed) + layout.size();
        MOST.fetch_max(now, Relaxed);
        // SAFETY: the caller keeps the contract of `alloc`.
        unsafe { System.alloc(layout) }
    }

    unsafe fn dealloc(&self, pointer: *mut u8, layout: Layout) {
        NOW.fetch_sub(layout.size(), Relaxed);
        // SAFETY: the caller keeps the contract of `dealloc`.
        unsafe { System.dealloc(pointer, layout) }
    }
}

#[global_allocator]
static ALLOCATOR: Counting = Counting;

/// Most bytes allocated at a time while `job` runs, beyond what was before.
pub(crate) fn most_during<T>(job: impl FnOnce() -> T) -> (T, usize) {
    let before = NOW.load(Relaxed);
    MOST.store(before, Relaxed);
    let result = job();
    (result, MOST.load(Relaxed) - before)
}
