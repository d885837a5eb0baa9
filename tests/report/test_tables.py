from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Annotated

import numpy as np
import pandas as pd

from settlelab.report import write_csv
from settlelab.units import Unit


@dataclass
class Row:
    name: str
    velocity: Annotated[float, Unit("mm/s")]
    velocity_u: Annotated[float, Unit("mm/s")]
    accepted: bool


def test_csv_has_units_in_headings_six_digits_and_plain_booleans(tmp_path: Path) -> None:
    frame = pd.DataFrame(
        {
            "name": ["Grès, fin", ""],
            "velocity": [0.0123456789, np.nan],
            "velocity_u": [1e-7, 2.0],
            "accepted": [True, False],
            "further": [7, 10],
        }
    )
    path = write_csv(frame, Row, tmp_path / "new" / "drops.csv")
    assert path.read_bytes().decode("utf-8") == (
        'name,velocity_mm_s,velocity_u_mm_s,accepted,further\n"Grès, fin",12.3457,0.0001,true,7\n,,2000,false,10\n'
    )


def test_csv_without_schema_is_written_as_it_stands(tmp_path: Path) -> None:
    frame = pd.DataFrame({"method": ["a"], "rms_percent": [7.123456789], "note": [None]})
    assert write_csv(frame, None, tmp_path / "t.csv").read_text() == "method,rms_percent,note\na,7.12346,\n"


def test_csv_of_an_empty_table_keeps_its_headings(tmp_path: Path) -> None:
    frame = pd.DataFrame({name: [] for name in Row.__dataclass_fields__})
    assert write_csv(frame, Row, tmp_path / "t.csv").read_text() == "name,velocity_mm_s,velocity_u_mm_s,accepted\n"
