//! Where all energy went, for many random experiments: sums close in integers, and outputs agree with each other.

use albedra::{Coating, Enclosure, Experiment, Medium, Outcome, Region, Source, TimeGrid};
use proptest::prelude::*;

/// Quanta of a photon's energy.
const ONE: i128 = 1 << 60;

#[derive(Clone, Debug)]
enum Body {
    Cuboid([f64; 3]),
    Prism(u32, f64, f64),
    /// Distances of the corners from the origin, at equal angles: any of them may be re-entrant.
    Star(Vec<f64>, f64),
}

impl Body {
    fn build(&self, scale: f64) -> Enclosure {
        match self {
            Self::Cuboid(size) => Enclosure::cuboid(size.map(|x| x * scale)).unwrap(),
            Self::Prism(sides, radius, height) => {
                Enclosure::prism(*sides, radius * scale, height * scale).unwrap()
            }
            Self::Star(radii, height) => {
                let corner = |(k, radius): (usize, &f64)| {
                    let angle = std::f64::consts::TAU * k as f64 / radii.len() as f64;
                    (
                        scale * radius * turn(angle).0,
                        scale * radius * turn(angle).1,
                    )
                };
                let outline: Vec<_> = radii.iter().enumerate().map(corner).collect();
                Enclosure::extruded(&outline, height * scale).unwrap()
            }
        }
    }
}

/// Cosine and sine to some digits; what they are exactly is of no concern here.
fn turn(angle: f64) -> (f64, f64) {
    let (mut x, mut y, steps) = (1.0, 0.0, 4096.0);
    let step = angle / steps;
    for _ in 0..4096 {
        (x, y) = (x - step * y, y + step * x);
        let length = (x * x + y * y).sqrt();
        (x, y) = (x / length, y / length);
    }
    (x, y)
}

#[derive(Clone, Debug)]
struct Case {
    body: Body,
    scale: f64,
    coatings: Vec<(f64, f64)>,
    opening: bool,
    paint: bool,
    opened_wall: bool,
    /// Absorption in units of one over the mean chord, and group index.
    medium: (f64, f64),
    /// Path limit in mean chords.
    limit: Option<f64>,
    sources: Vec<u8>,
    own_time: Option<(f64, usize)>,
    seed: u64,
    photons: u64,
}

fn share() -> impl Strategy<Value = f64> {
    prop_oneof![1 => Just(0.0), 1 => Just(1.0), 4 => 0.0..1.0]
}

fn length() -> impl Strategy<Value = f64> {
    0.1..2.0
}

fn body() -> impl Strategy<Value = Body> {
    prop_oneof![
        prop::array::uniform3(length()).prop_map(Body::Cuboid),
        (3_u32..9, length(), length()).prop_map(|(n, r, h)| Body::Prism(n, r, h)),
        (prop::collection::vec(length(), 4..9), length()).prop_map(|(r, h)| Body::Star(r, h)),
    ]
}

fn case() -> impl Strategy<Value = Case> {
    let reflectance = prop_oneof![1 => Just(0.0), 1 => Just(1.0), 6 => 0.0..0.99];
    let medium = (prop_oneof![Just(0.0), 0.0..3.0], 1.0..2.0);
    (
        (body(), prop::sample::select(vec![1e-6, 1.0, 1e4])),
        prop::collection::vec((reflectance, share()), 11),
        (any::<bool>(), any::<bool>(), any::<bool>()),
        medium,
        prop::option::of(0.5..40.0),
        prop::collection::vec(0_u8..5, 1..4),
        prop::option::of((0.1..60.0, 1_usize..40)),
        (any::<u64>(), 1_u64..300),
    )
        .prop_map(
            |((body, scale), coatings, flags, medium, limit, sources, own_time, run)| Case {
                body,
                scale,
                coatings,
                opening: flags.0,
                paint: flags.1,
                opened_wall: flags.2,
                medium,
                limit,
                sources,
                own_time,
                seed: run.0,
                photons: run.1,
            },
        )
}

