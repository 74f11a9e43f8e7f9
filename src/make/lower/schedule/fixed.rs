//! Two levels of equal chunks: the schedule that a front must not fall behind, whatever its tables say.
//!
//! Input:  cells with a chain, and how many links a chunk has.
//! Output: moves that mark the root. After: each chunk leaves its last link alone; the last one is marked in place.

use super::cells::{CellId, Cells, Term};
use super::program::{Move, backwards, shared};
use super::table::Game;

/// The chunk sizes to try for so many links: all small ones, then growing by a tenth.
pub(in crate::make::lower) fn sizes(links: usize) -> Vec<usize> {
    let mut sizes = Vec::new();
    let mut size = 2;
    while size * 2 <= links {
        sizes.push(size);
        size += (size / 10).max(1);
    }
    sizes
}

/// The moves with so many links a chunk.
pub(in crate::make::lower) fn two_levels(cells: &Cells, size: usize, game: Game) -> Vec<Move> {
    let direct = matches!(cells.terms[0], Term::Direct(_));
    let chunks: Vec<&[CellId]> = cells.chain.chunks(size).collect();
    let (last, held) = chunks.split_last().expect("a chain has links");
    let mut moves = Vec::new();
    held.iter().for_each(|chunk| moves.extend(make(cells, chunk)));
    let mut there = inner(cells, last);
    there.extend((!direct).then(|| Move::Compute(*last.last().expect("a chunk has links"))));
    moves.extend(there.iter().cloned().chain([Move::Mark]).chain(backwards(&there)));
    for chunk in held.iter().rev() {
        match game {
            Game::Unitary => moves.extend(backwards(&make(cells, chunk))),
            Game::Measured(_) => {
                let link = *chunk.last().expect("a chunk has links");
                let there = inner(cells, chunk);
                let repair = there.iter().cloned().chain([Move::Sign(link)]).chain(backwards(&there));
                moves.push(Move::Forget(link, repair.collect()));
            }
        }
    }
    shared(moves)
}

/// Computes the last link of a chunk and holds nothing else of it.
fn make(cells: &Cells, chunk: &[CellId]) -> Vec<Move> {
    let there = inner(cells, chunk);
    let link = *chunk.last().expect("a chunk has links");
    there.iter().cloned().chain([Move::Compute(link)]).chain(backwards(&there)).collect()
}

/// Computes all of a chunk but its last link.
fn inner(cells: &Cells, chunk: &[CellId]) -> Vec<Move> {
    let is_link = |cell: CellId| cells.chain.binary_search(&cell).is_ok();
    let mut moves = Vec::new();
    for (at, &link) in chunk.iter().enumerate() {
        let conjunct = cells.cone(&cells.list[link].needs, is_link);
        moves.extend(conjunct.into_iter().map(Move::Compute));
        moves.extend((at + 1 < chunk.len()).then_some(Move::Compute(link)));
    }
    shared(moves)
}
