"""The drop table of a study: every fall named, measured and judged."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, fields

import pandas as pd

from settlelab.errors import SettlelabError
from settlelab.measure.acceptance import finding
from settlelab.measure.causes import likely_causes
from settlelab.measure.chain import Fallen, Setup, bore_of, fallen, fallen_by_monte_carlo
from settlelab.measure.controls import CONTROL_COLUMNS, ControlDrop, chain_verdict, compare_control
from settlelab.measure.falls import View, drop_table, judged, row_of, view_of
from settlelab.measure.fluids import FluidState, fluid_state
from settlelab.measure.intervals import INTERVAL_COLUMNS, compared, departures
from settlelab.measure.lots import scatter_of
from settlelab.measure.model import Drop, Measured
from settlelab.measure.particle import Grain, grain_of
from settlelab.measure.viscosity import viscosity_table
from settlelab.physics.constants import STANDARD_GRAVITY
from settlelab.study.model import Particle, Recording, Study
from settlelab.video.model import Track, TrackedRecording

__all__ = ["measure_study"]

BUDGETED = ("velocity", "unbounded_velocity", "reynolds", "drag_coefficient")
GRAVITY = (
    f"gravity not measured; standard gravity {STANDARD_GRAVITY} m/s2 taken, from which places differ by up to 0.3 %"
)


@dataclass(frozen=True, slots=True)
class _Fall:
    """A fall with the recording that it belongs to."""

    recording: Recording
    tracked: TrackedRecording
    track: Track
    setup: Setup


@dataclass(frozen=True, slots=True)
class _Tables:
    """What a study gives, as it grows fall by fall."""

    drops: list[dict[str, object]] = field(default_factory=list)
    budget: list[dict[str, object]] = field(default_factory=list)
    controls: list[dict[str, object]] = field(default_factory=list)
    intervals: list[dict[str, object]] = field(default_factory=list)
    control_drops: list[ControlDrop] = field(default_factory=list)
    assumed: list[str] = field(default_factory=lambda: [GRAVITY])
    doubts: list[str] = field(default_factory=list)

    def note(self, assumed: Iterable[str], doubts: Iterable[str]) -> None:
        self.assumed.extend(assumed)
        self.doubts.extend(doubts)


def measure_study(study: Study, recordings: Sequence[TrackedRecording]) -> Measured:
    """Terminal velocity, Reynolds number and drag coefficient of every fall of a study, with uncertainties and budget.

    Falls are named in order of release. Where a recording shows more or fewer falls than it has names, no particle is
    guessed: its falls stay unnamed and are refused, and a doubt tells both counts.

    Parameters
    ----------
    study : Study
        As read.
    recordings : sequence of TrackedRecording
        One for each of `study.recordings`, in that order.

    Returns
    -------
    Measured
        Tables in SI. Further descriptors of the particle table are columns of `drops` after those of `Drop`.

    Raises
    ------
    SettlelabError
        The properties of a fluid cannot be had, or a particle would not fit into its column.
    FitError
        Viscometer readings do not give the flow curve asked for.
    ValueError
        Not as many recordings as the study has.
    """
    tables = _Tables()
    states: dict[str, FluidState] = {}
    for recording, tracked in zip(study.recordings, recordings, strict=True):
        if recording.fluid.name not in states:
            states[recording.fluid.name] = state = fluid_state(recording.fluid)
            tables.note(state.assumed, state.doubts)
        setup = Setup(
            scale_u=tracked.scale.u / tracked.scale.value,
            clock_u=tracked.clock.u_relative,
            bore=bore_of(recording.column),
            fluid=states[recording.fluid.name],
        )
        tables.note((), _doubts(recording, tracked, setup))
        for track, particle in zip(tracked.falls, _particles(study, recording, tracked), strict=True):
            _add_drop(tables, _Fall(recording, tracked, track, setup), particle)
    controls = pd.DataFrame(tables.controls, columns=list(CONTROL_COLUMNS)).astype({"passed": bool})
    if not controls["passed"].all():
        tables.note((), (chain_verdict(controls), likely_causes(tables.control_drops)))
    drops = drop_table(tables.drops)
    scatter = scatter_of(drops)
    intervals = pd.DataFrame(tables.intervals, columns=list(INTERVAL_COLUMNS))
    tables.note((), (*(scatter.told if scatter is not None else ()), *departures(intervals)))
    tables.note((), (note for tracked in recordings for note in tracked.notes))  # last: most are assumptions
    return Measured(
        drops=drops,
        budget=pd.DataFrame(tables.budget, columns=["drop", "output", "input", "share"]).astype({"share": float}),
        controls=controls,
        assumed=tuple(dict.fromkeys(tables.assumed)),
        doubts=tuple(dict.fromkeys(tables.doubts)),
        scatter=scatter,
        intervals=intervals,
        viscosities=viscosity_table(tables.control_drops),
    )


def _doubts(recording: Recording, tracked: TrackedRecording, setup: Setup) -> list[str]:
    doubts = []
    names, falls = len(recording.particles), len(tracked.falls)
    if names != falls:
        doubts.append(
            f"{recording.name}: {_count(falls, 'fall')} seen, {_count(names, 'particle')} named; "
            "none of its falls was given to a particle"
        )
    if math.isinf(setup.bore.diameter):
        doubts.append(f"{recording.name}: the inner size of its column is unknown; no wall correction was made")
    return doubts


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def _particles(study: Study, recording: Recording, tracked: TrackedRecording) -> list[Particle | None]:
    """The particle of each fall in order of release; None for all where the counts differ."""
    if len(recording.particles) != len(tracked.falls):
        return [None] * len(tracked.falls)
    return [study.particle(name) for name in recording.particles]


def _add_drop(tables: _Tables, fall: _Fall, particle: Particle | None) -> None:
    """Measure and judge one fall, and write it into the tables."""
    number = len(tables.drops) + 1
    view = _view(fall, particle)
    row = row_of(fall.track, fall.tracked, view)
    row |= {"drop": number, "recording": fall.recording.name, "fluid": fall.recording.fluid.name}
    if particle is None:
        found = [finding("unnamed"), *view.findings(fall.track, view.projected_diameter)]
        tables.drops.append(row | _fluid_columns(fall.setup.fluid) | judged(found))
        return
    grain = grain_of(particle, view.projected_diameter)
    tables.note(grain.assumed, grain.doubts)
    result = _result(fall, particle, grain, view)
    verdict = judged(view.findings(fall.track, grain.diameter))
    row |= _fluid_columns(fall.setup.fluid) | _particle_columns(particle, grain) | _result_columns(result)
    tables.drops.append(row | verdict)
    for output in BUDGETED:
        shares = getattr(result, output).shares
        tables.budget.extend(
            {"drop": number, "output": output, "input": source, "share": share} for source, share in shares.items()
        )
    if verdict["accepted"]:
        drawn = fallen_by_monte_carlo(view.velocity, grain, fall.setup, off_axis=view.off_axis)
        tables.intervals.extend(compared(number, result, drawn, BUDGETED))
    if particle.control and verdict["accepted"]:
        control = _control_drop(fall, particle, grain, result, view)
        tables.control_drops.append(control)
        tables.controls.append(_control_row(number, control))


def _view(fall: _Fall, particle: Particle | None) -> View:
    """The fall as seen, judged with what is known of the particle."""
    if particle is None:
        return view_of(fall.track, fall.tracked)
    density = particle.density.value if particle.density is not None else math.nan
    ratio = density / fall.setup.fluid.density
    return view_of(fall.track, fall.tracked, density_ratio=ratio, sphere=particle.diameter is not None)


def _result(fall: _Fall, particle: Particle, grain: Grain, view: View) -> Fallen:
    try:
        return fallen(view.velocity, grain, fall.setup, off_axis=view.off_axis)
    except SettlelabError as error:
        raise SettlelabError(f"{fall.recording.name}, particle {particle.name}: {error}") from error


def _control_drop(fall: _Fall, particle: Particle, grain: Grain, result: Fallen, view: View) -> ControlDrop:
    return ControlDrop(
        recording=fall.recording.name,
        particle=particle.name,
        sphere=grain,
        setup=fall.setup,
        track_u=view.velocity.u,
        seen_diameter=view.projected_diameter,
        comparison=compare_control(grain, fall.setup, result),
    )


def _control_row(number: int, control: ControlDrop) -> dict[str, object]:
    comparison = control.comparison
    return {
        "drop": number,
        "recording": control.recording,
        "particle": control.particle,
        "expected_velocity": comparison.expected.value,
        "expected_velocity_u": comparison.expected.u,
        "velocity": comparison.measured.value,
        "velocity_u": comparison.measured.u,
        "en": comparison.en,
        "passed": comparison.passed,
    }


def _fluid_columns(fluid: FluidState) -> dict[str, object]:
    consistency, flow_index, yield_stress = (float(value) for value in fluid.rheology.arrays())
    return {
        "fluid_density": fluid.density,
        "fluid_density_u": fluid.density_u,
        "consistency": consistency,
        "flow_index": flow_index,
        "yield_stress": yield_stress,
    }


def _particle_columns(particle: Particle, grain: Grain) -> dict[str, object]:
    columns: dict[str, object] = {
        "particle": particle.name,
        "lot": particle.lot,
        "control": particle.control,
        "equivalent_diameter_from": grain.diameter_from,
        "sphericity": grain.sphericity,
        "sphericity_from": grain.sphericity_from,
        "corey_shape_factor": grain.corey_shape_factor,
        "flatness": grain.flatness,
        "elongation": grain.elongation,
    }
    if not math.isnan(grain.circularity):
        columns["circularity"] = grain.circularity
    # a descriptor of the lab's own never takes the place of a column that is computed here
    reserved = {column.name for column in fields(Drop)}
    return columns | {name: value for name, value in grain.descriptors.items() if name not in reserved}


def _result_columns(result: Fallen) -> dict[str, object]:
    """Values and standard uncertainties of the chain under their names in the drop table."""
    names = {"diameter": "equivalent_diameter"} | {
        name: name for name in (*BUDGETED, "wall_factor", "viscosity", "particle_density")
    }
    columns: dict[str, object] = {"wall_method": result.wall_method}
    for name, column in names.items():
        estimate = getattr(result, name)
        columns |= {column: estimate.value, f"{column}_u": estimate.u}
    return columns