impl Case {
    fn experiment(&self) -> Experiment {
        let mut enclosure = self.body.build(self.scale);
        let chord = enclosure.mean_chord();
        let walls = enclosure.walls();
        // Light can always leave: at least one wall absorbs.
        for (wall, &(reflectance, share)) in walls.iter().zip(self.coatings.iter().cycle()) {
            let coating = Coating::mixed(reflectance, share).unwrap();
            enclosure = enclosure.with_coating(&wall.name, coating).unwrap();
        }
        enclosure = enclosure
            .with_coating(&walls[1].name, Coating::lambertian(0.5).unwrap())
            .unwrap();
        // Rectangular walls, whose centroid is in their middle.
        let wall = walls[0].name.clone();
        let small = 0.04 * self.scale;
        if self.paint {
            let region = Region::rectangle((0.0, 0.0), (small, small));
            enclosure = enclosure
                .paint("paint", &wall, region, Coating::mirror(0.7).unwrap())
                .unwrap();
        }
        if self.opening {
            let region = Region::disk((0.3 * small, 0.0), 0.5 * small);
            enclosure = enclosure.with_opening("opening", &wall, region).unwrap();
        }
        if self.opened_wall {
            enclosure = enclosure.opened(&walls[2].name).unwrap();
        }
        let medium = Medium::new(self.medium.1, self.medium.0 / chord).unwrap();
        enclosure = enclosure.with_medium(medium);
        let mut sources = self.sources.iter().map(|kind| match kind {
            0 => Source::walls(),
            1 => Source::point([0.0, 0.0, 0.0]).flux(2.5),
            2 => Source::volume().flux(0.3),
            3 => Source::wall(wall.clone()).cone(0.6).flux(1e-3),
            _ => Source::beam([0.0, 0.0, 0.0], [0.3, 0.2, 1.0])
                .radius(1e-3 * self.scale)
                .divergence(0.1),
        });
        let mut experiment = Experiment::new(&enclosure, sources.next().unwrap());
        for source in sources {
            experiment = experiment.and(source);
        }
        if let Some(chords) = self.limit {
            experiment = experiment.path_limit(chords * chord);
        }
        if let Some((chords, bins)) = self.own_time {
            experiment =
                experiment.time(TimeGrid::new(chords * chord / medium.speed(), bins).unwrap());
        }
        experiment
    }
}

fn sum(outcome: &Outcome, cell: usize) -> i128 {
    outcome.totals().groups()[cell].iter().sum()
}

#[track_caller]
fn near(a: f64, b: f64, slack: f64) {
    assert!((a - b).abs() <= slack, "{a} and {b} differ by {:e}", a - b);
}

/// Cells of a row: incident, lost, direct. After the rows: medium, cut, untracked, roulette.
fn books_balance(case: &Case, outcome: &Outcome) {
    let ledger = outcome.ledger();
    assert!(ledger.closes(), "open by {} quanta", ledger.open_quanta);
    let counters = outcome.counters();
    assert_eq!(counters.untracked, 0);
    assert_eq!(counters.flights, counters.strikes);
    assert!(counters.strikes >= outcome.photons());
    assert_eq!(ledger.untracked.value, 0.0);
    let rows = outcome.rows();
    let emitted = ONE * i128::from(outcome.photons());
    let (mut lost, mut direct) = (0, 0);
    for (k, row) in rows.iter().enumerate() {
        let [incident, here, straight] = [0, 1, 2].map(|cell| sum(outcome, 3 * k + cell));
        assert!(0 <= here && here <= incident, "{}", row.name);
        assert!(0 <= straight && straight <= incident, "{}", row.name);
        assert!(!row.is_opening() || here == incident, "{}", row.name);
        lost += here;
        direct += straight;
    }
    let [medium, cut, untracked, roulette] =
        [0, 1, 2, 3].map(|cell| sum(outcome, 3 * rows.len() + cell));
    assert_eq!(emitted, lost + medium + cut + untracked + roulette);
    assert!(medium >= 0 && cut >= 0 && untracked == 0);
    assert!(case.limit.is_some() || cut == 0);
    if case.medium.0 == 0.0 {
        assert_eq!((medium, direct), (0, emitted));
    } else {
        assert!(direct <= emitted);
    }
}

fn outputs_agree(case: &Case, outcome: &Outcome) {
    let (ledger, watts) = (outcome.ledger(), outcome.watts());
    let tiny = 1e-13 * watts;
    let fluxes = outcome.fluxes();
    let total = |f: &dyn Fn(&albedra::Flux) -> f64| fluxes.iter().map(f).sum::<f64>();
    near(
        total(&|flux| flux.absorbed.value),
        ledger.absorbed.value,
        tiny,
    );
    near(
        total(&|flux| flux.escaped.value),
        ledger.escaped.value,
        tiny,
    );
    for (row, flux) in outcome.rows().iter().zip(&fluxes) {
        let rest = flux.incident.value - flux.absorbed.value - flux.escaped.value;
        near(
            flux.reflected.value,
            rest,
            1e-13 * (watts + flux.incident.value),
        );
        assert!(flux.direct.value <= flux.incident.value);
        if row.is_opening() {
            assert_eq!((flux.reflected.value, flux.absorbed.value), (0.0, 0.0));
            assert_eq!(flux.escaped.value, flux.incident.value);
        } else {
            assert_eq!(flux.escaped.value, 0.0);
        }
        let exposure = outcome.irradiance(&row.name).unwrap().value * row.area;
        near(
            exposure,
            flux.incident.value,
            1e-13 * (watts + flux.incident.value),
        );
    }
    near(
        total(&|flux| flux.incident.value) / watts,
        outcome.mean_strikes().value,
        1e-12 * outcome.mean_strikes().value,
    );
    let stored = outcome.stored_energy().value;
    let speed = albedra::SPEED_OF_LIGHT / case.medium.1;
    near(
        outcome.mean_path().value * watts / speed,
        stored,
        1e-13 * stored,
    );
}

