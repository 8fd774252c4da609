//! Which items become one front: elimination tree and amalgamation.

use super::order::Graph;

/// Rows of a front that are eliminated in it, and those it updates.
pub(super) struct Node {
    /// Items eliminated here, in order.
    pub(super) pivots: Vec<u32>,
    /// Items updated, all eliminated later, ascending.
    pub(super) below: Vec<u32>,
    /// Front that takes the update, or itself at a root.
    pub(super) parent: usize,
}

/// Time of one number moved to or from memory, in parts of one multiply-add: measured optimum is flat.
const MOVE: f64 = 4.0;
/// Time of starting a front, in multiply-adds: some microseconds.
const START: f64 = 6000.0;

/// Work of a front with so many pivots and rows below, in multiply-adds.
fn cost(pivots: usize, below: usize) -> f64 {
    let (p, b) = (pivots as f64, below as f64);
    p * p * p / 3.0 + p * p * b + p * b * b + MOVE * (p + b) * (p + b) + START
}

/// Fronts in an order where children come first and each subtree is contiguous. `rows[item]` counts its rows.
///
/// Structures by the row merge of Liu (SIAM J. Matrix Anal. Appl. 11, 134, 1990): what an item updates is what it
/// touches later, with what its children update. A child joins its parent where the zeros this adds cost less than
/// a front of its own (relaxed amalgamation: Duff and Reid, ACM Trans. Math. Softw. 9, 302, 1983).
pub(super) fn fronts(graph: &Graph, rows: &[u32], amalgamate: bool) -> Vec<Node> {
    let items = graph.nodes();
    let mut below: Vec<Vec<u32>> = Vec::with_capacity(items);
    let mut children: Vec<Vec<usize>> = vec![Vec::new(); items];
    let mut seen = vec![usize::MAX; items];
    for item in 0..items {
        seen[item] = item;
        let mut later: Vec<u32> = Vec::new();
        let own = graph.of(item).iter().filter(|&&i| i > item);
        let inherited = children[item].iter().flat_map(|&c| &below[c]);
        for i in own.map(|&i| i as u32).chain(inherited.copied()) {
            if seen[i as usize] != item {
                seen[i as usize] = item;
                later.push(i);
            }
        }
        later.sort_unstable();
        if let Some(&parent) = later.first() {
            children[parent as usize].push(item);
        }
        below.push(later);
    }
    let count = |items: &[u32]| {
        items
            .iter()
            .map(|&i| rows[i as usize] as usize)
            .sum::<usize>()
    };
    let below_rows: Vec<usize> = below.iter().map(|b| count(b)).collect();
    let mut pivot_rows: Vec<usize> = rows.iter().map(|&r| r as usize).collect();
    let mut pivots: Vec<Vec<u32>> = (0..items as u32).map(|i| vec![i]).collect();
    for item in 0..items {
        let mut kept = Vec::new();
        let mut adopted = Vec::new();
        let mut joined = Vec::new();
        for child in std::mem::take(&mut children[item]) {
            let (p, b) = (pivot_rows[item], below_rows[item]);
            let (cp, cb) = (pivot_rows[child], below_rows[child]);
            let apart = cost(p, b) + cost(cp, cb) + MOVE * (cb * cb) as f64;
            if amalgamate && cost(p + cp, b) <= apart {
                pivot_rows[item] += cp;
                joined.append(&mut pivots[child]);
                adopted.append(&mut children[child]);
            } else {
                kept.push(child);
            }
        }
        joined.push(item as u32);
        pivots[item] = joined;
        kept.append(&mut adopted);
        children[item] = kept;
    }
    postorder(items, &children, pivots, below)
}

fn postorder(
    items: usize,
    children: &[Vec<usize>],
    mut pivots: Vec<Vec<u32>>,
    mut below: Vec<Vec<u32>>,
) -> Vec<Node> {
    let mut is_child = vec![false; items];
    for c in (0..items)
        .filter(|&i| !pivots[i].is_empty())
        .flat_map(|i| &children[i])
    {
        is_child[*c] = true;
    }
    let mut nodes: Vec<Node> = Vec::new();
    let roots: Vec<usize> = (0..items)
        .filter(|&i| !pivots[i].is_empty() && !is_child[i])
        .collect();
    for root in roots {
        // (item, next child, fronts of the children done)
        let mut path: Vec<(usize, usize, Vec<usize>)> = vec![(root, 0, Vec::new())];
        while let Some((item, next, done)) = path.last_mut() {
            if let Some(&child) = children[*item].get(*next) {
                *next += 1;
                path.push((child, 0, Vec::new()));
                continue;
            }
            let front = nodes.len();
            for &child in done.iter() {
                nodes[child].parent = front;
            }
            nodes.push(Node {
                pivots: std::mem::take(&mut pivots[*item]),
                below: std::mem::take(&mut below[*item]),
                parent: front,
            });
            path.pop();
            if let Some((_, _, done)) = path.last_mut() {
                done.push(front);
            }
        }
    }
    nodes
}
