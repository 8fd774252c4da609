//! Which unknowns an element has, which of them are condensed or fixed, and the pattern that remains.

use crate::linalg::{Direct, LinalgError, Pattern, Symbolic};
use std::sync::Arc;

/// Marks an unknown that is not in the global system (fixed, unused or condensed).
const ABSENT: u32 = u32::MAX;

/// Element unknowns and the condensed pattern of one system on one topology.
///
/// Every element has `local` unknowns; the first `outer` couple to neighbours, the rest are its own and are
/// condensed. Unknowns are numbered `0..total` in all.
pub struct Layout {
    /// Number of elements.
    pub elements: usize,
    /// Unknowns of an element.
    pub local: usize,
    /// How many of them couple to neighbours.
    pub outer: usize,
    /// Unknowns in all, including fixed ones.
    pub total: usize,
    /// Unknown numbers, shape `(elements, local)` row-major.
    pub numbers: Vec<u32>,
    /// Whether each unknown is fixed (its increment is zero), shape `(total,)`.
    pub fixed: Vec<bool>,
    /// Factor between scaled and physical unknowns, the same for its row, shape `(total,)`.
    pub scale: Vec<f64>,
    /// Row and column in the condensed system, or absent, shape `(total,)`.
    pub(super) row: Vec<u32>,
    /// Unknown of each row of the condensed system.
    pub(super) unknown: Vec<u32>,
    /// Pattern of the condensed system.
    pub(super) pattern: Arc<Pattern>,
    /// Where each entry `(row, column)` of an element's outer block goes, shape `(elements, outer, outer)`.
    pub(super) positions: Vec<u32>,
    /// Analysis of the pattern.
    pub(super) symbolic: Box<dyn Symbolic>,
}

impl Layout {
    /// Build pattern and analysis.
    ///
    /// # Errors
    /// [`LinalgError::Memory`] from the analysis.
    pub fn new(
        local: usize,
        outer: usize,
        total: usize,
        numbers: Vec<u32>,
        fixed: Vec<bool>,
        scale: Vec<f64>,
    ) -> Result<Self, LinalgError> {
        let elements = numbers.len() / local;
        let mut row = vec![ABSENT; total];
        for element in numbers.chunks(local) {
            for &n in &element[..outer] {
                if !fixed[n as usize] {
                    row[n as usize] = 0;
                }
            }
        }
        let mut unknown = Vec::new();
        for (n, r) in row.iter_mut().enumerate() {
            if *r == 0 {
                *r = unknown.len() as u32;
                unknown.push(n as u32);
            }
        }
        let (pattern, positions) = couple(&numbers, local, outer, &row, unknown.len());
        let symbolic = Box::new(Direct::analyse(&pattern)?);
        Ok(Self {
            elements,
            local,
            outer,
            total,
            numbers,
            fixed,
            scale,
            row,
            unknown,
            pattern: Arc::new(pattern),
            positions,
            symbolic,
        })
    }

    /// Unknowns of the condensed system.
    pub fn condensed(&self) -> usize {
        self.unknown.len()
    }

    /// Unknown numbers of one element.
    pub fn element(&self, element: usize) -> &[u32] {
        &self.numbers[element * self.local..(element + 1) * self.local]
    }
}

/// Pattern of the coupling through elements, and where each element entry goes.
fn couple(
    numbers: &[u32],
    local: usize,
    outer: usize,
    row: &[u32],
    size: usize,
) -> (Pattern, Vec<u32>) {
    let elements = numbers.len() / local;
    let rows_of = |e: usize| {
        numbers[e * local..e * local + outer]
            .iter()
            .map(|&n| row[n as usize])
    };
    let mut touching: Vec<Vec<(u32, u32)>> = vec![Vec::new(); size];
    for e in 0..elements {
        for (i, r) in rows_of(e).enumerate() {
            if r != ABSENT {
                touching[r as usize].push((e as u32, i as u32));
            }
        }
    }
    let mut positions = vec![ABSENT; elements * outer * outer];
    let mut column_starts = vec![0; size + 1];
    let mut rows: Vec<usize> = Vec::new();
    let mut place = vec![ABSENT; size];
    for column in 0..size {
        let start = rows.len();
        for &(e, _) in &touching[column] {
            for r in rows_of(e as usize) {
                if r != ABSENT && place[r as usize] == ABSENT {
                    place[r as usize] = 0;
                    rows.push(r as usize);
                }
            }
        }
        rows[start..].sort_unstable();
        for (k, &r) in rows[start..].iter().enumerate() {
            place[r] = (start + k) as u32;
        }
        for &(e, j) in &touching[column] {
            for (i, r) in rows_of(e as usize).enumerate() {
                if r != ABSENT {
                    positions[(e as usize * outer + i) * outer + j as usize] = place[r as usize];
                }
            }
        }
        for &r in &rows[start..] {
            place[r] = ABSENT;
        }
        column_starts[column + 1] = rows.len();
    }
    (
        Pattern {
            size,
            column_starts,
            rows,
        },
        positions,
    )
}
