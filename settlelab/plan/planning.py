"""A study to a plan: every particle in every setup, then what is to be said about each setup."""

from __future__ import annotations

import math
from dataclasses import asdict
from pathlib import Path

import pandas as pd

from settlelab.measure.chain import Setup, bore_of
from settlelab.measure.drops import GRAVITY
from settlelab.measure.fluids import fluid_state
from settlelab.measure.particle import Grain, grain_of
from settlelab.plan.advice import verdicts
from settlelab.plan.film import film_of
from settlelab.plan.laws import GRAIN_SCATTER
from settlelab.plan.model import Aims, Plan, Planned, SetupPlan
from settlelab.plan.situation import SCATTER, Situation, planned
from settlelab.study.model import Camera, Column, Recording, Study
from settlelab.units import Quantity, show

__all__ = ["plan_study"]

NO_GRAINS = "{}: neither weighed nor calipered; its size is known only when it is filmed"

OVERRATED = (
    "sphericity of grains not measured; taken from the ellipsoid of their axes, which overrates angular grains: expect "
    "them in the lower half of the stated interval of V"
)


def plan_study(study: Study, aims: Aims | None = None) -> Plan:
    """What a study will show, how well, and what to change before filming.

    Parameters
    ----------
    study : Study
        As read. Of a video that is there already only the size of the picture is read.
    aims : Aims, optional
        Target and what is known of camera and scatter.

    Raises
    ------
    SettlelabError
        The properties of a fluid cannot be had.
    FitError
        Viscometer readings do not give the flow curve asked for.
    """
    aims = aims or Aims()
    states = {fluid.name: fluid_state(fluid) for fluid in study.fluids}
    grains = {particle.name: grain_of(particle, math.nan) for particle in study.particles}
    assumed = [*study.assumed, GRAVITY, *_assumed_of(aims)]
    doubts: list[str] = []
    setups = []
    for recordings in _alike(study):
        first = recordings[0]
        film = film_of(first, aims.picture_height)
        state = states[first.fluid.name]
        dropped = list(dict.fromkeys(name for recording in recordings for name in recording.particles))
        setup = Setup(scale_u=film.scale_u, clock_u=film.clock_u, bore=bore_of(first.column), fluid=state)
        situation = Situation(setup=setup, film=film, column=first.column, aims=aims)
        setups.append(_setup_plan(recordings, {name: grains[name] for name in dropped}, situation))
        assumed += [*state.assumed, *film.assumed, *_of_grains(dropped, grains)]
        doubts += state.doubts
    return Plan(
        name=study.name,
        aims=aims,
        setups=tuple(setups),
        assumed=tuple(dict.fromkeys(assumed)),
        doubts=tuple(dict.fromkeys(doubts)),
    )


def _alike(study: Study) -> list[list[Recording]]:
    """Recordings with the same fluid, camera and column together, in the order of the study."""
    groups: list[list[Recording]] = []
    for recording in study.recordings:
        for group in groups:
            first = group[0]
            if (first.fluid.name, first.camera, first.column) == (
                recording.fluid.name,
                recording.camera,
                recording.column,
            ):
                group.append(recording)
                break
        else:
            groups.append([recording])
    return groups


def _setup_plan(recordings: list[Recording], grains: dict[str, Grain], situation: Situation) -> SetupPlan:
    rows = [planned(name, grain, situation) for name, grain in grains.items()]
    first = recordings[0]
    return SetupPlan(
        title=f"{first.fluid.name}, {_column(first.column)}, {_camera(first.camera)}",
        recordings=tuple(Path(recording.name).name for recording in recordings),
        rows=pd.DataFrame([asdict(row) for row in rows], columns=list(Planned.__dataclass_fields__)),
        verdicts=verdicts(rows, grains, situation),
    )


def _column(column: Column) -> str:
    if column.section == "rectangular" and column.width and column.depth:
        return f"column {_plain(column.width, 'mm')} x {_plain(column.depth, 'mm')}"
    return f"column {_plain(column.inner_diameter, 'mm')} wide" if column.inner_diameter else "column of unknown width"


def _camera(camera: Camera) -> str:
    rate = _plain(camera.frame_rate, "Hz") if camera.frame_rate else "frame rate not stated"
    exposure = f"exposure {_plain(camera.exposure, 'ms')}" if camera.exposure else "exposure not stated"
    return f"{rate}, {exposure}"


def _plain(quantity: Quantity, unit: str) -> str:
    return show(Quantity(quantity.value), unit)


def _assumed_of(aims: Aims) -> tuple[str, ...]:
    """What stands behind every plan."""
    told = [
        f"single grains taken to scatter by {100 * GRAIN_SCATTER:.0f} % in drag coefficient about the published laws "
        "(k = 1), beyond what the laws differ"
    ]
    if aims.scatter is None:
        told.append(
            f"replicate drops taken to scatter by {100 * SCATTER['']:.0f} % in velocity, spheres by "
            f"{100 * SCATTER['typed']:.1f} %; state your own where you know it"
        )
    return tuple(told)


def _of_grains(names: list[str], grains: dict[str, Grain]) -> list[str]:
    told = [note for name in names for note in grains[name].assumed if not grains[name].silhouette]
    if any(grains[name].sphericity_from == "ellipsoid of the axes" for name in names):
        told.append(OVERRATED)
    return told + [NO_GRAINS.format(f"particle {name}") for name in names if grains[name].silhouette]
