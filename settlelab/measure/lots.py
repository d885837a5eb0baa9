"""Replicate drops and lots: how well a drop repeats, how much particles differ, what stands out, what drifts.

All of it is relative, on logarithms of the unbounded velocity of accepted cuttings. A particle in one fluid is a group.
Suspicious drops and particles are marked; nothing is removed.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
import pandas as pd

from settlelab.measure.components import OUTLIER, Suspect, cochran, drift, grubbs, one_way
from settlelab.measure.model import Scatter

__all__ = ["scatter_of"]

LOT_COLUMNS = (
    "lot",
    "fluid",
    "particles",
    "drops",
    "within",
    "repeatability_limit",
    "between",
    "mean_u",
    "f_ratio",
    "p_value",
)
MARK_COLUMNS = ("lot", "fluid", "particle", "drop", "test", "statistic", "critical", "mark")
TREND_COLUMNS = ("fluid", "drops", "per_drop", "per_drop_u", "p_value")
ALL = "all"
FEWEST_PARTICLES = 4  # for a test on particles of a lot, which differ in size as well


def scatter_of(drops: pd.DataFrame) -> Scatter | None:
    """Repeatability, differences between particles, suspicious drops and particles, and drift with drop order.

    Parameters
    ----------
    drops : DataFrame
        Columns of `Drop`, SI.

    Returns
    -------
    Scatter or None
        None where no cutting was accepted.
    """
    known = np.isfinite(drops["unbounded_velocity"]) & (drops["unbounded_velocity"] > 0)
    used = drops[drops["accepted"].astype(bool) & ~drops["control"].astype(bool) & known]
    if used.empty:
        return None
    used = used.assign(log_velocity=np.log(used["unbounded_velocity"].to_numpy(dtype=np.float64)))
    rows = [_lot_row(*names, part) for names, part in _by(used)]
    lots = pd.DataFrame(rows + _pooled(used, rows), columns=list(LOT_COLUMNS))
    marks = pd.DataFrame(
        [mark for names, part in _by(used) for mark in _marks(*names, part)], columns=list(MARK_COLUMNS)
    )
    trends = pd.DataFrame(
        [row for fluid, part in used.groupby("fluid", sort=False) for row in _trend(str(fluid), part)],
        columns=list(TREND_COLUMNS),
    )
    return Scatter(lots=lots, marks=marks, trends=trends, told=tuple(_told(marks, trends)))


def _by(drops: pd.DataFrame) -> Iterator[tuple[tuple[str, str], pd.DataFrame]]:
    for (lot, fluid), part in drops.groupby(["lot", "fluid"], sort=False):
        yield (str(lot), str(fluid)), part


def _lot_row(lot: str, fluid: str, part: pd.DataFrame) -> dict[str, object]:
    found = one_way(part["log_velocity"], part["particle"])
    return {
        "lot": lot,
        "fluid": fluid,
        "particles": found.groups,
        "drops": found.count,
        "within": found.within,
        "repeatability_limit": found.repeatability_limit,
        "between": found.between,
        "mean_u": found.mean_u,
        "f_ratio": found.f_ratio,
        "p_value": found.p_value,
    }


def _pooled(used: pd.DataFrame, rows: list[dict[str, object]]) -> list[dict[str, object]]:
    """A row on the repeatability of all lots and fluids together, where there are several and some replicates."""
    found = one_way(used["log_velocity"], pd.factorize(used["particle"] + "\0" + used["fluid"])[0])
    if len(rows) < 2 or not math.isfinite(found.within):
        return []
    unknown = dict.fromkeys(("between", "mean_u", "f_ratio", "p_value"), math.nan)
    place = {"lot": ALL, "fluid": ALL, "particles": found.groups, "drops": found.count}
    return [place | {"within": found.within, "repeatability_limit": found.repeatability_limit} | unknown]


def _marks(lot: str, fluid: str, part: pd.DataFrame) -> Iterator[dict[str, object]]:
    """Everything in a lot that a test marks: single drops, particles that repeat badly, particles unlike the others."""
    place = {"lot": lot, "fluid": fluid}
    groups = {str(name): group for name, group in part.groupby("particle", sort=False)}
    for name, group in groups.items():
        yield from _marked(place, "Grubbs, drops of a particle", grubbs(group["log_velocity"]), [name], group["drop"])
    for size in sorted({len(group) for group in groups.values()} - {1}):
        equal = [name for name, group in groups.items() if len(group) == size]
        deviations = [float(groups[name]["log_velocity"].std()) for name in equal]
        yield from _marked(place, "Cochran, repeatability of particles", cochran(deviations, size), equal)
    if len(groups) >= FEWEST_PARTICLES:
        means = [float(group["log_velocity"].mean()) for group in groups.values()]
        yield from _marked(place, "Grubbs, particles of a lot", grubbs(means), list(groups))


def _marked(
    place: dict[str, str], test: str, found: Suspect | None, names: list[str], drops: pd.Series | None = None
) -> Iterator[dict[str, object]]:
    """The row of a mark, if the test gives one: of a drop where `drops` holds their numbers, else of a particle."""
    if found is None or not found.mark:
        return
    critical = found.critical_outlier if found.mark == "outlier" else found.critical_straggler
    yield place | {
        "particle": names[found.index] if drops is None else names[0],
        "drop": "" if drops is None else str(int(drops.iloc[found.index])),
        "test": test,
        "statistic": found.statistic,
        "critical": critical,
        "mark": found.mark,
    }


def _trend(fluid: str, part: pd.DataFrame) -> Iterator[dict[str, object]]:
    found = drift(part["log_velocity"], part["drop"], part["particle"])
    if found is not None:
        yield {
            "fluid": fluid,
            "drops": len(part),
            "per_drop": found.slope,
            "per_drop_u": found.u,
            "p_value": found.p_value,
        }


def _told(marks: pd.DataFrame, trends: pd.DataFrame) -> Iterator[str]:
    """Outliers and drifts, each of which chance alone gives in one test of a hundred: a sentence each."""
    for row in marks[marks["mark"] == "outlier"].to_dict("records"):
        what = f"drop {row['drop']} of particle {row['particle']}" if row["drop"] else f"particle {row['particle']}"
        yield (
            f"{what} ({row['fluid']}) is an outlier by {row['test']} ({row['statistic']:.3f}, 1 % point "
            f"{row['critical']:.3f}); it was kept: look for a cause"
        )
    for row in trends[trends["p_value"] < OUTLIER].to_dict("records"):
        way = "faster" if row["per_drop"] > 0 else "slower"
        yield (
            f"{row['fluid']}: replicate drops become {way} with drop order, by "
            f"{100 * math.expm1(abs(row['per_drop'])):.2g} % a drop: did the fluid change its temperature or rest?"
        )
