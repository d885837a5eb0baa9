"""What the lab hands in, validated and in SI: the study file with its overrides, and the bench tables.

In: `study.toml`, CSV and XLSX tables. Out: `Study` (model.py). Every fault of an input is collected and told in one go.
"""

from __future__ import annotations

from settlelab.study.reading import read_study
from settlelab.study.table import Column, Table, read_table

__all__ = ["Column", "Table", "read_study", "read_table"]
