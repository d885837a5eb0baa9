"""Drag laws of a sphere made for one kind of mud, and terminal velocity from them.

The house's way to fall in mud is a Newtonian law at the generalised Reynolds number over X (`nonnewtonian`). The laws
here, `MUD`, are the published alternatives, to compare with. Their Reynolds number is rho V^(2-n) d^n / K and their
Bingham number tau0 / (K (V/d)^n), whatever print uses; in a Newtonian fluid both come down to the usual ones.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import STANDARD_GRAVITY, FloatArray
from settlelab.physics.drag.nonnewtonian import power_law_correction
from settlelab.physics.drag.solver import DragLaw, Settling, balance, terminal_velocity
from settlelab.physics.registry import Entry, Registry
from settlelab.physics.rheology import Rheology


@dataclass(frozen=True, slots=True, kw_only=True)
class MudMethod(Entry):
    """A drag law of a sphere in a non-Newtonian fluid."""

    fluid: str  # "power-law", "bingham" or "herschel-bulkley": the model that it is made for


MUD: Registry[MudMethod] = Registry(MudMethod)


@MUD.published(
    "renaud-2004",
    source="Renaud, Mauret & Chhabra (2004), Can. J. Chem. Eng. 82, 1066-1070",
    fluid="power-law",
    valid={"reynolds": (0.0, 1000.0), "flow_index": (0.3, 1.0)},
    note="From memory; within 11 % of the standard sphere curve at flow index 1, its creeping factor 1 to 4 % below "
    "the computed one. The end of the range in flow index is ours.",
    confirmed=False,
)
def renaud(reynolds: FloatArray, flow_index: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in a power-law fluid from creeping flow to the Newton regime."""
    alpha = 3 / (flow_index**2 + flow_index + 1)
    x = 6 ** ((flow_index - 1) / 2) * alpha ** (flow_index + 1)
    creeping = 24 * x / reynolds
    b = np.exp(3 * (alpha - np.log(6)))
    k = (3 - alpha) / (6 * alpha) * np.exp((3 - alpha) / (2 * alpha) * np.log(3))
    bend = np.exp(((3 - alpha) / (2 * alpha)) ** 2 * np.log((np.sqrt(6) - 1) / np.sqrt(6)))
    power = 11 / 48 * np.sqrt(6) * (1 - bend)
    middle = 4 * 0.44 * creeping ** (2 * power) * k * (6 * x * b / (6 * x * b + creeping)) ** power
    return np.asarray(creeping + middle + 0.44 * (6 * x * b / (6 * x * b + 128 * creeping)) ** (11 / 12))


