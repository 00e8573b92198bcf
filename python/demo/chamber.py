"""A calibration chamber for leaf samples, from its drawing to pictures. Everything in it is invented."""

import argparse
from pathlib import Path

import matplotlib

matplotlib.use("Agg")

import albedra as al

HERE = Path(__file__).resolve().parent

# All invented: a white paint, a duller one on the floor, a leaf, and the numbers below.
WHITE = al.Coating.lambertian(0.95)
FLOOR = al.Coating.mixed(0.85, specular_share=0.2)
LEAF = al.Coating.lambertian(0.45)

SAMPLE_AT = (0.36, 0.09, 0.0)  # m, in the leg that the lamp cannot see
LAMP_AT = (0.15, 0.31, 0.09)  # m, round the corner


def build() -> al.Experiment:
    """Put chamber, sample, detector and lamp together."""
    chamber = (
        al.Enclosure.load(HERE / "chamber.obj", unit="mm", coating=WHITE, coatings={"floor": FLOOR})
        .paint("leaf", wall="floor", region=al.Region.disk((0, 0), 0.020, at=SAMPLE_AT), coating=LEAF)
        .with_opening("detector", wall="right", region=al.Region.disk((0, 0.03), 0.010))
    )
    lamp = al.Source.point(LAMP_AT, axis=(0, 1, 0), flux=3.0)
    return al.Experiment(
        chamber,
        lamp,
        time=al.TimeGrid(stop=80e-9, bins=160),
        maps={"floor": (42, 36)},
        title="leaf calibration chamber – INVENTED: geometry, coatings and lamp are made up",
    )


def main() -> None:
    """Trace, print, draw and save."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--photons", type=int, default=250_000, help="photons to trace")
    parser.add_argument("--seed", type=int, default=7, help="seed of the run")
    parser.add_argument(
        "--out", type=Path, default=HERE.parents[1] / "target" / "demo", help="folder of the results"
    )
    arguments = parser.parse_args()

    experiment = build()
    print(f"chamber.obj (invented): {experiment.enclosure!r}")
    print(f"tracing {arguments.photons} photons; Ctrl-C stops and shows what is done", flush=True)
    try:
        result = experiment.trace(arguments.photons, seed=arguments.seed, progress=True)
    except al.Interrupted as stopped:
        if stopped.result is None:
            raise
        result = stopped.result
    print(f"\n{result}\n")

    leaf, port = result.flux["leaf"], result.flux["detector"]
    print(f"leaf: irradiance {result.irradiance['leaf']}, straight from the lamp {leaf.direct}")
    share = result.ratio("detector.escaped", "ledger.emitted")
    print(f"detector: {port.escaped} escapes, {share} of the lamp's flux")

    arguments.out.mkdir(parents=True, exist_ok=True)
    for kind in ("decay", "flux", "map"):
        result.plot(kind).figure.savefig(arguments.out / f"{kind}.png", dpi=150)
    result.save(arguments.out / "outcome.nc")
    assert al.load(arguments.out / "outcome.nc") == result
    print(f"\nIn {arguments.out}: decay.png, flux.png, map.png, and outcome.nc for albedra.load.")
    print(
        "These are estimates for design, not a hazard assessment: exposure limits and classification follow\n"
        "IEC 60825-1 and IEC 62471, local codes, and the judgement of a qualified safety officer."
    )


if __name__ == "__main__":
    main()
