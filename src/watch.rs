//! How progress leaves the library and how a request to stop enters it.
//!
//! The library neither prints nor reads a clock. Whoever calls it hands down a [`Watch`]:
//! it learns what is going on, tells how many seconds have passed and may ask for an
//! early end. [`Silent`] does none of this.

/// A piece of news from a running computation.
#[derive(Debug, Clone, Copy, PartialEq)]
#[non_exhaustive]
pub enum News<'a> {
    /// A named stretch of work begins.
    Stage(&'a str),
    /// `done` of `total` units of the current stretch are finished.
    Progress {
        /// Units finished.
        done: u64,
        /// Units in all; 0 where the total is not known.
        total: u64,
    },
    /// The best figure so far of a search, in words fit for one line.
    Best(&'a str),
}

/// The caller's eyes, clock and hand on the brake. Called from any thread.
pub trait Watch: Sync {
    /// Takes note of a piece of news.
    fn tell(&self, _news: News<'_>) {}
    /// Seconds since the caller started its clock; always 0 for a caller without a clock,
    /// so that time limits never end a computation.
    fn seconds(&self) -> f64 {
        0.0
    }
    /// Whether the computation should end at its next safe point.
    fn stop(&self) -> bool {
        false
    }
}

/// Watches nothing, never stops anything, has no clock.
#[derive(Debug, Clone, Copy, Default)]
pub struct Silent;

impl Watch for Silent {}
