//! Irradiance cell by cell.

use super::Outcome;
use crate::experiment::ExperimentError;
use crate::near::Near;

/// Irradiance of a planar wall, cell by cell, regions included.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Map {
    /// The wall.
    pub wall: String,
    /// Edges of the cells along u in m.
    pub u_edges: Vec<f64>,
    /// Edges of the cells along v in m.
    pub v_edges: Vec<f64>,
    /// Area of each cell that lies on the wall in m², row by row: v outside, u inside.
    pub area: Vec<f64>,
    /// Irradiance in W/m², in the order of the areas; NaN where a cell lies off the wall.
    pub irradiance: Vec<f64>,
    /// Standard uncertainty in W/m².
    pub u: Vec<f64>,
    /// Degrees of freedom of the uncertainty.
    pub degrees_of_freedom: f64,
}

impl Outcome {
    /// The map of a wall.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).map("z-", (4, 3)).trace(2_000).seed(7).run()?;
    /// let map = outcome.map("z-")?;
    /// assert_eq!(map.irradiance.len(), 12);
    /// let watts: f64 = map.irradiance.iter().zip(&map.area).map(|(e, area)| e * area).sum();
    /// assert!((watts - outcome.flux("z-")?.incident.value).abs() < 1e-12);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If no map of it was asked for.
    pub fn map(&self, wall: &str) -> Result<Map, ExperimentError> {
        let layout = &self.layout;
        let Some(map) = layout.maps.iter().find(|map| map.wall == wall) else {
            let near = Near::to(wall, layout.maps.iter().map(|map| map.wall.as_str()));
            return Err(ExperimentError::UnknownOutput {
                name: format!("map of {wall}"),
                near,
            });
        };
        let all = self.jackknife().estimate_many_linear(|sums| {
            let cells = map.cells.clone().zip(&map.areas);
            cells
                .map(|(cell, area)| layout.watts * sums.mean(cell) / area)
                .collect()
        });
        let off = |values: Vec<f64>| {
            let on = values.into_iter().zip(&map.areas);
            on.map(|(value, &area)| if area > 0.0 { value } else { f64::NAN })
                .collect()
        };
        Ok(Map {
            wall: map.wall.clone(),
            u_edges: map.u_edges.clone(),
            v_edges: map.v_edges.clone(),
            area: map.areas.clone(),
            irradiance: off(all.values),
            u: off(all.u),
            degrees_of_freedom: all.degrees_of_freedom,
        })
    }

    /// Names of the walls that have a map.
    pub fn maps(&self) -> Vec<String> {
        self.layout
            .maps
            .iter()
            .map(|map| map.wall.clone())
            .collect()
    }
}
