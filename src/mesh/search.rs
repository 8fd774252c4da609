//! Search structures of the mesher: what is near a place, without looking at everything. None changes an answer:
//! they only skip what cannot matter, so meshes are the same to the last bit as with plain loops.

use crate::base::{Vec2, vec2};

/// Items in a leaf: the optimum is flat.
const LEAF: usize = 6;
/// Box distances are trusted to this relative rounding before anything is skipped.
const ROUNDING: f64 = 1e-12;

/// Axis-parallel box, lower left and upper right.
pub(super) type Bounds = [Vec2; 2];

/// A binary tree of boxes around items.
#[derive(Clone, Debug, Default)]
pub(super) struct BoxTree {
    nodes: Vec<Node>,
    /// Items in the order of the leaves.
    items: Vec<u32>,
}

#[derive(Clone, Debug)]
struct Node {
    bounds: Bounds,
    /// Items of a leaf, or of all leaves below.
    items: std::ops::Range<usize>,
    /// Second child (the first follows its parent); zero for a leaf.
    second: usize,
}

impl BoxTree {
    /// Boxes of items 0, 1, ...
    pub(super) fn new(bounds: &[Bounds]) -> Self {
        let mut tree = Self {
            nodes: Vec::new(),
            items: (0..bounds.len() as u32).collect(),
        };
        if !bounds.is_empty() {
            tree.split(bounds, 0..bounds.len());
        }
        tree
    }

    fn split(&mut self, bounds: &[Bounds], items: std::ops::Range<usize>) {
        let around = self.items[items.clone()]
            .iter()
            .map(|&i| bounds[i as usize])
            .reduce(join)
            .unwrap_or([Vec2::ZERO; 2]);
        let place = self.nodes.len();
        self.nodes.push(Node {
            bounds: around,
            items: items.clone(),
            second: 0,
        });
        if items.len() <= LEAF {
            return;
        }
        let extent = around[1] - around[0];
        let key = |i: u32| {
            let middle = bounds[i as usize][0] + bounds[i as usize][1];
            if extent.x > extent.y {
                middle.x
            } else {
                middle.y
            }
        };
        // Stable, so that equal places keep their order and equal input gives equal trees.
        self.items[items.clone()].sort_by(|&a, &b| key(a).total_cmp(&key(b)));
        let half = items.start + items.len() / 2;
        self.split(bounds, items.start..half);
        self.nodes[place].second = self.nodes.len();
        self.split(bounds, half..items.end);
    }

    /// Calls `look(item)` for the items of all boxes that `wanted` does not refuse; `wanted` sees the number of the
    /// node and its box. The child nearer to `place` comes first.
    fn search(
        &self,
        place: Vec2,
        mut wanted: impl FnMut(&mut f64, usize, &Bounds) -> bool,
        mut look: impl FnMut(&mut f64, usize),
        start: f64,
    ) -> f64 {
        // Depth is at most log2 of the items: 64 would be more items than memory.
        let mut waiting = [0usize; 64];
        let mut count = usize::from(!self.nodes.is_empty());
        let mut state = start;
        while count > 0 {
            count -= 1;
            let at = waiting[count];
            let node = &self.nodes[at];
            if !wanted(&mut state, at, &node.bounds) {
                continue;
            }
            if node.second == 0 {
                for &item in &self.items[node.items.clone()] {
                    look(&mut state, item as usize);
                }
                continue;
            }
            let [mut near, mut far] = [at + 1, node.second];
            if distance_to(&self.nodes[far].bounds, place)
                < distance_to(&self.nodes[near].bounds, place)
            {
                (near, far) = (far, near);
            }
            waiting[count] = far;
            waiting[count + 1] = near;
            count += 2;
        }
        state
    }

    /// Items whose boxes hold a place, in ascending order.
    pub(super) fn holding(&self, place: Vec2) -> Vec<usize> {
        let mut found = Vec::new();
        self.search(
            place,
            |_, _, b| holds(b, place),
            |_, item| found.push(item),
            0.0,
        );
        found.sort_unstable();
        found
    }
}

fn join(a: Bounds, b: Bounds) -> Bounds {
    [
        vec2(a[0].x.min(b[0].x), a[0].y.min(b[0].y)),
        vec2(a[1].x.max(b[1].x), a[1].y.max(b[1].y)),
    ]
}

fn holds(b: &Bounds, p: Vec2) -> bool {
    (b[0].x..=b[1].x).contains(&p.x) && (b[0].y..=b[1].y).contains(&p.y)
}

fn distance_to(b: &Bounds, p: Vec2) -> f64 {
    let dx = (b[0].x - p.x).max(p.x - b[1].x).max(0.0);
    let dy = (b[0].y - p.y).max(p.y - b[1].y).max(0.0);
    vec2(dx, dy).norm()
}

