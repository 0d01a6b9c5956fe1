//! The whole Newton matrix of a collocation step, all stages side by side, each with its own slopes.
//!
//! ```text
//! | w11 C1 + G1   w12 C2        w13 C3      |      w = W/h; C, G: slopes of q and f at the stage
//! | w21 C1        w22 C2 + G2   w23 C3      |
//! | w31 C1        w32 C2        w33 C3 + G3 |
//! ```
//! Unknowns are numbered stage by stage within each unknown of the system, so that the fill-reducing order of one
//! stage serves for all. Blocks off the diagonal hold only the positions at which some charge has a slope: in a
//! circuit these are few, and the matrix costs little more than its diagonal blocks.

use super::super::pattern::Pattern;
use super::super::system::Evaluation;
use crate::math::{Elimination, Matrix, Singular};

/// The matrix, made when it is first needed.
#[derive(Debug)]
pub(crate) struct Coupled<const S: usize> {
    matrix: Option<Matrix<f64>>,
    elimination: Elimination,
    /// Positions of the system's pattern at which a charge has had a slope.
    charged: Vec<bool>,
    /// Per position of the system's pattern and stage column: slots of the rows' stages, where there are any.
    slots: Vec<[[u32; S]; S]>,
    right: Vec<f64>,
}

impl<const S: usize> Coupled<S> {
    pub fn new(pattern: &Pattern, elimination: Elimination) -> Self {
        Coupled {
            matrix: None,
            elimination,
            charged: vec![false; pattern.len()],
            slots: Vec::new(),
            right: vec![0.0; S * pattern.size],
        }
    }

    /// Factors the matrix of the stages' slopes; `rates` is W/h.
    pub fn factor(
        &mut self,
        pattern: &Pattern,
        rates: &[[f64; S]; S],
        outs: &[Evaluation],
    ) -> Result<(), Singular> {
        let mut grown = self.matrix.is_none();
        for out in outs {
            for (charged, &slope) in self.charged.iter_mut().zip(&out.dq) {
                if slope != 0.0 && !*charged {
                    (*charged, grown) = (true, true);
                }
            }
        }
        if grown {
            self.lay_out(pattern);
        }
        let Some(matrix) = &mut self.matrix else {
            return Ok(());
        };
        let values = matrix.values_mut();
        for (position, slots) in self.slots.iter().enumerate() {
            let charged = self.charged[position];
            for (column, out) in outs.iter().enumerate() {
                let (dq, df) = (out.dq[position], out.df[position]);
                if charged {
                    for row in 0..S {
                        values[slots[column][row] as usize] = rates[row][column] * dq;
                    }
                    values[slots[column][column] as usize] += df;
                } else {
                    values[slots[column][column] as usize] = df;
                }
            }
        }
        matrix.factor().map_err(|singular| Singular {
            column: singular.column / S,
        })
    }

    /// Right side of the equation of `row` and `stage`; the solution is read from the same place.
    #[inline]
    pub fn right_mut(&mut self) -> &mut [f64] {
        &mut self.right
    }

    /// Solves with the last factors, in place.
    pub fn solve(&mut self) {
        if let Some(matrix) = &mut self.matrix {
            matrix.solve(&mut self.right);
        }
    }

    /// Finds the pattern of the whole from the system's and the charged positions.
    fn lay_out(&mut self, pattern: &Pattern) {
        let mut positions = Vec::new();
        for column in 0..pattern.size {
            for slot in pattern.starts[column]..pattern.starts[column + 1] {
                let row = pattern.rows[slot];
                for stage in 0..S {
                    for other in 0..S {
                        if stage == other || self.charged[slot] {
                            positions.push((S * row + stage, S * column + other));
                        }
                    }
                }
            }
        }
        let whole = Pattern::from_positions(S * pattern.size, &positions);
        self.slots.clear();
        for column in 0..pattern.size {
            for slot in pattern.starts[column]..pattern.starts[column + 1] {
                let row = pattern.rows[slot];
                self.slots.push(std::array::from_fn(|other| {
                    std::array::from_fn(|stage| {
                        whole
                            .slot(S * row + stage, S * column + other)
                            .map_or(0, |slot| slot as u32)
                    })
                }));
            }
        }
        self.matrix = Some(Matrix::new(
            whole.size,
            &whole.starts,
            &whole.rows,
            self.elimination,
        ));
    }
}
