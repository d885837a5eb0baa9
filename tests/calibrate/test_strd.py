"""NIST's reference problems of nonlinear regression through the fitting wrapper of the calibration.

Data and certified values: NIST/ITL Statistical Reference Datasets, in the reference beside the repository.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from settlelab.calibrate.fit import least_squares
from settlelab.calibrate.forms import Parameter

STRD = Path(__file__).parents[3] / "shared" / "reference" / "nist_strd"
pytestmark = pytest.mark.skipif(not STRD.is_dir(), reason="NIST's reference data sets are not beside the repository")


def rational(b: np.ndarray, x: np.ndarray) -> np.ndarray:
    return (b[0] + b[1] * x + b[2] * x**2 + b[3] * x**3) / (1 + b[4] * x + b[5] * x**2 + b[6] * x**3)


MODELS: dict[str, Callable[[np.ndarray, np.ndarray], np.ndarray]] = {
    "Misra1a": lambda b, x: b[0] * (1 - np.exp(-b[1] * x)),
    "Thurber": rational,
    "Eckerle4": lambda b, x: b[0] / b[1] * np.exp(-0.5 * ((x - b[2]) / b[1]) ** 2),
    "MGH09": lambda b, x: b[0] * (x**2 + x * b[1]) / (x**2 + x * b[2] + b[3]),
    "Hahn1": rational,
    "Rat43": lambda b, x: b[0] / (1 + np.exp(b[1] - b[2] * x)) ** (1 / b[3]),
}


@pytest.mark.parametrize("start", ["start_1", "start_2"])
@pytest.mark.parametrize("name", list(MODELS))
def test_certified_values_to_five_digits(name: str, start: str) -> None:
    """The farther of NIST's two starts is `start_1`."""
    certified = pd.read_csv(STRD / "certified_nonlinear.csv")
    certified = certified[(certified["set"] == name) & certified["start_1"].notna()]
    data = pd.read_csv(STRD / f"{name}.csv")
    x, y = data["x"].to_numpy(), data["y"].to_numpy()
    parameters = [
        Parameter(row.parameter, getattr(row, start), -1e5, 1e5, "of NIST's model") for row in certified.itertuples()
    ]
    found = least_squares(lambda b: y - MODELS[name](b, x), parameters)
    digits = -np.log10(np.abs(found.values / certified["certified"].to_numpy() - 1) + 1e-16)
    assert digits.min() >= 5, digits
