//! Where the tensors of a tiling lie, found from the bonds.

use super::{Layout, Network, TensorId};
use crate::tiling::Tiling;
use crate::tiling::geometry::{Frame, first_frame, step};
use std::collections::VecDeque;

/// The tiling of a network and the motion that takes each tile from the origin to its place,
/// tensor by tensor; leg k of a tensor leaves through side k of its tile, and
/// [`tile_vertices`](crate::tiling::geometry::tile_vertices) gives the corners.
///
/// Each of several glued patches is laid out for itself. Nothing for tensors that are no tiles
/// (states that fix bulk legs). Nothing at all where the network is no regular tiling. Linear
/// in tensors; for drawing only.
pub fn tile_frames(network: &Network) -> Option<(Tiling, Vec<Option<Frame>>)> {
    let layout = network.layout()?;
    let (p, q) = layout.tiling?;
    let tiling = Tiling::new(u64::from(p), u64::from(q)).ok()?;
    let mut frames: Vec<Option<Frame>> = vec![None; network.tensors()];
    if !layout.place.is_empty() {
        let c = tiling.curvature();
        for (t, frame) in frames.iter_mut().enumerate() {
            if is_tile(network, layout, t, p)
                && let (Some(&place), Some(&angle)) = (layout.place.get(t), layout.angle.get(t))
            {
                *frame = Some(Frame::at(c, place, angle));
            }
        }
        return Some((tiling, frames));
    }
    let steps: Vec<Frame> = (0..p * p).map(|k| step(tiling, k / p, k % p)).collect();
    let mut queue = VecDeque::new();
    for root in 0..network.tensors() {
        if frames[root].is_some() || !is_tile(network, layout, root, p) {
            continue;
        }
        frames[root] = Some(first_frame(tiling, starts_at_vertex(layout, q)));
        queue.push_back(root);
        while let Some(t) = queue.pop_front() {
            let from = frames[t].expect("a queued tile has its place");
            let id = TensorId::new(t as u32);
            for (side, &label) in network.legs(id).iter().take(p as usize).enumerate() {
                for &other in network.holders(label) {
                    let o = other.index();
                    if frames[o].is_some()
                        || !is_tile(network, layout, o, p)
                        || layout.sheet_of(other) != layout.sheet_of(id)
                    {
                        continue;
                    }
                    let legs = network.legs(other).iter().take(p as usize);
                    if let Some(back) = legs.into_iter().position(|&l| l == label) {
                        let towards = &steps[side * p as usize + back];
                        frames[o] = Some(from.after(towards));
                        queue.push_back(o);
                    }
                }
            }
        }
    }
    Some((tiling, frames))
}

/// Tiles come with a ring, where rings are known, and have a leg a side.
fn is_tile(network: &Network, layout: &Layout, tensor: usize, polygon: u32) -> bool {
    (layout.ring.is_empty() || tensor < layout.ring.len())
        && network.legs(TensorId::new(tensor as u32)).len() >= polygon as usize
}

/// Ring 0 of a patch round a vertex has q tiles, of one round a tile a single one.
fn starts_at_vertex(layout: &Layout, q: u32) -> bool {
    let in_ring_0 =
        |t: &usize| layout.ring[*t] == 0 && layout.sheet.get(*t).is_none_or(|&s| s == 0);
    (0..layout.ring.len()).filter(in_ring_0).take(2).count() == 2 && q > 1
}
