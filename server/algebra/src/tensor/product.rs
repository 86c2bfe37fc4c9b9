//! The inner loop of all contractions: a batch of matrix products of jets.
//!
//! The one idea: an array keeps, for each monomial, one block of numbers with one number for each component. A
//! product of jets is then a sum over pairs of monomials of plain matrix products of blocks, each number of
//! the result being one long sum of products that is brought into range once. Blocks of zeros, as constants
//! have beyond the first, are left out.

use crate::jet::Pair;
use crate::number::Number;

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

/// The blocks of the result, one for each monomial, from those of the factors.
pub(crate) fn product<N: Number>(products: &[Vec<Pair>], shape: Shape, left: &[N], right: &[N]) -> Vec<N> {
    let left = living_blocks(left, shape.batch * shape.rows * shape.inner);
    let right = living_blocks(right, shape.batch * shape.inner * shape.columns);
    let mut result = Vec::with_capacity(products.len() * shape.size());
    let mut sums = vec![N::EMPTY; shape.size()];
    for pairs in products {
        sums.fill(N::EMPTY);
        for (i, j) in pairs {
            if let (Some(Some(left)), Some(Some(right))) = (left.get(*i as usize), right.get(*j as usize)) {
                add_blocks(&mut sums, shape, left, right);
            }
        }
        result.extend(sums.iter().map(|sum| N::total(*sum)));
    }
    result
}

/// The blocks of an array, those of nothing but zeros left out.
fn living_blocks<N: Number>(data: &[N], size: usize) -> Vec<Option<&[N]>> {
    let alive = |block: &&[N]| block.iter().any(|number| !number.is_zero());
    data.chunks_exact(size.max(1)).map(|block| Some(block).filter(alive)).collect()
}

fn add_blocks<N: Number>(sums: &mut [N::Sum], shape: Shape, left: &[N], right: &[N]) {
    let Shape { rows, inner, columns, .. } = shape;
    let lefts = left.chunks_exact((rows * inner).max(1));
    let rights = right.chunks_exact((inner * columns).max(1));
    for ((sums, left), right) in sums.chunks_exact_mut((rows * columns).max(1)).zip(lefts).zip(rights) {
        for (sums, row) in sums.chunks_exact_mut(columns.max(1)).zip(left.chunks_exact(inner.max(1))) {
            if let [sum] = sums {
                *sum = row.iter().zip(right).fold(*sum, |sum, (a, b)| N::add_product(sum, *a, *b));
            } else {
                add_rows(sums, row, right);
            }
        }
    }
}

fn add_rows<N: Number>(sums: &mut [N::Sum], row: &[N], right: &[N]) {
    for (a, others) in row.iter().zip(right.chunks_exact(sums.len().max(1))) {
        if a.is_zero() {
            continue;
        }
        for (sum, b) in sums.iter_mut().zip(others) {
            *sum = N::add_product(*sum, *a, *b);
        }
    }
}
