"""What the lab hands in, validated and in SI: the study file with its overrides, and the bench tables.

In: `study.toml`, CSV and XLSX tables. Out: `Study` (model.py). Every fault of an input is collected and told in one go.
"""

from __future__ import annotations

from settlelab.study.columns import Cells, read_quantities
from settlelab.study.model import Study
from settlelab.study.new import new_study
from settlelab.study.reading import read_study
from settlelab.study.summary import study_summary
from settlelab.study.table import Column, Table, read_table

__all__ = [
    "Cells",
    "Column",
    "Study",
    "Table",
    "new_study",
    "read_quantities",
    "read_study",
    "read_table",
    "study_summary",
]
