//! The candidates behind one face.

use crate::matrices::Set;
use coilbreak::math::{Elimination, Matrix, Scalar};
use faer::dyn_stack::{MemBuffer, MemStack};
use faer::mat::MatMut;
use faer::sparse::linalg::cholesky::{self, SymmetricOrdering};
use faer::sparse::linalg::lu;
use faer::sparse::{SparseColMatRef, SymbolicSparseColMat};
use faer::traits::ComplexField;
use faer::{Conj, Par, Side};

/// An elimination with its factors.
pub trait Kernel<T> {
    /// Factors these values on the set's pattern.
    fn factor(&mut self, values: &[T]);
    /// Solves in place.
    fn solve(&mut self, x: &mut [T]);
    /// Entries stored, where known.
    fn filled(&self) -> Option<usize> {
        None
    }
}

/// Ours.
pub struct Own<T>(Matrix<T>);

impl<T: Scalar> Own<T> {
    pub fn new(set: &Set<T>, elimination: Elimination) -> Self {
        Own(Matrix::new(set.size, &set.starts, &set.rows, elimination))
    }
}

impl<T: Scalar> Kernel<T> for Own<T> {
    fn factor(&mut self, values: &[T]) {
        self.0.values_mut().copy_from_slice(values);
        self.0.factor().expect("a regular matrix");
    }
    fn solve(&mut self, x: &mut [T]) {
        self.0.solve(x);
    }
    fn filled(&self) -> Option<usize> {
        Some(self.0.filled())
    }
}

fn symbolic<T>(set: &Set<T>) -> SymbolicSparseColMat<u32> {
    let narrow = |wide: &[usize]| wide.iter().map(|&k| k as u32).collect();
    SymbolicSparseColMat::new_checked(
        set.size,
        set.size,
        narrow(&set.starts),
        None,
        narrow(&set.rows),
    )
}

/// Entries of L and U when a symmetric pattern is eliminated in the order of approximate minimum degree.
pub fn minimum_degree<T>(set: &Set<T>) -> usize {
    let pattern = symbolic(set);
    let order = cholesky::factorize_symbolic_cholesky(
        pattern.as_ref(),
        Side::Upper,
        SymmetricOrdering::Amd,
        Default::default(),
    )
    .expect("memory for the structure");
    2 * order.len_val() - set.size
}

/// faer's sparse LU: columns ordered once, rows interchanged anew at every factorisation.
pub struct Faer<T> {
    pattern: SymbolicSparseColMat<u32>,
    symbolic: lu::SymbolicLu<u32>,
    numeric: lu::NumericLu<u32, T>,
    memory: MemBuffer,
}

impl<T: ComplexField + Scalar> Faer<T> {
    pub fn new(set: &Set<T>) -> Self {
        let pattern = symbolic(set);
        let symbolic = lu::factorize_symbolic_lu(pattern.as_ref(), Default::default())
            .expect("memory for the structure");
        let factor = symbolic.factorize_numeric_lu_scratch::<T>(Par::Seq, Default::default());
        let solve = symbolic.solve_in_place_scratch::<T>(1, Par::Seq);
        Faer {
            pattern,
            symbolic,
            numeric: lu::NumericLu::new(),
            memory: MemBuffer::new(factor.or(solve)),
        }
    }
}

impl<T: ComplexField + Scalar> Kernel<T> for Faer<T> {
    fn factor(&mut self, values: &[T]) {
        let matrix = SparseColMatRef::new(self.pattern.as_ref(), values);
        let stack = MemStack::new(&mut self.memory);
        self.symbolic
            .factorize_numeric_lu(
                &mut self.numeric,
                matrix,
                Par::Seq,
                stack,
                Default::default(),
            )
            .expect("a regular matrix");
    }
    fn solve(&mut self, x: &mut [T]) {
        let rows = x.len();
        let factors = lu::LuRef::new_unchecked(&self.symbolic, &self.numeric);
        let x = MatMut::from_column_major_slice_mut(x, rows, 1);
        factors.solve_in_place_with_conj(Conj::No, x, Par::Seq, MemStack::new(&mut self.memory));
    }
}

/// nalgebra's dense LU.
pub struct Nalgebra<T: nalgebra::ComplexField> {
    size: usize,
    starts: Vec<usize>,
    rows: Vec<usize>,
    lu: Option<nalgebra::LU<T, nalgebra::Dyn, nalgebra::Dyn>>,
}

impl<T: nalgebra::ComplexField> Nalgebra<T> {
    pub fn new(set: &Set<T>) -> Self {
        Nalgebra {
            size: set.size,
            starts: set.starts.clone(),
            rows: set.rows.clone(),
            lu: None,
        }
    }
}

impl<T: nalgebra::ComplexField + Scalar> Kernel<T> for Nalgebra<T> {
    fn factor(&mut self, values: &[T]) {
        let mut matrix = nalgebra::DMatrix::from_element(self.size, self.size, <T as Scalar>::ZERO);
        for column in 0..self.size {
            for slot in self.starts[column]..self.starts[column + 1] {
                matrix[(self.rows[slot], column)] = values[slot];
            }
        }
        self.lu = Some(matrix.lu());
    }
    fn solve(&mut self, x: &mut [T]) {
        let lu = self.lu.as_ref().expect("factored before it is solved with");
        lu.solve_mut(&mut nalgebra::DVectorViewMut::from_slice(x, self.size));
    }
}
