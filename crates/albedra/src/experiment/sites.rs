//! Sources fitted to their enclosure.

use super::ground::Ground;
use super::{Experiment, ExperimentError};
use crate::enclosure::{Piece, Solid};
use crate::engine::{Lane, Surfaces};
use crate::flight::Hierarchy;
use crate::geometry::RegionShape;
use crate::math::larger;
use crate::near::Near;
use crate::source::{
    Aim, DiskSite, Emitter, HEMISPHERE, Place, PointSite, Site, Source, Spot, Spread, sine_squared,
    unit,
};

mod body;
mod wall;

use body::{Inside, VolumeSite};
use wall::{AnyWall, RegionSite, WallSite};

/// Whether a source by itself gives the equilibrium of a closed Lambertian body: light from all walls by the cosine law.
pub(super) fn is_equilibrium(source: &Source) -> bool {
    source.place == Place::Walls
        && source.spread
            == Spread::Cosine {
                axis: None,
                half_angle: HEMISPHERE,
            }
}

/// What sources are fitted to.
struct Stage<'a> {
    experiment: &'a Experiment,
    ground: &'a Ground,
    surfaces: &'a Surfaces,
}

pub(super) fn emitter(
    experiment: &Experiment,
    ground: &Ground,
    surfaces: &Surfaces,
) -> Result<Emitter, ExperimentError> {
    let stage = Stage {
        experiment,
        ground,
        surfaces,
    };
    let sources = &experiment.settings.sources;
    if sources.is_empty() {
        return Err(ExperimentError::NoSource);
    }
    let mut parts = Vec::new();
    for (index, source) in sources.iter().enumerate() {
        if !(source.flux > 0.0 && source.flux < 1e300) {
            return Err(ExperimentError::Source {
                source: index,
                required: "flux must be a positive number of watts",
                value: source.flux,
            });
        }
        let aim = Stage::aim(index, source)?;
        parts.push((stage.site(index, source, aim)?, aim));
    }
    let all: f64 = sources.iter().map(|source| source.flux).sum();
    let mut upper = 0.0;
    let mut shares: Vec<f64> = sources
        .iter()
        .map(|source| {
            upper += source.flux / all;
            upper
        })
        .collect();
    if let Some(last) = shares.last_mut() {
        *last = 1.0;
    }
    Ok(Emitter { shares, parts })
}

