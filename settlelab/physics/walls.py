"""Walls: how much slower a particle falls in a column than in unbounded fluid.

In: diameter over bore, Reynolds number in unbounded fluid, flow index. Out: the wall factor V/V_unbounded with its
standard uncertainty and the methods it rests on (`WALLS`). A column is a round tube here; `equivalent_bore` turns a
rectangular one into it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PchipInterpolator

from settlelab.physics import wall_fits
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.nonnewtonian import generalised_reynolds
from settlelab.physics.registry import find
from settlelab.physics.rheology import Rheology
from settlelab.physics.roots import bracketed_root
from settlelab.physics.wall_methods import (
    WALLS,
    WallMethod,
    kehlenbeck_difelice,
    munroe,
    newton,
    tube_creeping,
    tube_finite_reynolds,
    tube_power_law,
)

__all__ = ["WALLS", "WallFactor", "WallMethod", "equivalent_bore", "unbounded_velocity", "wall_factor", "wall_fits"]

# The end of creeping flow, and the stretch between the computed table and the Newton regime.
_CREEPING_END, _TABLE_END, _NEWTON_START = 0.3, 150.0, 1000.0
_TABLE_RATIO = 0.5  # the computed tables end here
_TABLE_U = 0.001  # standard uncertainty of the computed tables, absolute


@dataclass(frozen=True, slots=True, kw_only=True)
class WallFactor:
    """Wall factor with its standard uncertainty, and the names in `WALLS` that it rests on, joined by " + "."""

    factor: FloatArray
    u: FloatArray
    method: NDArray[np.str_]


def wall_factor(
    ratio: ArrayLike, reynolds_unbounded: ArrayLike, *, flow_index: ArrayLike = 1.0, method: str | None = None
) -> WallFactor:
    """Velocity in a round column over velocity in unbounded fluid, by the regime of the fall.

    Newtonian: the exact creeping solution at Re 0, going over linearly into the computed table at Re 0.3; the table to
    Re 150; the mean of `newton-1687` and `munroe-1888` from Re 1000; in between a blend, linear in ln Re. In a
    power-law fluid the loss of velocity 1 - f is that of the creeping power-law table, faded with Re as it fades in a
    Newtonian fluid. A yield stress confines the flow and makes the wall weaker than stated here.

    The standard uncertainty adds in squares: the computed tables (0.001); the doubt between methods, as a rectangular
    distribution over their difference (computed table and `kehlenbeck-difelice-1999` up to Re 150), or half the
    difference of the two Newton-regime factors; a particle off the axis by up to half the radius (0.03 times the ratio
    in creeping flow, fading as the wall does); how fast the wall fades in a power-law fluid; beyond ratio 0.5, a tenth
    of 1 - f; beyond the flow indices of the table, twice the distance times 1 - f.

    Parameters
    ----------
    ratio : (N,) array
        Particle diameter over bore [-], from 0 to below 1. Volume-equivalent diameter for near-isometric grains.
        The tables end at 0.5; beyond, and for a flow index outside 0.3 to 1, the nearest table value is carried on.
    reynolds_unbounded : (N,) array
        Generalised Reynolds number of the fall in unbounded fluid [-].
    flow_index : (N,) array
        n of the fluid [-].
    method : str, optional
        A name in `WALLS` to be used instead of this choice by regime, whether in its range or not. Its difference from
        the choice, as a rectangular distribution, is added to the uncertainty.

    Returns
    -------
    WallFactor
        (N,) arrays; factor 1 for a wall infinitely far away.

    Raises
    ------
    ValueError
        A ratio below 0, or of 1 and more: the particle would not fit.
    SettlelabError
        An unknown method.

    References
    ----------
    See the entries of `WALLS`.
    """
    arrays = (np.asarray(item, dtype=np.float64) for item in (ratio, reynolds_unbounded, flow_index))
    ratio, reynolds, n = np.broadcast_arrays(*arrays)
    if np.any(ratio < 0) or np.any(ratio >= 1):
        raise ValueError("a particle must be smaller than the column: diameter over bore from 0 to below 1")
    newtonian, spread = _newtonian(ratio, reynolds)
    walled = np.where(ratio > 0, 1.0, np.nan)
    # share of the creeping wall effect that is left at this Reynolds number, and what the power law makes of the loss
    left = np.clip((1 - newtonian) / (walled - tube_creeping(ratio)), 0.0, 1.0)
    milder = (1 - tube_power_law(ratio, n)) / (walled - tube_power_law(ratio, np.ones_like(n)))
    loss = (1 - newtonian) * milder
    doubts = (
        _TABLE_U,
        spread * milder,
        0.03 * ratio * left * milder,  # off the axis
        loss * (1 - left) * np.abs(1 - n),  # how fast the wall fades in a power-law fluid
        loss * 0.1 * (ratio > _TABLE_RATIO),
        loss * 2 * np.abs(n - np.clip(n, *WALLS["tube-power-law"].valid["flow_index"])),
    )
    u = np.sqrt(sum((np.square(doubt) for doubt in doubts), start=np.zeros_like(ratio)))
    none = ratio == 0
    chain = WallFactor(
        factor=np.where(none, 1.0, 1 - loss), u=np.where(none, 0.0, u), method=_names(ratio, reynolds, n)
    )
    return chain if method is None else _overruled(chain, method, ratio, reynolds, n)


def _overruled(
    chain: WallFactor, method: str, ratio: FloatArray, reynolds: FloatArray, flow_index: FloatArray
) -> WallFactor:
    """The factor by a method that was asked for, its difference from the chain taken as a doubt."""
    entry = find(method, WALLS)
    factor = entry.evaluate(ratio=ratio, reynolds_unbounded=reynolds, flow_index=flow_index)
    u = np.hypot(chain.u, (factor - chain.factor) / np.sqrt(12))
    return WallFactor(factor=factor, u=u, method=np.where(np.isnan(factor), "", entry.name))


def _newtonian(ratio: FloatArray, reynolds: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Wall factor in a Newtonian fluid and the standard uncertainty from the doubt between methods."""
    viscous = tube_finite_reynolds(ratio, np.minimum(reynolds, _TABLE_END))
    rival = kehlenbeck_difelice(ratio, np.minimum(reynolds, _TABLE_END))
    doubt = np.abs(viscous - rival) / np.sqrt(12) * np.clip(reynolds, 0.0, 1.0)  # none in creeping flow, solved exactly
    high, low = newton(ratio), munroe(ratio)
    span = np.log(_NEWTON_START / _TABLE_END)
    share = np.clip(np.log(np.maximum(reynolds, 1e-300) / _TABLE_END) / span, 0.0, 1.0)
    factor = (1 - share) * viscous + share * (high + low) / 2
    return factor, (1 - share) * doubt + share * (high - low) / 2


