"""Lots of cuttings to draw particles from: invented rocks with their shapes, sizes and densities."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from settlelab.simulate.grains import angular_grain
from settlelab.simulate.scene import Particle


@dataclass(frozen=True, slots=True, kw_only=True)
class Lot:
    """A lot of cuttings; sizes in m, densities in kg/m3."""

    name: str
    prefix: str  # of the particles' names
    density: float
    size: tuple[float, float]  # smallest and largest equivalent diameter
    proportions: tuple[float, float, float]
    breaks: int
    density_spread: float = 0.004  # relative, from grain to grain
    shape_spread: float = 0.12  # relative, of the proportions


SANDSTONE = Lot(
    name="sandstone", prefix="A", density=2580.0, size=(3.0e-3, 4.6e-3), proportions=(1.0, 0.82, 0.66), breaks=16
)
SHALE = Lot(name="shale", prefix="B", density=2490.0, size=(2.8e-3, 4.2e-3), proportions=(1.0, 0.8, 0.33), breaks=11)
LIMESTONE = Lot(
    name="limestone", prefix="C", density=2690.0, size=(2.2e-3, 3.6e-3), proportions=(1.0, 0.72, 0.52), breaks=13
)
ROCKS = (SANDSTONE, SHALE, LIMESTONE)


def cuttings(lot: Lot, number: int, rng: np.random.Generator, *, scatter: float = 0.03) -> tuple[Particle, ...]:
    """Grains of a lot, evenly spread over its sizes.

    Parameters
    ----------
    lot : Lot
        The rock.
    number : int
        How many.
    rng : numpy.random.Generator
        Source of chance.
    scatter : float
        Relative standard deviation of the drag coefficient from particle to particle about the drag law [-].
    """
    sizes = rng.permutation(np.linspace(*lot.size, number)) if number > 1 else [np.mean(lot.size)]
    return tuple(
        Particle(
            name=f"{lot.prefix}-{place:02d}",
            lot=lot.name,
            body=angular_grain(rng, equivalent_diameter=float(size), proportions=_shaken(lot, rng), breaks=lot.breaks),
            density=lot.density * (1 + lot.density_spread * float(rng.standard_normal())),
            scatter=float(np.exp(scatter * rng.standard_normal())),
            transmission=float(rng.uniform(0.03, 0.08)),
        )
        for place, size in enumerate(sizes, start=1)
    )


def _shaken(lot: Lot, rng: np.random.Generator) -> tuple[float, float, float]:
    long, intermediate, short = np.array(lot.proportions) * np.exp(lot.shape_spread * rng.standard_normal(3))
    return float(long), float(intermediate), float(short)
