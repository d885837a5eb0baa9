"""Every check value of the reference whose method is on board stands in tests/published, or where it is said here."""

from __future__ import annotations

import csv

import pytest

from tests.physics.outside import PUBLISHED, reference

# Sections of the reference by the start of their ids: not of this room, or checked by the test named.
ELSEWHERE = {
    "ST": "statistics",
    "SI": "statistics",
    "SC": "statistics",
    "SY": "statistics",
    "SN": "statistics",
    "OP": "optics of the video room",
    "LB": "brine: no equation on board",
    "TR": "transport in an annulus",
    "MM": "test_motion.py",
    "MH": "test_motion.py",
}
ROWS_ELSEWHERE = {
    "LW-08": "kell-1975 is not on board",
    "LW-09": "refractive index: video room",
    "LV-01": "iapws-r12-08 is not on board",
    "LV-02": "iapws-r12-08 is not on board",
    "LV-03": "iapws-r12-08 is not on board",
    "VR-04": "units room",
    "VR-12": "marsh funnel is not on board",
    "WB-10": "bottom of a tube: a rule in other_walls, no method",
    "WB-11": "bottom of a tube",
    "WB-12": "bottom of a tube",
    "WB-13": "bottom of a tube",
    "WB-14": "decay along a tube: no method",
    "WL-01": "creeping factor by finite elements: cv-X rows are the same quantity, to 0.001",
    "WL-02": "creeping factor by finite elements",
    "WL-03": "creeping factor by finite elements",
    "cv-YcAS": "the yield number implied by ansley-smith-1967 is not used",
}


def carried() -> set[float]:
    """All numbers in the tables of published values."""
    numbers: set[float] = set()
    for path in PUBLISHED.glob("*.csv"):
        with path.open(encoding="utf-8", newline="") as file:
            for row in csv.reader(file):
                for cell in row:
                    try:
                        numbers.add(float(cell))
                    except ValueError:
                        continue
    return numbers


@pytest.mark.parametrize("name", ["check_values_drag.csv", "check_values_lab.csv"])
def test_carried_over(name: str) -> None:
    with reference(name).open(encoding="utf-8", newline="") as file:
        rows = [row for row in csv.DictReader(file) if row["id"][:2] not in ELSEWHERE]
    numbers = carried()
    missing = [row["id"] for row in rows if float(row["value"]) not in numbers]
    assert sorted(set(missing) - set(ROWS_ELSEWHERE)) == []
