"""Errors in size and shape that would flatten a law.

A particle measured as large is on average a little smaller than it was measured: the largest readings are partly large
by their errors. Fitted to such readings a law comes out too flat (attenuation), however the weights are chosen. The
remedy is regression calibration: each reading is replaced by the value to be expected behind it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from settlelab.calibrate.falls import Falls
from settlelab.calibrate.observations import Observations
from settlelab.physics.constants import FloatArray

__all__ = ["attenuation_notes", "expected_inputs"]

MOST = 0.5  # of a reading's distance from the mean; a stated uncertainty that asks for more is not believed
NOTICEABLE = 0.01


def expected_inputs(means: Observations) -> Observations:
    """The particle means with size, density and descriptors as they are to be expected behind their readings.

    Readings are drawn towards the mean of all particles by the share of their variance that the stated uncertainty
    makes up. Without stated uncertainties, and with sizes from mass and density (a share of 1e-4), nothing changes.

    References
    ----------
    Carroll, Ruppert, Stefanski & Crainiceanu (2006), Measurement Error in Nonlinear Models, Chapman & Hall, chapter 4.
    """
    falls = means.falls
    drawn = {name: _expected(_values(falls, name), share) for name, share in _shares(means).items()}
    fields = {name: values for name, values in drawn.items() if name not in falls.descriptors}
    shapes: Mapping[str, FloatArray] = {name: drawn.get(name, values) for name, values in falls.descriptors.items()}
    return replace(means, falls=replace(falls, **fields, descriptors=shapes))


def attenuation_notes(means: Observations) -> tuple[str, ...]:
    """Which readings were drawn in noticeably, one sentence each."""
    return tuple(
        f"Stated uncertainties make up {np.mean(share):.0%} of the variance of the {name.replace('_', ' ')}: the fits "
        "use the values to be expected behind the readings, so that the law does not come out too flat."
        for name, share in _shares(means).items()
        if np.mean(share) > NOTICEABLE
    )


def _shares(means: Observations) -> dict[str, FloatArray]:
    """Share of the variance of the readings, in logarithms, that is error; for what belongs to single particles."""
    shares = {}
    for name, u in means.input_u.items():
        if name in ("fluid_density", "viscosity") or not np.any(u):
            continue
        variance = float(np.var(np.log(_values(means.falls, name))))
        if variance > 0.0:
            shares[name] = np.minimum(u**2 / variance, MOST)
    return shares


def _values(falls: Falls, name: str) -> FloatArray:
    return np.asarray(falls.descriptors[name] if name in falls.descriptors else getattr(falls, name))


def _expected(values: FloatArray, share: FloatArray) -> FloatArray:
    """Best linear prediction of the true values from the readings, in logarithms."""
    log = np.log(values)
    return np.asarray(np.exp(log - share * (log - np.mean(log))))
