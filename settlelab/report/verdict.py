"""What a reader should know first: is the chain under control, which drops count, which correlation holds."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import pandas as pd

from settlelab.measure.model import Measured
from settlelab.report.numbers import percent, significant

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = ["Finding", "findings"]

CLOSE = 10.0  # %, root mean square up to which a law is good enough for a velocity


@dataclass(frozen=True, slots=True)
class Finding:
    """One line at the head of the report; the mark says how to take it."""

    mark: Literal["good", "doubt", "bad"]
    topic: str
    text: str


def findings(measured: Measured, calibration: Calibration | None) -> tuple[Finding, ...]:
    """The lines at the head of the report, in the order in which they matter."""
    found = [_controls(measured.controls), _drops(measured.drops)]
    if calibration is None:
        found.append(Finding("doubt", "correlations", "No drops could be compared with published correlations."))
    else:
        found += [_published(calibration), _calibrated(calibration)]
    if measured.doubts:
        count = len(measured.doubts)
        told = measured.doubts[0] if count == 1 else f"{count} doubts are listed below; the first: {measured.doubts[0]}"
        found.append(Finding("doubt", "doubts", told))
    return tuple(found)


def _controls(controls: pd.DataFrame) -> Finding:
    topic = "measuring chain"
    if len(controls) == 0:
        return Finding(
            "doubt", topic, "No control sphere was dropped: scale, clock and fluid are not checked together."
        )
    passed = int(controls["passed"].astype(bool).sum())
    worst = significant(float(controls["en"].abs().max()), 2)
    agree = "agrees" if passed == len(controls) == 1 else "agree"
    told = (
        f"{_of(passed, len(controls), 'control drop')} {agree} with the expected velocity"
        f" (largest |Eₙ| {worst}, satisfactory up to 1)."
    )
    if passed == len(controls):
        return Finding("good", topic, f"Under control: {told}")
    return Finding("bad", topic, f"Not under control: only {told} Find the cause before the results are used.")


def _drops(drops: pd.DataFrame) -> Finding:
    topic = "drops"
    accepted = drops["accepted"].astype(bool)
    if len(drops) == 0:
        return Finding("bad", topic, "No fall was found in the recordings.")
    if not accepted.any():
        return Finding("bad", topic, f"None of {len(drops)} drops is accepted.{_why(drops)}")
    told = f"Accepted: {_of(int(accepted.sum()), len(drops), 'drop')}.{_why(drops[~accepted])}"
    return Finding("good" if accepted.all() else "doubt", topic, told)


def _why(refused: pd.DataFrame) -> str:
    """How often each flag stands first on a refused drop: that is the one that refused it."""
    counts = Counter(cell.split(";")[0] or "without flag" for cell in refused["flags"])
    return f" Refused: {', '.join(f'{count} {flag}' for flag, count in counts.most_common())}." if counts else ""


def _published(calibration: Calibration) -> Finding:
    row = _ranked(calibration, calibration.best_published)
    rms, bias = float(row["rms_percent"]), float(row["bias_percent"])
    inside = float(row["in_range_percent"])
    told = (
        f"{calibration.best_published} comes closest: deviation in velocity {significant(rms, 2)} % (root mean square),"
        f" bias {percent(bias)} %, {int(row['drops'])} drops, "
        + ("all inside its range." if inside == 100 else f"{significant(inside, 2)} % inside its range.")
    )
    return Finding("good" if rms <= CLOSE else "doubt", "published correlation", told)


def _calibrated(calibration: Calibration) -> Finding:
    """The verdict of the calibration in its own words."""
    rms = float(_ranked(calibration, calibration.card.name)["rms_percent"])
    return Finding("good" if rms <= CLOSE else "doubt", "calibration", calibration.notes[0])


def _ranked(calibration: Calibration, method: str) -> pd.Series:
    return calibration.ranking.set_index("method").loc[method]


def _of(count: int, total: int, noun: str) -> str:
    if count == total:
        return {1: f"the one {noun}", 2: f"both {noun}s"}.get(total, f"all {total} {noun}s")
    return f"{count} of {total} {noun}s"
