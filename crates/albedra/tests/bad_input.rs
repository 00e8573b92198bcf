//! Wrong input gets a typed error that names the culprit, what came and what is allowed, and nothing else happens.

use albedra::{
    Coating, CoatingError, Enclosure, EnclosureError, Experiment, ExperimentError, LoadError,
    Medium, MediumError, Mesh, MeshFormat, Outcome, OutlineError, Problem, Region, RegionError,
    RunError, SolidError, Source, TimeGrid, TimeGridError, Totals, Unit,
};

fn white() -> Coating {
    Coating::lambertian(0.9).unwrap()
}

fn cube() -> Enclosure {
    Enclosure::cuboid([1.0, 1.0, 1.0]).unwrap().coated(white())
}

fn l_shape() -> Enclosure {
    let outline = [
        (0.0, 0.0),
        (2.0, 0.0),
        (2.0, 1.0),
        (1.0, 1.0),
        (1.0, 2.0),
        (0.0, 2.0),
    ];
    Enclosure::extruded(&outline, 1.0).unwrap().coated(white())
}

/// A message holds all of these.
#[track_caller]
fn says(error: &impl std::error::Error, parts: &[&str]) {
    let message = error.to_string();
    for part in parts {
        assert!(message.contains(part), "{part:?} is missing in {message:?}");
    }
    assert!(
        !message.ends_with('.') && !message.is_empty(),
        "{message:?}"
    );
    assert!(
        message.starts_with(|c: char| !c.is_uppercase() || message.starts_with("OBJ")),
        "{message:?}"
    );
}

#[track_caller]
fn refused(experiment: &Experiment) -> ExperimentError {
    let error = experiment.check().expect_err("must be refused");
    // Compared as text, since what is not a number does not equal itself.
    let run = RunError::Experiment(error.clone());
    assert_eq!(
        format!("{:?}", experiment.trace(10).run()),
        format!("{:?}", Err::<Outcome, _>(run))
    );
    error
}

#[test]
fn reflectances_outside_their_range() {
    for value in [-1e-300, 1.2, f64::NAN, f64::INFINITY] {
        let error = Coating::lambertian(value).unwrap_err();
        assert!(matches!(error, CoatingError::Reflectance { .. }));
        says(&error, &["reflectance", "[0, 1]", &value.to_string()]);
        let error = Coating::mixed(0.5, value).unwrap_err();
        assert!(matches!(error, CoatingError::SpecularShare { .. }));
        says(&error, &["specular share", "[0, 1]", &value.to_string()]);
    }
}

#[test]
fn media_outside_their_range() {
    for value in [0.0, -1.5, f64::NAN, f64::INFINITY] {
        let error = Medium::new(value, 0.0).unwrap_err();
        assert!(matches!(error, MediumError::GroupIndex { .. }));
        says(
            &error,
            &["group index", "[0.001, 1000]", &value.to_string()],
        );
    }
    let error = Medium::new(1.0, -0.1).unwrap_err();
    assert_eq!(error, MediumError::Absorption { value: -0.1 });
    says(&error, &["absorption", "not negative", "m⁻¹", "-0.1"]);
}

#[test]
fn sizes_outside_their_range() {
    for value in [0.0, -1.0, f64::NAN, f64::INFINITY, 1e12, 1e-12] {
        let error = Enclosure::cuboid([1.0, value, 1.0]).unwrap_err();
        let EnclosureError::Solid(SolidError::OutOfRange {
            argument: "y size", ..
        }) = &error
        else {
            panic!("{error:?}");
        };
        says(
            &error,
            &["y size", "[1e-9, 1e9] m", &format!("{value:?} m")],
        );
    }
    for sides in [0, 2, 5000] {
        let error = Enclosure::prism(sides, 1.0, 1.0).unwrap_err();
        says(&error, &["sides", "[3, 4096]", &sides.to_string()]);
    }
    says(
        &Enclosure::prism(6, f64::NAN, 1.0).unwrap_err(),
        &["radius", "NaN"],
    );
    says(
        &Enclosure::prism(6, 1.0, 0.0).unwrap_err(),
        &["height", "0.0 m"],
    );
}

