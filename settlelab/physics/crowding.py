"""Neighbours: how concentration, a particle ahead, and the last stirring change a velocity.

A settling test drops grains one by one: these tell how much is lost by dropping several, and how long to wait. The
entries of `CROWDING` give the exponent n of V = V_single (1 - c)^n.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import FloatArray
from settlelab.physics.registry import Entry, Registry, find


@dataclass(frozen=True, slots=True, kw_only=True)
class CrowdingMethod(Entry):
    """An exponent of hindered settling."""

    regime: str  # what it is made for


CROWDING: Registry[CrowdingMethod] = Registry(CrowdingMethod)


@CROWDING.published(
    "richardson-zaki-1954",
    source="Richardson & Zaki (1954), Trans. Instn Chem. Engrs 32, 35-53",
    where="eqs 33-39",
    regime="uniform spheres",
    valid={"reynolds": (2e-4, 7e3), "ratio": (0.0, 0.04)},
    note="In pieces: the exponent jumps by 14 % at Re 200 for ratio 0.04. In sedimentation the velocity at no "
    "concentration is that of the single particle; the factor 10^(-d/D) of the paper belongs to fluidisation and is "
    "no wall factor.",
)
def richardson_zaki(reynolds: FloatArray, ratio: FloatArray) -> FloatArray:
    """Exponent of hindered settling by Reynolds number and diameter over bore."""
    pieces = [
        4.65 + 19.5 * ratio + 0 * reynolds,
        (4.35 + 17.5 * ratio) * reynolds**-0.03,
        (4.45 + 18 * ratio) * reynolds**-0.1,
        4.45 * reynolds**-0.1 + 0 * ratio,
    ]
    value = np.select([reynolds < 0.2, reynolds < 1, reynolds < 200, reynolds < 500], pieces, 2.39)
    return np.where(np.isnan(reynolds + ratio), np.nan, value)


@CROWDING.published(
    "rowe-1987",
    source="Rowe (1987), Chem. Eng. Sci. 42, 2795-2796",
    regime="uniform spheres",
    valid={"reynolds": (1e-3, 3e4), "concentration": (0.04, 0.55)},
    note="A smooth curve through the exponents of Richardson and Zaki; used where none is asked for.",
)
def rowe(reynolds: FloatArray) -> FloatArray:
    """Exponent of hindered settling by Reynolds number."""
    power = reynolds**0.75
    return np.asarray((4.7 + 0.41 * power) / (1 + 0.175 * power))


@CROWDING.published(
    "garside-aldibouni-1977",
    source="Garside & Al-Dibouni (1977), Ind. Eng. Chem. Process Des. Dev. 16, 206-214",
    regime="uniform spheres",
    valid={"reynolds": (1e-3, 3e4)},
    note="14 % above Richardson and Zaki at Re 10. The range is that of its data, from memory.",
)
def garside_aldibouni(reynolds: FloatArray) -> FloatArray:
    """Exponent of hindered settling by Reynolds number, higher than most."""
    power = reynolds**0.9
    return np.asarray((5.1 + 0.27 * power) / (1 + 0.1 * power))


@CROWDING.published(
    "difelice-1999-dilute",
    source="Di Felice (1999), Int. J. Multiphase Flow 25, 559-574",
    regime="uniform spheres, dilute",
    valid={"reynolds": (1e-3, 1e3), "concentration": (0.0, 0.05)},
    note="For dilute suspensions, where the exponent is higher. One witness; the range in Re is ours.",
    confirmed=False,
)
def difelice_dilute(reynolds: FloatArray) -> FloatArray:
    """Exponent of hindered settling of a dilute suspension by Reynolds number."""
    power = reynolds**0.74
    return np.asarray((6.5 + 0.3 * power) / (1 + 0.1 * power))


def hindered_factor(
    concentration: ArrayLike, reynolds: ArrayLike, *, ratio: ArrayLike = 0.0, method: str = "rowe-1987"
) -> FloatArray:
    """Velocity in a suspension over that of one particle alone.

    Parameters
    ----------
    concentration : (N,) array
        Volume fraction of solids [-], 0 to below 1.
    reynolds : (N,) array
        Reynolds number of one particle alone at terminal velocity [-].
    ratio : (N,) array
        Diameter over bore [-].
    method : str
        A name in `CROWDING`.

    Returns
    -------
    (N,) array
        (1 - c)^n [-]; below 0.1 % from 1 while c is below 2e-4.

    Raises
    ------
    ValueError
        A concentration outside its range.
    SettlelabError
        An unknown method.
    """
    c = np.asarray(concentration, dtype=np.float64)
    if np.any(c < 0) or np.any(c >= 1):
        raise ValueError("the volume fraction of solids lies between 0 and 1")
    exponent = find(method, CROWDING).evaluate(reynolds=reynolds, ratio=ratio, concentration=c)
    return np.asarray((1 - c) ** exponent)


def pair_drag_factor(distance: ArrayLike) -> FloatArray:
    """Drag on each of two equal spheres that fall in line over that of one alone, creeping flow in unbounded fluid.

    Parameters
    ----------
    distance : (N,) array
        Between centres over diameter [-], above 1.

    Returns
    -------
    (N,) array
        [-]: 0.645 near contact, 1 - 3/(4 distance) far away; its reciprocal is how much faster the pair falls. In a
        tube spheres no longer feel each other one bore apart.

    Raises
    ------
    ValueError
        Spheres that overlap or touch.

    References
    ----------
    Stimson & Jeffery (1926), Proc. R. Soc. A 111, 110-116.
    """
    apart = np.asarray(distance, dtype=np.float64)
    if np.any(apart <= 1):
        raise ValueError("the distance between centres must be above one diameter")
    angle = np.arccosh(apart)
    total, term, n = np.zeros_like(angle), np.ones_like(angle), 0
    while np.any(np.abs(term) > 1e-13) and n < 10_000:
        n += 1
        wide = (2 * n + 1) * angle
        fade = np.exp(-wide)  # both sides of the fraction are taken over e^((2n+1) alpha), so that none overflows
        above = 1 + fade**2 - 2 * fade - (2 * n + 1) ** 2 * np.sinh(angle) ** 2 * fade
        below = 1 - fade**2 + (2 * n + 1) * np.sinh(2 * angle) * fade
        term = n * (n + 1) / ((2 * n - 1) * (2 * n + 3)) * (1 - above / below)
        total = total + term
    return np.asarray(4 / 3 * np.sinh(angle) * total)


def wake_velocity_share(distance: ArrayLike, reynolds: ArrayLike, drag_coefficient: ArrayLike) -> FloatArray:
    """Speed of the fluid on the centre line behind a particle over the particle's speed, laminar wake.

    Parameters
    ----------
    distance : (N,) array
        Behind the particle, over its diameter [-].
    reynolds, drag_coefficient : (N,) array
        Of the particle [-].

    Returns
    -------
    (N,) array
        Cd Re d / (32 x) [-], from the momentum that the drag takes. A particle that follows falls faster by up to that
        share; vortices shorten the wake above Re 270.
    """
    return np.asarray(
        np.asarray(drag_coefficient, dtype=np.float64)
        * np.asarray(reynolds, dtype=np.float64)
        / (32 * np.asarray(distance, dtype=np.float64))
    )


REST_RATE = 26.3746  # square of the first zero of the Bessel function J2: slowest axial mode without net flow


def resting_time(bore: ArrayLike, viscosity: ArrayLike, fluid_density: ArrayLike, *, share: float = 1e-3) -> FloatArray:
    """Time after which the motion that stirring left in a closed round column has died down to a share.

    Parameters
    ----------
    bore : (N,) array
        [m].
    viscosity : (N,) array
        [Pa s]; of mud that at the lowest rate. A gel needs longer: its structure must come back.
    fluid_density : (N,) array
        [kg/m3].
    share : float
        [-], above 0 and below 1.

    Returns
    -------
    (N,) array
        [s]: ln(1/share) R^2 / (26.37 nu), about 11 min for water in a bore of 100 mm.

    Raises
    ------
    ValueError
        A share outside its range.
    """
    if not 0 < share < 1:
        raise ValueError("the share of the motion that is left lies between 0 and 1")
    radius = np.asarray(bore, dtype=np.float64) / 2
    kinematic = np.asarray(viscosity, dtype=np.float64) / np.asarray(fluid_density, dtype=np.float64)
    return np.asarray(np.log(1 / share) * radius**2 / (REST_RATE * kinematic))
