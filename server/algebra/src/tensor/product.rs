//! The inner loop of all contractions: a batch of matrix products of jets.
//!
//! The one idea: an array keeps, for each monomial, one block of numbers with one number for each component. A
//! product of jets is then a sum over pairs of monomials of plain matrix products of blocks. The result is made a
//! tile at a time: a few neighbours in a row, whose sums stay in registers until they are complete and are brought
//! into range once. Blocks of zeros, as constants have beyond the first, are left out.

use crate::jet::Pair;
use crate::number::Number;

/// How many neighbours in a row are summed at a time: four sums of 128 bits are what the registers hold.
const TILE: usize = 4;

/// The shape of a batch of matrix products: `result[b][i][j] = sum over k of left[b][i][k] right[b][k][j]`.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Shape {
    pub batch: usize,
    pub rows: usize,
    pub inner: usize,
    pub columns: usize,
}

impl Shape {
    /// How many components the result has.
    const fn size(self) -> usize {
        self.batch * self.rows * self.columns
    }
}

/// Two blocks, or parts of them, that are multiplied.
type Blocks<'a, N> = (&'a [N], &'a [N]);

/// The blocks of the result, one for each monomial, from those of the factors.
pub(crate) fn product<N: Number>(products: &[Vec<Pair>], shape: Shape, left: &[N], right: &[N]) -> Vec<N> {
    let left = living_blocks(left, shape.batch * shape.rows * shape.inner);
    let right = living_blocks(right, shape.batch * shape.inner * shape.columns);
    let mut result = Vec::with_capacity(products.len() * shape.size());
    let mut living = Vec::new();
    for pairs in products {
        let block = |(i, j): &Pair| (*left.get(*i as usize)?).zip(*right.get(*j as usize)?);
        living.clear();
        living.extend(pairs.iter().filter_map(block));
        push_block(&mut result, shape, &living);
    }
    result
}

/// The blocks of an array, those of nothing but zeros left out.
fn living_blocks<N: Number>(data: &[N], size: usize) -> Vec<Option<&[N]>> {
    let alive = |block: &&[N]| block.iter().any(|number| !number.is_zero());
    data.chunks_exact(size.max(1)).map(|block| Some(block).filter(alive)).collect()
}

/// One block of the result: the sum of the products of blocks.
fn push_block<N: Number>(result: &mut Vec<N>, shape: Shape, blocks: &[Blocks<N>]) {
    let Shape { batch, rows, inner, columns } = shape;
    if let ([(left, right)], 1, 1) = (blocks, batch, inner) {
        // Without a sum there is nothing to keep in registers.
        left.iter().for_each(|a| result.extend(right.iter().map(|b| *a * *b)));
        return;
    }
    if blocks.is_empty() {
        result.resize(result.len() + shape.size(), N::ZERO);
        return;
    }
    for row in 0..batch * rows {
        let (from, to) = (row * inner, row / rows.max(1) * inner * columns);
        let mut column = 0;
        while column < columns {
            let at = (from, to + column);
            column += match columns - column {
                1 => push_tile::<N, 1>(result, shape, blocks, at),
                2 => push_tile::<N, 2>(result, shape, blocks, at),
                3 => push_tile::<N, 3>(result, shape, blocks, at),
                _ => push_tile::<N, TILE>(result, shape, blocks, at),
            };
        }
    }
}

/// Neighbours in a row of the result: how many. The row stands at the first place in the left blocks, the columns
/// begin at the second in the right ones.
fn push_tile<N: Number, const W: usize>(
    result: &mut Vec<N>,
    shape: Shape,
    blocks: &[Blocks<N>],
    (from, to): (usize, usize),
) -> usize {
    let mut sums = [N::EMPTY; W];
    for (left, right) in blocks {
        let row = left.get(from..from + shape.inner).unwrap_or_default();
        sums = added(sums, row, right.get(to..).unwrap_or_default(), shape.columns);
    }
    result.extend_from_slice(&sums.map(N::total));
    W
}

/// The sums with the products of a row and of as many columns, whose rows stand so far apart.
fn added<N: Number, const W: usize>(mut sums: [N::Sum; W], row: &[N], columns: &[N], apart: usize) -> [N::Sum; W] {
    let apart = apart.max(1);
    for (run, others) in row.chunks(N::RUN).zip(columns.chunks(N::RUN * apart)) {
        for (a, others) in run.iter().zip(others.chunks(apart)) {
            let Some(others) = others.first_chunk::<W>().filter(|_| !a.is_zero()) else { continue };
            for (sum, b) in sums.iter_mut().zip(others) {
                *sum = N::add_unsettled(*sum, *a, *b);
            }
        }
        sums = sums.map(N::settled);
    }
    sums
}
