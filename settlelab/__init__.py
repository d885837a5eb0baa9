"""settlelab: settling tests from recording to signed report.

The public face. Names are loaded on first use, so that importing the package costs next to nothing.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from settlelab.calibrate import calibrate_drops, predict, read_card, read_drop_table
    from settlelab.errors import SettlelabError
    from settlelab.measure import measure_falls, measure_study
    from settlelab.physics.drag import DRAG
    from settlelab.pipeline import run_study
    from settlelab.study import read_study
    from settlelab.units import Quantity
    from settlelab.video import follow_falls

__version__ = "0.1.0"

__all__ = [
    "DRAG",
    "Quantity",
    "SettlelabError",
    "calibrate_drops",
    "follow_falls",
    "measure_falls",
    "measure_study",
    "predict",
    "read_card",
    "read_drop_table",
    "read_study",
    "run_study",
]

_HOMES = {
    "settlelab.calibrate": ("calibrate_drops", "predict", "read_card", "read_drop_table"),
    "settlelab.errors": ("SettlelabError",),
    "settlelab.measure": ("measure_falls", "measure_study"),
    "settlelab.physics.drag": ("DRAG",),
    "settlelab.pipeline": ("run_study",),
    "settlelab.study": ("read_study",),
    "settlelab.units": ("Quantity",),
    "settlelab.video": ("follow_falls",),
}


def __getattr__(name: str) -> object:
    """A public name, from the room where it lives."""
    for home, names in _HOMES.items():
        if name in names:
            return getattr(import_module(home), name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