@MUD.published(
    "darby-1996",
    source="Darby (1996), Chem. Eng. 103 (12), 107",
    where="after Darby & Melson (1981)",
    fluid="power-law",
    valid={"reynolds": (0.0, 100.0)},
    note="From memory; its creeping factor is within 3 % of the computed one. Not to be ranked with until seen in "
    "print.",
    confirmed=False,
)
def darby(reynolds: FloatArray, flow_index: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in a power-law fluid, two-constant form."""
    x = (1.33 + 0.37 * flow_index) / (1 + 0.7 * flow_index**3.7)
    c = ((1.82 / flow_index) ** 8 + 34) ** -0.125
    return np.asarray((c + 4.8 / np.sqrt(reynolds / x)) ** 2)


@MUD.published(
    "kelessidis-mpandelis-2004",
    source="Kelessidis & Mpandelis (2004), Powder Technol. 147, 117-125",
    fluid="power-law",
    valid={"reynolds": (0.1, 1000.0)},
    note="From memory; within 9 % of the standard sphere curve at flow index 1. The flow index enters through the "
    "Reynolds number alone.",
    confirmed=False,
)
def kelessidis_mpandelis(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in a shear-thinning fluid."""
    return 24 / reynolds * (1 + 0.1407 * reynolds**0.6018) + 0.2118 / (1 + 0.4215 / reynolds)


@MUD.published(
    "graham-jones-1994",
    source="Graham & Jones (1994), J. Non-Newton. Fluid Mech. 54, 465-488",
    fluid="power-law",
    valid={"reynolds": (0.4, 200.0), "flow_index": (0.4, 1.0)},
    note="Fit of computed flows, from memory; print has its Reynolds number on the radius. In two pieces, which do "
    "not quite meet at Re 48. Within 2 % of the standard sphere curve at flow index 1.",
    confirmed=False,
)
def graham_jones(reynolds: FloatArray, flow_index: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in a power-law fluid, computed."""
    half = 2 / reynolds
    slow = 35.2 * half**1.03 + flow_index * (1 - 20.9 * half**1.11)
    fast = 37 * half**1.1 + 0.36 * flow_index + 0.25
    # far below its range the slow piece would turn negative; Stokes' law with the creeping factor stands in for it
    creeping = 24 * power_law_correction(flow_index) / reynolds
    return np.where(reynolds < 0.2, creeping, np.where(reynolds <= 48, slow, fast))


@MUD.published(
    "ansley-smith-1967",
    source="Ansley & Smith (1967), AIChE J. 13, 1193-1196",
    fluid="bingham",
    valid={"bingham": (0.1, 1e4)},
    note="By their dynamic parameter Q = Re / (1 + 7 pi/24 Bi): 34/Q below 20, 0.4 above 200; the straight line in "
    "logarithms between is ours, and so are the limits of Bi. Constants from memory. Against computed creeping flow "
    "10, 32, 20 and 2 % low at Bi 0.1, 1, 10 and 100, and 42 % high without yield stress.",
    confirmed=False,
)
def ansley_smith(reynolds: FloatArray, bingham: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in a Bingham fluid by the picture of a yielded envelope."""
    q = reynolds / (1 + 7 * np.pi / 24 * bingham)
    slope = np.log(0.4 / 1.7) / np.log(200 / 20)
    return np.where(q < 20, 34 / q, np.maximum(1.7 * (q / 20) ** slope, 0.4))


@MUD.published(
    "blackery-mitsoulis-1997",
    source="Blackery & Mitsoulis (1997), J. Non-Newton. Fluid Mech. 70, 59-77",
    fluid="bingham",
    valid={"reynolds": (0.0, 0.1), "bingham": (0.0, 1000.0)},
    note="Creeping flow in unbounded fluid, fit of computed values, from memory: 16 and 2 % low, 15 and 1 % high at "
    "Bi 0.1, 1, 10 and 100 against our own computation. The limits are ours.",
    confirmed=False,
)
def blackery_mitsoulis(reynolds: FloatArray, bingham: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in creeping flow of a Bingham fluid."""
    return 24 / reynolds * (1 + 2.93 * bingham**0.83)


@MUD.published(
    "atapattu-1995",
    source="Atapattu, Chhabra & Uhlherr (1995), J. Non-Newton. Fluid Mech. 59, 245-265",
    fluid="herschel-bulkley",
    valid={"reynolds": (0.0, 0.1), "flow_index": (0.4, 0.6)},
    note="Creeping flow, fit of experiments; 0.823 from memory (0.87 is met too). For flow indices about 0.5, where "
    "it is 4 to 20 % below computed values; half of them for a Bingham fluid. Not to be ranked with until seen in "
    "print.",
    confirmed=False,
)
def atapattu(reynolds: FloatArray, flow_index: FloatArray, bingham: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in creeping flow of a Herschel-Bulkley fluid."""
    return 24 * power_law_correction(flow_index) / reynolds * (1 + 0.823 * bingham)


def mud_terminal_velocity(
    method: MudMethod,
    *,
    diameter: ArrayLike,
    densities: tuple[ArrayLike, ArrayLike],
    rheology: Rheology,
    gravity: float = STANDARD_GRAVITY,
) -> Settling:
    """Terminal velocity of a sphere by a law made for its kind of fluid.

    Parameters
    ----------
    method : MudMethod
        One of `MUD`. A law for power-law fluids passes the yield stress over, but for the test whether it moves at all.
    diameter : (N,) array
        [m], above 0.
    densities : pair of (N,) array
        Of particle and fluid [kg/m3].
    rheology : Rheology
        Flow curve of the fluid.
    gravity : float
        [m/s2].

    Returns
    -------
    Settling
        As of `terminal_velocity`.

    Raises
    ------
    ValueError
        A diameter or a density of 0 and less, a flow index of 2 and more.
    """

    def drag_at(
        velocity: FloatArray, *, diameter: FloatArray, fluid_density: FloatArray, rheology: Rheology
    ) -> FloatArray:
        consistency, n, yield_stress = rheology.arrays()
        viscous = consistency * (velocity / diameter) ** n
        return method.evaluate(
            reynolds=fluid_density * velocity**2 / viscous, flow_index=n, bingham=yield_stress / viscous
        )

    return balance(drag_at, diameter=diameter, densities=densities, rheology=rheology, gravity=gravity)


def wilson_terminal_velocity(
    drag: DragLaw,
    *,
    diameter: ArrayLike,
    densities: tuple[ArrayLike, ArrayLike],
    rheology: Rheology,
    gravity: float = STANDARD_GRAVITY,
) -> Settling:
    """Terminal velocity of a sphere in any fluid by its equivalent viscosity, without iteration on the velocity.

    The fluid counts as Newtonian with the viscosity that the flow curve has at 0.3 of the mean stress that the weight
    exerts on the surface, |rho_s - rho| g d / 6. The sphere is held where the yield stress reaches that share of it.
    The 0.3 is from memory. The published fit of the velocity curve is replaced by the Newtonian law itself.

    Parameters
    ----------
    drag : callable
        Newtonian law, Reynolds number to drag coefficient.
    diameter : (N,) array
        [m], above 0.
    densities : pair of (N,) array
        Of particle and fluid [kg/m3].
    rheology : Rheology
        Flow curve of the fluid.
    gravity : float
        [m/s2].

    Returns
    -------
    Settling
        (N,) arrays; the Reynolds number is on the equivalent viscosity.

    Raises
    ------
    ValueError
        A diameter or a density of 0 and less.

    References
    ----------
    Wilson, Horsley, Kealy, Reizes & Horsley (2003), Int. J. Miner. Process. 71, 17-30.
    """
    d, rho_s, rho = (np.asarray(item, dtype=np.float64) for item in (diameter, *densities))
    consistency, n, yield_stress = rheology.arrays()
    stress = 0.3 * np.abs(rho_s - rho) * gravity * d / 6
    moving = (stress > yield_stress) & (rho_s != rho)
    rate = (np.where(moving, stress - yield_stress, np.nan) / consistency) ** (1 / n)
    settling = terminal_velocity(
        drag,
        diameter=d,
        particle_density=rho_s,
        fluid_density=rho,
        rheology=Rheology(consistency=stress / rate),
        gravity=gravity,
    )
    still = np.broadcast_to(~moving, settling.velocity.shape)
    return Settling(
        velocity=np.where(still, 0.0, settling.velocity),
        reynolds=np.where(still, 0.0, settling.reynolds),
        drag_coefficient=settling.drag_coefficient,
        held=np.asarray(still & (rho_s != rho)),
        several=settling.several,
    )