impl Stage<'_> {
    fn aim(index: usize, source: &Source) -> Result<Aim, ExperimentError> {
        let wall = matches!(source.place, Place::Wall { .. } | Place::Walls);
        match source.spread {
            Spread::Isotropic if wall => Err(ExperimentError::SourceDirection {
                source: index,
                required: "light from walls must keep to a cone or be parallel",
            }),
            Spread::Isotropic => Ok(Aim::Isotropic),
            Spread::Parallel { axis } => Ok(Aim::Parallel(direction(index, axis.to_array())?)),
            Spread::Cosine { axis, half_angle } => {
                if !(0.0..=HEMISPHERE).contains(&half_angle) {
                    let required = "half-angle must lie in [0, π/2] radians";
                    return Err(ExperimentError::Source {
                        source: index,
                        required,
                        value: half_angle,
                    });
                }
                if axis.is_some() && wall {
                    return Err(ExperimentError::SourceDirection {
                        source: index,
                        required: "a cone of light from walls must have their normals as axes",
                    });
                }
                if axis.is_none() && !wall {
                    return Err(ExperimentError::SourceDirection {
                        source: index,
                        required: "a cone of light from a point or the volume must have an axis",
                    });
                }
                let axis = axis
                    .map(|axis| direction(index, axis.to_array()))
                    .transpose()?;
                Ok(Aim::Cosine {
                    axis,
                    sine_squared: sine_squared(half_angle),
                })
            }
        }
    }

    fn site(
        &self,
        index: usize,
        source: &Source,
        aim: Aim,
    ) -> Result<Box<dyn Site>, ExperimentError> {
        match &source.place {
            Place::Point { position } => {
                self.inside(index, &[position.to_array()])?;
                Ok(Box::new(PointSite(position.to_array())))
            }
            Place::Disk {
                centre,
                axis,
                radius,
            } => {
                let axis = direction(index, axis.to_array())?;
                if !(*radius >= 0.0 && *radius < 1e300) {
                    let required = "radius must be a number of metres that is not negative";
                    return Err(ExperimentError::Source {
                        source: index,
                        required,
                        value: *radius,
                    });
                }
                let site = DiskSite {
                    centre: centre.to_array(),
                    axis,
                    radius: *radius,
                };
                self.inside(index, &site.rim())?;
                Ok(Box::new(site))
            }
            Place::Wall { name } => {
                let pieces = self.experiment.enclosure.pieces();
                let Some(row) = pieces.iter().position(|piece| piece.name == name) else {
                    let near = Near::to(name, pieces.iter().map(|piece| piece.name));
                    return Err(ExperimentError::UnknownName {
                        name: name.clone(),
                        near,
                    });
                };
                self.in_sight(index, &pieces[row])?;
                self.row_site(index, &pieces[row], row, aim)
            }
            Place::Walls => {
                let pieces = self.experiment.enclosure.pieces();
                let sites = (pieces.iter().enumerate())
                    .map(|(row, piece)| self.row_site(index, piece, row, aim))
                    .collect::<Result<_, _>>()?;
                let areas: Vec<f64> = pieces.iter().map(|piece| piece.area).collect();
                Ok(Box::new(AnyWall::new(&areas, sites)))
            }
            Place::Volume => {
                let solid = &self.experiment.enclosure.solid;
                let [lower, upper] = solid.bounds;
                let sides = [0, 1, 2].map(|axis| upper[axis] - lower[axis]);
                let share = solid.volume / (sides[0] * sides[1] * sides[2]);
                // Points in a convex body are not found by trial.
                if solid.convex.is_none() {
                    let required = "the volume must fill at least 1e-4 of its bounding box";
                    large_enough(index, share, required)?;
                }
                Ok(Box::new(VolumeSite::new(solid)))
            }
        }
    }

    /// Refuses a wall or region of which so little can be seen that trial finds no point of it.
    fn in_sight(&self, index: usize, piece: &Piece<'_>) -> Result<(), ExperimentError> {
        let enclosure = &self.experiment.enclosure;
        let whole = piece
            .patch
            .map_or(enclosure.solid.walls[piece.wall].area, |patch| {
                enclosure.patches[patch].shape.area()
            });
        let required = "later regions must leave at least 1e-4 of the wall or region to see";
        large_enough(index, piece.area / whole, required)
    }

    fn row_site(
        &self,
        index: usize,
        piece: &Piece<'_>,
        row: usize,
        aim: Aim,
    ) -> Result<Box<dyn Site>, ExperimentError> {
        let enclosure = &self.experiment.enclosure;
        let site = WallSite::new(&enclosure.solid, self.ground, self.surfaces, piece.wall);
        if let Aim::Parallel(axis) = aim {
            let outward = site.surfaces().any(|surface| {
                let [a, b, c, _] = self.ground.planes[surface];
                a * axis[0] + b * axis[1] + c * axis[2] >= 0.0
            });
            if outward {
                let required = "parallel light must lead inward from every facet of the wall";
                return Err(ExperimentError::SourceDirection {
                    source: index,
                    required,
                });
            }
        }
        match (piece.patch, &self.surfaces.plans[piece.wall]) {
            (Some(patch), Some(plan)) => {
                let shape: RegionShape = enclosure.patches[patch].shape.clone();
                Ok(Box::new(RegionSite {
                    shape,
                    plan: plan.clone(),
                    row: row as u64,
                    wall: site,
                }))
            }
            _ => Ok(Box::new(site)),
        }
    }

    fn inside(&self, source: usize, points: &[[f64; 3]]) -> Result<(), ExperimentError> {
        let inside = Inside::new(&self.experiment.enclosure.solid);
        match points.iter().find(|&&point| !inside.holds(point)) {
            Some(&position) => Err(ExperimentError::SourceOutside { source, position }),
            None => Ok(()),
        }
    }
}

/// The least share of trials that must find a point; the sites' tries allow for it.
const LEAST_SHARE: f64 = 1e-4;

fn large_enough(source: usize, share: f64, required: &'static str) -> Result<(), ExperimentError> {
    if share >= LEAST_SHARE {
        Ok(())
    } else {
        Err(ExperimentError::Source {
            source,
            required,
            value: share,
        })
    }
}

/// A direction brought to unit length.
fn direction(source: usize, axis: [f64; 3]) -> Result<[f64; 3], ExperimentError> {
    let largest = larger(larger(axis[0].abs(), axis[1].abs()), axis[2].abs());
    // Divided by the largest component where squares of such lengths would leave the range.
    let scaled = axis.map(|x| x / largest);
    [unit(axis), unit(scaled)]
        .into_iter()
        .find(|[x, y, z]| (x * x + y * y + z * z - 1.0).abs() < 1e-9)
        .ok_or(ExperimentError::SourceDirection {
            source,
            required: "a direction must have a finite length above 0",
        })
}
