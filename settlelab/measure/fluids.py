"""Density and flow curve of a test fluid, with what they are uncertain by and why."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from settlelab.errors import SettlelabError
from settlelab.measure.propagation import Effect, shifted
from settlelab.physics.constants import FloatArray
from settlelab.physics.flow_curve import fit_rheology
from settlelab.physics.liquids import (
    LIQUIDS,
    glycerol_water_density,
    glycerol_water_viscosity,
    water_density,
    water_viscosity,
)
from settlelab.physics.rheology import Rheology
from settlelab.study.model import Fluid, ViscometerReadings
from settlelab.units import Quantity

__all__ = ["FluidState", "flow_curve", "fluid_state"]

# what the effects change: kg/m3, ln(Pa s^n), 1, Pa
PROPERTIES = ("fluid_density", "log_consistency", "flow_index", "yield_stress")

DOUBTFUL_CHI_SQUARE = 4.0  # reduced, from which readings and flow curve are said to disagree


@dataclass(frozen=True, slots=True, kw_only=True)
class FluidState:
    """A fluid in the state in which the particles fell; effects are independent of each other."""

    name: str
    density: float  # kg/m3
    rheology: Rheology
    effects: tuple[Effect, ...]
    assumed: tuple[str, ...] = ()
    doubts: tuple[str, ...] = ()

    @property
    def properties(self) -> dict[str, float]:
        """Best values of `PROPERTIES`."""
        consistency, flow_index, yield_stress = (float(field) for field in self.rheology.arrays())
        values = (self.density, float(np.log(consistency)), flow_index, yield_stress)
        return dict(zip(PROPERTIES, values, strict=True))

    @property
    def covariance(self) -> FloatArray:
        """(4, 4) covariance of `PROPERTIES`: density, ln consistency, flow index and yield stress."""
        changes = np.array([[effect.change.get(name, 0.0) for name in PROPERTIES] for effect in self.effects])
        return np.asarray(changes.T @ changes)

    @property
    def density_u(self) -> float:
        """Standard uncertainty of the density [kg/m3]."""
        return float(np.sqrt(self.covariance[0, 0]))

    def draw(self, rng: np.random.Generator, count: int) -> tuple[FloatArray, Rheology]:
        """Draws of density [kg/m3] and flow curve for Monte Carlo, all sources normal; arrays of `count`."""
        scores = rng.standard_normal((count, len(self.effects)))
        drawn = shifted(self.properties, self.effects, scores)
        return drawn["fluid_density"], flow_curve(drawn)


def flow_curve(properties: Mapping[str, FloatArray]) -> Rheology:
    """The flow curve of (M,) arrays of `PROPERTIES`; a yield stress stays at 0 or above."""
    return Rheology(
        consistency=np.exp(properties["log_consistency"]),
        flow_index=properties["flow_index"],
        yield_stress=np.maximum(properties["yield_stress"], 0.0),
    )


@dataclass(frozen=True, slots=True)
class _Told:
    """What the user must know about a property: one sentence each, or nothing."""

    assumed: str = ""
    doubt: str = ""


@dataclass(frozen=True, slots=True)
class _Property:
    """A density or a viscosity: its value, and the standard uncertainty by source, sign kept."""

    value: float
    effects: dict[str, float]
    told: _Told = _Told()


def fluid_state(fluid: Fluid) -> FluidState:
    """Density and flow curve of a fluid from what the lab typed.

    A density or viscosity that was typed counts before a published equation; a flow curve fitted to viscometer readings
    counts before both. The uncertainty of a published equation enters besides that of temperature and mass fraction.

    Raises
    ------
    SettlelabError
        Neither typed nor to be computed: a temperature, mass fraction, density or viscosity is missing.
    FitError
        The viscometer readings do not give the flow curve asked for.
    """
    density = _density(fluid)
    effects = [Effect(source, {"fluid_density": u}) for source, u in density.effects.items()]
    told = [density.told]
    if fluid.readings is not None:
        rheology, flow_effects, of_curve = _fitted(fluid, fluid.readings)
        effects += flow_effects
        told.append(of_curve)
    else:
        viscosity = _viscosity(fluid)
        rheology = Rheology(consistency=viscosity.value)
        effects = _together(density, viscosity)
        told.append(viscosity.told)
    return FluidState(
        name=fluid.name,
        density=density.value,
        rheology=rheology,
        effects=tuple(effects),
        assumed=tuple(each.assumed for each in told if each.assumed),
        doubts=tuple(each.doubt for each in told if each.doubt),
    )


def _together(density: _Property, viscosity: _Property) -> list[Effect]:
    """Effects on both properties: the one thermometer and the one mass fraction move them together."""
    sources = dict.fromkeys((*density.effects, *viscosity.effects))
    return [
        Effect(
            source,
            {
                "fluid_density": density.effects.get(source, 0.0),
                "log_consistency": viscosity.effects.get(source, 0.0) / viscosity.value,
            },
        )
        for source in sources
    ]


def _density(fluid: Fluid) -> _Property:
    if fluid.density is not None:
        return _Property(fluid.density.value, {"fluid density": fluid.density.u})
    if fluid.liquid == "water":
        return _published(fluid, "tanaka-2001", "fluid density", lambda t, _: water_density(t))
    if fluid.liquid == "glycerol-water":
        return _published(fluid, "volk-kaehler-2018", "fluid density", lambda t, w: glycerol_water_density(w, t))
    raise SettlelabError(f'fluid "{fluid.name}": its density is missing')


def _viscosity(fluid: Fluid) -> _Property:
    if fluid.viscosity is not None:
        return _Property(fluid.viscosity.value, {"viscosity": fluid.viscosity.u})
    if fluid.liquid == "water":
        return _published(fluid, "iapws-sr6-08", "viscosity", lambda t, _: water_viscosity(t))
    if fluid.liquid == "glycerol-water":
        return _published(fluid, "cheng-2008", "viscosity", lambda t, w: glycerol_water_viscosity(w, t))
    raise SettlelabError(f'fluid "{fluid.name}": its viscosity or a table of viscometer readings is missing')


def _published(fluid: Fluid, name: str, source: str, equation: Callable[[float, float], FloatArray]) -> _Property:
    """A property by a published equation, its own uncertainty and those of temperature and mass fraction."""
    method = LIQUIDS[name]
    temperature = _needed(fluid, "temperature", fluid.temperature)
    needs_fraction = "mass_fraction" in method.parameters
    fraction = _needed(fluid, "mass fraction", fluid.mass_fraction) if needs_fraction else Quantity(0.0)
    value = float(equation(temperature.value, fraction.value))
    effects = {source: method.relative_u * value}
    if temperature.u > 0:
        up, down = (equation(temperature.value + step, fraction.value) for step in (temperature.u, -temperature.u))
        effects["temperature"] = float(up - down) / 2
    if fraction.u > 0:
        ends = np.clip([fraction.value + fraction.u, fraction.value - fraction.u], 0.0, 1.0)
        change = float(equation(temperature.value, ends[0]) - equation(temperature.value, ends[1]))
        effects["mass fraction"] = change * fraction.u / float(ends[0] - ends[1])
    inside = bool(method.within(temperature=temperature.value, mass_fraction=fraction.value))
    beyond = f'fluid "{fluid.name}": {method.quantity} by {name} outside the range it is made for'
    computed = f'fluid "{fluid.name}": {method.quantity} not measured; computed for {method.liquid} by {name}'
    return _Property(
        value=value,
        effects=effects,
        told=_Told(computed, "" if inside else beyond),
    )


def _needed(fluid: Fluid, what: str, quantity: Quantity | None) -> Quantity:
    if quantity is None:
        raise SettlelabError(f'fluid "{fluid.name}": its {what} is missing')
    return quantity


def _fitted(fluid: Fluid, readings: ViscometerReadings) -> tuple[Rheology, list[Effect], _Told]:
    """The flow curve of viscometer readings, its uncertainty as independent effects of the source "viscosity".

    Where the readings scatter by more than their uncertainty allows, the covariance is widened by the reduced chi
    square (the Birge ratio).
    """
    fit = fit_rheology(readings.shear_rate, readings.shear_stress, readings.u_shear_stress, fluid.rheology)
    consistency, _, _ = fit.rheology.arrays()
    values, vectors = np.linalg.eigh(_unit_free(fit.covariance, fit.names, float(consistency)))
    birge = max(1.0, fit.chi_square / fit.degrees_of_freedom) if fit.degrees_of_freedom > 0 else 1.0
    axes = np.sqrt(np.maximum(values, 0.0) * birge) * vectors  # columns: independent directions
    names = ["log_consistency" if name == "consistency" else name for name in fit.names]
    effects = [Effect("viscosity", dict(zip(names, axis.tolist(), strict=True))) for axis in axes.T]
    chosen = f'fluid "{fluid.name}": flow curve from {readings.file.name}; {fit.model} fits it best'
    scatter = (
        f'fluid "{fluid.name}": viscometer readings scatter about the {fit.model} curve by {birge**0.5:.2g} times '
        "their uncertainty"
    )
    told = _Told(chosen if fluid.rheology == "best" else "", scatter if birge > DOUBTFUL_CHI_SQUARE else "")
    return fit.rheology, effects, told


def _unit_free(covariance: FloatArray, names: tuple[str, ...], consistency: float) -> FloatArray:
    """Covariance with the consistency as its logarithm, so that draws of it stay above 0."""
    scale = np.array([1 / consistency if name == "consistency" else 1.0 for name in names])
    return np.asarray(covariance * np.outer(scale, scale))
