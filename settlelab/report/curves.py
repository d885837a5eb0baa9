"""Drag laws as curves over the range of the drops, for the drag chart."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np
import pandas as pd

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DRAG, Method
from settlelab.report.figures import DragCurve

if TYPE_CHECKING:
    from settlelab.calibrate import CalibratedFit, Calibration

__all__ = ["drag_curves"]

STANDARD_CURVE = "clift-grace-weber-1978"  # of the sphere
POINTS = 200
BEYOND = 1.5  # factor by which a curve reaches beyond the drops


def drag_curves(drops: pd.DataFrame, calibration: Calibration | None) -> list[DragCurve]:
    """The standard curve of the sphere, and for each lot of accepted cuttings the two laws of the calibration.

    These are the best published one and the chosen form, at the median shape of the lot, a little beyond the Reynolds
    numbers of its drops.
    """
    used = drops[drops["accepted"].astype(bool)]
    reynolds = _reach(used)
    sphere = DRAG[STANDARD_CURVE].drag_coefficient(reynolds)
    curves = [DragCurve(label="sphere", kind="sphere", lot=None, reynolds=reynolds, drag_coefficient=sphere)]
    if calibration is None:
        return curves
    for lot, own in used[~used["control"].astype(bool)].groupby("lot", sort=True):
        curves.append(_curve(DRAG[calibration.best_published], "published", str(lot), own))
        if calibration.chosen is not None:
            curves.append(_curve(calibration.chosen, "calibrated", str(lot), own))
    return curves


def _reach(drops: pd.DataFrame) -> FloatArray:
    return np.geomspace(drops["reynolds"].min() / BEYOND, drops["reynolds"].max() * BEYOND, POINTS)


def _curve(
    law: Method | CalibratedFit, kind: Literal["published", "calibrated"], lot: str, drops: pd.DataFrame
) -> DragCurve:
    """A law at the median shape of a lot's drops; a form with a coefficient for each lot takes that of the lot."""
    known = drops.assign(density_ratio=drops["particle_density"] / drops["fluid_density"])
    needs = law.needs if isinstance(law, Method) else law.form.needs
    shape = {name: float(known[name].median()) for name in needs if name != "lot"}
    if not isinstance(law, Method) and "lot" in needs:
        shape["lot"] = float(law.form.recipe.lots.index(lot))
    reynolds = _reach(drops)
    drag = np.asarray(law.drag_coefficient(reynolds, **shape)) * np.ones_like(reynolds)
    return DragCurve(label=law.name, kind=kind, lot=lot, reynolds=reynolds, drag_coefficient=drag)
