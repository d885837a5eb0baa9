"""Published laws by shape with their own coefficients fitted anew.

Coefficients that the drops of a lab can hardly tell apart are left as in print; where the rest cannot be told apart
either, the fit says so.
"""

from __future__ import annotations

import numpy as np

from settlelab.calibrate.form import Descriptors, Form, Parameter, Recipe, Values, form
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DRAG, scaled_drag
from settlelab.physics.drag.nonspherical import ganser_base


@form("chien-refit", "chien-1994")
def _chien_refit(made_by: Recipe) -> Form:
    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        a, b = values
        return np.asarray(a / reynolds + b * np.exp(-5.03 * descriptors["sphericity"]))

    return Form(
        recipe=made_by,
        formula="Cd = A/Re + B exp(-5.03 s), s = sphericity; the exponent is kept, cuttings of like shape cannot tell "
        f"it from B ({DRAG['chien-1994'].source})",
        parameters=(
            Parameter("A", 30.0, 3.0, 300.0, "creeping drag coefficient times Re, 30 in print"),
            Parameter("B", 67.289, 5.0, 900.0, "scale of the drag coefficient at high Re, 67.289 in print"),
        ),
        needs=("sphericity",),
        drag=drag,
    )


@form("haider-levenspiel-refit", "haider-levenspiel-1989")
def _haider_levenspiel_refit(made_by: Recipe) -> Form:
    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        (a, b, c), s = values, descriptors["sphericity"]
        rise = a * np.exp(np.polyval([2.4486, -6.4581, 2.3288], s)) * reynolds ** (b * (0.0964 + 0.5565 * s))
        plateau = c * np.exp(np.polyval([-10.2599, 18.4222, -13.8944, 4.905], s))
        onset = np.exp(np.polyval([15.8855, -20.7322, 12.2584, 1.4681], s))
        return np.asarray(24 / reynolds * (1 + rise) + plateau / (1 + onset / reynolds))

    return Form(
        recipe=made_by,
        formula="Cd = 24/Re (1 + a A Re^(b B)) + c C/(1 + D/Re), A = exp(2.3288 - 6.4581 s + 2.4486 s^2), "
        "B = 0.0964 + 0.5565 s, C = exp(4.905 - 13.8944 s + 18.4222 s^2 - 10.2599 s^3), "
        "D = exp(1.4681 + 12.2584 s - 20.7322 s^2 + 15.8855 s^3), s = sphericity; D is kept, it acts only together "
        f"with C ({DRAG['haider-levenspiel-1989'].source})",
        parameters=(
            Parameter("a", 1.0, 0.05, 20.0, "scale of the coefficient A, 1 in print"),
            Parameter("b", 1.0, 0.3, 2.5, "scale of the exponent B, 1 in print"),
            Parameter("c", 1.0, 0.02, 20.0, "scale of the drag coefficient at high Re, 1 in print"),
        ),
        needs=("sphericity",),
        drag=drag,
    )


@form("ganser-refit", "ganser-1993")
def _ganser_refit(made_by: Recipe) -> Form:
    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        (p, q, r), s = values, descriptors["sphericity"]
        k_stokes = 1 / (1 / 3 + 2 / 3 * s ** -np.asarray(p))
        k_newton = 10 ** (q * (-np.log10(np.minimum(s, 1.0))) ** r)
        return scaled_drag(reynolds, k_stokes, k_newton, ganser_base)

    return Form(
        recipe=made_by,
        formula="Cd = K2 F(Re K1 K2), F(x) = 24/x (1 + 0.1118 x^0.6567) + 0.4305/(1 + 3305/x), "
        f"K1 = 1/(1/3 + 2/3 s^-p), K2 = 10^(q (-log10 s)^r), s = sphericity ({DRAG['ganser-1993'].source})",
        parameters=(
            Parameter("p", 0.5, -2.0, 6.0, "exponent of the sphericity in the Stokes shape factor, 0.5 in print"),
            Parameter("q", 1.8148, 0.05, 12.0, "coefficient of the Newton shape factor, 1.8148 in print"),
            Parameter("r", 0.5743, 0.02, 4.0, "exponent of the Newton shape factor, 0.5743 in print"),
        ),
        needs=("sphericity",),
        drag=drag,
    )


@form("swamee-ojha-refit", "swamee-ojha-1991")
def _swamee_ojha_refit(made_by: Recipe) -> Form:
    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        (a, b, m), x = values, descriptors["corey_shape_factor"]
        viscous = a / ((1 + 4.5 * x**0.35) ** 0.8 * reynolds**0.64)
        inertial = b * (reynolds / (reynolds + 100 + 100 * x)) ** 0.32 / (x**18 + 1.05 * x ** np.asarray(m))
        return np.asarray((viscous + inertial) ** 1.25)

    return Form(
        recipe=made_by,
        formula="Cd = (A/((1 + 4.5 x^0.35)^0.8 Re^0.64) + B (Re/(Re + 100 + 100 x))^0.32/(x^18 + 1.05 x^m))^1.25, "
        f"x = corey_shape_factor; no creeping limit ({DRAG['swamee-ojha-1991'].source})",
        parameters=(
            Parameter("A", 48.5, 5.0, 500.0, "coefficient of the viscous part, 48.5 in print"),
            Parameter("B", 1.0, 0.05, 20.0, "scale of the inertial part, 1 in print"),
            Parameter("m", 0.8, -3.0, 6.0, "exponent of the Corey shape factor at high Re, 0.8 in print"),
        ),
        needs=("corey_shape_factor",),
        drag=drag,
    )