#[test]
fn outlines_that_are_no_polygon() {
    let of = |corners: &[(f64, f64)]| match Enclosure::extruded(corners, 1.0).unwrap_err() {
        EnclosureError::Solid(SolidError::Outline(error)) => error,
        other => panic!("{other:?}"),
    };
    let square = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
    assert_eq!(of(&square[..2]), OutlineError::TooFewCorners { corners: 2 });
    says(&of(&[]), &["at least 3 corners", "got 0"]);
    let bow = of(&[square[0], square[2], square[1], square[3]]);
    assert!(matches!(bow, OutlineError::SelfCrossing { .. }));
    says(&bow, &["outline", "corner 1", "corner 3"]);
    let twice = of(&[square[0], square[1], square[1], square[2]]);
    assert_eq!(
        twice,
        OutlineError::RepeatedCorner {
            first: 2,
            second: 3
        }
    );
    says(&twice, &["corners 2 and 3"]);
    let nan = of(&[square[0], square[1], (1.0, f64::NAN)]);
    assert!(matches!(nan, OutlineError::NotFinite { corner: 3, .. }));
    says(&nan, &["corner 3", "NaN"]);
    assert_eq!(
        of(&[(0.0, 0.0), (1.0, 1.0), (3.0, 3.0)]),
        of(&[(0.0, 0.0), (2.0, 2.0), (3.0, 3.0)])
    );
}

const BOX: &str = "v 0 0 0\nv 1 0 0\nv 1 1 0\nv 0 1 0\nv 0 0 1\nv 1 0 1\nv 1 1 1\nv 0 1 1\n";
const FACES: [&str; 6] = [
    "f 1 4 3 2",
    "f 5 6 7 8",
    "f 1 2 6 5",
    "f 2 3 7 6",
    "f 3 4 8 7",
    "f 4 1 5 8",
];

#[track_caller]
fn problems(text: &str) -> (Vec<Problem>, String) {
    let mesh = Mesh::read(text.as_bytes(), MeshFormat::Obj, Unit::Metre).unwrap();
    let error = Enclosure::from_mesh(mesh).expect_err("must be refused");
    let EnclosureError::Unsound(audit) = &error else {
        panic!("{error:?}");
    };
    (audit.problems.clone(), error.to_string())
}

#[test]
fn open_meshes_list_every_open_edge() {
    let (found, text) = problems(&format!("{BOX}{}", FACES[1..].join("\n")));
    assert_eq!(found.len(), 4);
    assert!(
        found
            .iter()
            .all(|problem| matches!(problem, Problem::OpenEdge { .. })),
        "{found:?}"
    );
    assert!(text.contains("the edge of facet 1 from "), "{text}");
    assert!(
        text.contains("(1, 0, 0) m") && text.contains("belongs to no other facet"),
        "{text}"
    );
}

#[test]
fn meshes_with_different_problems_list_them_all() {
    // One facet is missing, one is turned over, and there is a fin on an edge.
    let text = format!(
        "{BOX}{}\nf 3 4 7\nf 5 8 7 6\n",
        [FACES[0], FACES[2], FACES[3], FACES[4]].join("\n")
    );
    let (found, _) = problems(&text);
    let has = |f: &dyn Fn(&Problem) -> bool| found.iter().any(f);
    assert!(has(&|p| matches!(p, Problem::OpenEdge { .. })), "{found:?}");
    assert!(
        has(&|p| matches!(p, Problem::InconsistentFacets { .. })),
        "{found:?}"
    );
    assert!(
        has(&|p| matches!(p, Problem::NonManifoldEdge { facets, .. } if facets.len() == 3)),
        "{found:?}"
    );
}

#[test]
fn inside_out_meshes() {
    let turned = [
        "f 2 3 4 1",
        "f 8 7 6 5",
        "f 5 6 2 1",
        "f 6 7 3 2",
        "f 7 8 4 3",
        "f 8 5 1 4",
    ];
    let (found, text) = problems(&format!("{BOX}{}", turned.join("\n")));
    assert_eq!(found, [Problem::InsideOut { volume: -1.0 }]);
    assert!(
        text.contains("face inward") && text.contains("-1 m³") && text.contains("reverse"),
        "{text}"
    );
}

#[test]
fn self_intersecting_meshes() {
    // The apex of a pyramid stands out through the opposite face of the box.
    let dent = [
        "f 1 4 3 2",
        "f 1 2 6 5",
        "f 2 3 7 6",
        "f 3 4 8 7",
        "f 4 1 5 8",
        "f 5 6 9",
        "f 6 7 9",
        "f 7 8 9",
        "f 8 5 9",
    ];
    let (found, text) = problems(&format!("{BOX}v 0.5 0.4 -0.2\n{}", dent.join("\n")));
    assert!(
        found
            .iter()
            .filter(|p| matches!(p, Problem::Intersection { .. }))
            .count()
            >= 4,
        "{found:?}"
    );
    assert!(
        text.contains("cross or overlap at (") && text.contains("facets 0 and 5"),
        "{text}"
    );
}

