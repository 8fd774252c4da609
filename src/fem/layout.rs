//! Which unknowns an element has, which of them are condensed or fixed, and the pattern that remains.

use crate::linalg::{LinalgError, Multifrontal, Pattern, Role, Symbolic, Unknowns};
use std::collections::BTreeMap;
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
    unknowns: Unknowns,
    /// Analysis of the pattern.
    pub(super) symbolic: Box<dyn Symbolic>,
}

impl Layout {
    /// Build pattern and analysis of a system whose diagonal is sound.
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
        Self::saddle(local, outer, total, numbers, fixed, scale, total)
    }

    /// Build pattern and analysis of a saddle point: unknowns from `first_constraint` on are constraints (pressures),
    /// whose diagonal is zero before velocities are eliminated.
    ///
    /// # Errors
    /// [`LinalgError::Memory`] from the analysis.
    pub fn saddle(
        local: usize,
        outer: usize,
        total: usize,
        numbers: Vec<u32>,
        fixed: Vec<bool>,
        scale: Vec<f64>,
        first_constraint: usize,
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
        let touching = touching(&numbers, local, outer, &row, unknown.len());
        let unknowns = unknowns(&touching, |row| unknown[row] as usize >= first_constraint);
        let (pattern, positions) = couple(&numbers, local, outer, &row, &touching);
        let symbolic = Box::new(Multifrontal::analyse(&pattern, &unknowns)?);
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
            unknowns,
            symbolic,
        })
    }

    /// What the order of elimination knows of the condensed system: its groups and roles.
    pub fn unknowns(&self) -> &Unknowns {
        &self.unknowns
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

/// Elements around each row of the condensed system, with the row's place among their unknowns.
fn touching(
    numbers: &[u32],
    local: usize,
    outer: usize,
    row: &[u32],
    size: usize,
) -> Vec<Vec<(u32, u32)>> {
    let mut touching: Vec<Vec<(u32, u32)>> = vec![Vec::new(); size];
    for (e, element) in numbers.chunks(local).enumerate() {
        for (i, &n) in element[..outer].iter().enumerate() {
            let r = row[n as usize];
            if r != ABSENT {
                touching[r as usize].push((e as u32, i as u32));
            }
        }
    }
    touching
}

/// Rows that sit in the same elements form a group (an edge's unknowns; a vertex). Unknowns of edges sit in two
/// elements at most and fill the constraints' diagonal: those of vertices are orthogonal, or nearly so, to the
/// gradients of the vertex's own pressure.
fn unknowns(touching: &[Vec<(u32, u32)>], is_constraint: impl Fn(usize) -> bool) -> Unknowns {
    let mut number: BTreeMap<Vec<u32>, u32> = BTreeMap::new();
    let mut unknowns = Unknowns {
        group: Vec::with_capacity(touching.len()),
        role: Vec::with_capacity(touching.len()),
    };
    for (row, elements) in touching.iter().enumerate() {
        let around: Vec<u32> = elements.iter().map(|&(e, _)| e).collect();
        let next = number.len() as u32;
        unknowns.group.push(*number.entry(around).or_insert(next));
        unknowns.role.push(if is_constraint(row) {
            Role::Constraint
        } else if elements.len() <= 2 {
            Role::Filling
        } else {
            Role::Plain
        });
    }
    unknowns
}

/// Pattern of the coupling through elements, and where each element entry goes.
fn couple(
    numbers: &[u32],
    local: usize,
    outer: usize,
    row: &[u32],
    touching: &[Vec<(u32, u32)>],
) -> (Pattern, Vec<u32>) {
    let (elements, size) = (numbers.len() / local, touching.len());
    let rows_of = |e: usize| {
        numbers[e * local..e * local + outer]
            .iter()
            .map(|&n| row[n as usize])
    };
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