def _names(ratio: FloatArray, reynolds: FloatArray, flow_index: FloatArray) -> NDArray[np.str_]:
    """Which methods the chain uses."""
    regimes = [
        (ratio == 0, "none"),
        (reynolds < _CREEPING_END, "tube-creeping + tube-finite-reynolds"),
        (reynolds <= _TABLE_END, "tube-finite-reynolds"),
        (reynolds < _NEWTON_START, "tube-finite-reynolds + newton-1687 + munroe-1888"),
        (reynolds >= _NEWTON_START, "newton-1687 + munroe-1888"),
    ]
    names = np.select([mask for mask, _ in regimes], [name for _, name in regimes], default="")
    newtonian = (flow_index == 1) | (names == "") | (names == "none")
    return np.where(newtonian, names, np.char.add(names, " + tube-power-law"))


def unbounded_velocity(
    velocity: ArrayLike,
    *,
    diameter: ArrayLike,
    bore: ArrayLike,
    fluid_density: ArrayLike,
    rheology: Rheology,
    method: str | None = None,
) -> tuple[FloatArray, WallFactor]:
    """Velocity that a particle would have without walls, from its velocity in a column.

    The wall factor depends on the Reynolds number of the fall in unbounded fluid, which is what is sought; the equation
    V_unbounded f(Re_unbounded) = V is solved to 1e-12.

    Parameters
    ----------
    velocity : (N,) array
        Terminal velocity in the column [m/s], of either sign.
    diameter : (N,) array
        Equivalent diameter [m].
    bore : (N,) array
        Inner diameter of the column, or its equivalent [m]; infinity for no wall.
    fluid_density : (N,) array
        Density of the fluid [kg/m3].
    rheology : Rheology
        Flow curve of the fluid.
    method : str, optional
        As in `wall_factor`.

    Returns
    -------
    velocity : (N,) array
        Velocity in unbounded fluid [m/s]; 0 and nan stay what they are.
    wall : WallFactor
        The factor at the solution.

    Raises
    ------
    ValueError
        A particle not smaller than the column.
    SettlelabError
        An unknown method.
    """
    inputs = (velocity, diameter, bore, fluid_density, *rheology.arrays())
    v, d, width, rho, consistency, n, tau0 = np.broadcast_arrays(*(np.asarray(x, dtype=np.float64) for x in inputs))
    fluid = Rheology(consistency=consistency, flow_index=n, yield_stress=tau0)
    ratio = d / width
    speed = np.where(v != 0, np.abs(v), np.nan)

    def factor_at(log_unbounded: FloatArray) -> WallFactor:
        unbounded = np.exp(log_unbounded)
        reynolds = generalised_reynolds(unbounded, diameter=d, fluid_density=rho, rheology=fluid)
        return wall_factor(ratio, reynolds, flow_index=n, method=method)

    def excess(log_unbounded: FloatArray) -> FloatArray:
        return log_unbounded + np.log(factor_at(log_unbounded).factor) - np.log(speed)

    slowest = wall_factor(ratio, 0.0, flow_index=n, method=method).factor
    log_unbounded = bracketed_root(excess, np.log(speed) - 1e-9, np.log(speed) - np.log(slowest) + 1e-9)
    unbounded = np.where(v == 0, 0.0, np.sign(v) * np.exp(log_unbounded))
    return unbounded, factor_at(np.where(v == 0, -np.inf, log_unbounded))


# First coefficient of f = 1 - c d/W of a rectangular duct with short side W, by short over long side: method of
# fundamental solutions, creeping flow on the axis. The tube has 2.1044.
_SIDES = (0.0, 1 / 3, 1 / 2, 2 / 3, 1.0)
_COEFFICIENT = (1.004, 1.155, 1.343, 1.544, 1.901)
_duct = PchipInterpolator(_SIDES, _COEFFICIENT)


def equivalent_bore(width: ArrayLike, depth: ArrayLike) -> FloatArray:
    """Bore of the round tube whose wall acts on a small particle as that of a rectangular column does.

    Parameters
    ----------
    width, depth : (N,) array
        Inner sides [m], above 0, in either order; one may be infinite.

    Returns
    -------
    (N,) array
        1.107 times the side of a square column, up to 2.096 times the gap between two plates [m]. Good while the
        diameter is below 0.3 of the short side (square: within 2 % of the drag factor up to 0.5). Not the hydraulic
        diameter, which overcorrects.
    """
    sides = np.broadcast_arrays(np.asarray(width, dtype=np.float64), np.asarray(depth, dtype=np.float64))
    short, long = np.minimum(*sides), np.maximum(*sides)
    return np.asarray(2.1044 / _duct(short / long) * short)