#[test]
fn meshes_without_use() {
    let error = Enclosure::from_mesh(Mesh::default()).unwrap_err();
    assert!(
        matches!(&error, EnclosureError::Unsound(audit) if audit.problems == [Problem::NoFacets])
    );
    let mut broken = cube().mesh().clone();
    broken.corners[3] = 99;
    broken.facet_walls[2] = 77;
    broken.vertices[1].x = f64::NAN;
    let error = Enclosure::from_mesh(broken).unwrap_err();
    says(&error, &["vertex 99", "wall 77", "NaN"]);
    let mut short = cube().mesh().clone();
    short.starts.pop();
    assert!(matches!(
        Enclosure::from_mesh(short),
        Err(EnclosureError::Unsound(_))
    ));
}

#[test]
fn files_that_are_not_there_or_of_no_known_kind() {
    let error = Enclosure::load("no such file.stl", Unit::Millimetre).unwrap_err();
    says(&error, &["no such file.stl", "cannot be read"]);
    let error = Enclosure::load("chamber.step", Unit::Millimetre).unwrap_err();
    says(&error, &["obj, stl or ply", "chamber.step"]);
    let error = "furlong".parse::<Unit>().unwrap_err();
    says(&error, &["furlong", "mm"]);
}

#[test]
fn regions_that_leave_their_wall() {
    let error = cube()
        .with_opening("port", "x+", Region::disk((0.3, 0.0), 0.25))
        .unwrap_err();
    let EnclosureError::Region {
        name,
        wall,
        error: RegionError::OffWall { by, .. },
    } = &error
    else {
        panic!("{error:?}");
    };
    assert_eq!((name.as_str(), wall.as_str()), ("port", "x+"));
    assert!((by - 0.05).abs() < 1e-12);
    says(
        &error,
        &[
            "\"port\"",
            "\"x+\"",
            "must lie on its wall",
            "leaves it by 0.05 m at (u, v) = (0.55, 0) m",
        ],
    );
    for region in [
        Region::disk((0.0, 0.0), -0.1),
        Region::disk((0.0, 0.0), f64::NAN),
    ] {
        let error = cube().with_opening("port", "x+", region).unwrap_err();
        says(&error, &["\"port\"", "\"x+\"", "radius", "positive"]);
    }
    let error = cube()
        .paint(
            "spot",
            "x+",
            Region::disk((f64::INFINITY, 0.0), 0.1),
            white(),
        )
        .unwrap_err();
    says(&error, &["\"spot\"", "centre", "finite", "inf"]);
    let bow = Region::polygon(vec![(0.0, 0.0), (0.1, 0.1), (0.1, 0.0), (0.0, 0.1)]);
    says(
        &cube().paint("bow", "x+", bow, white()).unwrap_err(),
        &["\"bow\"", "cross"],
    );
    // Across the notch of an L no corner is off the wall. On a lid u is x, and v is −y, from the centroid.
    let corners = [(0.5, 1.95), (0.6, 1.99), (1.99, 0.6), (1.95, 0.5)];
    let across = Region::polygon(
        corners
            .map(|(x, y)| (x - 5.0 / 6.0, 5.0 / 6.0 - y))
            .to_vec(),
    );
    let error = l_shape()
        .paint("across", "top", across, white())
        .unwrap_err();
    says(&error, &["\"across\"", "\"top\"", "crosses a gap"]);
}

#[test]
fn names_that_do_not_exist_come_with_near_ones() {
    let enclosure = cube()
        .with_opening("detector", "x+", Region::disk((0.0, 0.0), 0.1))
        .unwrap();
    let error = enclosure
        .clone()
        .with_coating("detecter", white())
        .unwrap_err();
    let EnclosureError::UnknownName { name, near } = &error else {
        panic!("{error:?}");
    };
    assert_eq!(
        (name.as_str(), near.names()[0].as_str()),
        ("detecter", "detector")
    );
    says(&error, &["\"detecter\"", "there are: \"detector\""]);
    says(
        &enclosure.clone().opened("x").unwrap_err(),
        &["\"x\"", "\"x-\""],
    );
    says(
        &enclosure
            .clone()
            .paint("spot", "z", Region::disk((0.0, 0.0), 0.1), white())
            .unwrap_err(),
        &["\"z-\""],
    );

    let experiment = Experiment::new(&enclosure, Source::wall("Detector"));
    let error = refused(&experiment);
    assert!(
        matches!(&error, ExperimentError::UnknownName { near, .. } if near.names()[0] == "detector")
    );
    let experiment = Experiment::new(&enclosure, Source::volume());
    let error = refused(&experiment.clone().map("y", (2, 2)));
    assert!(matches!(&error, ExperimentError::UnknownWall { near, .. } if near.names().len() == 6));
    // The name of a region does not help where a wall is meant.
    let error = refused(&experiment.clone().map("detector", (2, 2)));
    says(&error, &["needs a wall", "\"detector\"", "there are: \"x"]);
    let error = enclosure
        .clone()
        .paint("spot", "detector", Region::disk((0.0, 0.0), 0.1), white())
        .unwrap_err();
    assert!(matches!(&error, EnclosureError::UnknownWall { near, .. } if near.names().len() == 6));
    says(&error, &["no wall is named \"detector\"; there are: \"x"]);

    let outcome = experiment.trace(100).run().unwrap();
    says(
        &outcome.flux("detectr").unwrap_err(),
        &["\"detectr\"", "\"detector\""],
    );
    says(
        &outcome.output("detector.incidant").unwrap_err(),
        &["\"detector.incidant\"", "\"detector.incident\""],
    );
    says(&outcome.map("x+").unwrap_err(), &["x+", "map"]);
    says(
        &outcome.ratio("x+.incident", "y.incident").unwrap_err(),
        &["\"y.incident\"", "\"y+.incident\""],
    );
    let error = experiment
        .trace(100)
        .target("detectr.incident", 0.1)
        .run()
        .unwrap_err();
    assert!(matches!(
        error,
        RunError::Experiment(ExperimentError::UnknownOutput { .. })
    ));
    let error = experiment.trace(100).watching("nothing").run().unwrap_err();
    says(&error, &["no output is named \"nothing\""]);
}

