"""What a calibrated form is: a drag law with a few parameters that a lab's own drops determine, built from its recipe.

The recipe is what a calibration card holds, so that a card read again gives the same law. Forms enter `FORMS` by the
decorator `form`; `forms` is where they are asked for.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from settlelab.calibrate.falls import Law
from settlelab.physics.constants import FloatArray

__all__ = ["FORMS", "Descriptors", "Form", "Parameter", "Recipe", "Values", "form"]

Values = (
    FloatArray | Sequence[FloatArray | float]
)  # one entry per parameter; an array gives each particle its own value
Descriptors = Mapping[str, FloatArray]
Drag = Callable[[Values, FloatArray, Descriptors], FloatArray]


@dataclass(frozen=True, slots=True, kw_only=True)
class Recipe:
    """What identifies a form: kind, published law it stands on, shape descriptor, lots with parameters of their own."""

    kind: str  # key of FORMS, or "formula"
    base: str
    descriptor: str = ""
    lots: tuple[str, ...] = ()
    expression: str = ""  # of a user's own formula, which stands on no published law


@dataclass(frozen=True, slots=True)
class Parameter:
    """A parameter as it enters the formula; a fit starts at `start` and stays between the bounds."""

    name: str
    start: float
    low: float
    high: float
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Form:
    """A calibrated form whose parameters are still open."""

    recipe: Recipe
    formula: str  # readable without settlelab
    parameters: tuple[Parameter, ...]
    needs: tuple[str, ...]  # descriptors that every particle must have; `lot` is the number of its lot
    drag: Drag
    law_u: float = 0.0  # relative standard uncertainty of the drag coefficients of the law it stands on

    @property
    def name(self) -> str:
        """How tables call it, such as `stokes-newton-power of sphericity` or `factor on chien-1994`."""
        if self.recipe.expression:
            return f"{self.recipe.kind} {self.recipe.expression}"
        if self.recipe.descriptor:
            return f"{self.recipe.kind} of {self.recipe.descriptor.replace('_', ' ')}"
        by_lot = " by lot" if self.recipe.lots else ""
        return f"{self.recipe.kind}{by_lot} on {self.recipe.base}"

    def law(self, values: Values) -> Law:
        """The drag law with its parameters set."""
        return lambda reynolds, descriptors: self.drag(values, reynolds, descriptors)


Builder = Callable[[Recipe], Form]
FORMS: dict[str, tuple[str, Builder]] = {}  # kind -> the law that it stands on unless told otherwise, and its builder


def form(kind: str, base: str) -> Callable[[Builder], Builder]:
    """Enters a builder in `FORMS` under its kind."""

    def enter(builder: Builder) -> Builder:
        FORMS[kind] = (base, builder)
        return builder

    return enter
