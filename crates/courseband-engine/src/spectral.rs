//! Eigenvalues of symmetric matrices, the empty one included.

use nalgebra::{DMatrix, DVector, Dyn, SymmetricEigen};

/// Eigenvalues and vectors; none for an empty matrix, where the library would panic.
pub(crate) fn symmetric_eigen(matrix: &DMatrix<f64>) -> SymmetricEigen<f64, Dyn> {
    if matrix.nrows() == 0 {
        return SymmetricEigen { eigenvectors: DMatrix::zeros(0, 0), eigenvalues: DVector::zeros(0) };
    }
    matrix.clone().symmetric_eigen()
}
