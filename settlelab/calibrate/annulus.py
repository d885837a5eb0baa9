"""Slip velocities against the mean velocity of a mud that flows up a vertical annulus: an indication, not a design."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from settlelab.errors import SettlelabError
from settlelab.measure.model import Millimetre, MillimetrePerSecond, Number

__all__ = ["ANNULUS_CAUTIONS", "USUAL_RATIO", "AnnulusRow", "in_annulus"]

STEEPEST = 30.0  # degrees from vertical beyond which cuttings slide and form beds
USUAL_RATIO = 0.5  # transport ratio commonly asked for in vertical holes: a convention, not physics

ANNULUS_CAUTIONS = (
    "The slip velocities are those in mud at rest. Flowing mud is sheared, and thinner if it thins under shear: "
    "cuttings slip faster than this.",
    "In an eccentric annulus the wide side carries and the narrow side does not; rotation of the pipe, filter cake and "
    "the crowd of other cuttings are not counted either.",
    f"That a transport ratio of {USUAL_RATIO:g} is enough in a vertical hole is a convention (after Sifferman et al. "
    "1974, J. Pet. Technol. 26, 1295), not physics.",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class AnnulusRow:
    """One particle size in a vertical annulus; the interval is of 95 %, for a single particle."""

    equivalent_diameter: Millimetre
    slip_velocity: MillimetrePerSecond
    annular_velocity: MillimetrePerSecond
    rise_velocity: MillimetrePerSecond  # annular less slip velocity; below 0 the particle falls
    transport_ratio: Number  # rise over annular velocity
    transport_ratio_low: Number
    transport_ratio_high: Number


def in_annulus(predicted: pd.DataFrame, annular_velocity: float, inclination: float = 0.0) -> pd.DataFrame:
    """Predicted velocities set against the mean velocity in an annulus.

    Parameters
    ----------
    predicted : DataFrame
        As `predict` gives it.
    annular_velocity : float
        Flow rate over the area of the annulus [m/s].
    inclination : float
        Of the hole from vertical [degrees].

    Returns
    -------
    DataFrame
        Columns of `AnnulusRow` in SI, a row for each of `predicted`.

    Raises
    ------
    SettlelabError
        The mud does not flow upwards, or the hole is inclined by more than 30 degrees: there cuttings slide and lie in
        beds, and the slip across the hole governs, which a fall along it says nothing about (Okrajni & Azar 1986, SPE
        Drill. Eng. 1, 291; Tomren, Iyoho & Azar 1986, SPE Drill. Eng. 1, 43).
    """
    if not (np.isfinite(annular_velocity) and annular_velocity > 0):
        raise SettlelabError("the annular velocity must be above 0: without flow nothing is carried")
    if not 0 <= inclination <= STEEPEST:
        raise SettlelabError(
            f"no transport ratio at {inclination:g} degrees from vertical: beyond {STEEPEST:g} degrees cuttings slide "
            "and form beds, and it is their fall across the hole that governs, not along it"
        )
    slip = predicted["velocity"]
    return pd.DataFrame(
        {
            "equivalent_diameter": predicted["equivalent_diameter"],
            "slip_velocity": slip,
            "annular_velocity": annular_velocity,
            "rise_velocity": annular_velocity - slip,
            "transport_ratio": 1 - slip / annular_velocity,
            "transport_ratio_low": 1 - predicted["prediction_high"] / annular_velocity,
            "transport_ratio_high": 1 - predicted["prediction_low"] / annular_velocity,
        }
    )
