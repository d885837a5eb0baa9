"""A study in words, for whoever checks it before it is run."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable

from settlelab.study.model import Camera, Column, Fluid, Particle, Recording, Study
from settlelab.study.particles import MEASURED
from settlelab.units import Quantity, show

__all__ = ["study_summary"]


def study_summary(study: Study) -> dict[str, tuple[str, ...]]:
    """Title of each part of a study -> its lines; all that will be used, nothing that is computed."""
    cuttings = [particle for particle in study.particles if not particle.control]
    controls = [particle for particle in study.particles if particle.control]
    about = [text for text in (study.lab, study.operator, study.date) if text]
    return {
        "Study": (study.name, *([", ".join(about)] if about else [])),
        "Fluids": tuple(f"{fluid.name}: {_fluid(fluid)}" for fluid in study.fluids),
        "Particles": _particles(cuttings),
        "Controls": tuple(_control(particle) for particle in controls) or ("none: nothing checks the whole chain",),
        "Recordings": tuple(line for recording in study.recordings for line in _recording(recording, study)),
    }


def _fluid(fluid: Fluid) -> str:
    parts: list[str] = [fluid.liquid]
    parts += _typed(fluid.mass_fraction, "%", "{} glycerol by mass") + _typed(fluid.density, "kg/m3")
    parts += _typed(fluid.viscosity, "mPa s")
    if fluid.readings is not None:
        rates = fluid.readings.shear_rate
        parts.append(f"{rates.size} viscometer readings from {rates.min():.4g} to {rates.max():.4g} 1/s")
        parts.append(f"rheology: {fluid.rheology}")
    return ", ".join(parts + _typed(fluid.temperature, "°C"))


def _particles(cuttings: list[Particle]) -> tuple[str, ...]:
    if not cuttings:
        return ("none beside the controls",)
    lots = Counter(particle.lot or "without lot" for particle in cuttings)
    lines = [f"{len(cuttings)} in {len(lots)} lot{'s' * (len(lots) > 1)}: {_counted(lots.items())}"]
    known = {name: sum(getattr(particle, name) is not None for particle in cuttings) for name in MEASURED}
    lines.append("measured: " + _counted((name.replace("_", " "), count) for name, count in known.items() if count))
    descriptors = Counter(name for particle in cuttings for name in particle.descriptors)
    return (*lines, *(["descriptors: " + _counted(descriptors.items())] if descriptors else []))


def _counted(counts: Iterable[tuple[str, int]]) -> str:
    return ", ".join(f"{name} {count}" for name, count in counts) or "nothing"


def _control(particle: Particle) -> str:
    return ", ".join([particle.name, *_typed(particle.diameter, "mm"), *_typed(particle.density, "kg/m3")])


def _recording(recording: Recording, study: Study) -> list[str]:
    """The recording's falls, and the setup where it is not that of the one before."""
    drops = len(recording.particles)
    falls = f"{drops} drop{'s' * (drops > 1)} in {recording.fluid.name}: {', '.join(recording.particles)}"
    index = study.recordings.index(recording)
    before = study.recordings[index - 1] if index else None
    lines = [f"{recording.name}: {falls}"]
    if before is None or before.column != recording.column:
        lines.append(f"  column: {_column(recording.column)}")
    if before is None or before.camera != recording.camera:
        lines.append(f"  camera: {_camera(recording.camera)}")
    return lines


def _column(column: Column) -> str:
    parts: list[str] = [column.section, *_typed(column.inner_diameter, "mm", "inner diameter {}")]
    parts += _typed(column.width, "mm", "width {}") + _typed(column.depth, "mm", "depth {}")
    parts += _typed(column.height, "mm", "height {}") + _typed(column.wall_thickness, "mm", "wall {}")
    return ", ".join(parts + ["viewing box"] * column.viewing_box)


def _camera(camera: Camera) -> str:
    clock = show(camera.frame_rate, "Hz") if camera.frame_rate is not None else "clock of the video file"
    if camera.metre_per_px is not None:
        scale = show(camera.metre_per_px, "mm/px")
    elif camera.marks_apart is not None:
        scale = f"from two marks {show(camera.marks_apart, 'mm')} apart"
    elif camera.graduation is not None:
        scale = f"from graduation marks every {show(camera.graduation, 'mm')}"
    else:
        scale = "from the checkerboard"
    return f"{clock}, scale {scale}, gravity {camera.gravity}"


def _typed(quantity: Quantity | None, unit: str, words: str = "{}") -> list[str]:
    return [] if quantity is None else [words.format(show(quantity, unit))]
