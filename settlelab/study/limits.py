"""What a typed quantity can physically be."""

from __future__ import annotations

import math
from dataclasses import dataclass

from settlelab.physics.constants import ZERO_CELSIUS
from settlelab.units import Quantity
from settlelab.units.spelling import SI

__all__ = [
    "ABOVE_ZERO",
    "FRACTION",
    "INDEX",
    "LIQUID",
    "LIQUID_DENSITY",
    "NOT_NEGATIVE",
    "SHAPE",
    "SOLID_DENSITY",
    "WATER",
    "Limits",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """Bounds in SI; `text` says them, to follow the name of what is measured."""

    text: str
    low: float
    high: float = math.inf
    with_low: bool = False  # whether `low` itself is possible; `high` is

    def check(self, quantity: Quantity, dimension: str) -> None:
        """Raise ValueError, with what would be accepted, where a quantity is outside or drowns in its uncertainty."""
        value = quantity.value
        if value > self.high or value < self.low or (value == self.low and not self.with_low):
            raise ValueError(f"{SI[dimension].name} {self.text}")
        if self.low >= 0.0 and not self.with_low and quantity.u >= value:
            raise ValueError(f"{SI[dimension].name} larger than its uncertainty")


ABOVE_ZERO = Limits(text="above 0", low=0.0)
NOT_NEGATIVE = Limits(text="of 0 or above", low=0.0, with_low=True)
SHAPE = Limits(text="above 0 and at most 1, as this shape descriptor is", low=0.0, high=1.0)
SOLID_DENSITY = Limits(text="between 10 and 23000 kg/m3, as a particle has", low=10.0, high=23e3)
LIQUID_DENSITY = Limits(text="between 400 and 14000 kg/m3, as a liquid has", low=400.0, high=14e3)
FRACTION = Limits(text="between 0 and 100 %", low=0.0, high=1.0, with_low=True)
INDEX = Limits(text="between 1 and 3, as a refractive index is", low=1.0, high=3.0, with_low=True)
LIQUID = Limits(text="between -50 and 250 °C, as a test liquid has", low=ZERO_CELSIUS - 50, high=ZERO_CELSIUS + 250)
WATER = Limits(
    text="between 0 and 100 °C, where water is liquid", low=ZERO_CELSIUS, high=ZERO_CELSIUS + 100, with_low=True
)
