//! View factors, measured as direct flux from one black wall or region to another.

use albedra::{Coating, Enclosure, Experiment, Flux, Region, Source};
use albedra_tests::rig::{FACES, cuboid};
use albedra_tests::{Budget, Checks, oracle, record, records, statistical};
use glam::DVec3;

const PHOTONS: u64 = 1_000_000;

fn black(size: [f64; 3]) -> Enclosure {
    cuboid(size, Coating::absorber())
}

fn painted(chamber: &Enclosure, name: &str, wall: &str, region: Region, at: [f64; 3]) -> Enclosure {
    chamber
        .clone()
        .paint(name, wall, region.at(DVec3::from(at)), Coating::absorber())
        .unwrap()
}

fn flux(budget: Budget, case: &str, chamber: &Enclosure, from: &str, to: &str) -> Flux {
    let experiment = Experiment::new(chamber, Source::wall(from));
    budget.run(case, PHOTONS, &experiment).flux(to).unwrap()
}

fn facing_rectangles(budget: Budget) {
    let mut checks = Checks::new(
        "facing rectangles as whole walls and as painted regions",
        0.02,
    );
    for entry in records("vf.parallel_rect")
        .into_iter()
        .chain(records("published.vf.parallel"))
    {
        let (a, b, c) = (entry.number("a"), entry.number("b"), entry.number("c"));
        let whole = flux(budget, &entry.id, &black([a, b, c]), "z-", "z+");
        checks.against(entry, whole.direct);

        let case = format!("{} painted", entry.id);
        let chamber = black([a + 2.0, b + 1.0, c]);
        let plate = || Region::rectangle((0.0, 0.0), (a, b));
        let chamber = painted(&chamber, "lower", "z-", plate(), [0.3, -0.2, -0.5 * c]);
        let chamber = painted(&chamber, "upper", "z+", plate(), [0.3, -0.2, 0.5 * c]);
        checks.against(
            entry,
            flux(budget, &case, &chamber, "lower", "upper").direct,
        );
    }
    checks.assert_ran("vf.parallel_rect", 6);
    checks.assert_ran("published.vf.parallel", 2);
    checks.finish();
}

fn standing_rectangles(budget: Budget) {
    let mut checks = Checks::new("rectangles with a common edge", 0.01);
    for entry in records("vf.perp_rect") {
        let (w, h, l) = (entry.number("w"), entry.number("h"), entry.number("l"));
        checks.against(
            entry,
            flux(budget, &entry.id, &black([w, l, h]), "z-", "x-").direct,
        );

        let case = format!("{} painted", entry.id);
        let [x, y, z] = [w + 1.0, l + 1.5, h + 0.5];
        let floor = Region::rectangle((0.0, 0.0), (w, l));
        let wall = Region::rectangle((0.0, 0.0), (l, h));
        let chamber = painted(
            &black([x, y, z]),
            "floor",
            "z-",
            floor,
            [0.5 * (w - x), 0.25, -0.5 * z],
        );
        let chamber = painted(
            &chamber,
            "panel",
            "x-",
            wall,
            [-0.5 * x, 0.25, 0.5 * (h - z)],
        );
        checks.against(
            entry,
            flux(budget, &case, &chamber, "floor", "panel").direct,
        );
    }
    checks.assert_ran("vf.perp_rect", 5);
    checks.finish();
}

fn coaxial_disks(budget: Budget) {
    let mut checks = Checks::new("coaxial disks", 0.02);
    for entry in records("vf.coaxial_disks") {
        let (r1, r2, h) = (entry.number("r1"), entry.number("r2"), entry.number("h"));
        let disk = |radius| Region::disk((0.0, 0.0), radius);
        let chamber = black([5.0, 6.0, h]);
        let chamber = painted(&chamber, "first", "z-", disk(r1), [0.25, -0.5, -0.5 * h]);
        let chamber = painted(&chamber, "second", "z+", disk(r2), [0.25, -0.5, 0.5 * h]);
        checks.against(
            entry,
            flux(budget, &entry.id, &chamber, "first", "second").direct,
        );
    }
    checks.assert_ran("vf.coaxial_disks", 5);
    checks.finish();
}