fn curves_agree(case: &Case, outcome: &Outcome) {
    let (decay, off, on) = (outcome.decay(), outcome.switch_off(), outcome.switch_on());
    assert_eq!(decay.energy[0], outcome.watts());
    assert_eq!(on.energy[0], 0.0);
    // Fewer photons have no uncertainty to speak of.
    assert_eq!(
        decay.u[0],
        if outcome.photons() < 128 {
            f64::INFINITY
        } else {
            0.0
        }
    );
    let stored = outcome.stored_energy().value;
    if case.medium.0 == 0.0 {
        near(off.energy[0], stored, 1e-9 * stored);
    }
    for k in 0..off.energy.len() {
        near(
            off.energy[k] + on.energy[k],
            off.energy[0],
            1e-12 * off.energy[0],
        );
    }
    // Energy inside is that of living photons; it can only rise when roulette gives some of them more weight.
    assert!(decay.energy.iter().all(|&energy| energy >= 0.0));
    let games = outcome.totals().groups()[3 * outcome.rows().len() + 3]
        .iter()
        .any(|&sum| sum != 0);
    for pair in decay.energy.windows(2) {
        assert!(pair[0] >= pair[1] || games, "{pair:?}");
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn random_experiments_account_for_all_energy(case in case()) {
        let outcome = case.experiment().trace(case.photons).seed(case.seed).threads(1).run().unwrap();
        prop_assert_eq!(outcome.photons(), case.photons);
        books_balance(&case, &outcome);
        outputs_agree(&case, &outcome);
        curves_agree(&case, &outcome);
    }
}

#[test]
fn energy_rises_only_by_roulette() {
    // Few strikes: no photon is light enough to play, so the curve cannot rise.
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::lambertian(0.9).unwrap());
    let experiment = Experiment::new(&cube, Source::walls()).path_limit(5.0);
    let outcome = experiment
        .time(TimeGrid::new(20e-9, 101).unwrap())
        .trace(2000)
        .run()
        .unwrap();
    assert_eq!(outcome.ledger().roulette.value, 0.0);
    let energy = outcome.decay().energy;
    assert!(energy.windows(2).all(|pair| pair[0] >= pair[1]));
    assert!(outcome.ledger().cut.value > 0.1 && outcome.ledger().closes());
}

#[test]
fn losses_far_below_a_quantum_of_energy_still_close() {
    // Walls that absorb 1e-16 a strike, for which a strike limit has to end the photons.
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::mirror(1.0 - 1.1e-16).unwrap());
    let experiment = Experiment::new(&cube, Source::volume()).path_limit(3000.0);
    let outcome = experiment.trace(64).run().unwrap();
    assert!(outcome.ledger().closes());
    let absorbed = outcome.ledger().absorbed.value;
    // About 4500 strikes of 1.1e-16 each.
    assert!((3e-13..8e-13).contains(&absorbed), "{absorbed:e}");
}

#[test]
fn an_opening_takes_its_walls_place_under_its_own_name() {
    let white = Coating::lambertian(0.5).unwrap();
    let cube = Enclosure::cuboid([1.0; 3]).unwrap().coated(white);
    let opened = cube.clone().opened_as("exit", "x+").unwrap();
    let experiment = Experiment::new(&opened, Source::wall("exit")).map("x+", (2, 2));
    let outcome = experiment.trace(6400).run().unwrap();
    let flux = outcome.flux("exit").unwrap();
    assert!(flux.escaped.value > 0.0 && flux.escaped == flux.incident);
    assert!(outcome.flux("x+").is_err());
    let on_map: f64 = outcome.map("x+").unwrap().irradiance.iter().sum::<f64>() * 0.25;
    assert!((on_map / flux.incident.value - 1.0).abs() < 1e-12);
    let text = experiment.to_text();
    assert_eq!(Experiment::from_text(&text, None).unwrap(), experiment);
    // A wall that is coated again has its own name again.
    let closed = opened.with_coating("exit", white).unwrap();
    assert_eq!(closed, cube);
}

#[test]
fn light_that_hardly_ends_is_refused() {
    let spot = albedra::Region::disk((0.0, 0.0), 1e-6);
    let mirror = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::mirror(1.0).unwrap())
        .with_opening("spot", "x+", spot)
        .unwrap();
    let experiment = Experiment::new(&mirror, Source::volume());
    let error = experiment.check().unwrap_err();
    assert!(matches!(error, albedra::ExperimentError::NearlyEndless { strikes } if strikes > 1e11));
    assert!(error.to_string().contains("set a path limit"), "{error}");
    assert!(experiment.path_limit(10.0).check().is_ok());
}
