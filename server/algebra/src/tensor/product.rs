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

/// Two blocks that are multiplied, or what follows a place in each.
type Blocks<'a, N> = (&'a [N], &'a [N]);

/// The blocks of the result, one for each monomial, from those of the factors.
pub(crate) fn product<N: Number>(products: &[Vec<Pair>], shape: Shape, left: &[N], right: &[N]) -> Vec<N> {
    let left = living_blocks(left, shape.batch * shape.rows * shape.inner);
    let right = living_blocks(right, shape.batch * shape.inner * shape.columns);
    let mut result = Vec::with_capacity(products.len() * shape.size());
    let (mut living, mut panel) = (Vec::new(), Vec::new());
    for pairs in products {
        let block = |(i, j): &Pair| (*left.get(*i as usize)?).zip(*right.get(*j as usize)?);
        living.clear();
        living.extend(pairs.iter().filter_map(block));
        push_block(&mut result, shape, &living, &mut panel);
    }
    result
}

/// The blocks of an array, those of nothing but zeros left out.
fn living_blocks<N: Number>(data: &[N], size: usize) -> Vec<Option<&[N]>> {
    let alive = |block: &&[N]| block.iter().any(|number| !number.is_zero());
    data.chunks_exact(size.max(1)).map(|block| Some(block).filter(alive)).collect()
}

/// One block of the result: the sum of the products of blocks. The panel is room to work in.
fn push_block<N: Number>(result: &mut Vec<N>, shape: Shape, blocks: &[Blocks<N>], panel: &mut Vec<N>) {
    let Shape { batch, rows, inner, columns } = shape;
    if let ([(left, right)], 1, 1) = (blocks, batch, inner) {
        // Without a sum there is nothing to keep in registers.
        left.iter().for_each(|a| result.extend(right.iter().map(|b| *a * *b)));
        return;
    }
    let begin = result.len();
    result.resize(begin + shape.size(), N::ZERO);
    if blocks.is_empty() {
        return;
    }
    let matrices = result.get_mut(begin..).unwrap_or_default().chunks_exact_mut((rows * columns).max(1));
    for (number, matrix) in matrices.enumerate() {
        let mut column = 0;
        while column < columns {
            let at = Strip { rows: number * rows * inner, columns: number * inner * columns, column };
            column += match columns - column {
                1 => at.fill::<N, 1>(matrix, shape, blocks, panel),
                2 => at.fill::<N, 2>(matrix, shape, blocks, panel),
                3 => at.fill::<N, 3>(matrix, shape, blocks, panel),
                _ => at.fill::<N, TILE>(matrix, shape, blocks, panel),
            };
        }
    }
}

/// Neighbouring columns of a matrix of the result: where the rows of the left blocks begin, where the columns of the
/// right ones do, and which column is the first.
#[derive(Clone, Copy)]
struct Strip {
    rows: usize,
    columns: usize,
    column: usize,
}

impl Strip {
    /// Fills a strip of `W` columns, and tells how many they are. Several rows share the columns of the right blocks,
    /// which are brought together for them.
    fn fill<N: Number, const W: usize>(
        self,
        matrix: &mut [N],
        shape: Shape,
        blocks: &[Blocks<N>],
        panel: &mut Vec<N>,
    ) -> usize {
        let Shape { rows, inner, columns, .. } = shape;
        let together = rows > 1 && columns > W;
        panel.clear();
        for (_, right) in blocks.iter().filter(|_| together) {
            self.tiles::<N, W>(right, shape).for_each(|tile| panel.extend_from_slice(tile));
        }
        for (row, target) in matrix.chunks_exact_mut(columns.max(1)).enumerate() {
            let from = self.rows + row * inner;
            let mut sums = Sums::<N, W>::new();
            let mut tiles = panel.as_chunks::<W>().0.iter();
            for (left, right) in blocks {
                let row = left.get(from..from + inner).unwrap_or_default();
                if together {
                    sums.add(row, &mut tiles);
                } else {
                    sums.add(row, &mut self.tiles(right, shape));
                }
            }
            target.iter_mut().skip(self.column).zip(sums.numbers).for_each(|(entry, sum)| *entry = N::total(sum));
        }
        W
    }

    /// The strip of a right block, a row at a time.
    fn tiles<N: Number, const W: usize>(self, right: &[N], shape: Shape) -> impl Iterator<Item = &[N; W]> {
        let rows = right.get(self.columns + self.column..).unwrap_or_default().chunks(shape.columns.max(1));
        rows.take(shape.inner).filter_map(|row| row.first_chunk())
    }
}

/// Sums of products, and how many products they have room for.
struct Sums<N: Number, const W: usize> {
    numbers: [N::Sum; W],
    room: usize,
}

impl<N: Number, const W: usize> Sums<N, W> {
    fn new() -> Self {
        Self { numbers: [N::EMPTY; W], room: N::RUN }
    }

    /// Adds the products of a row with the rows of a strip.
    fn add<'a>(&mut self, row: &[N], tiles: &mut impl Iterator<Item = &'a [N; W]>) {
        // A copy of its own stays in registers.
        let mut sums = self.numbers;
        for run in row.chunks(N::RUN) {
            if run.len() > self.room {
                sums = sums.map(N::settled);
                self.room = N::RUN;
            }
            self.room -= run.len();
            for (a, tile) in run.iter().zip(tiles.by_ref()).filter(|(a, _)| !a.is_zero()) {
                for (sum, b) in sums.iter_mut().zip(tile) {
                    *sum = N::add_unsettled(*sum, *a, *b);
                }
            }
        }
        self.numbers = sums;
    }
}
