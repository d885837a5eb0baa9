from __future__ import annotations

import math

import pytest

from settlelab.measure.acceptance import FLAGS, finding, near_wall, verdict

IN_THE_DESIGN = {
    "accelerating",
    "near-wall",
    "neighbour",
    "rising",
    "short-track",
    "blurred",
    "edge",
    "wobbling",
    "gap",
    "clock",
}


def test_every_flag_of_the_design_has_its_decision() -> None:
    assert set(FLAGS) == IN_THE_DESIGN | {"unnamed"}
    refusing = {flag for flag, decision in FLAGS.items() if decision.refuses}
    assert refusing == {"unnamed", "short-track", "rising", "accelerating"}


def test_a_clean_drop() -> None:
    assert verdict([]) == (True, "", "")


def test_warnings_do_not_refuse() -> None:
    assert verdict([finding("gap"), finding("clock")]) == (
        True,
        "gap;clock",
        "gap: lost and found again; clock: frame times are irregular",
    )


def test_what_refuses_comes_first() -> None:
    accepted, flags, reason = verdict([finding("gap"), finding("rising")])
    assert not accepted
    assert flags == "rising;gap"
    assert reason.startswith("rising: it rises")


def test_a_flag_raised_twice_is_told_once() -> None:
    assert verdict([finding("short-track"), finding("short-track")])[1] == "short-track"


@pytest.mark.parametrize(
    ("off_axis", "diameters", "refused"),
    [
        (0.2, 20.0, None),
        (0.5, 20.0, None),
        (0.6, 20.0, False),
        (0.85, 20.0, True),
        (0.6, 1.2, True),
        (0.3, 1.2, True),
        (math.nan, math.nan, None),
    ],
)
def test_near_the_wall(off_axis: float, diameters: float, refused: bool | None) -> None:
    found = near_wall(off_axis, diameters)
    assert (None if found is None else found.refuses) is refused


def test_the_sentence_about_the_wall() -> None:
    found = near_wall(0.61, 12.0)
    assert found is not None
    assert found.text == "61 % of the radius off the axis; its wall factor is less sure"