#[test]
fn names_that_are_taken_or_empty() {
    let port = || Region::disk((0.0, 0.0), 0.1);
    let enclosure = cube().with_opening("port", "x+", port()).unwrap();
    for name in ["port", "y-"] {
        let error = enclosure
            .clone()
            .paint(name, "x-", port(), white())
            .unwrap_err();
        assert_eq!(
            error,
            EnclosureError::Name {
                name: name.to_owned()
            }
        );
        says(&error, &[&format!("\"{name}\""), "taken"]);
    }
    says(
        &enclosure.paint("", "x-", port(), white()).unwrap_err(),
        &["must have a name"],
    );
}

#[test]
fn walls_of_a_mesh_without_names_or_facets() {
    let made = |walls: &[&str], last: u32| {
        let mut mesh = cube().mesh().clone();
        mesh.walls = walls.iter().map(|&name| name.to_owned()).collect();
        mesh.facet_walls = vec![0, 0, 0, 0, 0, last];
        Enclosure::from_mesh(mesh)
    };
    assert!(made(&["a", "b"], 1).is_ok());
    let named = |name: &str| Err(EnclosureError::Name { name: name.into() });
    assert_eq!(made(&["a", "a"], 1), named("a"));
    assert_eq!(made(&["a", ""], 1), named(""));
    let error = made(&["a", "unused"], 0).unwrap_err();
    assert_eq!(
        error,
        EnclosureError::NoFacets {
            wall: "unused".to_owned()
        }
    );
    says(&error, &["\"unused\"", "facets"]);
}

#[test]
fn regions_on_walls_that_are_not_planar() {
    let sides = "f 1 2 6 5\nf 2 3 7 6\nf 3 4 8 7\nf 4 1 5 8\n";
    let text = format!("{BOX}g ends\nf 1 4 3 2\nf 5 6 7 8\ng sides\n{sides}");
    let mesh = Mesh::read(text.as_bytes(), MeshFormat::Obj, Unit::Metre).unwrap();
    let enclosure = Enclosure::from_mesh(mesh).unwrap().coated(white());
    for wall in ["sides", "ends"] {
        let error = enclosure
            .clone()
            .with_opening("port", wall, Region::disk((0.0, 0.0), 0.1))
            .unwrap_err();
        assert_eq!(
            error,
            EnclosureError::NotPlanar {
                wall: wall.to_owned()
            }
        );
        says(&error, &[wall, "planar"]);
        let error = refused(&Experiment::new(&enclosure, Source::volume()).map(wall, (2, 3)));
        assert!(matches!(error, ExperimentError::Map { .. }));
        says(&error, &[wall, "planar", "2 × 3"]);
    }
}

#[test]
fn regions_that_later_ones_hide() {
    let region = |radius| Region::disk((0.0, 0.0), radius);
    let enclosure = cube().paint("small", "x+", region(0.1), white()).unwrap();
    let error = enclosure
        .paint("large", "x+", region(0.2), white())
        .unwrap_err();
    assert_eq!(
        error,
        EnclosureError::Hidden {
            name: "small".to_owned()
        }
    );
    says(&error, &["\"small\""]);
    let all = Region::rectangle((0.0, 0.0), (1.0, 1.0));
    let error = cube().paint("all", "x+", all, white()).unwrap_err();
    assert_eq!(
        error,
        EnclosureError::Hidden {
            name: "x+".to_owned()
        }
    );
}

