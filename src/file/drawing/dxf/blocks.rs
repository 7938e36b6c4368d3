//! Blocks put in place: nested, scaled, turned, mirrored, in arrays; without end or in too great a number refused.

use super::super::fault::{Fault, fault, short};
use super::super::sheet::{MOST_PIECES, Sheet, Weight, too_much};
use super::entity::{Insert, What};
use super::{Block, Entity};
use kurbo::Affine;
use std::collections::HashMap;

/// Blocks within blocks.
const DEEPEST: usize = 32;

/// What holds for everything below an insert.
#[derive(Clone, Copy)]
struct Around {
    place: Affine,
    /// Layer of the innermost insert; nothing at the top.
    layer: Option<usize>,
    /// Why nothing below is shown.
    hidden: Option<&'static str>,
}

struct Expansion<'a> {
    sheet: &'a mut Sheet,
    blocks: &'a [Block],
    by_name: HashMap<String, usize>,
    /// Number of the first path of each entity that has one: of a block by number, then entity.
    paths: Vec<Vec<Option<usize>>>,
    /// Inserts followed so far.
    followed: usize,
    /// Blocks being put in place, outermost first.
    chain: Vec<usize>,
}

/// Puts everything in place.
///
/// # Errors
/// One fault: a block inside itself, blocks nested too deep, or too much altogether.
pub(super) fn expand(sheet: &mut Sheet, blocks: &[Block], entities: Vec<Entity>) -> Result<(), Fault> {
    let mut by_name = HashMap::new();
    for (number, block) in blocks.iter().enumerate() {
        by_name.entry(block.name.to_lowercase()).or_insert(number);
    }
    let top = Around { place: Affine::IDENTITY, layer: None, hidden: None };
    let paths = vec![Vec::new(); blocks.len()];
    let mut expansion = Expansion { sheet, blocks, by_name, paths, followed: 0, chain: Vec::new() };
    for entity in entities {
        expansion.top(entity, top)?;
    }
    Ok(())
}

impl Expansion<'_> {
    /// Layer of an entity: on layer 0 of a block it takes the insert's.
    fn layer(layer: usize, around: Around) -> usize {
        if layer == 0 { around.layer.unwrap_or(0) } else { layer }
    }

    /// Why an entity is not shown.
    fn hidden(&self, entity: &Entity, layer: usize, around: Around) -> Option<&'static str> {
        around.hidden.or(entity.hidden).or(self.sheet.layers[layer].hidden)
    }

    /// An entity that stands by itself; its path is taken, not copied.
    fn top(&mut self, entity: Entity, around: Around) -> Result<(), Fault> {
        let hidden = self.hidden(&entity, entity.layer, around);
        match entity.what {
            What::Path(path, plane) => {
                if let Some(why) = hidden {
                    self.sheet.skip(path.kind, &path.id, why, Weight::Harmless, entity.layer);
                    return Ok(());
                }
                self.sheet.paths.push(path);
                self.sheet.place(self.sheet.paths.len() - 1, plane, entity.layer)
            }
            _ => self.any(&entity, around, &mut None),
        }
    }

    fn any(&mut self, entity: &Entity, around: Around, known: &mut Option<usize>) -> Result<(), Fault> {
        let layer = Self::layer(entity.layer, around);
        let hidden = self.hidden(entity, layer, around);
        match &entity.what {
            What::Path(path, plane) => {
                if let Some(why) = hidden {
                    self.sheet.skip(path.kind, &path.id, why, Weight::Harmless, layer);
                    return Ok(());
                }
                let number = *known.get_or_insert_with(|| {
                    self.sheet.paths.push(path.clone());
                    self.sheet.paths.len() - 1
                });
                self.sheet.place(number, around.place * *plane, layer)
            }
            What::Insert(insert) => self.insert(insert, entity, layer, around),
            What::Skipped(kind, why, weight) => {
                let (why, weight) = hidden.map_or((why.as_str(), *weight), |hidden| (hidden, Weight::Harmless));
                self.sheet.skip(kind, &entity.id, why, weight, layer);
                Ok(())
            }
            What::Unknown(kind) => {
                let weight = if hidden.is_some() { Weight::Harmless } else { Weight::Missed };
                let why = hidden.unwrap_or("a kind of entity this reader does not know");
                self.sheet.skip(kind, &entity.id, why, weight, layer);
                Ok(())
            }
        }
    }

    fn insert(&mut self, insert: &Insert, entity: &Entity, layer: usize, around: Around) -> Result<(), Fault> {
        let blocks = self.blocks;
        let name = &insert.block;
        let words = || format!("INSERT of block \"{}\"", short(name));
        // A layer that is only off hides what takes its layer from the insert, which its own layer will tell; a frozen
        // one hides everything.
        let frozen = self.sheet.layers[layer].hidden.filter(|why| why.contains("frozen"));
        let hidden = around.hidden.or(entity.hidden).or(frozen);
        if let Some(why) = hidden {
            self.sheet.skip("INSERT", &entity.id, why, Weight::Harmless, layer);
            return Ok(());
        }
        let Some(&number) = self.by_name.get(&name.to_lowercase()) else {
            let why = format!("there is no block \"{}\"; export the drawing again", short(name));
            self.sheet.skip("INSERT", &entity.id, &why, Weight::Missed, layer);
            return Ok(());
        };
        let block = &blocks[number];
        if block.elsewhere {
            let why = format!("block \"{}\" is in another file; bind it into this one", short(name));
            self.sheet.skip("INSERT", &entity.id, &why, Weight::Missed, layer);
            return Ok(());
        }
        if self.chain.contains(&number) {
            return Err(fault(format!("{} is inside itself; mend the block", words())));
        }
        if self.chain.len() >= DEEPEST {
            return Err(fault(format!("{} is nested deeper than {DEEPEST} blocks; explode some of them", words())));
        }
        let count = insert.counts[0].saturating_mul(insert.counts[1]);
        if count > MOST_PIECES || self.followed.saturating_add(count) > MOST_PIECES {
            return Err(too_much());
        }
        self.followed += count;
        self.chain.push(number);
        for row in 0..insert.counts[1] {
            for column in 0..insert.counts[0] {
                let shift = (insert.spacing[0] * column as f64, insert.spacing[1] * row as f64);
                let place = around.place
                    * insert.origin
                    * Affine::translate(shift)
                    * insert.content
                    * Affine::translate(-block.base.to_vec2());
                self.content(number, Around { place, layer: Some(layer), hidden: None })?;
            }
        }
        self.chain.pop();
        Ok(())
    }

    fn content(&mut self, number: usize, around: Around) -> Result<(), Fault> {
        let entities = &self.blocks[number].entities;
        if self.paths[number].is_empty() {
            self.paths[number] = vec![None; entities.len()];
        }
        for (i, entity) in entities.iter().enumerate() {
            self.followed += 1;
            if self.followed > 4 * MOST_PIECES {
                return Err(too_much());
            }
            let mut known = self.paths[number][i];
            self.any(entity, around, &mut known)?;
            self.paths[number][i] = known;
        }
        Ok(())
    }
}
