//! A calibration chamber with a sample and a detector port; all numbers are invented.
#![expect(clippy::print_stdout, reason = "an example shows what it found")]

use albedra::{Coating, Enclosure, Experiment, Region, Source, TimeGrid};

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let white = Coating::lambertian(0.97)?;
    let sample = Region::rectangle((0.0, 0.0), (0.1, 0.1));
    let chamber = Enclosure::cuboid([1.2, 0.8, 0.5])?
        .coated(white)
        .with_coating("z-", Coating::mixed(0.90, 0.3)?)?
        .paint("sample", "y+", sample, Coating::lambertian(0.6)?)?
        .with_opening("detector", "x+", Region::disk((0.0, 0.0), 0.05))?;
    let lamp = Source::point([0.2, 0.0, 0.0]).flux(5.0);
    let outcome = Experiment::new(&chamber, lamp)
        .title("calibration chamber (invented)")
        .time(TimeGrid::new(400e-9, 200)?)
        .map("z-", (24, 16))
        .trace(1_000_000)
        .seed(7)
        .run()?;
    println!("{outcome}");
    Ok(())
}