#[test]
fn walls_without_a_coating() {
    let bare = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .with_coating("x-", white())
        .unwrap();
    let error = refused(&Experiment::new(&bare, Source::volume()));
    assert_eq!(
        error,
        ExperimentError::Bare {
            wall: "x+".to_owned()
        }
    );
    says(&error, &["\"x+\"", "no coating"]);
}

#[test]
fn sources_outside() {
    for at in [
        [0.6, 0.0, 0.0],
        [0.0, 0.0, -0.500_001],
        [f64::NAN, 0.0, 0.0],
        [0.0, f64::INFINITY, 0.0],
    ] {
        let error = refused(&Experiment::new(&cube(), Source::volume()).and(Source::point(at)));
        assert!(
            matches!(error, ExperimentError::SourceOutside { source: 1, .. }),
            "{error:?}"
        );
        says(
            &error,
            &[
                "source 1",
                "outside",
                &format!("({}, {}, {}) m", at[0], at[1], at[2]),
            ],
        );
    }
    // In the notch of an L, and beyond it.
    for at in [
        [1.5, 1.5, 0.0],
        [0.5, 0.5, 0.6],
        [3.0, 0.5, 0.0],
        [1.001, 1.001, 0.0],
    ] {
        let error = refused(&Experiment::new(&l_shape(), Source::point(at)));
        assert!(
            matches!(error, ExperimentError::SourceOutside { source: 0, .. }),
            "{at:?} {error:?}"
        );
    }
    for at in [
        [0.999, 1.5, 0.0],
        [1.5, 0.999, 0.49],
        [0.0, 0.0, 0.5],
        [1.0, 1.0, 0.0],
    ] {
        assert_eq!(
            Experiment::new(&l_shape(), Source::point(at)).check(),
            Ok(()),
            "{at:?}"
        );
    }
    let beam = Source::beam([0.4, 0.0, 0.0], [0.0, 0.0, 1.0]);
    assert_eq!(
        Experiment::new(&cube(), beam.clone().radius(0.09)).check(),
        Ok(())
    );
    let error = refused(&Experiment::new(&cube(), beam.radius(0.2)));
    assert!(matches!(error, ExperimentError::SourceOutside { .. }));
}

#[test]
fn sources_with_bad_numbers() {
    let numbers = |source: Source, parts: &[&str]| {
        let error = refused(&Experiment::new(&cube(), source));
        assert!(
            matches!(error, ExperimentError::Source { source: 0, .. }),
            "{error:?}"
        );
        says(&error, parts);
    };
    for flux in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        numbers(
            Source::volume().flux(flux),
            &["source 0", "flux", "positive", &flux.to_string()],
        );
    }
    let beam = || Source::beam([0.0; 3], [0.0, 0.0, 1.0]);
    for radius in [-0.1, f64::NAN, f64::INFINITY] {
        numbers(
            beam().radius(radius),
            &["radius", "not negative", &radius.to_string()],
        );
    }
    for angle in [-0.1, 1.6, f64::NAN] {
        numbers(
            beam().divergence(angle),
            &["half-angle", "[0, π/2]", &angle.to_string()],
        );
        numbers(
            Source::wall("x-").cone(angle),
            &["half-angle", "[0, π/2]", &angle.to_string()],
        );
    }
    let directions = |source: Source, part: &str| {
        let error = refused(&Experiment::new(&cube(), source));
        assert!(
            matches!(error, ExperimentError::SourceDirection { source: 0, .. }),
            "{error:?}"
        );
        says(&error, &["source 0", part]);
    };
    for bad in [[0.0; 3], [f64::NAN, 0.0, 1.0], [f64::INFINITY, 0.0, 0.0]] {
        directions(Source::beam([0.0; 3], bad), "direction");
        directions(Source::point([0.0; 3]).cosine_about(bad), "direction");
        directions(Source::wall("x-").parallel(bad), "direction");
    }
    directions(Source::wall("x-").parallel([-1.0, 0.0, 0.0]), "inward");
    directions(Source::wall("x-").parallel([0.0, 1.0, 0.0]), "inward");
    directions(Source::walls().parallel([1.0, 0.0, 0.0]), "inward");
    directions(Source::volume().cone(0.3), "axis");
    // Light about any other axis would leave through the wall that it starts on.
    directions(Source::wall("x-").cosine_about([-1.0, 0.0, 0.0]), "normals");
    directions(Source::walls().cosine_about([0.0, 0.0, 1.0]), "normals");
}

