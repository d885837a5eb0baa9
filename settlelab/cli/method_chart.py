"""The picture of `settlelab methods NAME --plot`: one drag law over the Reynolds number."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes

from settlelab.physics.catalogue import spoken
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DRAG, Method
from settlelab.report import drawing

# A blocky chip of rock in water, for laws that ask for a shape.
EXAMPLE = {
    "sphericity": 0.8,
    "corey_shape_factor": 0.6,
    "flatness": 0.6,
    "elongation": 0.8,
    "circularity": 0.85,
    "density_ratio": 2.65,
    "projected_area_ratio": 1.2,
    "projected_circularity": 0.9,
    "largest_circularity": 0.9,
    "powers_roundness": 3.5,
}
STANDARD = "clift-grace-weber-1978"


def law_chart(method: Method) -> Axes:
    """Drag coefficient over Reynolds number, full where the law is in its range, with the sphere's standard curve."""
    reynolds: FloatArray = np.geomspace(1e-2, 1e6, 600)
    shape = {need: float(np.clip(EXAMPLE[need], *method.valid.get(need, (0.0, 10.0)))) for need in method.needs}
    cd = method.drag_coefficient(reynolds, **shape)
    inside = method.within(reynolds=reynolds, **shape)
    ax = drawing.axes(None, 5.0, 3.6)
    if method.name != STANDARD:
        sphere = DRAG[STANDARD].drag_coefficient(reynolds)
        ax.plot(reynolds, sphere, color=drawing.MUTED, linewidth=1.0, label="sphere, standard curve")
    ax.plot(reynolds, cd, color=drawing.SERIES[1][0], linewidth=1.2, linestyle=":", label="outside its range")
    label = method.name + "".join(f"\n{spoken(name)} {value:g}" for name, value in shape.items())
    ax.plot(reynolds, np.where(inside, cd, np.nan), color=drawing.SERIES[0][0], linewidth=2.0, label=label)
    ax.set(xscale="log", yscale="log", xlabel="Reynolds number", ylabel="drag coefficient", ylim=(0.05, 3e3))
    ax.grid(which="major", color=drawing.FAINT, linewidth=0.6)
    ax.legend(fontsize=8, frameon=False, labelcolor=drawing.INK)
    return ax
