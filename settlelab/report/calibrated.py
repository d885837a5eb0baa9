"""The calibration as the page shows it, read off its card: law, coefficients, what it covers, what to beware of."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import pandas as pd

from settlelab.report.numbers import significant
from settlelab.report.views import Show, TableView, table_view, unit_text
from settlelab.units import parse_heading

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration, Card

__all__ = ["CalibrationView", "calibration_view"]

COEFFICIENTS = (
    Show(heading="coefficient", field="name"),
    Show(heading="value ± u", field="value", u="u", unit="1"),
    Show(heading="95 % interval", field="interval"),
    Show(heading="meaning", field="meaning"),
)
RANGES = (
    Show(heading="what the drops cover", field="name"),
    Show(heading="from", field="low", unit="1"),
    Show(heading="median", field="median", unit="1"),
    Show(heading="to", field="high", unit="1"),
)


@dataclass(frozen=True, slots=True)
class CalibrationView:
    """What the page tells about the law of the card."""

    name: str
    verdict: str
    formula: str
    coefficients: TableView | None  # None for a published law
    ranges: TableView
    scatter: str
    how_to_use: str
    remarks: tuple[str, ...]
    left_out: tuple[str, ...]


def calibration_view(calibration: Calibration) -> CalibrationView:
    """The calibrated form, or the published law that was kept."""
    card = calibration.card
    return CalibrationView(
        name=card.name,
        verdict=calibration.notes[0],
        formula=card.law.formula,
        coefficients=_coefficients(card) if card.law.parameters else None,
        ranges=_ranges(card),
        scatter=_scatter(card),
        how_to_use=card.law.how_to_use,
        remarks=calibration.notes[1:],
        left_out=_left_out(calibration.left_out),
    )


def _coefficients(card: Card) -> TableView:
    rows = [
        {
            "name": each.name,
            "value": each.value,
            "u": math.nan if each.standard_uncertainty is None else each.standard_uncertainty,
            "interval": " to ".join(map(significant, each.interval_95 or ())) or "at a bound of the fit",
            "meaning": each.meaning,
        }
        for each in card.law.parameters
    ]
    return table_view(pd.DataFrame(rows), COEFFICIENTS)


def _ranges(card: Card) -> TableView:
    rows = [
        {"name": _plain(key), "low": span.low, "median": span.median, "high": span.high}
        for key, span in card.ranges.items()
    ]
    return table_view(pd.DataFrame(rows), RANGES)


def _plain(key: str) -> str:
    """`viscosity_mPa_s` as it is printed."""
    heading = parse_heading(key)
    name = heading.name.replace("_", " ").replace("reynolds", "Reynolds number")
    return f"{name}, {unit_text(heading.unit)}" if heading.unit else name


def _scatter(card: Card) -> str:
    scatter = card.scatter
    told = [f"Single drops of a new particle scatter about the law by {significant(100 * scatter.single_drop, 2)} %"]
    told.append(f"particles by {significant(100 * scatter.between_particles, 2)} %")
    if scatter.repeatability > 0:
        told.append(f"drops of one particle by {significant(100 * scatter.repeatability, 2)} %")
    data = card.data
    return (
        f"{', '.join(told)} (relative standard deviations in velocity; {data.particles} particles, {data.drops} drops)."
    )


def _left_out(reasons: Mapping[str, str]) -> tuple[str, ...]:
    return tuple(f"{name} {reason.replace('_', ' ')}" for name, reason in reasons.items())
