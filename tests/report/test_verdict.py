from __future__ import annotations

import pandas as pd
import pytest

from settlelab.report.verdict import Finding, findings
from tests.report.invented import calibration_of, drop, invented_drops, measured_of


def found(topic: str, drops: list[dict[str, object]] | None = None, **given: object) -> Finding:
    measured = measured_of(invented_drops() if drops is None else drops, **given)
    return next(finding for finding in findings(measured, None) if finding.topic == topic)


def controls(*en: float) -> pd.DataFrame:
    return pd.DataFrame({"drop": range(len(en)), "en": en, "passed": [abs(value) <= 1 for value in en]})


@pytest.mark.parametrize(
    ("en", "mark", "text"),
    [
        ((0.3,), "good", "Under control: the one control drop agrees"),
        ((0.3, -0.8), "good", "Under control: both control drops agree with the expected velocity (largest |Eₙ| 0.80,"),
        ((0.3, 0.8, -0.1), "good", "all 3 control drops agree"),
        ((0.3, -1.8), "bad", "Not under control: only 1 of 2 control drops agree"),
        ((), "doubt", "No control sphere was dropped"),
    ],
)
def test_measuring_chain(en: tuple[float, ...], mark: str, text: str) -> None:
    finding = found("measuring chain", controls=controls(*en))
    assert finding.mark == mark
    assert text in finding.text


def test_refused_drops_are_counted_by_their_flags() -> None:
    assert found("drops").text == "Accepted: 25 of 26 drops. Refused: 1 accelerating."
    assert found("drops", [drop(1, accepted=False, flags="edge;gap"), drop(2, accepted=False, flags="gap")]) == Finding(
        "bad", "drops", "None of 2 drops is accepted. Refused: 1 edge, 1 gap."
    )
    assert found("drops", [drop(1)]) == Finding("good", "drops", "Accepted: the one drop.")


def test_no_drop_at_all() -> None:
    finding = next(finding for finding in findings(measured_of([]), None) if finding.topic == "drops")
    assert finding == Finding("bad", "drops", "No fall was found in the recordings.")


def test_calibration_speaks_for_itself() -> None:
    measured = measured_of(invented_drops())
    calibration = calibration_of(measured)
    assert Finding("good", "calibration", calibration.notes[0]) in findings(measured, calibration)
    row = calibration.ranking["method"] == calibration.card.name
    calibration.ranking.loc[row, "rms_percent"] = 12.0
    assert Finding("doubt", "calibration", calibration.notes[0]) in findings(measured, calibration)


def test_published_correlation_is_doubted_where_it_is_far_off() -> None:
    measured = measured_of(invented_drops())
    calibration = calibration_of(measured)
    row = calibration.ranking["method"] == calibration.best_published
    calibration.ranking.loc[row, ["rms_percent", "bias_percent", "in_range_percent"]] = (23.4, -20.1, 83.3)
    finding = next(each for each in findings(measured, calibration) if each.topic == "published correlation")
    assert finding.mark == "doubt"
    assert "23 % (root mean square), bias −20.1 %, 23 drops, 83 % inside its range." in finding.text


def test_without_comparison_there_is_no_correlation() -> None:
    topics = [finding.topic for finding in findings(measured_of([drop(1)]), None)]
    assert topics == ["measuring chain", "drops", "correlations", "doubts"]
