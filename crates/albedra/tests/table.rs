//! The printed table: its width, and what it says.

use albedra::{Coating, Enclosure, Experiment, Region, Source};

#[test]
fn fits_80_columns_and_says_what_the_bracket_is() -> Result<(), Box<dyn std::error::Error>> {
    let chamber = Enclosure::cuboid([1.2e-6, 0.8e-6, 0.5e-6])?
        .coated(Coating::lambertian(0.97)?)
        .with_opening(
            "a name that is much too long for its column",
            "x+",
            Region::disk((0.0, 0.0), 1e-9),
        )?;
    let outcome = Experiment::new(&chamber, Source::point([0.0; 3]).flux(1e12))
        .title("invented")
        .trace(1000)
        .run()?;
    let table = outcome.to_string();
    for line in table.lines() {
        assert!(
            line.chars().count() <= 80,
            "{} columns: {line}",
            line.chars().count()
        );
    }
    for part in [
        "standard uncertainty of the simulation alone",
        "closes",
        "95 %",
        "IEC 62471",
    ] {
        assert!(table.contains(part), "{part} is missing in\n{table}");
    }
    Ok(())
}

#[test]
fn tells_no_decay_time_where_the_energy_does_not_fall() -> Result<(), Box<dyn std::error::Error>> {
    let chamber = Enclosure::cuboid([1.0; 3])?.coated(Coating::mirror(1.0)?);
    let outcome = Experiment::new(&chamber, Source::volume())
        .path_limit(100.0)
        .trace(1000)
        .run()?;
    assert_eq!(outcome.decay_time(None), None);
    let table = outcome.to_string();
    assert!(
        !table.contains("NaN") && !table.contains("one exponential"),
        "{table}"
    );
    Ok(())
}
