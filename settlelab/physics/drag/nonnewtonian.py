"""How a drag law made for Newtonian liquids is used in mud: generalised Reynolds number, creeping correction, yield.

The one convention of the house. Apparent viscosity is taken at the shear rate V/d, which gives the generalised Reynolds
number rho V d / mu(V/d), in a power-law fluid rho V^(2-n) d^n / K. Taken alone this understates the drag of a sphere in
creeping flow by the factor X; a drag law is therefore evaluated at Re/X, so that its viscous limit becomes 24 X/Re.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.interpolate import CubicSpline

from settlelab.physics.constants import STANDARD_GRAVITY, BoolArray, FloatArray
from settlelab.physics.rheology import Rheology

# Largest yield number tau0/(g d (rho_s - rho)) at which a sphere still moves. Beris, Tsamopoulos, Armstrong & Brown
# (1985), J. Fluid Mech. 158, 219-244, print 0.143 for 2 pi r^2 tau0 over the weight in the fluid: three times it.
CRITICAL_YIELD_NUMBER = 0.143 / 3

# Drag of a sphere in a creeping power-law fluid over 24/Re: variational solution in unbounded fluid, stable to 1e-4 on
# refinement. The classical finite-element table (Gu & Tanner 1985, J. Non-Newton. Fluid Mech. 17, 1-12) is 1 to 4 %
# lower for flow indices of 0.3 to 0.8. The value at 0 is the plastic limit, tied to the critical yield number.
_PLASTIC = 1 / (18 * CRITICAL_YIELD_NUMBER)
_FLOW_INDEX = (0.0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0)
_CREEPING = (_PLASTIC, 1.3440, 1.4363, 1.4839, 1.4952, 1.4759, 1.4288, 1.3556, 1.2579, 1.1381, 1.0)
_creeping_spline = CubicSpline(_FLOW_INDEX, _CREEPING)


def generalised_reynolds(
    velocity: ArrayLike, *, diameter: ArrayLike, fluid_density: ArrayLike, rheology: Rheology
) -> FloatArray:
    """Reynolds number on the apparent viscosity at the shear rate V/d; its sign is left out.

    Parameters
    ----------
    velocity : (N,) array
        Velocity in unbounded fluid [m/s]; 0 gives 0.
    diameter : (N,) array
        Equivalent diameter [m].
    fluid_density : (N,) array
        Density of the fluid [kg/m3].
    rheology : Rheology
        Flow curve; its fields broadcast.

    Returns
    -------
    (N,) array
        rho V d / mu(V/d) = rho V^2 / tau(V/d) [-].
    """
    speed = np.abs(np.asarray(velocity, dtype=np.float64))
    moving = np.where(speed > 0, speed, np.nan)
    rate = moving / np.asarray(diameter, dtype=np.float64)
    reynolds = np.asarray(fluid_density, dtype=np.float64) * moving**2 / rheology.shear_stress(rate)
    return np.where(speed == 0, 0.0, reynolds)


def power_law_correction(flow_index: ArrayLike) -> FloatArray:
    """X(n): creeping drag of a sphere in a power-law fluid over 24 / generalised Reynolds number.

    Parameters
    ----------
    flow_index : (N,) array
        n [-]. Up to 1 a cubic spline of a computed table; above 1 (shear-thickening) the closed form of Renaud et al.,
        which is from memory and 1 to 4 % low below 1.

    Returns
    -------
    (N,) array
        X [-]: 1 at n = 1, 1.48 at n = 0.5.

    References
    ----------
    Renaud, Mauret & Chhabra (2004), Can. J. Chem. Eng. 82, 1066-1070.
    """
    n = np.asarray(flow_index, dtype=np.float64)
    thickening = 6 ** ((n - 1) / 2) * (3 / (n**2 + n + 1)) ** (n + 1)
    return np.where(n > 1, thickening, _creeping_spline(np.clip(n, 0.0, 1.0)))


def creeping_correction(velocity: ArrayLike, *, diameter: ArrayLike, rheology: Rheology) -> FloatArray:
    """X of a sphere in a Herschel-Bulkley fluid: creeping drag over 24 / generalised Reynolds number.

    (X(n) + 1.165 Bi + c sqrt(Bi)) / (1 + Bi), Bi = tau0/(K (V/d)^n), c = 1.7 at n = 1 and 0.6 at n = 0.5, linear
    between and beyond, not below 0. An interpolation of our own, within 4 % of computed values; without yield
    stress it is X(n), and at rest it makes the sphere stop at the critical yield number of Beris et al. (1985).

    Parameters
    ----------
    velocity : (N,) array
        Velocity in unbounded fluid [m/s], not 0.
    diameter : (N,) array
        Equivalent diameter [m].
    rheology : Rheology
        Flow curve.

    Returns
    -------
    (N,) array
        X [-].
    """
    consistency, n, yield_stress = rheology.arrays()
    power_law = power_law_correction(n)
    if not np.any(yield_stress):
        return power_law
    rate = np.abs(np.asarray(velocity, dtype=np.float64)) / np.asarray(diameter, dtype=np.float64)
    share = yield_stress / (yield_stress + consistency * rate**n)  # Bi/(1 + Bi), safe at rest
    bend = np.maximum(1.7 - 2.2 * (1 - n), 0.0)
    return np.asarray(power_law * (1 - share) + _PLASTIC * share + bend * np.sqrt(share * (1 - share)))


def held(
    *,
    diameter: ArrayLike,
    density_difference: ArrayLike,
    yield_stress: ArrayLike,
    gravity: float = STANDARD_GRAVITY,
) -> BoolArray:
    """Whether the yield stress holds a sphere still.

    Parameters
    ----------
    diameter : (N,) array
        Equivalent diameter [m].
    density_difference : (N,) array
        Particle less fluid density [kg/m3], of either sign.
    yield_stress : (N,) array
        Yield stress [Pa].
    gravity : float
        [m/s2].

    Returns
    -------
    (N,) bool array
        True where the yield number tau0/(g d |drho|) reaches 0.0477. Static tests of spheres scatter from 0.04 to 0.2;
        for other bodies there is no agreed value, and that of the sphere is used.

    References
    ----------
    Beris, Tsamopoulos, Armstrong & Brown (1985), J. Fluid Mech. 158, 219-244.
    """
    weight = gravity * np.asarray(diameter, dtype=np.float64) * np.abs(np.asarray(density_difference, dtype=np.float64))
    tau0 = np.asarray(yield_stress, dtype=np.float64)
    return (tau0 > 0) & (tau0 >= CRITICAL_YIELD_NUMBER * weight)
