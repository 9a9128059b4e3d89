//! Several processes on one job.

/// Processes that share the work of one contraction. Each runs the same call with the same
/// input; each gets some of the slices, and the first ends up with the result.
pub trait Team: Sync {
    /// This process, from 0.
    fn rank(&self) -> usize;
    /// Number of processes.
    fn size(&self) -> usize;
    /// Hands `mine` to rank 0, which gets everybody's in the order of ranks; the others get
    /// nothing back.
    fn gather(&self, mine: Vec<Vec<u8>>) -> Option<Vec<Vec<u8>>>;
    /// Hands rank 0's bytes to everybody; the others' argument is not looked at.
    fn broadcast(&self, bytes: Vec<u8>) -> Vec<u8>;
    /// Ends all processes with this exit status; does nothing where there is only one.
    fn abort(&self, _status: i32) {}
}

/// One process.
#[derive(Debug, Clone, Copy, Default)]
pub struct Alone;

impl Team for Alone {
    fn rank(&self) -> usize {
        0
    }
    fn size(&self) -> usize {
        1
    }
    fn gather(&self, mine: Vec<Vec<u8>>) -> Option<Vec<Vec<u8>>> {
        Some(mine)
    }
    fn broadcast(&self, bytes: Vec<u8>) -> Vec<u8> {
        bytes
    }
}
