//! The surfaces that photons meet: the kernel's, their rows and their coatings.

use super::Layout;
use crate::enclosure::{Enclosure, Finish, Solid};
use crate::engine::{Surfaces, WallPlan};
use crate::flight::{Facets, Flight, Planes};

/// The surfaces that a flight kernel hits.
#[derive(Debug)]
pub(crate) struct Ground {
    /// Wall of each surface.
    pub(crate) walls: Vec<u32>,
    /// Plane n·x = offset of each surface, outward unit normal.
    pub(crate) planes: Vec<[f64; 4]>,
    /// Surface of each triangle of the solid.
    pub(crate) of_triangle: Vec<u32>,
}

/// The kernel for a body, chosen by its shape, and its surfaces.
pub(super) fn ground(solid: &Solid) -> (Ground, Box<dyn Flight>) {
    if let Some(convex) = &solid.convex {
        let planes: Vec<_> = convex
            .iter()
            .map(|plane| [plane.normal.x, plane.normal.y, plane.normal.z, plane.offset])
            .collect();
        let mut of_facet = vec![0; solid.mesh.facets()];
        for (index, plane) in (0_u32..).zip(convex) {
            for &facet in &plane.facets {
                of_facet[facet as usize] = index;
            }
        }
        let of_triangle = solid
            .triangle_facets
            .iter()
            .map(|&facet| of_facet[facet as usize])
            .collect();
        let walls = convex.iter().map(|plane| plane.wall).collect();
        let flight = Box::new(Planes::new(&planes));
        return (
            Ground {
                walls,
                planes,
                of_triangle,
            },
            flight,
        );
    }
    let planes: Vec<_> = (0..solid.triangles.len())
        .map(|triangle| solid.plane_of(triangle))
        .collect();
    let walls = (0..solid.triangles.len())
        .map(|triangle| solid.triangle_wall(triangle))
        .collect();
    let of_triangle = (0_u32..).take(planes.len()).collect();
    let flight = Facets::new(solid.hierarchy(false), planes.clone());
    (
        Ground {
            walls,
            planes,
            of_triangle,
        },
        Box::new(flight),
    )
}

/// Rows and coatings of the surfaces, flattened into tables.
pub(super) fn surfaces(enclosure: &Enclosure, layout: &Layout, ground: &Ground) -> Surfaces {
    let pieces = enclosure.pieces();
    let mut plans: Vec<Option<WallPlan>> = vec![None; enclosure.solid.walls.len()];
    for (wall, plan) in plans.iter_mut().enumerate() {
        let mapped = layout
            .maps
            .iter()
            .any(|map| map.wall == enclosure.mesh().walls[wall]);
        let regions: Vec<_> = (0_u64..)
            .zip(&pieces)
            .filter(|(_, piece)| piece.wall == wall)
            .filter_map(|(row, piece)| Some((enclosure.patches[piece.patch?].shape.clone(), row)))
            .collect();
        if let (true, Some(plane)) = (
            mapped || !regions.is_empty(),
            &enclosure.solid.walls[wall].plane,
        ) {
            *plan = Some(WallPlan {
                frame: plane.frame,
                regions,
            });
        }
    }
    let placed: Vec<bool> = ground
        .walls
        .iter()
        .map(|&wall| plans[wall as usize].is_some())
        .collect();
    let coating = |piece: &crate::enclosure::Piece<'_>| piece.finish.and_then(Finish::coating);
    Surfaces {
        walls: ground.walls.clone(),
        // Walls come first among the rows, in their order.
        rows: ground.walls.iter().map(|&wall| u64::from(wall)).collect(),
        any_placed: placed.contains(&true),
        placed,
        plans,
        reflectance: pieces
            .iter()
            .map(|piece| coating(piece).map_or(0.0, |c| c.reflectance()))
            .collect(),
        specular_share: pieces
            .iter()
            .map(|piece| coating(piece).map_or(0.0, |c| c.specular_share()))
            .collect(),
    }
}
