"""What was measured in the recordings, what the lab typed, what was assumed: told apart."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import pandas as pd

from settlelab.measure.model import Measured
from settlelab.study.model import Camera, Fluid, Study
from settlelab.video.model import TrackedRecording

__all__ = ["Origin", "origin"]


@dataclass(frozen=True, slots=True)
class Origin:
    """One sentence each."""

    measured: tuple[str, ...]
    typed: tuple[str, ...]
    assumed: tuple[str, ...]


def origin(study: Study, measured: Measured, tracked: Sequence[TrackedRecording]) -> Origin:
    """Where the numbers of a study come from."""
    assumed = dict.fromkeys((*study.assumed, *measured.assumed))
    return Origin(_measured(measured.drops, study), _typed(study, measured.drops, tracked), tuple(assumed))


def _measured(drops: pd.DataFrame, study: Study) -> tuple[str, ...]:
    if len(drops) == 0:
        return ()
    found = ["position of every particle in every frame, hence velocity and silhouette"]
    if any(recording.camera.graduation or recording.camera.checkerboard for recording in study.recordings):
        found.append("scale, from marks of known spacing found in the picture")
    if count := int((drops["equivalent_diameter_from"] == "silhouette").sum()):
        found.append(f"equivalent diameter of {_drops(count)}, from the silhouette")
    return tuple(found)


def _typed(study: Study, drops: pd.DataFrame, tracked: Sequence[TrackedRecording]) -> tuple[str, ...]:
    found = [f"fluid {fluid.name}: {', '.join(_fluid_inputs(fluid))}" for fluid in study.fluids]
    found.append("column: its section and inner dimensions")
    scales = dict.fromkeys(text for recording in study.recordings if (text := _typed_scale(recording.camera)))
    found += [f"scale: {text}" for text in scales]
    if any(seen.clock.source == "stated" for seen in tracked):
        found.append("true frame rate of the camera")
    sources = drops.loc[~drops["equivalent_diameter_from"].isin(["silhouette", ""]), "equivalent_diameter_from"]
    found += [f"equivalent diameter of {_drops(count)}: {source}" for source, count in sources.value_counts().items()]
    shapes = drops.loc[drops["sphericity_from"] != "", "sphericity_from"]
    found += [f"sphericity of {_drops(count)}: {source}" for source, count in shapes.value_counts().items()]
    return tuple(found)


def _drops(count: int) -> str:
    return "1 drop" if count == 1 else f"{count} drops"


def _fluid_inputs(fluid: Fluid) -> list[str]:
    names = ("mass_fraction", "temperature", "density", "viscosity", "readings")
    words = {"mass_fraction": "mass fraction", "readings": "viscometer readings"}
    return [words.get(name, name) for name in names if getattr(fluid, name) is not None] or ["its name"]


def _typed_scale(camera: Camera) -> str:
    if camera.metre_per_px is not None:
        return "millimetres per pixel"
    return "two marks in the picture and the distance between them" if camera.marks is not None else ""
