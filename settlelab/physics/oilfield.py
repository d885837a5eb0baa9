"""Oil-field viscometer readings turned into the field's own numbers, and the shear rates that a settling test uses.

Readings are dial degrees of a rotational viscometer with rotor and bob R1B1. The field's numbers rest on two readings
each: `flow_curve.fit_rheology` uses all of them and states uncertainties.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import BoolArray, FloatArray
from settlelab.physics.rheology import SHEAR_STRESS_PER_DEGREE, Rheology

ROTOR_RADIUS, BOB_RADIUS = 0.018415, 0.017245  # m, R1B1
POUND_PER_100_SQUARE_FEET = 0.478803  # Pa


@dataclass(frozen=True, slots=True, kw_only=True)
class BinghamNumbers:
    """What the field reads off the 600 and 300 rpm readings."""

    plastic_viscosity: FloatArray  # Pa s
    yield_point: FloatArray  # Pa, a dial degree taken as 1 lbf/100 ft2
    apparent_viscosity: FloatArray  # Pa s, half the 600 rpm reading


def bingham_numbers(r600: ArrayLike, r300: ArrayLike) -> BinghamNumbers:
    """Plastic viscosity, yield point and apparent viscosity from two dial readings.

    Parameters
    ----------
    r600, r300 : (N,) array
        Dial readings at 600 and 300 rpm [degrees].

    Returns
    -------
    BinghamNumbers
        A dial degree counts as 1 lbf/100 ft2 in the yield point by the field's definition, though it is 1.0666 of them.
    """
    high, low = np.asarray(r600, dtype=np.float64), np.asarray(r300, dtype=np.float64)
    return BinghamNumbers(
        plastic_viscosity=np.asarray((high - low) * 1e-3),
        yield_point=np.asarray((2 * low - high) * POUND_PER_100_SQUARE_FEET),
        apparent_viscosity=np.asarray(high / 2 * 1e-3),
    )


def power_law_pipe(r600: ArrayLike, r300: ArrayLike) -> Rheology:
    """Power law through the 600 and 300 rpm readings, as API RP 13D has it for the pipe.

    Parameters
    ----------
    r600, r300 : (N,) array
        Dial readings [degrees].

    Returns
    -------
    Rheology
        n = 3.32 log(R600/R300), K = 0.511 R300 / 511^n.
    """
    high, low = np.asarray(r600, dtype=np.float64), np.asarray(r300, dtype=np.float64)
    n = 3.32 * np.log10(high / low)
    return Rheology(consistency=0.511 * low / 511**n, flow_index=n)


def power_law_annulus(r100: ArrayLike, r3: ArrayLike) -> Rheology:
    """Power law through the 100 and 3 rpm readings, as API RP 13D has it for the annulus.

    Parameters
    ----------
    r100, r3 : (N,) array
        Dial readings [degrees].

    Returns
    -------
    Rheology
        n = 0.657 log(R100/R3), K = 0.511 R100 / 170.2^n: nearer to the rates at which a grain settles than the pipe's.
    """
    high, low = np.asarray(r100, dtype=np.float64), np.asarray(r3, dtype=np.float64)
    n = 0.657 * np.log10(high / low)
    return Rheology(consistency=0.511 * high / 170.2**n, flow_index=n)


def low_rate_yield_stress(r6: ArrayLike, r3: ArrayLike) -> FloatArray:
    """Yield stress estimate 2 R3 - R6 [Pa] from two dial readings [degrees]; not below 0."""
    degrees = 2 * np.asarray(r3, dtype=np.float64) - np.asarray(r6, dtype=np.float64)
    return np.asarray(np.maximum(degrees, 0.0) * SHEAR_STRESS_PER_DEGREE)


def shear_rate_correction(flow_index: ArrayLike) -> FloatArray:
    """Shear rate at the bob of R1B1 in a power-law fluid over the Newtonian one that the rpm are turned into.

    Parameters
    ----------
    flow_index : (N,) array
        n [-], above 0. Of any fluid the slope of ln stress against ln rate at the reading, to good approximation.

    Returns
    -------
    (N,) array
        [-]: 1 at n = 1, 1.066 at 0.5. Consistency fitted to uncorrected rates is high by this to the power n.
    """
    n = np.asarray(flow_index, dtype=np.float64)
    ratio = BOB_RADIUS / ROTOR_RADIUS
    return np.asarray((1 - ratio**2) / n / (1 - ratio ** (2 / n)))


def readings_of_the_fall(shear_rate: ArrayLike, velocity: ArrayLike, diameter: ArrayLike) -> BoolArray:
    """Which viscometer readings a settling test rests on: those nearest to the shear rates V/d of its grains.

    Parameters
    ----------
    shear_rate : (N,) array
        Of the readings [1/s].
    velocity, diameter : (M,) array
        Of the grains [m/s, m].

    Returns
    -------
    (N,) bool array
        True for the readings between the least and the greatest V/d and the next one on either side; where the grains
        shear slower or faster than any reading, only the nearest reading is left and the flow curve is extrapolated.
    """
    rate = np.asarray(shear_rate, dtype=np.float64)
    settling = np.abs(np.asarray(velocity, dtype=np.float64)) / np.asarray(diameter, dtype=np.float64)
    known = settling[np.isfinite(settling)]
    if known.size == 0 or rate.size == 0:
        return np.zeros(rate.shape, dtype=np.bool_)
    low, high = float(known.min()), float(known.max())
    below, above = rate[rate <= low], rate[rate >= high]
    floor = below.max() if below.size else -np.inf
    ceiling = above.min() if above.size else np.inf
    return np.asarray((rate >= min(floor, rate.max())) & (rate <= max(ceiling, rate.min())))


def true_shear_rates(shear_rate: ArrayLike, shear_stress: ArrayLike) -> FloatArray:
    """Shear rates at the bob of R1B1 in a fluid that is not Newtonian, from the nominal rates of the readings.

    Parameters
    ----------
    shear_rate : (N,) array
        Nominal, 1.7023 per rpm [1/s], rising; two and more.
    shear_stress : (N,) array
        [Pa], above 0.

    Returns
    -------
    (N,) array
        Nominal rate times `shear_rate_correction` at the slope of ln stress against ln rate there [1/s]: exact for a
        power law, to be fitted by `flow_curve.fit_rheology` instead of the nominal rates.

    Raises
    ------
    ValueError
        Fewer than two readings, rates that do not rise, or stresses not above 0.
    """
    rate, stress = (np.asarray(item, dtype=np.float64) for item in (shear_rate, shear_stress))
    if rate.size < 2 or np.any(np.diff(rate) <= 0) or np.any(rate <= 0) or np.any(stress <= 0):
        raise ValueError("two and more readings are needed, at rising shear rates and with stresses above 0")
    slope = np.gradient(np.log(stress), np.log(rate))
    return np.asarray(rate * shear_rate_correction(np.clip(slope, 0.05, 1.5)))
