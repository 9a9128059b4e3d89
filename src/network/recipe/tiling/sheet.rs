//! From patches with holes to tensors: sides become labels, tiles become tensors.

use super::{TilingRecipe, begin_layout};
use crate::block::Block;
use crate::network::file::Problem;
use crate::network::recipe::Setting;
use crate::network::source::BlockSource;
use crate::network::{Layout, NetworkBuilder};
use crate::tensor::Label;
use crate::tiling::{Patch, Tiling, geometry};
use std::fmt::Write;
use std::sync::Arc;

const NONE: u32 = u32::MAX;

/// Most tiles of several kinds whose places are noted.
const MOST_PLACED: usize = 200_000;

/// A patch with the tiles that are taken out of it.
pub(in crate::network::recipe) struct Sheet<'a> {
    pub recipe: &'a TilingRecipe,
    pub patch: Patch,
    /// One flag a tile; empty where none is taken out.
    removed: Vec<bool>,
    /// Open sides, one cycle after the other, each with the patch on its left; the outer
    /// boundary first.
    pub cycles: Vec<Vec<u32>>,
}

/// Two cycles of open sides that are glued, the second run backwards and begun `twist` sides
/// later.
pub(in crate::network::recipe) struct Join {
    /// Sheet and cycle.
    pub one: (usize, usize),
    /// Sheet and cycle.
    pub other: (usize, usize),
    pub twist: usize,
}

impl<'a> Sheet<'a> {
    pub(in crate::network::recipe) fn new(
        recipe: &'a TilingRecipe,
        patch: Patch,
        place: &str,
    ) -> Result<Self, Problem> {
        // A patch cut back from outside keeps a selection that fits the recipe's own rings.
        let rings = patch.ring_sizes().len().max(recipe.growth.rings as usize + 1);
        let tiles = patch.tiles();
        recipe.bulk.check("bulk", place, tiles, rings)?;
        recipe.remove.check("remove", place, tiles, rings)?;
        for rule in &recipe.rules {
            rule.tiles.check("tiles", place, tiles, rings)?;
        }
        let removed: Vec<bool> =
            (0..tiles as u32).map(|t| recipe.remove.holds(t, patch.ring_of(t))).collect();
        if removed.iter().all(|r| !r) {
            let cycles = vec![patch.boundary_numbers().to_vec()];
            return Ok(Self { recipe, patch, removed: Vec::new(), cycles });
        }
        if removed.iter().all(|&r| r) {
            return Err(Problem::Unfit {
                place: place.to_owned(),
                what: "remove",
                value: recipe.remove.to_string(),
                other: "a network, which needs a tile that stays".to_owned(),
            });
        }
        let mut sheet = Self { recipe, patch, removed, cycles: Vec::new() };
        sheet.cycles = sheet.trace();
        Ok(sheet)
    }
    pub(in crate::network::recipe) fn stays(&self, tile: u32) -> bool {
        self.removed.is_empty() || !self.removed[tile as usize]
    }
    fn open(&self, side: usize) -> bool {
        match self.patch.glued(side) {
            None => true,
            Some(other) => !self.stays(self.patch.side(other).tile),
        }
    }
    /// The open sides as cycles: from an open side, the next one is found by turning about the
    /// vertex where it ends.
    fn trace(&self) -> Vec<Vec<u32>> {
        let next_in_tile = |side: usize| {
            let s = self.patch.side(side);
            let p = self.patch.sides_of(s.tile);
            side - s.side as usize + ((s.side + 1) % p) as usize
        };
        let outer = self.patch.boundary_numbers().iter().map(|&n| n as usize);
        let mut seen = vec![false; self.patch.sides()];
        let mut cycles = Vec::new();
        for start in outer.chain(0..self.patch.sides()) {
            if seen[start] || !self.stays(self.patch.side(start).tile) || !self.open(start) {
                continue;
            }
            let mut cycle = Vec::new();
            let mut at = start;
            while !seen[at] {
                seen[at] = true;
                cycle.push(at as u32);
                at = next_in_tile(at);
                while !self.open(at) {
                    let across = self.patch.glued(at).expect("a closed side is glued");
                    at = next_in_tile(across);
                }
            }
            cycles.push(cycle);
        }
        cycles
    }
}

