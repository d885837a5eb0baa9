"""What the residuals of a law say of it: trends that it misses, a shape other than normal, drops that it hangs on."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import pandas as pd
from scipy.stats import kruskal, shapiro, spearmanr

from settlelab.calibrate.fit import LawFit
from settlelab.calibrate.form import Form
from settlelab.calibrate.observations import Observations
from settlelab.calibrate.validation import parameters_without
from settlelab.physics.constants import FloatArray

__all__ = ["check_notes", "influence", "residual_checks"]

FEWEST = 8  # particle means; of fewer no test finds anything
LEVEL = 0.05  # of all tests together, shared among them (Bonferroni)
HEAVY = 1.0  # standard uncertainties by which one particle may move a coefficient


class _Test(NamedTuple):
    check: str
    against: str
    statistic: str
    value: float
    p_value: float


def residual_checks(fit: LawFit, seen: Observations) -> pd.DataFrame:
    """Tests of the residuals of a law, each over its standard deviation.

    Parameters
    ----------
    fit : LawFit
        The law set against particle means.
    seen : Observations
        These.

    Returns
    -------
    DataFrame
        `check` (trend, lots, normality), `against`, `statistic`, `value`, `p_value`, and `remarkable`, true where the
        p-value is below 5 % over the number of tests. No rows for fewer than eight particle means. Means of one
        particle in several fluids count as independent, which makes p-values a little too small.
    """
    distance = fit.distance
    columns = ["check", "against", "statistic", "value", "p_value"]
    found: list[_Test] = []
    if len(distance) >= FEWEST:
        for name, values in _inputs(seen).items():
            if np.ptp(values) > 0:
                correlation, p_value = spearmanr(values, distance)
                found.append(_Test("trend", name, "Spearman correlation", float(correlation), float(p_value)))
        lots = [distance[seen.lot == lot] for lot in np.unique(seen.lot)]
        if len(lots) > 1:
            value, p_value = kruskal(*lots)
            found.append(_Test("lots", "lot", "Kruskal-Wallis H", float(value), float(p_value)))
        value, p_value = shapiro(distance)
        found.append(_Test("normality", "normal distribution", "Shapiro-Wilk W", float(value), float(p_value)))
    table = pd.DataFrame(found, columns=columns)
    table["remarkable"] = table["p_value"] < LEVEL / max(len(found), 1)
    return table


def _inputs(seen: Observations) -> dict[str, FloatArray]:
    """What residuals are held against."""
    shapes = {name: values for name, values in seen.falls.descriptors.items() if name not in ("lot", "density_ratio")}
    return {"reynolds": seen.reynolds, **shapes, "drop": seen.drop.astype(np.float64)}


def influence(form: Form, fit: LawFit, seen: Observations) -> pd.DataFrame:
    """How far each coefficient moves, in its standard uncertainties, when a particle is left out.

    Returns
    -------
    DataFrame
        A row for each particle, named by its first `drop`, a column for each coefficient, and `largest` of their sizes;
        the heaviest first. Coefficients at a bound do not move.
    """
    first = np.unique(seen.particle, return_index=True)[1]
    without = parameters_without(form, fit, seen.particle)[:, first]
    moved = (without - fit.values[:, None]) / np.sqrt(np.diag(fit.covariance))[:, None]
    moved = np.nan_to_num(moved)
    table = pd.DataFrame({"drop": seen.drop[first]})
    for parameter, values in zip(form.parameters, moved, strict=True):
        table[parameter.name] = values
    table["largest"] = np.abs(moved).max(axis=0)
    return table.sort_values("largest", ascending=False, kind="stable").reset_index(drop=True)


def check_notes(law: str, checks: pd.DataFrame, moved: pd.DataFrame | None) -> list[str]:
    """What a reader should know of it, one sentence each."""
    notes = []
    for row in checks[checks["remarkable"]].itertuples():
        against, chance = str(row.against).replace("_", " "), f"chance of it {row.p_value:.1g}"
        match row.check:
            case "trend":
                against = {"reynolds": "Reynolds number", "drop": "order of the drops"}.get(against, against)
                way = "faster" if row.value > 0 else "slower"
                notes.append(f"Particles fall {way} than {law} says as the {against} grows ({chance}).")
            case "lots":
                notes.append(f"The lots deviate from {law} by different amounts ({chance}).")
            case _:
                notes.append(f"Deviations from {law} are not normally distributed ({chance}).")
    if moved is not None and len(heavy := moved[moved["largest"] > HEAVY]):
        drops = ", ".join(str(drop) for drop in heavy["drop"])
        notes.append(
            f"A coefficient of {law} moves by more than its standard uncertainty without the particle of drop {drops}."
        )
    return notes
