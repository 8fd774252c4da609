//! Everything about a factorisation that the pattern alone decides.

use super::Role;
use super::tree::Node;
use crate::linalg::Pattern;
use std::ops::Range;

/// A dense front: its pivots are rows `pivots` of the elimination order, the rows it updates follow in `below`.
#[derive(Clone, Debug)]
pub(super) struct Front {
    /// Places in the elimination order.
    pub(super) pivots: Range<usize>,
    /// Into [`Plan::below`]: places in the elimination order, ascending.
    pub(super) below: Range<usize>,
    /// Into [`Plan::entries`].
    pub(super) entries: Range<usize>,
    /// Fronts whose updates are added here, in the order of the stack.
    pub(super) children: Vec<usize>,
    /// Into the factor's values: L (and LU of the pivots), column-major of shape (size, pivots), then U, row-major
    /// as columns of its transpose, shape (pivots, below) column-major.
    pub(super) values: usize,
}

impl Front {
    pub(super) fn pivot_count(&self) -> usize {
        self.pivots.len()
    }
    pub(super) fn below_count(&self) -> usize {
        self.below.len()
    }
    /// Rows of the dense front.
    pub(super) fn size(&self) -> usize {
        self.pivots.len() + self.below.len()
    }
}

/// The plan of a factorisation.
pub(super) struct Plan {
    /// Fronts, children first.
    pub(super) fronts: Vec<Front>,
    /// Row of the matrix at each place of the elimination order.
    pub(super) row: Vec<u32>,
    /// Rows updated by each front.
    pub(super) below: Vec<u32>,
    /// Where each of them sits in the parent's front, in step with `below`.
    pub(super) in_parent: Vec<u32>,
    /// (value of the matrix, place in the dense front), by front.
    pub(super) entries: Vec<(u32, u32)>,
    /// Numbers in the factors.
    pub(super) factor_values: usize,
    /// Greatest height of the stack of updates.
    pub(super) stack_height: usize,
    /// Greatest front, squared.
    pub(super) front_values: usize,
}

impl Plan {
    /// `item[row]`, fronts of items; constraints come last within a front.
    pub(super) fn new(pattern: &Pattern, item: &[u32], role: &[Role], nodes: &[Node]) -> Self {
        let size = pattern.size;
        let mut rows_of: Vec<Vec<u32>> =
            vec![Vec::new(); nodes.iter().map(|n| n.pivots.len()).sum()];
        for (row, &i) in item.iter().enumerate() {
            rows_of[i as usize].push(row as u32);
        }
        let (mut row, mut place) = (Vec::with_capacity(size), vec![0u32; size]);
        let mut fronts: Vec<Front> = Vec::with_capacity(nodes.len());
        for node in nodes {
            let first = row.len();
            for wanted in [false, true] {
                for &i in &node.pivots {
                    let rows = rows_of[i as usize].iter();
                    row.extend(rows.filter(|&&r| (role[r as usize] == Role::Constraint) == wanted));
                }
            }
            for (at, &r) in row.iter().enumerate().skip(first) {
                place[r as usize] = at as u32;
            }
            fronts.push(Front {
                pivots: first..row.len(),
                below: 0..0,
                entries: 0..0,
                children: Vec::new(),
                values: 0,
            });
        }
        let mut plan = Self {
            fronts,
            row,
            below: Vec::new(),
            in_parent: Vec::new(),
            entries: Vec::with_capacity(pattern.nonzeros()),
            factor_values: 0,
            stack_height: 0,
            front_values: 0,
        };
        for (f, node) in nodes.iter().enumerate() {
            let first = plan.below.len();
            let rows = node.below.iter().flat_map(|&i| &rows_of[i as usize]);
            plan.below.extend(rows.map(|&r| place[r as usize]));
            plan.below[first..].sort_unstable();
            plan.fronts[f].below = first..plan.below.len();
            if node.parent != f {
                plan.fronts[node.parent].children.push(f);
            }
        }
        plan.place_updates(nodes);
        plan.place_entries(pattern, &place);
        plan.measure();
        plan
    }

    fn place_updates(&mut self, nodes: &[Node]) {
        self.in_parent = vec![0; self.below.len()];
        for (f, node) in nodes.iter().enumerate() {
            if node.parent == f {
                continue;
            }
            let (child, parent) = (&self.fronts[f], &self.fronts[node.parent]);
            let mut k = parent.below.start;
            for b in child.below.clone() {
                let place = self.below[b] as usize;
                self.in_parent[b] = if place < parent.pivots.end {
                    (place - parent.pivots.start) as u32
                } else {
                    while (self.below[k] as usize) < place {
                        k += 1;
                    }
                    (parent.pivot_count() + k - parent.below.start) as u32
                };
            }
        }
    }

    /// An entry belongs to the front that eliminates the earlier of its row and its column.
    fn place_entries(&mut self, pattern: &Pattern, place: &[u32]) {
        // Entries by row: (column, value).
        let mut row_starts = vec![0usize; pattern.size + 1];
        for &r in &pattern.rows {
            row_starts[r + 1] += 1;
        }
        for r in 0..pattern.size {
            row_starts[r + 1] += row_starts[r];
        }
        let mut next = row_starts.clone();
        let mut by_row = vec![(0u32, 0u32); pattern.nonzeros()];
        for column in 0..pattern.size {
            for k in pattern.column_starts[column]..pattern.column_starts[column + 1] {
                let slot = &mut next[pattern.rows[k]];
                by_row[*slot] = (column as u32, k as u32);
                *slot += 1;
            }
        }
        let mut local = vec![0u32; pattern.size];
        for f in 0..self.fronts.len() {
            let Front { pivots, below, .. } = self.fronts[f].clone();
            let (count, size) = (pivots.len(), (pivots.len() + below.len()) as u32);
            for (i, at) in pivots.clone().enumerate() {
                local[at] = i as u32;
            }
            for (i, b) in below.clone().enumerate() {
                local[self.below[b] as usize] = (count + i) as u32;
            }
            let first = self.entries.len();
            for at in pivots.clone() {
                let r = self.row[at] as usize;
                for k in pattern.column_starts[r]..pattern.column_starts[r + 1] {
                    let other = place[pattern.rows[k]] as usize;
                    if other >= pivots.start {
                        self.entries
                            .push((k as u32, local[at] * size + local[other]));
                    }
                }
                for &(column, k) in &by_row[row_starts[r]..row_starts[r + 1]] {
                    let other = place[column as usize] as usize;
                    if other >= pivots.end {
                        self.entries.push((k, local[other] * size + local[at]));
                    }
                }
            }
            self.fronts[f].entries = first..self.entries.len();
        }
    }

    fn measure(&mut self) {
        let mut height = 0usize;
        for f in 0..self.fronts.len() {
            let children = self.fronts[f].children.iter();
            let taken: usize = children.map(|&c| self.fronts[c].below_count().pow(2)).sum();
            let front = &mut self.fronts[f];
            front.values = self.factor_values;
            let (p, b, n) = (front.pivot_count(), front.below_count(), front.size());
            self.factor_values += n * p + p * b;
            self.front_values = self.front_values.max(n * n);
            height = height - taken + b * b;
            self.stack_height = self.stack_height.max(height);
        }
    }
}
