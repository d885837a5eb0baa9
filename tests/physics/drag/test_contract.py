"""What every drag law on board must keep, and the values from outside that it must meet."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from settlelab.physics.drag import DESCRIPTORS, DRAG, Method, available_descriptors, usable_methods
from tests.physics.outside import inputs, published

METHODS = tuple(DRAG.values())
SPHERES = tuple(method for method in METHODS if method.diameter == "sphere")
CHIPS = {"sphericity": 0.8, "corey_shape_factor": 0.6, "flatness": 0.6, "elongation": 0.8, "density_ratio": 2.65}
# Creeping limit of Cd Re/24 for these chips, by hand. ganser: 1/3 + 2/3 0.8^-0.5; coelho: 0.843 log10(0.8/0.065);
# wu-wang: 53.5 exp(-0.39)/24; bagheri: F_S = 0.6 * 0.8^1.3 = 0.44894, (0.76572 + 1.30596)/2.
CREEPING = {
    "haider-levenspiel-1989": 1.0,
    "ganser-1993": 1.07869,
    "chien-1994": 1.25,
    "coelho-massarani-1996": 1 / 0.91898,
    "wu-wang-2006": 1.50929,
    "bagheri-bonadonna-2016": 1.03584,
} | {method.name: 1.0 for method in SPHERES}
NO_CREEPING_LIMIT = {"swamee-ojha-1991"}
# Deviation from the standard curve at Re 0.1, 1, ... 1e5, in percent, as the reference sheet computes it.
DEVIATION = {
    "schiller-naumann-1933": (1, 2, -3, 0, -7),
    "clift-gauvin-1971": (1, 2, -3, 1, -1, 3, -2),
    "haider-levenspiel-1989-sphere": (2, 4, 1, 1, -4, 4, -6),
    "brown-lawler-2003": (1, 2, -3, -1, -2, 1, -7),
    "cheng-2009": (-1, -2, 0, 1, -1, 3, -6),
    "swamee-ojha-1991-sphere": (0, -1, 1, 9, -8, 4, -1),
    "stokes-1851": (-2,),
}
BAND = 0.11  # the loosest of them, swamee-ojha-1991-sphere, between these points
# places where a law is in pieces, and the jump in Cd that the print has there
SEAMS = {
    "clift-grace-weber-1978": {
        0.01: 0.003,
        20: 0.008,
        260: 2e-4,
        1500: 1e-3,
        1.2e4: 2e-3,
        4.4e4: 2e-3,
        3.38e5: 7e-3,
        4e5: 0.22,
        1e6: 1e-3,
    }
}


def grid(method: Method, count: int = 400) -> np.ndarray:
    low, high = method.valid["reynolds"]
    return np.geomspace(max(low, 1e-3), high, count)


def test_names_are_the_trades() -> None:
    assert all({"reynolds", *method.needs} <= {"reynolds", *DESCRIPTORS} for method in METHODS)
    assert all(method.name.rsplit("-", 1)[-1] in (*map(str, range(1850, 2030)), "sphere") for method in METHODS)


@pytest.mark.parametrize("method", METHODS, ids=lambda method: method.name)
def test_entry_is_complete(method: Method) -> None:
    assert method.purpose.endswith(".")
    assert method.citation.endswith(")")
    assert method.citation != method.source
    assert method.diameter in ("sphere", "volume-equivalent")
    assert set(method.valid) <= set(method.parameters)
    assert all(0 <= low < high for low, high in method.valid.values())


@pytest.mark.parametrize(
    "row", published("drag_coefficients.csv"), ids=lambda row: f"{row['method']}-{row['reynolds']}"
)
def test_value_from_outside(row: dict[str, str]) -> None:
    cd = DRAG[row["method"]].drag_coefficient(**inputs(row, "drag_coefficient"))
    assert cd == pytest.approx(float(row["drag_coefficient"]), abs=float(row["half_digit"])), row["source"]


def test_every_law_has_a_value_from_outside_or_is_marked() -> None:
    rows = {row["method"] for row in published("drag_coefficients.csv")}
    rows |= {row["law"] for row in published("terminal_velocities.csv")}
    assert [name for name, method in DRAG.items() if name not in rows and method.confirmed] == []


@pytest.mark.parametrize("method", METHODS, ids=lambda method: method.name)
def test_positive_finite_and_smooth(method: Method) -> None:
    reynolds = grid(method)
    cd = method.drag_coefficient(reynolds, **CHIPS)
    assert np.all(np.isfinite(cd))
    assert np.all(cd > 0)
    seams = SEAMS.get(method.name, {})
    clear = np.array([not any(a < seam * 1.001 and b > seam * 0.999 for seam in seams) for a, b in pairwise(reynolds)])
    if "clift" in method.name:
        clear &= reynolds[1:] < 3.3e5  # the drag crisis is steep
    slope = np.diff(np.log(cd)) / np.diff(np.log(reynolds))
    assert np.all(slope[clear] < 0.3)
    assert np.all(slope[clear] > -1.001)
    assert np.max(np.abs(np.diff(slope))[clear[1:] & clear[:-1]]) < 0.05


@pytest.mark.parametrize(("name", "seam"), [(name, seam) for name, seams in SEAMS.items() for seam in seams])
def test_pieces_meet_as_they_do_in_print(name: str, seam: float) -> None:
    below, above = DRAG[name].drag_coefficient(np.array([seam * (1 - 1e-9), seam * (1 + 1e-9)]))
    assert abs(above / below - 1) <= SEAMS[name][seam]  # reference sheet, "Jumps"


@pytest.mark.parametrize("method", METHODS, ids=lambda method: method.name)
def test_creeping_limit(method: Method) -> None:
    ratio = method.drag_coefficient(1e-9, **CHIPS) * 1e-9 / 24
    if method.name in NO_CREEPING_LIMIT:
        assert ratio < 0.1
    else:
        assert ratio == pytest.approx(CREEPING[method.name], rel=2e-4)


@pytest.mark.parametrize("method", SPHERES, ids=lambda method: method.name)
def test_sphere_law_keeps_to_the_standard_curve(method: Method) -> None:
    reynolds = grid(method)
    reynolds = reynolds[reynolds <= 1.01e5]
    standard = DRAG["clift-grace-weber-1978"].drag_coefficient(reynolds)
    assert np.max(np.abs(method.drag_coefficient(reynolds) / standard - 1)) < BAND


@pytest.mark.parametrize("name", DEVIATION)
def test_deviation_from_the_standard_curve(name: str) -> None:
    reynolds = 10.0 ** np.arange(-1, len(DEVIATION[name]) - 1)
    standard = DRAG["clift-grace-weber-1978"].drag_coefficient(reynolds)
    percent = 100 * (DRAG[name].drag_coefficient(reynolds) / standard - 1)
    assert percent == pytest.approx(DEVIATION[name], abs=0.65)


@pytest.mark.parametrize("row", published("sphere_curve.csv"), ids=lambda row: row["reynolds"])
def test_standard_curve_against_chart_and_table(row: dict[str, str]) -> None:
    printed = float(row["drag_coefficient"])
    allowed = max(float(row["half_digit"]), float(row["allowance"]) * printed)
    cd = DRAG["clift-grace-weber-1978"].drag_coefficient(float(row["reynolds"]))
    assert cd == pytest.approx(printed, abs=allowed), row["source"]


@pytest.mark.parametrize("method", METHODS, ids=lambda method: method.name)
def test_arrays(method: Method) -> None:
    reynolds = np.array([[0.5], [np.nan], [50.0]])
    descriptors = {name: np.array([value, value]) for name, value in CHIPS.items()}
    before = reynolds.copy(), {name: value.copy() for name, value in descriptors.items()}
    cd = method.drag_coefficient(reynolds, **descriptors)
    assert cd.shape == ((3, 2) if method.needs else (3, 1))
    assert np.array_equal(np.isnan(cd), np.isnan(np.broadcast_to(reynolds, cd.shape)))
    assert cd[2, 0] == pytest.approx(method.drag_coefficient(50.0, **CHIPS), rel=1e-14)
    assert np.array_equal(reynolds, before[0], equal_nan=True)
    assert all(np.array_equal(descriptors[name], before[1][name]) for name in CHIPS)
    assert method.drag_coefficient(50, **CHIPS).shape == ()


@pytest.mark.parametrize("method", METHODS, ids=lambda method: method.name)
def test_outside_the_range_is_answered_and_marked(method: Method) -> None:
    low, high = method.valid["reynolds"]
    reynolds = np.array([low * 0.9 - 1e-9, np.sqrt(max(low, 1e-3) * high), high * 1.1, np.nan])
    assert method.within(reynolds=reynolds, **CHIPS).tolist() == [False, True, False, False]
    assert np.isfinite(method.drag_coefficient(high * 1.1, **CHIPS))


def test_unknown_descriptor_is_not_within() -> None:
    assert DRAG["ganser-1993"].within(reynolds=10.0, sphericity=[0.8, 0.5, np.nan]).tolist() == [True, False, False]
    with pytest.raises(ValueError, match="ganser-1993 needs sphericity"):
        DRAG["ganser-1993"].drag_coefficient(10.0)


def test_usable_methods() -> None:
    usable, left_out = usable_methods({"sphericity"})
    assert {"ganser-1993", "stokes-1851"} <= {method.name for method in usable}
    assert left_out["bagheri-bonadonna-2016"] == "needs flatness and elongation and density_ratio"
    assert left_out["wu-wang-2006"] == "needs corey_shape_factor"
    assert len(usable) + len(left_out) == len(DRAG)


def test_available_descriptors() -> None:
    axes = ["long_axis", "intermediate_axis", "short_axis"]
    known = available_descriptors(["particle", "sphericity", "density", *axes])
    assert known["sphericity"] == "typed"
    assert known["flatness"] == "from long axis, intermediate axis, short axis"
    assert known["density_ratio"] == "from density"
    assert set(available_descriptors(axes[:2])) == set()
