"""What the bench would say: readings drawn from the truth with errors of their stated standard uncertainties."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from settlelab.physics.constants import ZERO_CELSIUS
from settlelab.physics.liquids import LIQUIDS, glycerol_water_density, glycerol_water_viscosity
from settlelab.physics.rheology import SHEAR_RATE_PER_RPM, SHEAR_STRESS_PER_DEGREE, Rheology
from settlelab.simulate.scene import Liquid, Particle

FloatArray = NDArray[np.float64]

SPEEDS = (600.0, 300.0, 200.0, 100.0, 60.0, 30.0, 6.0, 3.0)  # rpm


@dataclass(frozen=True, slots=True, kw_only=True)
class Instruments:
    """Standard uncertainties of the bench, in SI; `scale` is relative."""

    mass: float = 0.3e-6
    density: float = 8.0
    axis: float = 0.03e-3
    sphere_diameter: float = 0.005e-3
    sphere_density: float = 5.0
    bore: float = 0.3e-3
    scale: float = 8e-4
    temperature: float = 0.2
    mass_fraction: float = 0.003
    liquid_density: float = 0.5
    dial: float = 0.3  # degree
    marks_apart: float = 0.05e-3
    pointing: float = 0.3  # px, reading a mark off a picture


@dataclass(frozen=True, slots=True, kw_only=True)
class TestFluid:
    """A liquid of the lab as it really is, and how its properties reach the study file."""

    name: str
    kind: Literal["glycerol-water", "measured"]
    liquid: Liquid
    temperature: float  # K
    mass_fraction: float | None = None


class Bench:
    """A bench with its instruments and its chance; a call takes a new reading unless it says otherwise."""

    def __init__(self, rng: np.random.Generator, instruments: Instruments | None = None) -> None:
        self.rng = rng
        self.u = instruments or Instruments()
        self._once: dict[tuple[str, float], str] = {}

    def read(self, true: float, u: float, unit: str, factor: float = 1.0, expanded: bool = False) -> str:
        """A reading as one types it, such as `12.41 ± 0.05 mm`; `true` and `u` in SI, `factor` turns them into `unit`.

        With `expanded` the uncertainty is typed for a coverage factor of 2: `12.41 ± 0.10 mm (k=2)`.
        """
        value = (true + u * self.rng.standard_normal()) * factor
        shown = 2 * u * factor if expanded else u * factor
        places = decimals(u * factor)
        return f"{value:.{places}f} ± {shown:.{places}f} {unit}".rstrip() + (" (k=2)" if expanded else "")

    def number(self, true: float, u: float, factor: float) -> str:
        """A reading without its uncertainty and unit, for a table that gives them in the heading."""
        return f"{(true + u * self.rng.standard_normal()) * factor:.{decimals(u * factor)}f}"

    def scale(self, metre_per_px: float) -> str:
        """The scale of a camera, found once and used for all its recordings."""
        return self._remembered("scale", metre_per_px, self.u.scale * metre_per_px, "mm/px")

    def bore(self, bore: float) -> str:
        """The inner diameter of a column, measured once."""
        return self._remembered("bore", bore, self.u.bore, "mm")

    def _remembered(self, what: str, true: float, u: float, unit: str) -> str:
        if (what, true) not in self._once:
            self._once[what, true] = self.read(true, u, unit, 1e3)
        return self._once[what, true]

    def celsius(self, temperature: float) -> str:
        """A reading of a thermometer."""
        value = temperature - ZERO_CELSIUS + self.u.temperature * self.rng.standard_normal()
        return f"{value:.2f} ± {self.u.temperature:.2f} °C"

    def particle_row(self, particle: Particle) -> list[str]:
        """The cells under PARTICLE_HEADINGS."""
        body, u = particle.body, self.u
        mass = particle.density * np.pi / 6 * body.equivalent_diameter**3
        # who measures a grain calls the longest reading the long axis
        axes = sorted((self.number(axis, u.axis, 1e3) for axis in body.axes), key=float, reverse=True)
        weighed = [self.number(mass, u.mass, 1e6), f"{u.mass * 1e6:g}"]
        density = self.read(particle.density, u.density, "")
        return [particle.name, particle.lot, *weighed, density, *axes, *[f"{u.axis * 1e3:g}"] * 3]

    def viscometer_rows(self, rheology: Rheology) -> list[list[str]]:
        """Speed [rpm], dial [deg] and u(dial) [deg] of a rotor-bob viscometer, geometry R1B1."""
        stress = rheology.shear_stress(np.array(SPEEDS) * SHEAR_RATE_PER_RPM)
        true = stress / SHEAR_STRESS_PER_DEGREE
        dials = np.maximum(true + self.u.dial * self.rng.standard_normal(true.size), 0.0)
        return [[f"{speed:g}", f"{dial:.2f}", f"{self.u.dial:g}"] for speed, dial in zip(SPEEDS, dials, strict=True)]


PARTICLE_HEADINGS = (
    "particle",
    "lot",
    "mass [mg]",
    "u(mass) [mg]",
    "density [kg/m3]",
    "long axis [mm]",
    "intermediate axis [mm]",
    "short axis [mm]",
    "u(long axis) [mm]",
    "u(intermediate axis) [mm]",
    "u(short axis) [mm]",
)
VISCOMETER_HEADINGS = ("speed [rpm]", "dial [deg]", "u(dial) [deg]")


def decimals(u: float) -> int:
    """Decimals that show an uncertainty with two digits, so that rounding adds next to nothing to it."""
    return max(0, 1 - int(np.floor(np.log10(u))))


def glycerol_water(name: str, mass_fraction: float, temperature: float, rng: np.random.Generator) -> TestFluid:
    """A glycerol-water mixture; its density and viscosity miss the published equations by what these are uncertain."""
    density = float(glycerol_water_density(mass_fraction, temperature))
    viscosity = float(glycerol_water_viscosity(mass_fraction, temperature))
    u_density, u_viscosity = LIQUIDS["volk-kaehler-2018"].relative_u, LIQUIDS["cheng-2008"].relative_u
    density *= 1 + u_density * rng.standard_normal()
    viscosity *= 1 + u_viscosity * rng.standard_normal()
    liquid = Liquid(density=density, rheology=Rheology(consistency=viscosity))
    return TestFluid(
        name=name, kind="glycerol-water", liquid=liquid, temperature=temperature, mass_fraction=mass_fraction
    )


def polymer(name: str, density: float, consistency: float, flow_index: float, temperature: float) -> TestFluid:
    """A power-law fluid whose properties are measured."""
    liquid = Liquid(density=density, rheology=Rheology(consistency=consistency, flow_index=flow_index))
    return TestFluid(name=name, kind="measured", liquid=liquid, temperature=temperature)
