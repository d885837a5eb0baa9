"""A study file with its tables to a `Study`: sections in turn, every fault kept, all of them raised together."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from settlelab.errors import Fault, InputFaults, did_you_mean
from settlelab.study.fluids import read_fluids
from settlelab.study.keys import (
    CalibrationKeys,
    ControlKeys,
    ParticlesKeys,
    ReportKeys,
    StudyKeys,
)
from settlelab.study.model import CalibrationChoice, Particle, ReportChoice, Study
from settlelab.study.particles import read_particles
from settlelab.study.recordings import read_recordings
from settlelab.study.source import Section, Source, load_toml, several
from settlelab.study.table import scan_table
from settlelab.units import wanted

__all__ = ["read_study"]

ORDER = ("study", "fluid", "column", "camera", "particles", "control", "recording", "calibration", "report")
SINGLE = ("study", "column", "camera", "particles", "calibration", "report")
SEVERAL = ("fluid", "control", "recording")


def read_study(path: Path, *, before_filming: bool = False) -> Study:
    """A study with its bench tables, validated and in SI.

    Parameters
    ----------
    path : Path
        A `study.toml`, or the folder that holds it.
    before_filming : bool
        Whether videos, pictures of a checkerboard and the scale of the camera may still be missing.

    Raises
    ------
    InputFaults
        Everything that is wrong in the study file and all its tables.
    """
    file = path / "study.toml" if path.is_dir() else path
    raw = load_toml(file)
    source = Source(file=file, before_filming=before_filming, inputs=[file])
    _check_sections(source, raw)
    study = _study(source, raw)
    if source.faults:
        raise InputFaults(sorted(source.faults, key=lambda fault: _reading_order(fault, source)))
    return study


def _reading_order(fault: Fault, source: Source) -> tuple[int, int, int]:
    """From top to bottom of the study file, then of each table."""
    if fault.file != source.file:
        return 1 + source.inputs.index(fault.file), fault.row or 0, 0
    section, _, number = (fault.key or "").partition(",")[0].strip("[]").partition(" ")
    return 0, ORDER.index(section) if section in ORDER else -1, int(number or 0)


def _study(source: Source, raw: dict[str, Any]) -> Study:
    about = source.section(StudyKeys, raw.get("study", {}), "study").keys
    fluids = read_fluids(source, several(raw, "fluid"))
    particles = _particles(source, raw)
    recordings = read_recordings(source, raw, fluids, particles)
    calibration = source.section(CalibrationKeys, raw.get("calibration", {}), "calibration").keys
    report = source.section(ReportKeys, raw.get("report", {}), "report").keys
    return Study(
        file=source.file,
        name=about.name or source.file.resolve().parent.name,
        lab=about.lab or "",
        operator=about.operator or "",
        date=about.date or "",
        notes=about.notes or "",
        fluids=tuple(fluids.values()),
        particles=particles or (),
        recordings=recordings,
        calibration=CalibrationChoice(
            descriptors=tuple(calibration.descriptors or ()),
            forms=tuple(calibration.forms or ()),
            target=calibration.target.value if calibration.target is not None else None,
        ),
        report=ReportChoice(
            units=report.units or "lab", title=report.title or "", signatures=tuple(report.signatures or ())
        ),
        inputs=tuple(dict.fromkeys(source.inputs)),
        assumed=tuple(source.assumed),
    )


def _check_sections(source: Source, raw: Mapping[str, Any]) -> None:
    """Unknown sections, and `[fluid]` where `[[fluid]]` belongs."""
    known = (*SINGLE, *SEVERAL)
    for name, content in raw.items():
        if name not in known:
            hint = did_you_mean(name, known) or f"; known: {', '.join(known)}"
            source.fault("", name, f"a section of a study{hint}")
        elif name in SEVERAL and not isinstance(content, list):
            source.fault("", f"[{name}]", f"[[{name}]] in double brackets, as there may be several")


def _particles(source: Source, raw: Mapping[str, Any]) -> tuple[Particle, ...] | None:
    """Particles of the table and control spheres; None where names cannot be checked against them."""
    section = source.section(ParticlesKeys, raw.get("particles", {}), "particles")
    rows: tuple[Particle, ...] | None = ()
    if section.keys.table is not None:
        rows = _table_rows(source, section.keys.table)
    elif "particles" in raw and section.lacks("table"):
        source.fault("particles, table", None, 'the particle table such as "particles.csv"')
    particles = list(rows or ())
    for number, typed in enumerate(several(raw, "control"), start=1):
        control = _control(source, source.section(ControlKeys, typed, f"control {number}"))
        if any(control.name == other.name for other in particles):
            source.fault(f"control {number}, particle", control.name, "a name that no other particle has")
        particles.append(control)
    return None if rows is None or section.at_fault else tuple(particles)


def _table_rows(source: Source, typed: str) -> tuple[Particle, ...] | None:
    path = source.path(typed, "particles, table")
    if path is None:
        return None
    source.inputs.append(path)
    table, faults = scan_table(path)
    particles, assumed = read_particles(table, faults) if table is not None else ((), ())
    source.faults.extend(faults)
    source.assumed.extend(assumed)
    return particles or None


def _control(source: Source, section: Section[ControlKeys]) -> Particle:
    keys, place = section.keys, section.place
    needed = {"particle": "the name of the sphere", "diameter": wanted("m"), "density": wanted("kg/m3")}
    for key, accepted in needed.items():
        if section.lacks(key):
            source.fault(f"{place}, {key}", None, accepted)
    for key, quantity in (("diameter", keys.diameter), ("density", keys.density)):
        if quantity is not None and not quantity.u:
            source.assumed.append(f"{source.file.name}, {place}: {key} states no uncertainty; taken as 0")
    return Particle(name=keys.particle or place, diameter=keys.diameter, density=keys.density, control=True)
