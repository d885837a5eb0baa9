"""A whole simulated study: recordings, study.toml and bench tables as a lab would hand them in, and the truth apart."""

from __future__ import annotations

import csv
import json
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

import numpy as np
import pandas as pd

from settlelab.simulate.backdrop import to_pixels
from settlelab.simulate.bench import PARTICLE_HEADINGS, VISCOMETER_HEADINGS, Bench, Instruments, TestFluid
from settlelab.simulate.film import DropTruth, recording
from settlelab.simulate.grains import Sphere
from settlelab.simulate.scene import Particle, Scene
from settlelab.simulate.write import turned_point
from settlelab.units import with_headings

SIMULATED = "Simulated: drawn by `settlelab simulate` in an invented scenario. No grain of it was ever dropped."


@dataclass(frozen=True, slots=True, kw_only=True)
class Take:
    """One recording of a study."""

    video: str  # file name
    fluid: str  # name of a fluid of the study
    scene: Scene
    scale: Literal["typed", "marks"] = "typed"  # whether the study states the scale or two marks in the picture


@dataclass(frozen=True, slots=True, kw_only=True)
class SimulatedStudy:
    """A study before it is drawn. The first take's camera and column become [camera] and [column]."""

    name: str
    fluids: tuple[TestFluid, ...]
    cuttings: tuple[Particle, ...]
    spheres: tuple[Particle, ...]  # the control spheres
    takes: tuple[Take, ...]
    heading: tuple[tuple[str, str], ...] = ()  # further keys of [study]
    report: tuple[tuple[str, str], ...] = ()  # keys of [report]


def draw_study(
    study: SimulatedStudy,
    tables: Path,
    videos: Path,
    seed: int,
    *,
    instruments: Instruments | None = None,
    progress: Callable[[int, int], object] | None = None,
) -> tuple[pd.DataFrame, list[Path]]:
    """Draw the recordings into `videos` and write study.toml and the bench tables into `tables`.

    Parameters
    ----------
    study : SimulatedStudy
        What to draw.
    tables, videos : Path
        Folders, made where missing; they may be the same.
    seed : int
        Seed of noise, dust and readings; the same study and seed give the same bytes with the same OpenCV.
    instruments : Instruments, optional
        Standard uncertainties of the bench.
    progress : callable, optional
        Called with the number of recordings drawn and of all, after each.

    Returns
    -------
    truth : pandas.DataFrame
        `recording` (as study.toml names it) and the columns of `DropTruth` in SI, one row per drop.
    written : list of Path
        Every file.

    Raises
    ------
    RecordingError
        A video cannot be written.
    """
    tables.mkdir(parents=True, exist_ok=True)
    videos.mkdir(parents=True, exist_ok=True)
    names = [_relative(videos / take.video, tables) for take in study.takes]
    bench = Bench(np.random.default_rng([seed, 0]), instruments)
    written = _write_tables(study, tables, names, bench)
    truths = []
    for number, (take, name) in enumerate(zip(study.takes, names, strict=True), start=1):
        drops = recording(take.scene, videos / take.video, seed + 1000 * number)
        truths.append(drops.assign(recording=name))
        written.append(videos / take.video)
        if progress is not None:
            progress(number, len(names))
    truth = pd.concat(truths, ignore_index=True)
    truth["drop"] = np.arange(1, len(truth) + 1)
    return truth[["recording", *DropTruth.__annotations__]], written


def write_truth(truth: pd.DataFrame, path: Path) -> Path:
    """Write a truth table with its units in the headings."""
    path.parent.mkdir(parents=True, exist_ok=True)
    shown = with_headings(truth, DropTruth)
    path.write_bytes(shown.to_csv(index=False, float_format="%.8g", lineterminator="\n").encode())
    return path


def _write_tables(study: SimulatedStudy, tables: Path, names: Sequence[str], bench: Bench) -> list[Path]:
    written = []
    if study.cuttings:
        rows = [bench.particle_row(particle) for particle in study.cuttings]
        written.append(_write_csv(tables / "particles.csv", PARTICLE_HEADINGS, rows))
    for fluid in study.fluids:
        if fluid.kind == "measured":
            rows = bench.viscometer_rows(fluid.liquid.rheology)
            written.append(_write_csv(tables / _viscometer(fluid), VISCOMETER_HEADINGS, rows))
    toml = tables / "study.toml"
    toml.write_bytes(("\n\n".join(_sections(study, names, bench)) + "\n").encode())
    return [toml, *written]


def _write_csv(path: Path, headings: Sequence[str], rows: Sequence[Sequence[str]]) -> Path:
    with path.open("w", encoding="utf-8", newline="") as file:
        csv.writer(file, lineterminator="\n").writerows([headings, *rows])
    return path


def _viscometer(fluid: TestFluid) -> str:
    return f"viscometer_{fluid.name}.csv"


def _relative(video: Path, tables: Path) -> str:
    """A video's path as study.toml names it."""
    if video.parent == tables:
        return video.name
    return f"../{video.parent.name}/{video.name}"


