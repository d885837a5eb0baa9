"""`settlelab predict`: calibrated velocities for given sizes, densities and fluids."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from settlelab.cli import console

if TYPE_CHECKING:
    import pandas as pd

    from settlelab.calibrate import Card
    from settlelab.calibrate.fluids import SettlingFluid


def _si(dimension: str) -> Callable[[str], float]:
    """Reads an option such as `2.5 mm` in SI; text that is no such quantity is wrong usage."""

    def quantity(text: str) -> float:
        from settlelab.units import parse_quantity

        try:
            return parse_quantity(text, dimension).value
        except ValueError as error:
            raise click.BadParameter(f'"{text}" is not {error}') from error

    return quantity


def _named(text: str) -> tuple[str, float]:
    """Reads an option such as `corey_shape_factor=0.6`."""
    name, _, number = text.partition("=")
    return name.strip(), _si("1")(number)


@click.command("predict")
@click.argument("card", type=click.Path(path_type=Path))
@click.option(
    "--diameter",
    "diameters",
    multiple=True,
    type=_si("m"),
    help='Equivalent diameter such as "2.5 mm"; may be repeated [default: sieve openings around the calibration].',
)
@click.option(
    "--particles",
    type=click.Path(path_type=Path),
    help="Table with diameter [mm], and particle density and shape descriptors where they differ.",
)
@click.option("--particle-density", type=_si("kg/m3"), help="[default: the median of the calibration, and said so]")
@click.option("--sphericity", type=_si("1"), help="Of all particles [default: the median of the calibration].")
@click.option(
    "--descriptor", "descriptors", multiple=True, type=_named, metavar="NAME=NUMBER", help="Any other shape descriptor."
)
@click.option("--lot", help="Lot, where the card has coefficients of each lot.")
@click.option("--fluid", help="A fluid of the calibration by its name.")
@click.option("--fluid-density", type=_si("kg/m3"), help='Such as "1100 kg/m3".')
@click.option("--viscosity", type=_si("Pa s"), help='Such as "5 mPa s".')
@click.option("--consistency", type=_si("Pa s^n"), help="Of a power-law or Herschel-Bulkley fluid.")
@click.option("--flow-index", type=_si("1"))
@click.option("--yield-stress", type=_si("Pa"))
@click.option("--liquid", type=click.Choice(["water", "glycerol-water"]), help="Properties in print, by temperature.")
@click.option("--temperature", type=_si("K"), help='Such as "21.5 °C".')
@click.option("--mass-fraction", type=_si("1"), help='Of glycerol, such as "62 %".')
@click.option(
    "--annular-velocity",
    type=_si("m/s"),
    help='Of mud in a vertical annulus, such as "0.7 m/s": adds transport ratios.',
)
@click.option(
    "--inclination",
    type=click.FloatRange(0, 180),
    default=0.0,
    help="Of that hole from vertical, in degrees [default: 0].",
)
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for prediction.csv and prediction.svg, and annulus.csv where asked for.",
)
def command(card: Path, particles: Path | None, lot: str | None, out: Path | None, **given: Any) -> None:  # noqa: ANN401 (options of several types)
    """Predict velocities by a calibration card. For other sizes and fluids, with 95 % intervals."""
    from settlelab.calibrate import ANNULUS_CAUTIONS, in_annulus, predict, read_card

    law = read_card(card)
    fluid = _fluid(law, given)
    sizes, told = _particles(law, particles, lot, given)
    table = predict(
        law,
        diameter=sizes.pop("equivalent_diameter").to_numpy(),
        particle_density=sizes.pop("particle_density").to_numpy(),
        fluid_density=fluid.density,
        rheology=fluid.rheology,
        descriptors={name: sizes[name].to_numpy() for name in sizes.columns},
    )
    annulus = None
    if given["annular_velocity"] is not None:
        annulus = in_annulus(table, given["annular_velocity"], given["inclination"])
    click.echo(f"{law.name}, in {fluid.told}\n")
    _show(table)
    if annulus is not None:
        _show_annulus(annulus)
    if out is not None:
        console.written(_write(table, annulus, law, out))
    console.doubts([*told, *law.cautions, *(ANNULUS_CAUTIONS if annulus is not None else ())])


def _fluid(card: Card, given: dict[str, Any]) -> SettlingFluid:
    """The fluid that the options describe, in one of three ways."""
    from settlelab.calibrate.fluids import SettlingFluid, fluid_in_print, fluid_of_card
    from settlelab.physics.rheology import Rheology

    stated = [name for name in ("fluid_density", "viscosity", "consistency", "flow_index") if given[name] is not None]
    if sum([bool(given["fluid"]), bool(stated), bool(given["liquid"])]) > 1:
        raise click.UsageError("describe the fluid in one way: --fluid, --liquid, or density and viscosity")
    if given["liquid"]:
        if given["temperature"] is None:
            raise click.UsageError("--liquid needs --temperature")
        if given["liquid"] == "glycerol-water" and given["mass_fraction"] is None:
            raise click.UsageError("glycerol-water needs --mass-fraction")
        return fluid_in_print(given["liquid"], given["temperature"], given["mass_fraction"] or 0.0)
    if not stated:
        return fluid_of_card(card, given["fluid"] or "")
    power_law = given["consistency"] is not None and given["flow_index"] is not None
    if given["fluid_density"] is None or not (power_law or given["viscosity"] is not None):
        raise click.UsageError("a fluid needs --fluid-density and --viscosity, or --consistency and --flow-index")
    rheology = Rheology(
        consistency=given["consistency"] if power_law else given["viscosity"],
        flow_index=given["flow_index"] if power_law else 1.0,
        yield_stress=given["yield_stress"] or 0.0,
    )
    return SettlingFluid(density=given["fluid_density"], rheology=rheology, told="a fluid of the stated properties")


def _particles(
    card: Card, table: Path | None, lot: str | None, given: dict[str, Any]
) -> tuple[pd.DataFrame, list[str]]:
    """Sizes, densities and descriptors, and what was taken for granted."""
    import pandas as pd

    from settlelab.calibrate import ladder, read_sizes

    told: list[str] = []
    if table is not None:
        if given["diameters"]:
            raise click.UsageError("give either --diameter or --particles, not both")
        sizes = read_sizes(table, card.law.needs)
    else:
        sizes = pd.DataFrame({"equivalent_diameter": given["diameters"] or ladder(card)})
    if not (given["diameters"] or table):
        told.append("Sizes are sieve openings (ASTM E11), taken as diameters of the sphere of equal volume.")
    typed = {
        **dict(given["descriptors"]),
        "sphericity": given["sphericity"],
        "particle_density": given["particle_density"],
    }
    if "lot" in card.law.needs:
        if lot not in card.law.lots:
            raise click.UsageError(f"--lot must be one of {', '.join(card.law.lots)}")
        typed["lot"] = float(card.law.lots.index(lot))
    for name, key in {"particle_density": "particle_density_kg_m3", **{need: need for need in card.law.needs}}.items():
        if name in sizes.columns or name == "density_ratio":
            continue
        if typed.get(name) is None:
            typed[name] = card.ranges[key].median
            unit = " kg/m3" if name == "particle_density" else ""
            told.append(
                f"The {name.replace('_', ' ')} is not given: {typed[name]:g}{unit}, the median of the calibration."
            )
        sizes[name] = typed[name]
    return sizes, told


def _show(table: pd.DataFrame) -> None:
    click.echo("diameter   velocity   95 %, the law    95 %, one particle      Re")
    click.echo("      mm       mm/s             mm/s                mm/s")
    for row in table.to_dict("records"):
        law, single = (
            f"{1e3 * row[f'{kind}_low']:.4g} to {1e3 * row[f'{kind}_high']:.4g}"
            for kind in ("confidence", "prediction")
        )
        mark = f"  outside the calibration: {_spoken(row['outside'])}" if row["outside"] else ""
        click.echo(
            f"{1e3 * row['equivalent_diameter']:8.4g} {1e3 * row['velocity']:10.4g} {law:>16} {single:>19}"
            f" {row['reynolds']:7.3g}{mark}"
        )
    click.echo()


def _show_annulus(table: pd.DataFrame) -> None:
    from settlelab.calibrate.annulus import USUAL_RATIO

    click.echo(f"in a vertical annulus at {table['annular_velocity'][0]:.4g} m/s")
    click.echo("diameter       slip       rise   transport    95 %, one particle")
    click.echo("      mm       mm/s       mm/s       ratio")
    for row in table.to_dict("records"):
        spread = f"{row['transport_ratio_low']:.2f} to {row['transport_ratio_high']:.2f}"
        low = row["transport_ratio_low"] < USUAL_RATIO
        click.echo(
            f"{1e3 * row['equivalent_diameter']:8.4g} {1e3 * row['slip_velocity']:10.4g}"
            f" {1e3 * row['rise_velocity']:10.4g} {row['transport_ratio']:11.2f} {spread:>21}"
            + (f"  may fall below {USUAL_RATIO:g}" if low else "")
        )
    click.echo()


def _spoken(outside: str) -> str:
    endings = ("_mm", "_kg_m3")
    names = [
        next((name.removesuffix(end) for end in endings if name.endswith(end)), name) for name in outside.split(";")
    ]
    return ", ".join("Reynolds number" if name == "reynolds" else name.replace("_", " ") for name in names)


def _write(table: pd.DataFrame, annulus: pd.DataFrame | None, card: Card, out: Path) -> list[Path]:
    from settlelab.calibrate import AnnulusRow, Prediction
    from settlelab.report import write_csv
    from settlelab.report.drawing import picture
    from settlelab.report.predicted import predicted_velocities

    chart = out / "prediction.svg"
    written = [write_csv(table, Prediction, out / "prediction.csv"), chart]
    chart.write_bytes(picture(predicted_velocities(table, title=card.name), "svg"))
    if annulus is not None:
        written.append(write_csv(annulus, AnnulusRow, out / "annulus.csv"))
    return written
