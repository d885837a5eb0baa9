"""Which fluid to predict for: one of the card's, or a liquid whose properties are in print."""

from __future__ import annotations

from dataclasses import dataclass

from settlelab.calibrate.card import Card, CardFluid
from settlelab.errors import SettlelabError, did_you_mean
from settlelab.physics.liquids import (
    glycerol_water_density,
    glycerol_water_viscosity,
    water_density,
    water_viscosity,
)
from settlelab.physics.rheology import Rheology

__all__ = ["SettlingFluid", "fluid_in_print", "fluid_of_card"]


@dataclass(frozen=True, slots=True, kw_only=True)
class SettlingFluid:
    """A fluid for a prediction; `told` says in words what it is."""

    density: float  # kg/m3
    rheology: Rheology
    told: str


def fluid_of_card(card: Card, name: str = "") -> SettlingFluid:
    """A fluid of the calibration by its name, or the only one.

    Raises
    ------
    SettlelabError
        No such fluid, or several and none named.
    """
    named = {fluid.name: fluid for fluid in card.data.fluids}
    known = ", ".join(f'"{each}"' for each in named if each)
    if not name:
        if len(card.data.fluids) == 1:
            return _from_card(card.data.fluids[0])
        raise SettlelabError(f"the card was made in several fluids: name one of {known} or state density and viscosity")
    if name not in named:
        raise SettlelabError(
            f'"{name}" is not a fluid of the card{did_you_mean(name, named)}; it has {known or "no names"}'
        )
    return _from_card(named[name])


def _from_card(fluid: CardFluid) -> SettlingFluid:
    rheology = Rheology(
        consistency=fluid.consistency_Pa_s_n, flow_index=fluid.flow_index, yield_stress=fluid.yield_stress_Pa
    )
    called = f'the fluid "{fluid.name}" of the calibration' if fluid.name else "the fluid of the calibration"
    return SettlingFluid(density=fluid.density_kg_m3, rheology=rheology, told=called)


def fluid_in_print(liquid: str, temperature: float, mass_fraction: float = 0.0) -> SettlingFluid:
    """Water, or glycerol in water.

    Parameters
    ----------
    liquid : str
        "water" or "glycerol-water".
    temperature : float
        [K].
    mass_fraction : float
        Of glycerol [-].
    """
    if liquid == "water":
        density, viscosity = water_density(temperature), water_viscosity(temperature)
    else:
        density = glycerol_water_density(mass_fraction, temperature)
        viscosity = glycerol_water_viscosity(mass_fraction, temperature)
    return SettlingFluid(
        density=float(density), rheology=Rheology(consistency=float(viscosity)), told=f"{liquid} by properties in print"
    )
