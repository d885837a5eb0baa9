"""From a drop table to the law that holds for these cuttings: ranking, calibrated forms, card, prediction.

In: measured velocities with what they depend on (columns of `Drop`). Out: `Calibration`, with a `Card` from which
`predict` gives velocities of other sizes in other fluids.
"""

from __future__ import annotations

from settlelab.calibrate.annulus import ANNULUS_CAUTIONS, AnnulusRow, in_annulus
from settlelab.calibrate.calibration import calibrate_drops
from settlelab.calibrate.card import Card, read_card, write_card
from settlelab.calibrate.carding import Origin
from settlelab.calibrate.model import CalibratedFit, Calibration, FittedParameter
from settlelab.calibrate.predict import Prediction, predict
from settlelab.calibrate.ranking import PredictedDrop
from settlelab.calibrate.sizes import ladder, read_sizes
from settlelab.calibrate.table import as_measured, assumptions, read_drop_table

__all__ = [
    "ANNULUS_CAUTIONS",
    "AnnulusRow",
    "CalibratedFit",
    "Calibration",
    "Card",
    "FittedParameter",
    "Origin",
    "PredictedDrop",
    "Prediction",
    "as_measured",
    "assumptions",
    "calibrate_drops",
    "in_annulus",
    "ladder",
    "predict",
    "read_card",
    "read_drop_table",
    "read_sizes",
    "write_card",
]
