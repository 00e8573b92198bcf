//! The numbers that an audit judges by, in one place.

/// Farthest distance of a coordinate from the origin in metres. Beyond, products of coordinates could overflow.
pub(super) const FARTHEST: f64 = 1e30;

/// A facet of an area at or below this share of its extent squared has none. Rounding leaves about 1e-16, so normals
/// are still good to four digits at the limit. Common practice, no source.
pub(super) const DEGENERATE: f64 = 1e-12;

/// How far the corners of a polygon may leave its plane, as a share of its extent. Files of seven digits stay within.
/// Common practice, no source.
pub(super) const NON_PLANAR: f64 = 1e-6;

/// Sine of the angle below which two neighbours that lie on the same side of their edge count as folded together.
/// Rounding of a rotated mesh leaves about 1e-16. Common practice, no source.
pub(super) const FOLDED: f64 = 1e-12;

/// Problems that are kept one by one; the rest is only counted.
pub(super) const KEPT: usize = 1000;

/// Corner checks allowed for cutting all polygons into triangles; some 5 ns each. More makes larger polygons with many
/// inward corners possible, and the worst case slower.
pub(super) const EAR_CHECKS: u64 = 20_000_000;

/// Steps of the search for intersections: this many and some for each triangle. A step is some 5 ns, so that the worst
/// mesh of 30 000 facets takes a quarter of a second. A good mesh takes about 100 steps a triangle, but a flat fan of n
/// triangles about n² steps: some 3000 can be checked.
pub(super) const STEPS: u64 = 20_000_000;
pub(super) const STEPS_A_TRIANGLE: u64 = 400;

/// Pairs of triangles that intersect after which the search is given up: far more than are listed.
pub(super) const HITS: usize = 20_000;