#[test]
fn sources_whose_points_no_trial_would_find() {
    let almost_all = Region::rectangle((0.0, 0.0), (1.0, 1.0 - 1e-6));
    let enclosure = cube().paint("all", "x+", almost_all, white()).unwrap();
    let error = refused(&Experiment::new(&enclosure, Source::wall("x+")));
    assert!(matches!(error, ExperimentError::Source { source: 0, .. }));
    says(&error, &["source 0", "1e-4", "to see"]);
    for source in [Source::wall("all"), Source::walls()] {
        assert_eq!(Experiment::new(&enclosure, source).check(), Ok(()));
    }
    // A bent strip around a large square.
    let thin = 1e-6;
    let outline = [
        (0.0, 0.0),
        (1.0, 0.0),
        (1.0, thin),
        (thin, thin),
        (thin, 1.0),
        (0.0, 1.0),
    ];
    let strip = Enclosure::extruded(&outline, 1.0).unwrap().coated(white());
    let error = refused(&Experiment::new(&strip, Source::volume()));
    assert!(matches!(error, ExperimentError::Source { source: 0, .. }));
    says(&error, &["source 0", "1e-4", "bounding box"]);
    assert_eq!(Experiment::new(&strip, Source::walls()).check(), Ok(()));
}

#[test]
fn texts_without_a_source() {
    let text = Experiment::new(&cube(), Source::volume()).to_text();
    let (before, after) = text.split_once("[[experiment.sources]]").unwrap();
    let after = &after[after.find("[enclosure").unwrap()..];
    let text = format!("{before}sources = []\n{after}");
    let experiment = Experiment::from_text(&text, None).unwrap();
    let error = refused(&experiment);
    assert_eq!(error, ExperimentError::NoSource);
    says(&error, &["sources", "at least 1", "got 0"]);
}

#[test]
fn directions_of_any_length_are_accepted() {
    for length in [1e-200, 1e-10, 1.0, 1e10, 1e200] {
        let beam = Source::beam([0.0; 3], [0.0, length, length]);
        assert_eq!(Experiment::new(&cube(), beam).check(), Ok(()), "{length:e}");
    }
}

#[test]
fn time_grids_that_are_empty_or_backward() {
    for stop in [0.0, -1e-9, f64::NAN, f64::INFINITY] {
        let error = TimeGrid::new(stop, 10).unwrap_err();
        assert!(matches!(error, TimeGridError::Stop { .. }));
        says(&error, &["time grid", "positive", &stop.to_string()]);
    }
    let error = TimeGrid::new(1e-9, 0).unwrap_err();
    assert_eq!(error, TimeGridError::Bins { value: 0 });
    says(&error, &["time grid", "1 to 10000000", "got 0"]);
    assert!(matches!(
        TimeGrid::new(1e-9, usize::MAX),
        Err(TimeGridError::Bins { .. })
    ));
    assert_eq!(
        TimeGrid::from_edges(vec![]),
        Err(TimeGridError::Bins { value: 0 })
    );
    let error = TimeGrid::from_edges(vec![0.0, 2e-9, 1e-9]).unwrap_err();
    assert_eq!(
        error,
        TimeGridError::Order {
            edge: 2,
            before: 2e-9,
            value: 1e-9
        }
    );
    says(&error, &["edge 2", "above"]);
    says(
        &TimeGrid::from_edges(vec![1e-9, 2e-9]).unwrap_err(),
        &["first edge", "0 s"],
    );
    assert!(TimeGrid::from_edges(vec![0.0, f64::NAN]).is_err());
}

#[test]
fn runs_with_bad_numbers() {
    let experiment = Experiment::new(&cube(), Source::volume());
    let error = experiment.trace(0).run().unwrap_err();
    assert_eq!(error, RunError::Photons { value: 0 });
    says(&error, &["photons", "at least 1", "got 0"]);
    for (first, photons) in [
        (u64::MAX, 1),
        (1 << 61, 1),
        ((1 << 61) - 5, 6),
        (0, u64::MAX),
    ] {
        let error = experiment.trace(photons).from(first).run().unwrap_err();
        assert_eq!(error, RunError::Indices { first, photons });
        says(
            &error,
            &[
                "below 2^61",
                &format!("{photons} photons from index {first}"),
            ],
        );
    }
    assert!(experiment.trace(5).from((1 << 61) - 5).run().is_ok());
    for threads in [0, 5000] {
        let error = experiment.trace(10).threads(threads).run().unwrap_err();
        assert_eq!(error, RunError::Threads { value: threads });
        says(&error, &["threads", "1 to 4096", &threads.to_string()]);
    }
    for lanes in [0, 257] {
        let error = experiment.trace(10).lanes(lanes).run().unwrap_err();
        assert_eq!(error, RunError::Lanes { value: lanes });
        says(&error, &["lanes", "1 to 256", &lanes.to_string()]);
    }
    for relative in [0.0, -0.1, 1.0, f64::NAN] {
        let error = experiment
            .trace(10)
            .target("x-.incident", relative)
            .run()
            .unwrap_err();
        assert!(matches!(error, RunError::Target { .. }));
        says(&error, &["target", "1e-9", &relative.to_string()]);
    }
    for value in [0.0, -2.0, f64::NAN, f64::INFINITY] {
        let error = refused(&experiment.clone().path_limit(value));
        assert!(matches!(error, ExperimentError::PathLimit { .. }));
        says(&error, &["path limit", "positive", &value.to_string()]);
    }
}

