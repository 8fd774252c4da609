//! In which order to eliminate: a graph of groups, ordered by approximate minimum degree, and the rule that keeps
//! constraints behind what fills their zero diagonal.

use super::{Role, Unknowns};
use crate::linalg::{LinalgError, Pattern};
use faer::dyn_stack::{MemBuffer, MemStack};
use faer::sparse::SymbolicSparseColMatRef;
use faer::sparse::linalg::amd;

/// Neighbours of each node, sorted, without itself; as one list with starts.
pub(super) struct Graph {
    pub(super) starts: Vec<usize>,
    pub(super) neighbours: Vec<usize>,
}

impl Graph {
    /// Nodes are adjacent where any of their rows are; `node[row]`.
    pub(super) fn quotient(pattern: &Pattern, node: &[u32], nodes: usize) -> Self {
        let mut rows: Vec<Vec<u32>> = vec![Vec::new(); nodes];
        for (row, &n) in node.iter().enumerate() {
            rows[n as usize].push(row as u32);
        }
        let mut seen = vec![usize::MAX; nodes];
        let mut graph = Self {
            starts: vec![0],
            neighbours: Vec::new(),
        };
        for (n, rows) in rows.iter().enumerate() {
            seen[n] = n;
            let first = graph.neighbours.len();
            for &row in rows {
                let column = row as usize;
                for &r in
                    &pattern.rows[pattern.column_starts[column]..pattern.column_starts[column + 1]]
                {
                    let other = node[r] as usize;
                    if seen[other] != n {
                        seen[other] = n;
                        graph.neighbours.push(other);
                    }
                }
            }
            graph.neighbours[first..].sort_unstable();
            graph.starts.push(graph.neighbours.len());
        }
        graph
    }

    pub(super) fn nodes(&self) -> usize {
        self.starts.len() - 1
    }

    pub(super) fn of(&self, node: usize) -> &[usize] {
        &self.neighbours[self.starts[node]..self.starts[node + 1]]
    }

    /// Position of each node in the elimination by approximate minimum degree (Amestoy, Davis and Duff, SIAM J.
    /// Matrix Anal. Appl. 17, 886, 1996; the library's implementation).
    fn minimum_degree(&self) -> Result<Vec<usize>, LinalgError> {
        let nodes = self.nodes();
        let memory = |_| LinalgError::Memory { size: nodes };
        let (mut order, mut position) = (vec![0usize; nodes], vec![0usize; nodes]);
        let graph = SymbolicSparseColMatRef::new_checked(
            nodes,
            nodes,
            &self.starts,
            None,
            &self.neighbours,
        );
        let mut space =
            MemBuffer::try_new(amd::order_scratch::<usize>(nodes, self.neighbours.len()))
                .map_err(|_| LinalgError::Memory { size: nodes })?;
        amd::order(
            &mut order,
            &mut position,
            graph,
            amd::Control::default(),
            MemStack::new(&mut space),
        )
        .map_err(memory)?;
        Ok(position)
    }
}

/// Which item each row is eliminated with; items are numbered in the order of elimination.
///
/// Groups are ordered as wholes. A constraint (a pressure) has a zero on its diagonal until unknowns that couple to
/// it are gone: each claims a pair that no other has claimed, of its own group if it can, and is moved behind the
/// claimed group where that comes later. (That velocities of vertices do not fill the diagonal of a pressure at the
/// same vertex, but those of edges do, is why the caller says which unknowns fill.)
pub(super) fn items(
    pattern: &Pattern,
    unknowns: &Unknowns,
) -> Result<(Vec<u32>, usize), LinalgError> {
    let groups = unknowns.group.iter().max().map_or(0, |&g| g as usize + 1);
    let graph = Graph::quotient(pattern, &unknowns.group, groups);
    let position = graph.minimum_degree()?;
    // Claims that a group can take: one for two components of a velocity, since one of them may be blind to a pressure.
    let mut unclaimed = vec![0usize; groups];
    let mut constraints = Vec::new();
    for (row, (&group, &role)) in unknowns.group.iter().zip(&unknowns.role).enumerate() {
        match role {
            Role::Plain => {}
            Role::Filling => unclaimed[group as usize] += 1,
            Role::Constraint => constraints.push(row),
        }
    }
    for claims in &mut unclaimed {
        *claims = claims.div_ceil(2);
    }
    let mut item: Vec<u32> = unknowns
        .group
        .iter()
        .map(|&g| position[g as usize] as u32)
        .collect();
    // Those that can claim within their group do so first, so that nobody takes it from them.
    let mut waiting = Vec::new();
    for row in constraints {
        let own = unknowns.group[row] as usize;
        if unclaimed[own] > 0 {
            unclaimed[own] -= 1;
        } else {
            waiting.push(row);
        }
    }
    waiting.sort_by_key(|&row| (item[row], row));
    for row in waiting {
        let own = unknowns.group[row] as usize;
        let claimed = graph
            .of(own)
            .iter()
            .copied()
            .filter(|&g| unclaimed[g] > 0)
            .min_by_key(|&g| {
                let late = position[g].max(position[own]);
                (late, usize::MAX - unclaimed[g], g)
            });
        if let Some(claimed) = claimed {
            unclaimed[claimed] -= 1;
            item[row] = item[row].max(position[claimed] as u32);
        }
    }
    // A group all of whose rows moved away leaves no item.
    let mut number = vec![0u32; groups];
    for &i in &item {
        number[i as usize] = 1;
    }
    let mut items = 0;
    for n in &mut number {
        items += *n;
        *n = items;
    }
    let item = item.iter().map(|&i| number[i as usize] - 1).collect();
    Ok((item, items as usize))
}
