"""Density and viscosity of water and of glycerol-water, from published equations.

Each entry of `LIQUIDS` carries its citation, range and relative standard uncertainty; the functions of the same name
are what other rooms call. Temperatures are in kelvin (ITS-90), concentrations are mass fractions of glycerol.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import ZERO_CELSIUS, FloatArray
from settlelab.physics.registry import Entry, Registry


@dataclass(frozen=True, slots=True, kw_only=True)
class LiquidProperty(Entry):
    """A published equation for a property of a liquid."""

    liquid: str  # "water" | "glycerol-water"
    quantity: str  # "density" | "viscosity"
    unit: str
    relative_u: float  # standard uncertainty of the equation for the pure liquid, over the value


LIQUIDS: Registry[LiquidProperty] = Registry(LiquidProperty)


@LIQUIDS.published(
    "tanaka-2001",
    source="Tanaka et al. (2001), Metrologia 38, 301-309",
    liquid="water",
    quantity="density",
    unit="kg/m3",
    relative_u=1e-5,
    valid={"temperature": (273.15, 313.15)},
    note="Air-free water at 101325 Pa. The equation is good to 1e-6; 1e-5 allows for dissolved air and pressure. "
    "Tap water differs by far more: weigh it.",
)
def _tanaka(temperature: FloatArray) -> FloatArray:
    """Density of air-free water at atmospheric pressure by temperature."""
    t = temperature - ZERO_CELSIUS
    return 999.974950 * (1 - (t - 3.983035) ** 2 * (t + 301.797) / (522528.9 * (t + 69.34881)))


@LIQUIDS.published(
    "iapws-sr6-08",
    source="IAPWS (2008, revised 2011), supplementary release SR6-08 on properties of liquid water at 0.1 MPa",
    liquid="water",
    quantity="viscosity",
    unit="Pa s",
    relative_u=0.0017,
    valid={"temperature": (253.15, 383.15)},
    note="1.0016 mPa s at 20 °C. The uncertainty is that of ISO/TR 3666 (1998) at 20 °C, 0.17 %, taken as standard "
    "because its coverage factor could not be confirmed.",
)
def _iapws(temperature: FloatArray) -> FloatArray:
    """Viscosity of liquid water at atmospheric pressure by temperature."""
    reduced = temperature / 300
    powers = 280.68 * reduced**-1.9 + 511.45 * reduced**-7.7 + 61.131 * reduced**-19.6 + 0.45903 * reduced**-40
    return 1e-6 * powers


@LIQUIDS.published(
    "volk-kaehler-2018",
    source="Volk & Kähler (2018), Exp. Fluids 59, 75",
    liquid="glycerol-water",
    quantity="density",
    unit="kg/m3",
    relative_u=2e-4,
    valid={"temperature": (288.15, 303.15), "mass_fraction": (0.0, 1.0)},
    note="The uncertainty is the difference from a second fit of the literature (0.15 kg/m3 at 20 °C), rounded up. "
    "The density of pure glycerol is 1273.3 - 0.6121 t, not the rounded 1273 - 0.612 t that goes round.",
)
def _volk_kaehler(mass_fraction: FloatArray, temperature: FloatArray) -> FloatArray:
    """Density of aqueous glycerol by mass fraction and temperature."""
    t = temperature - ZERO_CELSIUS
    water = 1000 * (1 - (np.abs(t - 3.98) / 615) ** 1.71)
    glycerol = 1273.3 - 0.6121 * t
    volume_fraction = mass_fraction / glycerol / (mass_fraction / glycerol + (1 - mass_fraction) / water)
    contraction = 1.78e-6 * t**2 - 1.82e-4 * t + 1.41e-2
    # sin(pi) is not quite 0 in floating point and may come out below it
    excess = np.maximum(np.sin(np.pi * mass_fraction**1.31), 0.0) ** 0.81
    return (1 + contraction * excess) * (water * (1 - volume_fraction) + glycerol * volume_fraction)


@LIQUIDS.published(
    "cheng-2008",
    source="Cheng (2008), Ind. Eng. Chem. Res. 47, 3285-3288",
    liquid="glycerol-water",
    quantity="viscosity",
    unit="Pa s",
    relative_u=0.02,
    valid={"temperature": (273.15, 373.15), "mass_fraction": (0.0, 1.0)},
    note="Within -1.8 and +2.6 % of the table of Segur & Oberstar (1951) at 20 °C. Above 95 % each percent of water "
    "taken up from the air lowers the viscosity by a fifth: measure density and viscosity on the day.",
)
def _cheng(mass_fraction: FloatArray, temperature: FloatArray) -> FloatArray:
    """Viscosity of aqueous glycerol by mass fraction and temperature."""
    t = temperature - ZERO_CELSIUS
    water = 1.790 * np.exp((-1230 - t) * t / (36100 + 360 * t))
    glycerol = 12100 * np.exp((-1233 + t) * t / (9900 + 70 * t))
    a = 0.705 - 0.0017 * t
    b = (4.9 + 0.036 * t) * a**2.5
    c = mass_fraction
    weight = 1 - c + a * b * c * (1 - c) / (a * c + b * (1 - c))
    return 1e-3 * water**weight * glycerol ** (1 - weight)


def water_density(temperature: ArrayLike) -> FloatArray:
    """Density of air-free water at 101325 Pa, by `tanaka-2001`.

    Parameters
    ----------
    temperature : (N,) array
        Temperature [K], 273.15 to 313.15; outside, the value is extrapolated and `LIQUIDS[...].within` marks it.

    Returns
    -------
    (N,) array
        Density [kg/m3].
    """
    return LIQUIDS["tanaka-2001"].evaluate(temperature=temperature)


def water_viscosity(temperature: ArrayLike) -> FloatArray:
    """Viscosity of liquid water at 0.1 MPa, by `iapws-sr6-08`.

    Parameters
    ----------
    temperature : (N,) array
        Temperature [K], 253.15 to 383.15; outside, the value is extrapolated and `LIQUIDS[...].within` marks it.

    Returns
    -------
    (N,) array
        Viscosity [Pa s].
    """
    return LIQUIDS["iapws-sr6-08"].evaluate(temperature=temperature)


def glycerol_water_density(mass_fraction: ArrayLike, temperature: ArrayLike) -> FloatArray:
    """Density of aqueous glycerol, by `volk-kaehler-2018`.

    Parameters
    ----------
    mass_fraction : (N,) array
        Mass fraction of glycerol [-], 0 to 1.
    temperature : (N,) array
        Temperature [K], 288.15 to 303.15; outside, the value is extrapolated and `LIQUIDS[...].within` marks it.

    Returns
    -------
    (N,) array
        Density [kg/m3].
    """
    return LIQUIDS["volk-kaehler-2018"].evaluate(mass_fraction=mass_fraction, temperature=temperature)


def glycerol_water_viscosity(mass_fraction: ArrayLike, temperature: ArrayLike) -> FloatArray:
    """Viscosity of aqueous glycerol, by `cheng-2008`.

    Parameters
    ----------
    mass_fraction : (N,) array
        Mass fraction of glycerol [-], 0 to 1.
    temperature : (N,) array
        Temperature [K], 273.15 to 373.15; outside, the value is extrapolated and `LIQUIDS[...].within` marks it.

    Returns
    -------
    (N,) array
        Viscosity [Pa s].
    """
    return LIQUIDS["cheng-2008"].evaluate(mass_fraction=mass_fraction, temperature=temperature)
