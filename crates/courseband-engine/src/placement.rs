//! Where each group's coefficients stand among the unknowns that are solved together.
//!
//! Without anything shared every group is a block of its own. Shared columns, and clusters that
//! hold several groups, make one block: the groups' own columns one after the other, then the
//! shared ones. A group's *extended* columns are its own followed by the shared ones.

use nalgebra::DMatrix;

/// The blocks and who is in them.
#[derive(Debug, Clone)]
pub(crate) struct Placement {
    /// Per group: its block.
    block: Vec<usize>,
    /// Per group: position of its first own column in the block.
    first: Vec<usize>,
    /// Per group: number of own columns.
    own: Vec<usize>,
    /// Number of shared columns.
    shared: usize,
    /// Per block: number of unknowns.
    sizes: Vec<usize>,
}

impl Placement {
    /// `own`: own columns per group.
    pub(crate) fn new(own: Vec<usize>, shared: usize, joint: bool) -> Self {
        let groups = own.len();
        if shared == 0 && !joint {
            return Placement { block: (0..groups).collect(), first: vec![0; groups], sizes: own.clone(), own, shared };
        }
        let first = own.iter().scan(0, |at, k| Some(std::mem::replace(at, *at + k))).collect();
        let total = own.iter().sum::<usize>() + shared;
        Placement { block: vec![0; groups], first, own, shared, sizes: vec![total] }
    }

    pub(crate) fn blocks(&self) -> usize {
        self.sizes.len()
    }

    pub(crate) fn size(&self, block: usize) -> usize {
        self.sizes[block]
    }

    pub(crate) fn block(&self, group: usize) -> usize {
        self.block[group]
    }

    pub(crate) fn own(&self, group: usize) -> usize {
        self.own[group]
    }

    pub(crate) fn shared(&self) -> usize {
        self.shared
    }

    /// Number of extended columns of a group.
    pub(crate) fn extended(&self, group: usize) -> usize {
        self.own[group] + self.shared
    }

    /// Position in the block of a group's extended column.
    pub(crate) fn position(&self, group: usize, column: usize) -> usize {
        let own = self.own[group];
        if column < own {
            self.first[group] + column
        } else {
            self.sizes[self.block[group]] - self.shared + column - own
        }
    }

    /// Number of unknowns in the blocks before this one; of all for the number of blocks.
    pub(crate) fn offset(&self, block: usize) -> usize {
        self.sizes[..block].iter().sum()
    }

    /// A group's part of a block's square matrix.
    pub(crate) fn gather(&self, group: usize, whole: &DMatrix<f64>) -> DMatrix<f64> {
        let k = self.extended(group);
        if k == whole.nrows() {
            return whole.clone();
        }
        DMatrix::from_fn(k, k, |i, j| whole[(self.position(group, i), self.position(group, j))])
    }

    /// A group's rows of a block's matrix.
    pub(crate) fn gather_rows(&self, group: usize, whole: &DMatrix<f64>) -> DMatrix<f64> {
        DMatrix::from_fn(self.extended(group), whole.ncols(), |i, j| whole[(self.position(group, i), j)])
    }

    /// Adds a group's square matrix to its block's.
    pub(crate) fn scatter(&self, group: usize, part: &DMatrix<f64>, whole: &mut DMatrix<f64>) {
        for j in 0..part.ncols() {
            let column = self.position(group, j);
            for i in 0..part.nrows() {
                whole[(self.position(group, i), column)] += part[(i, j)];
            }
        }
    }

    /// Adds a group's rows to its block's.
    pub(crate) fn scatter_rows(&self, group: usize, part: &DMatrix<f64>, whole: &mut DMatrix<f64>) {
        for j in 0..part.ncols() {
            for i in 0..part.nrows() {
                whole[(self.position(group, i), j)] += part[(i, j)];
            }
        }
    }

    /// A group's weights (extended columns; the shared ones may be missing) as weights on its block.
    pub(crate) fn spread(&self, group: usize, weights: &[f64], out: &mut [f64]) {
        for (j, w) in weights.iter().enumerate() {
            out[self.position(group, j)] += w;
        }
    }
}
