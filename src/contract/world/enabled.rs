//! A build with MPI.

use crate::contract::{ContractError, Team};
use mpi::environment::Universe;
use mpi::topology::SimpleCommunicator;
use mpi::traits::{Communicator, Destination, Root, Source};
use std::sync::Mutex;

/// Messages are sent in pieces: MPI counts entries in 31 bits.
const PIECE: usize = 1 << 28;

struct World {
    // Calls come from one thread at a time, as the threading level asks for.
    alone: Mutex<()>,
    communicator: SimpleCommunicator,
    // Ends MPI when it is dropped, after the communicator's last use.
    _universe: Universe,
}

// SAFETY: the lock lets one thread at a time call MPI, which was set up for serialised calls.
unsafe impl Sync for World {}

/// The team of all processes that the MPI launcher started; a team of one where none did.
///
/// A panic on any rank ends all ranks. Call it once in a process.
///
/// # Errors
/// [`ContractError::MpiStart`] where MPI is running already or does not let several threads
/// live beside it.
pub fn world() -> Result<Box<dyn Team>, ContractError> {
    let (universe, level) = mpi::initialize_with_threading(mpi::Threading::Serialized)
        .ok_or(ContractError::MpiStart)?;
    if level < mpi::Threading::Serialized {
        return Err(ContractError::MpiStart);
    }
    let communicator = universe.world();
    let before = std::panic::take_hook();
    std::panic::set_hook(Box::new(move |info| {
        before(info);
        // The other ranks would wait for this one for ever.
        SimpleCommunicator::world().abort(101);
    }));
    Ok(Box::new(World { alone: Mutex::new(()), communicator, _universe: universe }))
}

impl World {
    fn send(&self, to: i32, bytes: &[u8]) {
        let peer = self.communicator.process_at_rank(to);
        peer.send(&(bytes.len() as u64));
        for piece in bytes.chunks(PIECE) {
            peer.send(piece);
        }
    }
    fn receive(&self, from: i32) -> Vec<u8> {
        let peer = self.communicator.process_at_rank(from);
        let length = peer.receive::<u64>().0 as usize;
        let mut bytes = vec![0u8; length];
        for piece in bytes.chunks_mut(PIECE) {
            peer.receive_into(piece);
        }
        bytes
    }
}

impl Team for World {
    fn rank(&self) -> usize {
        self.communicator.rank() as usize
    }
    fn size(&self) -> usize {
        self.communicator.size() as usize
    }
    fn gather(&self, mine: Vec<Vec<u8>>) -> Option<Vec<Vec<u8>>> {
        let _one = self.alone.lock().expect("no thread panics while it calls MPI");
        if self.communicator.rank() > 0 {
            let peer = self.communicator.process_at_rank(0);
            peer.send(&(mine.len() as u64));
            mine.iter().for_each(|m| self.send(0, m));
            return None;
        }
        let mut all = mine;
        for from in 1..self.communicator.size() {
            let count = self.communicator.process_at_rank(from).receive::<u64>().0;
            all.extend((0..count).map(|_| self.receive(from)));
        }
        Some(all)
    }
    fn broadcast(&self, bytes: Vec<u8>) -> Vec<u8> {
        let _one = self.alone.lock().expect("no thread panics while it calls MPI");
        let root = self.communicator.process_at_rank(0);
        let mut length = bytes.len() as u64;
        root.broadcast_into(&mut length);
        let mut all = if self.communicator.rank() == 0 { bytes } else { vec![0; length as usize] };
        for piece in all.chunks_mut(PIECE) {
            root.broadcast_into(piece);
        }
        all
    }
    fn abort(&self, status: i32) {
        self.communicator.abort(status);
    }
}
