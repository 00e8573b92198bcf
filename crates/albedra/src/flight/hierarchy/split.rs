//! Which triangles go together: splits where the expected cost is least.
//!
//! # Method
//!
//! Binned surface-area heuristic: Wald, "On fast construction of SAH-based bounding volume hierarchies", IEEE
//! Symposium on Interactive Ray Tracing 2007. A node is split on until it has eight parts.

use std::ops::Range;

use super::node::{WIDTH, larger, smaller};

/// Places where a split is tried, plus one.
const BINS: usize = 16;

/// What the builder knows of a triangle.
#[derive(Clone, Copy)]
pub(super) struct Item {
    pub(super) bounds: Bounds,
    /// Unit outward normal; zero if it cannot be relied on.
    pub(super) normal: [f32; 3],
    pub(super) triangle: u32,
}

impl Item {
    /// Twice the middle of the box.
    #[inline(always)]
    fn middle(&self, axis: usize) -> f32 {
        self.bounds.low[axis] + self.bounds.high[axis]
    }
}

/// A box in the frame.
#[derive(Clone, Copy)]
pub(super) struct Bounds {
    pub(super) low: [f32; 3],
    pub(super) high: [f32; 3],
}

impl Bounds {
    pub(super) const EMPTY: Self = Self {
        low: [f32::MAX; 3],
        high: [f32::MIN; 3],
    };

    #[inline(always)]
    pub(super) fn join(&mut self, other: &Self) {
        for axis in 0..3 {
            self.low[axis] = smaller(self.low[axis], other.low[axis]);
            self.high[axis] = larger(self.high[axis], other.high[axis]);
        }
    }

    fn around(items: &[Item]) -> Self {
        let mut all = Self::EMPTY;
        for item in items {
            all.join(&item.bounds);
        }
        all
    }

    /// Half the area of the box's surface.
    #[inline(always)]
    fn half_area(&self) -> f32 {
        let [x, y, z] = [0, 1, 2].map(|axis| self.high[axis] - self.low[axis]);
        x * y + y * z + z * x
    }
}

/// Items that become one child.
pub(super) struct Part {
    pub(super) items: Range<usize>,
    pub(super) bounds: Bounds,
}

impl Part {
    fn new(all: &[Item], items: Range<usize>) -> Self {
        Self {
            bounds: Bounds::around(&all[items.clone()]),
            items,
        }
    }
}

/// Splits a range of items into at most eight parts.
pub(super) fn parts(items: &mut [Item], range: Range<usize>, balanced: bool) -> Vec<Part> {
    let mut parts = Vec::with_capacity(WIDTH);
    if !range.is_empty() {
        parts.push(Part::new(items, range));
    }
    while parts.len() < WIDTH {
        let mut most = 0.0;
        let mut next = None;
        for (k, part) in parts
            .iter()
            .enumerate()
            .filter(|(_, part)| part.items.len() > 1)
        {
            let count = part.items.len() as f32;
            let cost = if balanced {
                count
            } else {
                part.bounds.half_area() * count
            };
            if cost > most {
                (most, next) = (cost, Some(k));
            }
        }
        let Some(k) = next else { break };
        let Range { start, end } = parts[k].items;
        let slice = &mut items[start..end];
        let middle = start
            + if balanced {
                halve(slice)
            } else {
                cheapest(slice).unwrap_or_else(|| halve(slice))
            };
        parts[k] = Part::new(items, start..middle);
        parts.push(Part::new(items, middle..end));
    }
    parts
}

/// Splits two or more items in the middle of their longest axis, ties by index; gives the number in the first half.
fn halve(items: &mut [Item]) -> usize {
    let (low, high) = spread(items);
    let [x, y, z] = [0, 1, 2].map(|axis| high[axis] - low[axis]);
    let axis = if x >= y && x >= z {
        0
    } else {
        1 + usize::from(z > y)
    };
    let middle = items.len() / 2;
    items.select_nth_unstable_by(middle, |a, b| {
        a.middle(axis)
            .total_cmp(&b.middle(axis))
            .then(a.triangle.cmp(&b.triangle))
    });
    middle
}

/// Least and greatest middles.
fn spread(items: &[Item]) -> ([f32; 3], [f32; 3]) {
    let mut low = [f32::MAX; 3];
    let mut high = [f32::MIN; 3];
    for item in items {
        for axis in 0..3 {
            low[axis] = smaller(item.middle(axis), low[axis]);
            high[axis] = larger(item.middle(axis), high[axis]);
        }
    }
    (low, high)
}

/// Splits where areas times numbers are least; gives the number in the first part, none if no place parts the items.
fn cheapest(items: &mut [Item]) -> Option<usize> {
    let (low, high) = spread(items);
    let per_bin = [0, 1, 2].map(|axis| {
        let width = high[axis] - low[axis];
        if width > 0.0 {
            BINS as f32 / width
        } else {
            0.0
        }
    });
    let bin = |item: &Item, axis: usize| {
        #[expect(
            clippy::cast_possible_truncation,
            clippy::cast_sign_loss,
            reason = "not negative, and cut off at BINS"
        )]
        let bin = ((item.middle(axis) - low[axis]) * per_bin[axis]) as usize;
        if bin < BINS { bin } else { BINS - 1 }
    };
    let mut bins = [[(0_u32, Bounds::EMPTY); BINS]; 3];
    for item in items.iter() {
        for (axis, bins) in bins.iter_mut().enumerate() {
            let (count, bounds) = &mut bins[bin(item, axis)];
            *count += 1;
            bounds.join(&item.bounds);
        }
    }
    let mut least = f32::MAX;
    let mut place = None;
    for (axis, bins) in bins.iter().enumerate() {
        let mut costs = [0.0; BINS];
        let mut below = (0, Bounds::EMPTY);
        for cut in 1..BINS {
            below.0 += bins[cut - 1].0;
            below.1.join(&bins[cut - 1].1);
            costs[cut] = if below.0 > 0 {
                below.0 as f32 * below.1.half_area()
            } else {
                f32::INFINITY
            };
        }
        let mut above = (0, Bounds::EMPTY);
        for cut in (1..BINS).rev() {
            above.0 += bins[cut].0;
            above.1.join(&bins[cut].1);
            let cost = if above.0 > 0 {
                costs[cut] + above.0 as f32 * above.1.half_area()
            } else {
                f32::INFINITY
            };
            if cost < least {
                (least, place) = (cost, Some((axis, cut)));
            }
        }
    }
    let (axis, cut) = place?;
    let mut middle = 0;
    for k in 0..items.len() {
        if bin(&items[k], axis) < cut {
            items.swap(k, middle);
            middle += 1;
        }
    }
    Some(middle)
}
