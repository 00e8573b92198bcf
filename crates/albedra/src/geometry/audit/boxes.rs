//! Finds the pairs of triangles whose bounding boxes meet.

use glam::DVec3;

use crate::geometry::facet::{bounds, higher, lower};

/// A box: its lowest and its highest corner.
pub(super) type Box3 = (DVec3, DVec3);

/// Items in a leaf at most. Fewer make a deeper tree, more make more needless tests.
const LEAF: usize = 4;

/// What looking at two nodes costs, in steps, where comparing two boxes costs one.
const NODE: u64 = 2;

/// A balanced tree of boxes over items.
///
/// All leaves are equally deep, so node `k` of a level holds the items `n·k >> level .. n·(k + 1) >> level` in the order
/// of the tree, and its children are the nodes `2k` and `2k + 1` of the next level.
#[derive(Debug)]
pub(super) struct Boxes {
    /// Items in the order of the tree, with their boxes.
    items: Vec<(Box3, u32)>,
    /// Boxes of all nodes, level by level from the root.
    nodes: Vec<Box3>,
    depth: usize,
}

impl Boxes {
    /// Sorts boxes into a tree; items are their indices.
    pub(super) fn new(boxes: impl Iterator<Item = Box3>) -> Self {
        let mut items: Vec<(Box3, u32)> = boxes.zip(0..).collect();
        let mut depth = 0;
        while items.len() >> depth > LEAF {
            depth += 1;
        }
        sort(&mut items, depth);
        let mut tree = Self {
            items,
            nodes: vec![(DVec3::ZERO, DVec3::ZERO); (2 << depth) - 1],
            depth,
        };
        for leaf in 0..1 << depth {
            let (from, to) = tree.range(leaf);
            let around = tree.items[from..to].iter().map(|item| item.0).reduce(union);
            tree.nodes[(1 << depth) - 1 + leaf] =
                around.unwrap_or((DVec3::INFINITY, DVec3::NEG_INFINITY));
        }
        for node in (0..(1 << depth) - 1).rev() {
            tree.nodes[node] = union(tree.nodes[2 * node + 1], tree.nodes[2 * node + 2]);
        }
        tree
    }

    fn range(&self, leaf: usize) -> (usize, usize) {
        // In u128, since the product of a count and a place may pass the range of an index.
        let place =
            |leaf: usize| ((self.items.len() as u128 * leaf as u128) >> self.depth) as usize;
        (place(leaf), place(leaf + 1))
    }

    /// Visits each pair of items whose boxes meet, once, in an order that depends on the boxes alone.
    ///
    /// `visit` gives what the pair cost in steps, or `None` to stop. Ends when more than `steps` are spent; true if all
    /// pairs were visited.
    pub(super) fn pairs(
        &self,
        mut steps: u64,
        mut visit: impl FnMut(u32, u32) -> Option<u64>,
    ) -> bool {
        let first_leaf = (1 << self.depth) - 1;
        let mut open = vec![(0, 0)];
        while let Some((a, b)) = open.pop() {
            let mut cost = NODE;
            if a != b && !meet(self.nodes[a], self.nodes[b]) {
            } else if a < first_leaf {
                let (a, b) = (2 * a + 1, 2 * b + 1);
                open.push((a + 1, b + 1));
                open.push((a, b + 1));
                if a != b {
                    open.push((a + 1, b));
                }
                open.push((a, b));
            } else {
                let ((from, to), (start, end)) =
                    (self.range(a - first_leaf), self.range(b - first_leaf));
                for i in from..to {
                    for j in (if a == b { i + 1 } else { start })..end {
                        cost += 1;
                        if meet(self.items[i].0, self.items[j].0) {
                            match visit(self.items[i].1, self.items[j].1) {
                                Some(spent) => cost += spent,
                                None => return false,
                            }
                        }
                    }
                }
            }
            let Some(rest) = steps.checked_sub(cost) else {
                return false;
            };
            steps = rest;
        }
        true
    }
}

fn union(a: Box3, b: Box3) -> Box3 {
    (lower(a.0, b.0), higher(a.1, b.1))
}

fn meet(a: Box3, b: Box3) -> bool {
    a.0.cmple(b.1).all() && b.0.cmple(a.1).all()
}

/// Splits items at their median along the widest axis of their middles, again and again.
fn sort(items: &mut [(Box3, u32)], depth: usize) {
    if depth == 0 {
        return;
    }
    let middle = |item: &(Box3, u32)| item.0.0 + item.0.1;
    let Some((low, high)) = bounds(items.iter().map(middle)) else {
        return;
    };
    let size = high - low;
    let axis = if size.x >= size.y && size.x >= size.z {
        0
    } else {
        1 + usize::from(size.z > size.y)
    };
    // The same place as `range` gives: floor(n/2) of n, since floors of halves nest.
    let half = items.len() / 2;
    items.select_nth_unstable_by(half, |a, b| {
        middle(a)[axis]
            .total_cmp(&middle(b)[axis])
            .then(a.1.cmp(&b.1))
    });
    let (left, right) = items.split_at_mut(half);
    sort(left, depth - 1);
    sort(right, depth - 1);
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeSet;

    use rand::{RngExt, SeedableRng};
    use rand_xoshiro::Xoshiro256PlusPlus;

    use super::*;

    fn random(count: usize, size: f64) -> Vec<Box3> {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(3);
        let mut point = || DVec3::new(rng.random(), rng.random(), rng.random());
        (0..count)
            .map(|_| (point(), point()))
            .map(|(low, extent)| (low, low + extent * size))
            .collect()
    }

    #[test]
    fn pairs_are_those_of_a_double_loop() {
        for count in [0, 1, 2, 5, 9, 100, 777] {
            let boxes = random(count, 0.3);
            let mut expected = BTreeSet::new();
            for i in 0..count {
                for j in i + 1..count {
                    if meet(boxes[i], boxes[j]) {
                        expected.insert((i, j));
                    }
                }
            }
            let mut found = BTreeSet::new();
            let done = Boxes::new(boxes.iter().copied()).pairs(u64::MAX, |i, j| {
                let (i, j) = if i < j { (i, j) } else { (j, i) };
                assert!(found.insert((i as usize, j as usize)), "{i} {j} twice");
                Some(0)
            });
            assert!(done);
            assert_eq!(found, expected, "{count}");
        }
    }

    #[test]
    fn steps_bound_the_search() {
        let boxes = vec![(DVec3::ZERO, DVec3::ONE); 1000];
        let tree = Boxes::new(boxes.into_iter());
        let mut seen = 0;
        assert!(!tree.pairs(10_000, |_, _| {
            seen += 1;
            Some(9)
        }));
        assert!((900..1100).contains(&seen), "{seen}");
        assert!(!tree.pairs(u64::MAX, |_, _| None));
    }
}
