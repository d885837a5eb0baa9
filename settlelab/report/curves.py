"""Drag laws as curves over the range of the drops, for the drag chart."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from settlelab.physics.drag import DRAG
from settlelab.report.figures import DragCurve

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = ["drag_curves"]

STANDARD_CURVE = "clift-grace-weber-1978"  # of the sphere
POINTS = 200


def drag_curves(drops: pd.DataFrame, calibration: Calibration | None) -> list[DragCurve]:
    """The standard curve of the sphere and, at the median shape of the accepted cuttings, the best published law.

    The curves reach a little beyond the Reynolds numbers of the accepted drops.
    """
    used = drops[drops["accepted"].astype(bool)]
    reynolds = np.geomspace(used["reynolds"].min() / 2, used["reynolds"].max() * 2, POINTS)
    sphere = DRAG[STANDARD_CURVE].drag_coefficient(reynolds)
    curves = [DragCurve(label="sphere", kind="sphere", reynolds=reynolds, drag_coefficient=sphere)]
    cuttings = used[~used["control"].astype(bool)]
    if calibration is None or len(cuttings) == 0:
        return curves
    method = DRAG[calibration.best_published]
    shape = median_shape(cuttings, method.needs)
    told = ", ".join(f"{name.replace('_', ' ')} {value:.2f}" for name, value in shape.items())
    label = f"{method.name} at {told}" if told else method.name
    drag = method.drag_coefficient(reynolds, **shape)
    return [*curves, DragCurve(label=label, kind="published", reynolds=reynolds, drag_coefficient=drag)]


def median_shape(drops: pd.DataFrame, needs: tuple[str, ...]) -> dict[str, float]:
    """Median of each descriptor that a law needs."""
    known = drops.assign(density_ratio=drops["particle_density"] / drops["fluid_density"])
    return {name: float(known[name].median()) for name in needs}