/// Lays the sheets into the builder. Boundary labels are `b0`, `b1`, … in the order of sites,
/// bonds `x0`, …, bulk legs `k` and the tensor's number.
pub(in crate::network::recipe) fn lay(
    builder: &mut NetworkBuilder,
    sheets: &[Sheet<'_>],
    joins: &[Join],
    setting: &mut Setting<'_>,
) -> Result<Layout, Problem> {
    let mut layout = begin_layout(sheets);
    let mut label_of: Vec<Vec<u32>> = sheets.iter().map(|s| vec![NONE; s.patch.sides()]).collect();
    let mut text = String::new();
    let joined = |sheet: usize, cycle: usize| {
        joins.iter().any(|j| j.one == (sheet, cycle) || j.other == (sheet, cycle))
    };
    let mut site = 0u32;
    for (s, sheet) in sheets.iter().enumerate() {
        for (c, cycle) in sheet.cycles.iter().enumerate() {
            if joined(s, c) || cycle.is_empty() {
                continue;
            }
            layout.cycles.push(cycle.len() as u32);
            for &side in cycle {
                let label = name(builder, &mut text, 'b', site, setting, None)?;
                label_of[s][side as usize] = label.number();
                builder.boundary([label]);
                site += 1;
            }
        }
    }
    let mut bond = 0u32;
    for join in joins {
        let one = &sheets[join.one.0].cycles[join.one.1];
        let other = &sheets[join.other.0].cycles[join.other.1];
        let n = one.len();
        for (k, &side) in one.iter().enumerate() {
            let label = name(builder, &mut text, 'x', bond, setting, None)?;
            bond += 1;
            label_of[join.one.0][side as usize] = label.number();
            label_of[join.other.0][other[(join.twist + n - k) % n] as usize] = label.number();
        }
    }
    for (s, sheet) in sheets.iter().enumerate() {
        for side in 0..sheet.patch.sides() {
            if label_of[s][side] != NONE || !sheet.stays(sheet.patch.side(side).tile) {
                continue;
            }
            let other = sheet.patch.glued(side).expect("every open side has its label");
            let label = name(builder, &mut text, 'x', bond, setting, None)?;
            bond += 1;
            label_of[s][side] = label.number();
            label_of[s][other] = label.number();
        }
    }
    let mut tensors = Tiles { made: Vec::new(), states: Vec::new(), text };
    for (s, sheet) in sheets.iter().enumerate() {
        tensors.lay(builder, sheet, &label_of[s], setting)?;
        let rings = (0..sheet.patch.tiles() as u32).filter(|&t| sheet.stays(t));
        layout.ring.extend(rings.map(|t| sheet.patch.ring_of(t)));
        if sheets.len() > 1 {
            layout.sheet.resize(layout.ring.len(), s as u32);
        }
    }
    let on_tile: Vec<usize> = tensors.states.iter().map(|s| s.tile).collect();
    tensors.lay_states(builder, setting)?;
    if let Some((p, q)) = layout.tiling {
        // Without holes and seams, places follow from the bonds whenever they are wanted.
        if sheets.iter().any(|s| !s.removed.is_empty()) {
            let tiling = Tiling::new(u64::from(p), u64::from(q))?;
            place(&mut layout, sheets, tiling);
        }
    } else if let [sheet] = sheets
        && sheet.patch.tiles() <= MOST_PLACED
    {
        let growth = &sheet.recipe.growth;
        let polygons = match growth.polygons.last() {
            Some(&last) if growth.keep_last => vec![last],
            _ => growth.polygons.clone(),
        };
        if let Some(frames) = geometry::mixed_frames(&sheet.patch, &polygons) {
            let stays = (0..frames.len()).filter(|&t| sheet.stays(t as u32));
            layout.place = stays.map(|t| frames[t].place()).collect();
        }
    }
    // States that fix bulk legs lie on their tiles.
    if !layout.place.is_empty() {
        for &tile in &on_tile {
            layout.place.push(layout.place[tile]);
            if !layout.angle.is_empty() {
                layout.angle.push(layout.angle[tile]);
            }
        }
    }
    Ok(layout)
}

fn place(layout: &mut Layout, sheets: &[Sheet<'_>], tiling: Tiling) {
    for sheet in sheets {
        let frames = geometry::frames(&sheet.patch).expect("all tiles are of one kind");
        for (t, frame) in frames.iter().enumerate() {
            let t = t as u32;
            if sheet.stays(t) {
                let turn = sheet.recipe.turn_of(t, sheet.patch.ring_of(t));
                layout.place.push(frame.place());
                layout.angle.push(frame.angle() + geometry::side_angle(tiling.polygon(), turn));
            }
        }
    }
}

fn name(
    builder: &mut NetworkBuilder,
    text: &mut String,
    letter: char,
    number: u32,
    setting: &mut Setting<'_>,
    own: Option<usize>,
) -> Result<Label, Problem> {
    text.clear();
    text.push(letter);
    let _ = write!(text, "{number}");
    let dim = setting.dims.of_or(text, own)?;
    Ok(builder.label(text, dim))
}

/// A block already made: its name (none for the default), its dimensions.
type Made = (Option<BlockSource>, Vec<usize>, Arc<Block>);

/// A bulk leg to be fixed, its state, and its tile's tensor.
struct State {
    leg: Label,
    block: BlockSource,
    tile: usize,
}

struct Tiles {
    made: Vec<Made>,
    states: Vec<State>,
    text: String,
}

impl Tiles {
    fn lay(
        &mut self,
        builder: &mut NetworkBuilder,
        sheet: &Sheet<'_>,
        label_of: &[u32],
        setting: &mut Setting<'_>,
    ) -> Result<(), Problem> {
        let (patch, recipe) = (&sheet.patch, sheet.recipe);
        let mut legs: Vec<Label> = Vec::new();
        let mut dims: Vec<usize> = Vec::new();
        let mut first = 0usize;
        for tile in 0..patch.tiles() as u32 {
            let (ring, p) = (patch.ring_of(tile), patch.sides_of(tile) as usize);
            let sides = first..first + p;
            first += p;
            if !sheet.stays(tile) {
                continue;
            }
            let turn = recipe.turn_of(tile, ring) as usize % p;
            legs.clear();
            legs.extend((0..p).map(|k| Label::new(label_of[sides.start + (k + turn) % p])));
            if recipe.has_bulk(tile, ring) {
                let number = builder.tensors() as u32;
                let own = recipe.bulk_dimension;
                let label = name(builder, &mut self.text, 'k', number, setting, own)?;
                legs.push(label);
                match recipe.state_of(tile, ring) {
                    None => builder.bulk([label]),
                    Some(state) => self.states.push(State {
                        leg: label,
                        block: state.clone(),
                        tile: number as usize,
                    }),
                }
            }
            dims.clear();
            dims.extend(legs.iter().map(|&l| builder.dim(l)));
            let block = self.block(builder, recipe.block_of(tile, ring), &dims, setting)?;
            builder.tensor(None, &legs, &block)?;
        }
        Ok(())
    }
    /// Fixes bulk legs: one tensor of one leg each, after all tiles.
    fn lay_states(
        &mut self,
        builder: &mut NetworkBuilder,
        setting: &mut Setting<'_>,
    ) -> Result<(), Problem> {
        for State { leg, mut block, tile } in std::mem::take(&mut self.states) {
            let dims = [builder.dim(leg)];
            if let BlockSource::Named(named) = &mut block
                && named.family == "random-state"
            {
                // Each tile its own: the numbers are drawn from seed plus tensor number.
                named.seed = named.seed.wrapping_add(tile as u64);
                let tensor = || format!("t{tile}");
                let made = setting.shelf.block(&block, &dims, &tensor)?;
                builder.source(&made, block);
                builder.tensor(None, &[leg], &made)?;
                continue;
            }
            let block = self.block(builder, Some(&block), &dims, setting)?;
            builder.tensor(None, &[leg], &block)?;
        }
        Ok(())
    }
    fn block(
        &mut self,
        builder: &mut NetworkBuilder,
        named: Option<&BlockSource>,
        dims: &[usize],
        setting: &mut Setting<'_>,
    ) -> Result<Arc<Block>, Problem> {
        if let Some(k) = self.made.iter().position(|(n, d, _)| n.as_ref() == named && d == dims) {
            return Ok(Arc::clone(&self.made[k].2));
        }
        let source = named.cloned().unwrap_or_else(|| BlockSource::family("perfect"));
        let tensor = format!("t{}", builder.tensors());
        let block = setting.shelf.block(&source, dims, &|| tensor.clone())?;
        builder.source(&block, source);
        self.made.push((named.cloned(), dims.to_vec(), Arc::clone(&block)));
        Ok(block)
    }
}