#[test]
fn light_that_could_never_end() {
    let mirrors = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::mirror(1.0).unwrap());
    let experiment = Experiment::new(&mirrors, Source::volume());
    let error = refused(&experiment);
    assert_eq!(error, ExperimentError::Endless);
    says(
        &error,
        &[
            "every reflectance is 1",
            "no opening",
            "does not absorb",
            "path limit",
        ],
    );
    assert_eq!(experiment.path_limit(10.0).check(), Ok(()));
    let open = |enclosure: &Enclosure| Experiment::new(enclosure, Source::volume()).check();
    assert_eq!(open(&mirrors.clone().opened("x-").unwrap()), Ok(()));
    assert_eq!(
        open(&mirrors.clone().with_medium(Medium::new(1.0, 1e-3).unwrap())),
        Ok(())
    );
    let spot = Region::disk((0.0, 0.0), 0.01);
    assert_eq!(
        open(&mirrors.paint("spot", "x-", spot, white()).unwrap()),
        Ok(())
    );
}

#[test]
fn memory_limits_name_what_needs_most() {
    let experiment = Experiment::new(&cube(), Source::volume());
    let error = refused(
        &experiment
            .clone()
            .map("x-", (10, 10))
            .map("z+", (2000, 2000)),
    );
    let ExperimentError::Memory {
        allowed,
        largest_map,
        needed,
    } = &error
    else {
        panic!("{error:?}");
    };
    assert_eq!((*allowed, largest_map.as_deref()), (1 << 30, Some("z+")));
    assert!(*needed > 4_000_000 * 1024);
    says(&error, &["1073741824", "\"z+\""]);
    let error = refused(&experiment.clone().memory(100_000));
    assert!(matches!(
        error,
        ExperimentError::Memory {
            largest_map: None,
            allowed: 100_000,
            ..
        }
    ));
    says(&error, &["100000", "time grid"]);
    for cells in [(usize::MAX, usize::MAX), (0, 5), (200_000, 1)] {
        let error = refused(&experiment.clone().map("x-", cells).memory(u64::MAX));
        says(&error, &["\"x-\""]);
    }
    let error = refused(&experiment.map("x-", (2, 2)).map("x-", (3, 3)));
    assert!(matches!(error, ExperimentError::Map { cells: [3, 3], .. }));
    says(&error, &["\"x-\"", "one map"]);
}

/// The generator `SplitMix64` (Steele, Lea, Flood 2014).
struct Chance(u64);

impl Chance {
    fn below(&mut self, limit: usize) -> usize {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        usize::try_from((z ^ (z >> 31)) % limit.max(1) as u64).unwrap()
    }
}

fn saved() -> [Vec<u8>; 2] {
    let flat = cube()
        .paint(
            "spot",
            "x-",
            Region::disk((0.1, 0.1), 0.2),
            Coating::mirror(0.5).unwrap(),
        )
        .unwrap();
    let flat = Experiment::new(&flat, Source::volume())
        .and(Source::wall("spot"))
        .map("x-", (2, 2));
    let mesh = Enclosure::from_mesh(l_shape().mesh().clone())
        .unwrap()
        .coated(white());
    let mesh = Experiment::new(&mesh, Source::walls()).path_limit(9.0);
    [flat, mesh].map(|e| {
        e.time(TimeGrid::new(1e-8, 3).unwrap())
            .trace(200)
            .run()
            .unwrap()
            .to_bytes()
    })
}

#[test]
fn truncated_outcomes_are_refused() {
    for bytes in saved() {
        assert_eq!(Outcome::from_bytes(&bytes).unwrap().to_bytes(), bytes);
        for length in (0..bytes.len().min(4000)).chain((4000..bytes.len()).step_by(997)) {
            let error = Outcome::from_bytes(&bytes[..length]).expect_err("not whole");
            assert_eq!(error, LoadError::NotAnOutcome, "{length}");
        }
        let longer = [bytes.as_slice(), &[0]].concat();
        assert_eq!(Outcome::from_bytes(&longer), Err(LoadError::NotAnOutcome));
        says(&LoadError::NotAnOutcome, &["not a whole outcome"]);
    }
}