/// Chords: is one near, and how many lie to the right.
#[derive(Clone, Debug)]
pub(super) struct Chords {
    chords: Vec<[Vec2; 2]>,
    tree: BoxTree,
}

impl Chords {
    pub(super) fn new(chords: Vec<[Vec2; 2]>) -> Self {
        let bounds: Vec<Bounds> = chords.iter().map(|&[a, b]| join([a, a], [b, b])).collect();
        Self {
            tree: BoxTree::new(&bounds),
            chords,
        }
    }

    pub(super) fn all(&self) -> &[[Vec2; 2]] {
        &self.chords
    }

    /// Distance of the nearest chord, or `limit` where none is nearer.
    pub(super) fn distance(&self, p: Vec2, limit: f64) -> f64 {
        self.tree.search(
            p,
            |best, _, b| distance_to(b, p) * (1.0 - ROUNDING) <= *best,
            |best, item| {
                let [a, b] = self.chords[item];
                *best = best.min(crate::geometry::contour::distance_to_chord(p, a, b));
            },
            limit,
        )
    }

    /// Whether a closed chain of chords goes round a place (even-odd rule).
    pub(super) fn contains(&self, p: Vec2) -> bool {
        let mut inside = false;
        self.tree.search(
            p,
            // The very condition of the crossing below fails for every chord of a box beyond these.
            |_, _, b| b[0].y <= p.y && p.y < b[1].y,
            |_, item| {
                let [a, b] = self.chords[item];
                inside ^= (a.y > p.y) != (b.y > p.y)
                    && p.x < a.x + (p.y - a.y) / (b.y - a.y) * (b.x - a.x);
            },
            0.0,
        );
        inside
    }
}

/// Least of size + growth |x - place| over seeds.
#[derive(Clone, Debug)]
pub(super) struct Seeds {
    /// (place, size, growth)
    seeds: Vec<(Vec2, f64, f64)>,
    tree: BoxTree,
    /// Least size and least growth below each node of the tree.
    least: Vec<[f64; 2]>,
}

impl Seeds {
    pub(super) fn new(seeds: Vec<(Vec2, f64, f64)>) -> Self {
        let bounds: Vec<Bounds> = seeds.iter().map(|s| [s.0, s.0]).collect();
        let tree = BoxTree::new(&bounds);
        let nodes = tree.nodes.iter();
        let least = nodes
            .map(|n| {
                let below = tree.items[n.items.clone()].iter();
                below.fold([f64::INFINITY; 2], |l, &i| {
                    let (_, size, growth) = seeds[i as usize];
                    [l[0].min(size), l[1].min(growth)]
                })
            })
            .collect();
        Self { seeds, tree, least }
    }

    /// Size at a place, at most `largest`.
    pub(super) fn at(&self, place: Vec2, largest: f64) -> f64 {
        self.tree.search(
            place,
            |best, node, b| {
                let [size, growth] = self.least[node];
                (size + growth * distance_to(b, place)) * (1.0 - ROUNDING) <= *best
            },
            |best, item| {
                let (x, size, growth) = self.seeds[item];
                *best = best.min(size + growth * x.distance(place));
            },
            largest,
        )
    }
}

/// Points added one by one, asked whether one is near: a tree of squares, each cut in four when full.
#[derive(Clone, Debug)]
pub(super) struct Crowd {
    cells: Vec<Cell>,
    low: Vec2,
    side: f64,
}

#[derive(Clone, Debug)]
enum Cell {
    Points(Vec<Vec2>),
    /// First of four children.
    Cut(usize),
}

/// Points in a square before it is cut.
const FULL: usize = 8;
/// Cuts of a square, at most: equal points must not cut for ever.
const DEEPEST: usize = 40;

impl Crowd {
    /// Empty, for points within a box (others are kept at its rim and found all the same).
    pub(super) fn new(bounds: Bounds) -> Self {
        let extent = bounds[1] - bounds[0];
        Self {
            cells: vec![Cell::Points(Vec::new())],
            low: bounds[0],
            side: extent.x.max(extent.y),
        }
    }

    pub(super) fn add(&mut self, p: Vec2) {
        let (mut at, mut low, mut side) = (0, self.low, self.side);
        for depth in 0.. {
            match &mut self.cells[at] {
                Cell::Cut(first) => {
                    side *= 0.5;
                    let (i, corner) = quarter(p, low, side);
                    (at, low) = (*first + i, corner);
                }
                Cell::Points(points) => {
                    points.push(p);
                    if points.len() <= FULL || depth >= DEEPEST {
                        return;
                    }
                    let points = std::mem::take(points);
                    let first = self.cells.len();
                    let mut parts: [Vec<Vec2>; 4] = Default::default();
                    for q in points {
                        parts[quarter(q, low, 0.5 * side).0].push(q);
                    }
                    self.cells[at] = Cell::Cut(first);
                    self.cells.extend(parts.map(Cell::Points));
                    return;
                }
            }
        }
    }

