"""The calibrated forms: a published drag law with a few parameters that a lab's own drops determine.

Each stands on a law with the right creeping and high-Re ends, so that a parameter keeps its meaning outside the lab's
range of Reynolds numbers. Refits of whole published laws stand in `refits`, a user's own formula in `formula`.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from settlelab.calibrate import refits
from settlelab.calibrate.falls import published_law
from settlelab.calibrate.form import FORMS, Descriptors, Form, Parameter, Recipe, Values, form
from settlelab.calibrate.formula import FORMULA, formula_form
from settlelab.errors import FitError, did_you_mean
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DRAG, SPHERE_LAW_U, scaled_drag
from settlelab.physics.registry import find

__all__ = ["FORMS", "SPHERE_LAW", "Form", "Parameter", "Recipe", "build_form", "recipe", "refits"]

SPHERE_LAW = "cheng-2009"  # smooth, and within 3 % of the standard curve to Re 1e4

# Laws that the forms stand on, written out so that a card can be used without settlelab.
WRITTEN_OUT = {
    "cheng-2009": "F(x) = 24/x (1 + 0.27 x)^0.43 + 0.47 (1 - exp(-0.04 x^0.38))",
    "ganser-1993": "F(Re, s) = 24/(Re K1) (1 + 0.1118 (Re K1 K2)^0.6567) + 0.4305 K2/(1 + 3305/(Re K1 K2)), "
    "K1 = 1/(1/3 + 2/3 s^-0.5), K2 = 10^(1.8148 (-log10 s)^0.5743)",
}


def recipe(kind: str, *, base: str = "", descriptor: str = "", lots: Sequence[str] = ()) -> Recipe:
    """A recipe with the usual law to stand on where none is named; `formula: ...` is a user's own.

    Raises
    ------
    FitError
        No such form; the nearest name is offered.
    """
    if kind.startswith(FORMULA):
        return Recipe(kind="formula", base="", expression=kind.removeprefix(FORMULA).strip())
    if kind not in FORMS:
        raise FitError(
            f'"{kind}" is not a calibrated form{did_you_mean(kind, FORMS)}; known: {", ".join(FORMS)}, and '
            f'"{FORMULA} ..." for a formula of your own'
        )
    return Recipe(kind=kind, base=base or FORMS[kind][0], descriptor=descriptor, lots=tuple(lots))


def build_form(made_by: Recipe) -> Form:
    """The form of a recipe.

    Raises
    ------
    FitError
        No such form.
    SettlelabError
        No such published law to stand on.
    """
    if made_by.kind == "formula":
        return formula_form(made_by)
    known = recipe(made_by.kind, base=find(made_by.base, DRAG).name, descriptor=made_by.descriptor, lots=made_by.lots)
    return FORMS[known.kind][1](known)


def _written_out(base: str) -> str:
    """The law that a form stands on, in full where it is usual, else where it is in print."""
    return f"{WRITTEN_OUT.get(base, f'F is {base}')} ({DRAG[base].source})"


@form("factor", SPHERE_LAW)
def _factor(made_by: Recipe) -> Form:
    published = published_law(DRAG[made_by.base])

    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        (c,) = values
        return np.asarray(published(reynolds / c, descriptors) / np.asarray(c) ** 2)

    return Form(
        recipe=made_by,
        formula=f"Cd = F(Re/c)/c^2, c times the velocity of {made_by.base} in a Newtonian fluid; "
        f"{_written_out(made_by.base)}",
        parameters=(Parameter("c", 1.0, 0.2, 3.0, f"velocity over that of {made_by.base}"),),
        needs=DRAG[made_by.base].needs,
        drag=drag,
    )


@form("stokes-newton", SPHERE_LAW)
def _stokes_newton(made_by: Recipe) -> Form:
    sphere = DRAG[made_by.base].formula

    def drag(values: Values, reynolds: FloatArray, _: Descriptors) -> FloatArray:
        k_stokes, k_newton = values
        return scaled_drag(reynolds, np.asarray(k_stokes), np.asarray(k_newton), sphere)

    return Form(
        recipe=made_by,
        formula=f"Cd = K2 F(Re K1 K2) (Thompson & Clark 1991, Ganser 1993); {_written_out(made_by.base)}",
        parameters=(
            Parameter("K1", 0.85, 0.1, 1.6, "creeping velocity over that of the sphere of equal volume"),
            Parameter("K2", 2.0, 0.3, 30.0, "drag coefficient at high Re over that of the sphere"),
        ),
        needs=(),
        drag=drag,
        law_u=SPHERE_LAW_U,
    )


@form("stokes-newton-power", SPHERE_LAW)
def _stokes_newton_power(made_by: Recipe) -> Form:
    sphere, descriptor = DRAG[made_by.base].formula, made_by.descriptor

    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        x, (a, b) = descriptors[descriptor], values
        return scaled_drag(reynolds, x**a, x ** -np.asarray(b), sphere)

    return Form(
        recipe=made_by,
        formula=f"Cd = K2 F(Re K1 K2), K1 = x^a, K2 = x^-b, x = {descriptor} (scaling of Thompson & Clark 1991 and "
        f"Ganser 1993); {_written_out(made_by.base)}",
        parameters=(
            Parameter("a", 0.4, -4.0, 8.0, f"exponent of {descriptor} in the Stokes shape factor K1"),
            Parameter(
                "b", 2.5, -8.0, 25.0, f"exponent of {descriptor} in the Newton shape factor K2, with its sign turned"
            ),
        ),
        needs=(descriptor,),
        drag=drag,
        law_u=SPHERE_LAW_U,
    )


@form("velocity-power", SPHERE_LAW)
def _velocity_power(made_by: Recipe) -> Form:
    sphere, descriptor = DRAG[made_by.base].formula, made_by.descriptor

    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        c, m = values
        factor = c * descriptors[descriptor] ** m
        return np.asarray(sphere(reynolds / factor) / factor**2)

    return Form(
        recipe=made_by,
        formula=f"Cd = F(Re/k)/k^2, k = c x^m, x = {descriptor}, k times the velocity of the sphere in a Newtonian "
        f"fluid; {_written_out(made_by.base)}",
        parameters=(
            Parameter("c", 0.9, 0.1, 4.0, f"velocity over that of the sphere of equal volume where {descriptor} is 1"),
            Parameter("m", 0.9, -4.0, 8.0, f"exponent of {descriptor}"),
        ),
        needs=(descriptor,),
        drag=drag,
        law_u=SPHERE_LAW_U,
    )


@form("effective-sphericity", "ganser-1993")
def _effective_sphericity(made_by: Recipe) -> Form:
    published, lots = DRAG[made_by.base], made_by.lots

    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        if not lots:
            return published.drag_coefficient(reynolds, sphericity=values[0])
        lot = descriptors["lot"]
        own = np.select([lot == number for number in range(len(lots))], list(values), default=np.nan)
        return published.drag_coefficient(reynolds, sphericity=own)

    single = (Parameter("s", 0.8, 0.1, 1.0, "sphericity that gives the measured velocities"),)
    each = tuple(
        Parameter(f"s{number}", 0.8, 0.1, 1.0, f"sphericity that gives the measured velocities of lot {lot}")
        for number, lot in enumerate(lots, start=1)
    )
    return Form(
        recipe=made_by,
        formula=f"Cd = F(Re, s), one sphericity s for {'each lot' if lots else 'all particles'}; "
        f"{_written_out(made_by.base)}",
        parameters=each or single,
        needs=("lot",) if lots else (),
        drag=drag,
    )