#[test]
fn damaged_outcomes_are_refused_without_a_panic() {
    let mut chance = Chance(5);
    for bytes in saved() {
        let whole = Outcome::from_bytes(&bytes).unwrap();
        // The description is a small part of the bytes and the most fragile: most changes go there.
        let head = bytes.len().min(1600);
        for round in 0..1500 {
            let mut broken = bytes.clone();
            for _ in 0..=chance.below(3) {
                let at = if round % 4 == 0 {
                    chance.below(bytes.len())
                } else {
                    chance.below(head)
                };
                match chance.below(3) {
                    0 => broken[at] = u8::try_from(chance.below(256)).unwrap(),
                    1 => broken[at] ^= 1 << chance.below(8),
                    _ => broken[at] = b"0123456789.-einaf\n[]\"="[chance.below(22)],
                }
            }
            // What is accepted is what was saved, or differs in what has no influence (white space, title, memory).
            if let Ok(outcome) = Outcome::from_bytes(&broken) {
                assert_eq!(outcome.totals(), whole.totals());
            }
        }
    }
}

#[test]
fn damaged_descriptions_are_refused_without_a_panic() {
    let experiment = Experiment::new(&cube(), Source::beam([0.0; 3], [0.0, 0.0, 1.0]))
        .map("x-", (2, 2))
        .time(TimeGrid::new(1e-8, 3).unwrap());
    let text = experiment.to_text();
    assert_eq!(Experiment::from_text(&text, None).as_ref(), Ok(&experiment));
    let mut chance = Chance(6);
    for _ in 0..3000 {
        let mut broken = text.clone().into_bytes();
        for _ in 0..=chance.below(4) {
            let at = chance.below(broken.len());
            match chance.below(3) {
                0 => broken[at] = b"0123456789.-einaf\n[]\"="[chance.below(22)],
                1 => drop(broken.remove(at)),
                _ => broken.insert(at, b"0123456789.-eninf\n[]"[chance.below(20)]),
            }
        }
        let Ok(broken) = String::from_utf8(broken) else {
            continue;
        };
        if let Ok(read) = Experiment::from_text(&broken, None) {
            // Numbers that came through unchecked until now are checked here.
            let _: Result<(), ExperimentError> = read.check();
        }
    }
    let older = text.replacen("albedra = 1", "albedra = 99", 1);
    says(
        &Experiment::from_text(&older, None).unwrap_err(),
        &["version", "got 99"],
    );
    assert!(Experiment::from_text("", None).is_err());
}

#[test]
fn totals_of_another_experiment_are_refused() {
    let run = |coating: f64| {
        let enclosure = cube().coated(Coating::lambertian(coating).unwrap());
        Experiment::new(&enclosure, Source::volume())
            .trace(100)
            .run()
            .unwrap()
    };
    let (mut ours, theirs) = (run(0.9), run(0.8));
    let error = Outcome::from_parts(ours.experiment(), theirs.totals().clone()).unwrap_err();
    assert_eq!(error, LoadError::Foreign);
    let error = ours.merge(&theirs).unwrap_err();
    says(&error, &["another experiment"]);
    let error = theirs
        .experiment()
        .trace(10)
        .continuing(&ours)
        .run()
        .unwrap_err();
    assert!(matches!(error, RunError::Merge(_)));
}

#[test]
fn numbers_without_sense_do_no_harm() {
    let experiment = Experiment::new(&cube(), Source::volume()).memory(u64::MAX);
    let outcome = experiment.trace(200).run().unwrap();
    assert_eq!(
        Outcome::from_bytes(&outcome.to_bytes()).as_ref(),
        Ok(&outcome)
    );
    for power in [0, 5, usize::MAX] {
        assert!(outcome.flight_moment(power).value.is_nan());
        assert!(outcome.first_flight_moment(power).value.is_nan());
    }
    // Totals that no run gives.
    let totals = outcome.totals();
    let groups = vec![[i128::MAX / 64; 64]; totals.groups().len()];
    let (history, outputs, seed) = (totals.history(), totals.outputs(), totals.seed());
    let (photons, counters) = (totals.photons().clone(), totals.counters());
    let totals = Totals::from_parts(history, outputs, seed, photons, groups, counters);
    let wild = Outcome::from_parts(&experiment, totals).unwrap();
    assert!(!wild.ledger().closes() && !wild.to_string().is_empty());
    assert!(wild.decay().energy[0].is_nan());
    assert!(wild.decay_time(Some((0.0, 1.0))).is_none());
}
