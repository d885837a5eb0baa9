"""`settlelab simulate`: a recording with known answers, or the sample study anew."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

import click

from settlelab.cli import console

ABOVE_ZERO = click.FloatRange(min=0, min_open=True)


@click.command("simulate")
@click.argument("folder", metavar="DIR", type=click.Path(path_type=Path, file_okay=False))
@click.option("--field-study", is_flag=True, help="Draw the sample study into the project DIR instead.")
@click.option("--particle", type=click.Choice(["grain", "sphere"]), default="grain", show_default=True)
@click.option("--number", type=click.IntRange(1, 50), default=3, show_default=True, help="Particles, dropped in turn.")
@click.option("--diameter", type=ABOVE_ZERO, default=4.0, show_default=True, help="Equivalent diameter, mm.")
@click.option("--density", type=ABOVE_ZERO, default=2600.0, show_default=True, help="Of the particles, kg/m3.")
@click.option(
    "--proportions",
    type=(ABOVE_ZERO, ABOVE_ZERO, ABOVE_ZERO),
    default=(1.0, 0.8, 0.6),
    show_default=True,
    metavar="A B C",
    help="Stretch of grains along three axes; 1 0.8 0.3 makes plates.",
)
@click.option("--glycerol", type=click.FloatRange(0, 100), default=70.0, show_default=True, help="Mass fraction, %.")
@click.option("--temperature", type=click.FloatRange(0, 40), default=21.0, show_default=True, help="Of the fluid, °C.")
@click.option(
    "--power-law",
    type=(ABOVE_ZERO, click.FloatRange(0.3, 1.0)),
    metavar="K N",
    help="A polymer fluid instead: consistency, Pa s^n, and flow index.",
)
@click.option("--bore", type=ABOVE_ZERO, default=100.0, show_default=True, help="Inner diameter of the column, mm.")
@click.option("--mm-per-px", type=ABOVE_ZERO, default=0.2, show_default=True, help="Scale in the plane of fall.")
@click.option("--frame-rate", type=ABOVE_ZERO, default=100.0, show_default=True, help="Of the camera, Hz.")
@click.option("--exposure", type=ABOVE_ZERO, default=1.0, show_default=True, help="Exposure, ms.")
@click.option(
    "--size", type=(click.IntRange(64, 4096),) * 2, default=(544, 800), show_default=True, help="Picture, px."
)
@click.option("--gravity", type=click.Choice(["down", "up", "left", "right"]), default="down", show_default=True)
@click.option("--depth", type=float, default=-400.0, show_default=True, help="Release, mm below the top of the view.")
@click.option("--dust", type=click.IntRange(0, 200), default=4, show_default=True, help="Specks in the fluid.")
@click.option("--bubbles", type=click.IntRange(0, 20), default=0, show_default=True, help="Rising air bubbles.")
@click.option(
    "--noise", type=click.FloatRange(0, 50), default=0.4, show_default=True, help="Sensor noise, grey levels."
)
@click.option("--suffix", type=click.Choice([".mp4", ".avi", ".mkv"]), default=".mp4", show_default=True)
@click.option("--seed", type=click.IntRange(0), default=1, show_default=True)
def command(
    *,
    folder: Path,
    field_study: bool,
    particle: Literal["grain", "sphere"],
    number: int,
    diameter: float,
    density: float,
    proportions: tuple[float, float, float],
    glycerol: float,
    temperature: float,
    power_law: tuple[float, float] | None,
    bore: float,
    mm_per_px: float,
    frame_rate: float,
    exposure: float,
    size: tuple[int, int],
    gravity: Literal["down", "up", "left", "right"],
    depth: float,
    dust: int,
    bubbles: int,
    noise: float,
    suffix: Literal[".mp4", ".avi", ".mkv"],
    seed: int,
) -> None:
    """Draw a recording with known answers. Camera, column, fluid and particles are yours to choose.

    Writes the video, truth.csv, and a study.toml with bench tables, so that `settlelab run DIR` works on it. All that
    is written says that it is simulated.
    """
    from settlelab.simulate import Camera, Column, Order, draw_field_study, draw_order  # heavy: when the command runs
    from settlelab.units import to_si

    with console.progress("drawn") as progress:
        if field_study:
            console.written(draw_field_study(folder, progress))
            return
        order = Order(
            particle=particle,
            number=number,
            diameter=to_si(diameter, "mm"),
            density=density,
            proportions=proportions,
            mass_fraction=to_si(glycerol, "%"),
            temperature=to_si(temperature, "°C"),
            power_law=power_law,
            camera=Camera(
                width=size[0],
                height=size[1],
                metre_per_px=to_si(mm_per_px, "mm"),
                frame_rate=frame_rate,
                exposure=to_si(exposure, "ms"),
                gravity=gravity,
                read_noise=noise,
            ),
            column=Column(bore=to_si(bore, "mm"), surface=to_si(min(depth, 0.0) - 20.0, "mm"), release_tube=depth > 0),
            depth=to_si(depth, "mm"),
            dust=dust,
            bubbles=bubbles,
            suffix=suffix,
            seed=seed,
        )
        console.written(draw_order(order, folder, progress))