    /// Whether all points are at least so far away.
    pub(super) fn all_at_least(&self, p: Vec2, distance: f64) -> bool {
        self.clear(0, self.low, self.side, p, distance)
    }

    fn clear(&self, at: usize, low: Vec2, side: f64, p: Vec2, distance: f64) -> bool {
        match &self.cells[at] {
            Cell::Points(points) => points.iter().all(|q| q.distance(p) >= distance),
            &Cell::Cut(first) => {
                let half = 0.5 * side;
                (0..4).all(|i| {
                    let corner = low + vec2((i & 1) as f64, (i >> 1) as f64) * half;
                    self.reaches(corner, half, p, distance)
                        || self.clear(first + i, corner, half, p, distance)
                })
            }
        }
    }

    /// Whether a square lies further away than asked, so that none of its points can be nearer. Squares at the rim
    /// of the whole hold what lies outside as well and are always looked into.
    fn reaches(&self, low: Vec2, side: f64, p: Vec2, distance: f64) -> bool {
        let high = low + vec2(side, side);
        let end = self.low + vec2(self.side, self.side);
        let at_rim =
            low.x <= self.low.x || low.y <= self.low.y || high.x >= end.x || high.y >= end.y;
        !at_rim && distance_to(&[low, high], p) * (1.0 - ROUNDING) > distance
    }
}

/// Which quarter of a square with quarters of this side holds a place, and its corner.
fn quarter(p: Vec2, low: Vec2, half: f64) -> (usize, Vec2) {
    let (right, up) = (p.x >= low.x + half, p.y >= low.y + half);
    let i = usize::from(right) + 2 * usize::from(up);
    (i, low + vec2(f64::from(right), f64::from(up)) * half)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::contour::distance_to_chord;

    /// Places that fill the unit square (additive recurrence of the golden ratio's relatives; only spread matters).
    fn places(n: usize, shift: f64) -> Vec<Vec2> {
        (1..=n)
            .map(|i| {
                let s = i as f64 + shift;
                vec2((0.754_877_666 * s).fract(), (0.569_840_291 * s).fract())
            })
            .collect()
    }

    #[test]
    fn trees_answer_as_plain_loops() {
        let seeds: Vec<(Vec2, f64, f64)> = places(500, 0.0)
            .into_iter()
            .enumerate()
            .map(|(i, p)| (p, 0.01 + 0.1 * p.y, if i % 7 == 0 { 0.45 } else { 0.25 }))
            .collect();
        let tree = Seeds::new(seeds.clone());
        let corners = places(200, 0.3);
        let chain: Vec<[Vec2; 2]> = (0..200)
            .map(|i| [corners[i], corners[(i + 1) % 200]])
            .collect();
        let chords = Chords::new(chain.clone());
        let mut crowd = Crowd::new([Vec2::ZERO, vec2(1.0, 1.0)]);
        let mut added: Vec<Vec2> = Vec::new();
        for p in places(2000, 0.7) {
            let p = p * 1.2 - vec2(0.1, 0.1);
            let plain = seeds
                .iter()
                .fold(0.2, |h: f64, s| h.min(s.1 + s.2 * s.0.distance(p)));
            assert_eq!(tree.at(p, 0.2), plain);
            let near = chain
                .iter()
                .map(|c| distance_to_chord(p, c[0], c[1]))
                .fold(0.03, f64::min);
            assert_eq!(chords.distance(p, 0.03), near);
            let crossings = chain.iter().filter(|[a, b]| {
                (a.y > p.y) != (b.y > p.y) && p.x < a.x + (p.y - a.y) / (b.y - a.y) * (b.x - a.x)
            });
            assert_eq!(chords.contains(p), crossings.count() % 2 == 1);
            let clear = added.iter().all(|q| q.distance(p) >= 0.02);
            assert_eq!(crowd.all_at_least(p, 0.02), clear);
            if clear {
                crowd.add(p);
                added.push(p);
            }
        }
        assert!(added.len() > 500);
        // The flawed twin: looking at the first half of the seeds only is seen.
        let half = Seeds::new(seeds[..250].to_vec());
        assert!(
            places(50, 0.1)
                .iter()
                .any(|&p| half.at(p, 0.2) != tree.at(p, 0.2))
        );
    }

    #[test]
    fn equal_points_and_empty_trees_end() {
        let mut crowd = Crowd::new([Vec2::ZERO, vec2(1.0, 1.0)]);
        for _ in 0..100 {
            crowd.add(vec2(0.3, 0.3));
        }
        assert!(!crowd.all_at_least(vec2(0.3, 0.3), 0.1));
        assert_eq!(Seeds::new(Vec::new()).at(Vec2::ZERO, 0.5), 0.5);
        assert!(BoxTree::new(&[]).holding(Vec2::ZERO).is_empty());
    }
}
