//! Buffers that are used again, and the count of bytes alive.

use crate::linalg::Scalar;
use std::mem::MaybeUninit;
use std::sync::Mutex;

/// Hands out buffers and takes them back. A fresh large buffer costs several times what
/// writing a used one does, since the system has to find and clear its pages.
pub(super) struct Arena<T> {
    state: Mutex<State<T>>,
    /// Bytes that live and waiting buffers together may take before waiting ones are freed.
    room: u64,
}

struct State<T> {
    waiting: Vec<Vec<T>>,
    waiting_bytes: u64,
    live: u64,
    peak: u64,
}

/// Buffers below this many bytes are left to the allocator, which is good at them.
const KEEP: usize = 1 << 14;

impl<T: Scalar> Arena<T> {
    pub fn new(room: u64) -> Self {
        let state = State { waiting: Vec::new(), waiting_bytes: 0, live: 0, peak: 0 };
        Self { state: Mutex::new(state), room }
    }

    fn bytes(entries: usize) -> u64 {
        (entries * size_of::<T>()) as u64
    }

    /// A vector of `len` entries, all of which `write` writes.
    pub fn fill(&self, len: usize, write: impl FnOnce(&mut [MaybeUninit<T>])) -> Vec<T> {
        let mut values = self.take(len);
        write(&mut values.spare_capacity_mut()[..len]);
        // SAFETY: the kernels that are called here write every entry or panic.
        unsafe { values.set_len(len) };
        values
    }

    fn take(&self, len: usize) -> Vec<T> {
        let want = Self::bytes(len);
        let mut state = self.lock();
        state.live += want;
        state.peak = state.peak.max(state.live);
        if want as usize >= KEEP {
            let fit = (0..state.waiting.len())
                .filter(|&i| (len..=len + len / 2).contains(&state.waiting[i].capacity()))
                .min_by_key(|&i| state.waiting[i].capacity());
            if let Some(i) = fit {
                let buffer = state.waiting.swap_remove(i);
                state.waiting_bytes -= Self::bytes(buffer.capacity());
                return buffer;
            }
        }
        let mut dropped = Vec::new();
        while state.live + state.waiting_bytes > self.room {
            let Some(buffer) = state.waiting.pop() else { break };
            state.waiting_bytes -= Self::bytes(buffer.capacity());
            dropped.push(buffer);
        }
        drop(state);
        drop(dropped);
        Vec::with_capacity(len)
    }

    /// Counts a vector that was made elsewhere.
    pub fn adopt(&self, entries: usize) {
        let mut state = self.lock();
        state.live += Self::bytes(entries);
        state.peak = state.peak.max(state.live);
    }

    /// Takes a vector back.
    pub fn give(&self, mut values: Vec<T>) {
        let mut state = self.lock();
        state.live -= Self::bytes(values.len());
        let size = Self::bytes(values.capacity());
        if size as usize >= KEEP && state.live + state.waiting_bytes + size <= self.room {
            values.clear();
            state.waiting_bytes += size;
            state.waiting.push(values);
        }
    }

    /// A vector leaves the arena's care.
    pub fn release(&self, entries: usize) {
        self.lock().live -= Self::bytes(entries);
    }

    /// Most bytes alive at once so far.
    pub fn peak(&self) -> u64 {
        self.lock().peak
    }

    fn lock(&self) -> std::sync::MutexGuard<'_, State<T>> {
        self.state.lock().expect("no thread panics while it holds the arena")
    }
}
