"""The report page: one file that needs nothing else, to be read in a browser or printed on A4."""

from __future__ import annotations

import base64
from collections.abc import Mapping, Sequence
from importlib.resources import files
from pathlib import Path
from typing import TYPE_CHECKING

import pandas as pd
from jinja2 import Environment, PackageLoader, StrictUndefined

from settlelab.measure.model import Measured
from settlelab.report import sections
from settlelab.report.calibrated import calibration_view
from settlelab.report.intervals import intervals_view
from settlelab.report.lab import lab_table
from settlelab.report.origin import origin
from settlelab.report.pictures import save_charts, save_overlays
from settlelab.report.scatter import scatter_view
from settlelab.report.verdict import findings
from settlelab.study.model import Study
from settlelab.video.model import TrackedRecording

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = ["write_report"]

SIGNATURES = ("Tested by", "Checked by", "Approved by")
MEDIA_TYPES = {".png": "image/png", ".svg": "image/svg+xml"}
LAB_NOTE = (
    "U is the expanded uncertainty (k = 2, about 95 %) of the mean: the repeatability of drops, pooled over all"
    " particles, and what the drops share (scale, clock, fluid, walls, size). The mean of a lot is that of these very"
    " particles; scatter is the relative standard deviation of the drops of a particle, or of the particles of a lot."
    " Predictions are for unbounded fluid and compare with the unbounded velocity; those of a calibrated form are on"
    " drops that it was fitted to."
)
CAUTIONS = (
    "A fall through still fluid in a column is not a design for hole cleaning: in a well the fluid moves and shears,"
    " the pipe turns, cuttings crowd, and an inclined hole carries them otherwise.",
    "A correlation outside its stated range still answers; such answers are marked, and are extrapolations.",
    "Calibrated coefficients hold for these cuttings, sizes and fluids; the card states the range.",
    "Glass columns break, and test fluids may be hot, caustic or toxic: follow the safety sheets and the laboratory's"
    " rules.",
    "Local codes and the judgement of licensed practice come before anything that this report says.",
)


def write_report(
    directory: Path,
    *,
    study: Study,
    measured: Measured,
    calibration: Calibration | None,
    tracked: Sequence[TrackedRecording],
    provenance: Mapping[str, Mapping[str, object]],
) -> Path:
    """Write `report.html`, and its pictures as files under `figures/` and `overlays/`.

    Parameters
    ----------
    directory : Path
        Folder of the results.
    study : Study
        What the lab handed in; its `report` section names title, units and signatures.
    measured : Measured
        Drops, budget, control spheres, what was assumed, doubts.
    calibration : Calibration or None
        None where no drop could be compared.
    tracked : sequence of TrackedRecording
        In the order of `study.recordings`.
    provenance : mapping
        Tables by their heading, such as {"input files": {"study.toml": "sha256 ..."}, "versions": {...}}.

    Returns
    -------
    Path
        The page. The same input gives the same bytes.
    """
    overlays = save_overlays(directory / "overlays", study, measured.drops, tracked)
    charts = save_charts(directory / "figures", measured, calibration)
    page = (
        _environment()
        .get_template("report.html.j2")
        .render(
            **_head(study, measured, calibration),
            **_tables(study, measured, calibration, tracked),
            overlays=[
                {"name": recording.name, "source": _data_address(path), "notes": seen.notes}
                for recording, path, seen in zip(study.recordings, overlays, tracked, strict=True)
            ],
            charts={name: _data_address(path) for name, path in charts.items()},
            provenance=[(name, list(entries.items())) for name, entries in provenance.items()],
        )
    )
    path = directory / "report.html"
    path.write_text(page, encoding="utf-8", newline="\n")
    return path


def _head(study: Study, measured: Measured, calibration: Calibration | None) -> dict[str, object]:
    """Title block, what to know first, signatures, cautions."""
    facts = {
        "study": study.name,
        "laboratory": study.lab,
        "operator": study.operator,
        "date": study.date,
        "drops": f"{int(measured.drops['accepted'].astype(bool).sum())} accepted of {len(measured.drops)}",
    }
    return {
        "style": _style(),
        "title": study.report.title or study.name,
        "facts": [(name, text) for name, text in facts.items() if text],
        "notes": study.notes,
        "simulated": "simulated" in study.notes.lower(),
        "findings": findings(measured, calibration),
        "signatures": study.report.signatures or SIGNATURES,
        "method": _method(measured.drops),
        "lab_note": f"{LAB_NOTE}{_laws(calibration)}",
        "cautions": CAUTIONS,
        "doubts": measured.doubts,
    }


def _tables(
    study: Study, measured: Measured, calibration: Calibration | None, tracked: Sequence[TrackedRecording]
) -> dict[str, object]:
    """Every table of the page; None where there is nothing to show."""
    system, drops = study.report.units, measured.drops
    shares = sections.budget_shares(measured)
    viscosities, intervals = measured.viscosities, measured.intervals
    return {
        "lab": sections.lab_view(lab_table(measured, calibration), system),
        "ranking": sections.ranking_view(calibration) if calibration else None,
        "calibration": calibration_view(calibration) if calibration else None,
        "controls": sections.controls_view(measured.controls, system) if len(measured.controls) else None,
        "viscosities": sections.viscosities_view(viscosities, system)
        if viscosities is not None and len(viscosities)
        else None,
        "intervals": intervals_view(intervals) if intervals is not None and len(intervals) else None,
        "budget": sections.budget_view(shares) if len(shares) else None,
        "scatter": scatter_view(measured.scatter) if measured.scatter is not None else None,
        "drops": sections.drops_view(drops, system) if len(drops) else None,
        "fluids": sections.fluids_view(study, drops, system),
        "recordings": sections.recordings_view(study, tracked, system),
        "origin": origin(study, measured, tracked),
    }


def _method(drops: pd.DataFrame) -> str:
    """How the numbers of the lab table came about, with the wall corrections that were used."""
    walls = sorted(set(drops["wall_method"]) - {""})
    corrected = f"corrected for the walls ({', '.join(walls)})" if walls else "not corrected for the walls"
    return (
        "Single particles were released in still fluid and filmed. The terminal velocity is the slope of position over"
        f" time in the part of the fall at steady speed; it is {corrected} to give the velocity in unbounded fluid."
        " Re and Cd are built on that velocity and the diameter of the sphere of equal volume."
    )


def _laws(calibration: Calibration | None) -> str:
    """Which laws the columns of the lab table mean; their names are too long for a heading."""
    if calibration is None:
        return ""
    calibrated = f"; calibrated law: {calibration.chosen.name}" if calibration.chosen else ""
    return f" Published law, the best of its kind: {calibration.best_published}{calibrated}."


def _style() -> str:
    return (files("settlelab.report") / "templates" / "report.css").read_text(encoding="utf-8")


def _environment() -> Environment:
    return Environment(
        loader=PackageLoader("settlelab.report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


def _data_address(path: Path) -> str:
    return f"data:{MEDIA_TYPES[path.suffix]};base64,{base64.b64encode(path.read_bytes()).decode('ascii')}"