fn walls_of_a_cube(budget: Budget) {
    let mut checks = Checks::new("walls of a cube", 0.01);
    for (i, from) in FACES.iter().enumerate() {
        let case = format!("cube from {from}");
        let experiment = Experiment::new(&black([1.0; 3]), Source::wall(*from));
        let outcome = budget.run(&case, PHOTONS, &experiment);
        let mut sum = 0.0;
        for (j, to) in FACES.iter().enumerate() {
            let flux = outcome.flux(to).unwrap();
            sum += flux.direct.value;
            let id = format!("cube {from} to {to}");
            match (i == j, i / 2 == j / 2) {
                (true, _) => checks.identical(&id, flux.direct.value, 0.0, 0.0),
                (_, true) => checks.against(record("published.cube.opposite"), flux.direct),
                _ => checks.against(record("published.cube.adjacent"), flux.direct),
            }
            checks.identical(
                &format!("{id}: all is direct"),
                flux.incident.value,
                flux.direct.value,
                0.0,
            );
        }
        checks.identical(&format!("I9 cube {from} closes"), sum, 1.0, 1e-12);
    }
    checks.assert_ran("published.cube", 2);
    checks.finish();
}

/// Rectangles that are neither centred nor alike, in the frame of the room.
fn offset_rectangles(budget: Budget) {
    let mut checks = Checks::new("offset parallel rectangles", 0.03);
    let gap = 0.7;
    for (i, (from, to)) in [
        ([0.1, 0.2, 0.5, 0.3], [-0.4, 0.6, 0.2, 0.9]),
        ([-0.5, -0.5, 0.9, 0.8], [0.5, 0.3, 0.7, 1.1]),
    ]
    .into_iter()
    .enumerate()
    {
        let rectangle =
            |[_, _, width, height]: [f64; 4]| Region::rectangle((0.0, 0.0), (width, height));
        let chamber = black([2.2, 2.4, gap]);
        let chamber = painted(
            &chamber,
            "low",
            "z-",
            rectangle(from),
            [from[0], from[1], -0.5 * gap],
        );
        let chamber = painted(
            &chamber,
            "high",
            "z+",
            rectangle(to),
            [to[0], to[1], 0.5 * gap],
        );
        let there = flux(
            budget,
            &format!("offset {i} there"),
            &chamber,
            "low",
            "high",
        );
        let back = flux(budget, &format!("offset {i} back"), &chamber, "high", "low");
        let factor = oracle::view::offset_rectangles(from, to, gap);
        checks.exact(&format!("offset {i} there"), there.direct, factor);
        checks.exact(
            &format!("offset {i} back"),
            back.direct,
            factor * from[2] * from[3] / (to[2] * to[3]),
        );
    }
    checks.finish();
}

/// I9: `A₁ F₁₂ = A₂ F₂₁` for outlines that have no closed form, on walls that stand at an angle.
fn reciprocity(budget: Budget) {
    let mut checks = Checks::new("I9 reciprocity", 0.02);
    let triangle = vec![(-0.3, -0.2), (0.4, -0.1), (0.0, 0.35)];
    let triangle_area = 0.5 * (0.7 * 0.55 - 0.3 * 0.1_f64);
    let disk_area = std::f64::consts::PI * 0.09;
    let chamber = black([1.0, 1.2, 0.9]);
    let chamber = painted(
        &chamber,
        "disk",
        "z-",
        Region::disk((0.0, 0.0), 0.3),
        [-0.15, 0.2, -0.45],
    );
    let chamber = painted(
        &chamber,
        "triangle",
        "x+",
        Region::polygon(triangle),
        [0.5, 0.1, 0.05],
    );
    let there = flux(budget, "disk to triangle", &chamber, "disk", "triangle").direct;
    let back = flux(budget, "triangle to disk", &chamber, "triangle", "disk").direct;
    checks.equal(
        "disk and triangle",
        albedra_tests::Measured::from(there).scaled(disk_area),
        albedra_tests::Measured::from(back).scaled(triangle_area),
    );

    let room = Enclosure::extruded(
        &[
            (0.0, 0.0),
            (2.0, 0.0),
            (2.0, 0.8),
            (0.9, 0.8),
            (0.9, 2.0),
            (0.0, 2.0),
        ],
        0.7,
    );
    let room = room.unwrap().coated(Coating::absorber());
    let area = |name: &str| {
        room.walls()
            .iter()
            .find(|wall| wall.name == name)
            .unwrap()
            .area
    };
    for (a, b) in [
        ("side 1", "side 5"),
        ("side 2", "bottom"),
        ("side 6", "side 2"),
        ("side 3", "side 6"),
    ] {
        let there = flux(budget, &format!("L {a} to {b}"), &room, a, b).direct;
        let back = flux(budget, &format!("L {b} to {a}"), &room, b, a).direct;
        checks.equal(
            &format!("L-shaped room, {a} and {b}"),
            albedra_tests::Measured::from(there).scaled(area(a)),
            albedra_tests::Measured::from(back).scaled(area(b)),
        );
    }
    checks.finish();
}

statistical!(
    facing_rectangles,
    standing_rectangles,
    coaxial_disks,
    walls_of_a_cube,
    offset_rectangles,
    reciprocity,
);