def _sections(study: SimulatedStudy, names: Sequence[str], bench: Bench) -> list[str]:
    """The sections of study.toml, in the order of the design."""
    first = study.takes[0].scene
    heading = {"name": study.name, **dict(study.heading), "notes": SIMULATED}
    sections = [_section("[study]", heading)]
    sections += [_section("[[fluid]]", _fluid_keys(fluid, bench)) for fluid in study.fluids]
    column = {
        "section": "round",
        "inner_diameter": bench.bore(first.column.bore),
        "wall_thickness": _wall(first),
        "viewing_box": True,
    }
    camera = {
        "frame_rate": _frame_rate(first),
        "mm_per_px": bench.scale(first.camera.metre_per_px),
        "gravity": first.camera.gravity,
        "exposure": f"{first.camera.exposure * 1e3:g} ms",
    }
    sections += [_section("[column]", column), _section("[camera]", camera)]
    if study.cuttings:
        sections.append(_section("[particles]", {"table": "particles.csv"}))
    sections += [_section("[[control]]", _control_keys(sphere, bench)) for sphere in study.spheres]
    for take, name in zip(study.takes, names, strict=True):
        keys = {
            "video": name,
            "particles": [drop.particle.name for drop in take.scene.drops],
            "fluid": take.fluid,
            **_overrides(take, first, bench),
        }
        sections.append(_section("[[recording]]", keys))
    if study.report:
        sections.append(_section("[report]", dict(study.report)))
    return sections


def _fluid_keys(fluid: TestFluid, bench: Bench) -> dict[str, object]:
    keys: dict[str, object] = {"name": fluid.name, "liquid": fluid.kind}
    if fluid.mass_fraction is not None:
        keys["mass_fraction"] = bench.read(fluid.mass_fraction, bench.u.mass_fraction, "%", 100.0)
    else:
        keys["density"] = bench.read(fluid.liquid.density, bench.u.liquid_density, "kg/m3", expanded=True)
        keys["viscometer"] = _viscometer(fluid)
        keys["rheology"] = "power-law"
    keys["temperature"] = bench.celsius(fluid.temperature)
    return keys


def _control_keys(sphere: Particle, bench: Bench) -> dict[str, object]:
    assert isinstance(sphere.body, Sphere)
    return {
        "particle": sphere.name,
        "diameter": bench.read(sphere.body.diameter, bench.u.sphere_diameter, "mm", 1e3),
        "density": bench.read(sphere.density, bench.u.sphere_density, "kg/m3"),
    }


def _overrides(take: Take, first: Scene, bench: Bench) -> dict[str, object]:
    """Keys of [camera] and [column] that this recording states anew."""
    scene, keys = take.scene, dict[str, object]()
    if scene.camera.frame_rate != first.camera.frame_rate:
        keys["camera.frame_rate"] = _frame_rate(scene)
    if scene.camera.exposure != first.camera.exposure:
        keys["camera.exposure"] = f"{scene.camera.exposure * 1e3:g} ms"
    if scene.camera.gravity != first.camera.gravity:
        keys["camera.gravity"] = scene.camera.gravity
    if take.scale == "marks":
        keys |= _marks(scene, bench)
    elif scene.camera.metre_per_px != first.camera.metre_per_px:
        keys["camera.mm_per_px"] = bench.scale(scene.camera.metre_per_px)
    if scene.column.bore != first.column.bore:
        keys["column.inner_diameter"] = bench.bore(scene.column.bore)
    if scene.column.wall != first.column.wall:
        keys["column.wall_thickness"] = _wall(scene)
    return keys


def _marks(scene: Scene, bench: Bench) -> dict[str, object]:
    """Two marks of the column's graduation, as far apart as the view allows, read off the picture."""
    camera, column = scene.camera, scene.column
    assert column.graduation is not None
    low = column.graduation if column.surface < 0 else column.surface + 2 * column.graduation
    high = camera.height * camera.metre_per_px if column.bottom is None else column.bottom
    steps = int((high - low) / column.graduation * (1 - 1e-9))
    first = np.ceil(low / column.graduation) * column.graduation
    x = column.axis - column.bore / 2 + 3e-3
    points = []
    for y in (first, first + steps * column.graduation):
        place = turned_point(*to_pixels(scene, x, float(y)), (camera.width, camera.height), camera.gravity)
        points.append([round(float(pixel + bench.u.pointing * bench.rng.standard_normal()), 1) for pixel in place])
    apart = bench.read(steps * column.graduation, bench.u.marks_apart, "mm", 1e3)
    return {"camera.marks": points, "camera.marks_apart": apart}


def _frame_rate(scene: Scene) -> str:
    return f"{scene.camera.frame_rate:g} Hz"


def _wall(scene: Scene) -> str:
    return f"{scene.column.wall * 1e3:.1f} mm"


def _section(title: str, keys: Mapping[str, object]) -> str:
    # TOML writes these texts, lists of texts or numbers, and truth values as JSON does
    lines = [f"{key} = {json.dumps(value, ensure_ascii=False)}" for key, value in keys.items()]
    return "\n".join([title, *lines])
