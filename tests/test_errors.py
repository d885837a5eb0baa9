"""The sentences of faults: where, what was found, what would be accepted."""

from __future__ import annotations

from pathlib import Path

import pytest

from settlelab.errors import Fault, InputFaults, SettlelabError, did_you_mean

TABLE, STUDY = Path("bench/particles.csv"), Path("bench/study.toml")


@pytest.mark.parametrize(
    ("fault", "sentence"),
    [
        (
            Fault(file=TABLE, row=7, column="mass [mg]", found="12,5.3", accepted="a number such as 12.5 or 12,5"),
            'particles.csv, row 7, column "mass [mg]": "12,5.3" is not a number such as 12.5 or 12,5',
        ),
        (
            Fault(file=STUDY, key="camera, gravity", found="dwn", accepted='"down" or "up"'),
            'study.toml, camera, gravity: "dwn" is not "down" or "up"',
        ),
        (
            Fault(file=STUDY, row=3, found="x", accepted="a line of TOML"),
            'study.toml, line 3: "x" is not a line of TOML',
        ),
        (Fault(file=TABLE, found=None, accepted="a table"), "particles.csv: missing, expected a table"),
    ],
)
def test_sentence_of_a_fault(fault: Fault, sentence: str) -> None:
    assert str(fault) == sentence


def test_faults_are_told_together_and_kept() -> None:
    faults = [Fault(file=TABLE, row=row, found="x", accepted="a number") for row in (2, 5)]
    error = InputFaults(faults)
    assert isinstance(error, SettlelabError)
    assert str(error) == 'particles.csv, row 2: "x" is not a number\nparticles.csv, row 5: "x" is not a number'
    assert error.faults == tuple(faults)


def test_a_near_name_is_offered() -> None:
    assert did_you_mean("gravty", ["gravity", "graduation"]) == ' (did you mean "gravity"?)'
    assert did_you_mean("class", ["mass"], cutoff=0.8) == ""
    assert did_you_mean("gravity", []) == ""
