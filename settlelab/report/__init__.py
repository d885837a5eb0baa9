"""Tables, figures and the report page.

In: the study, what was measured, the calibration, the tracked recordings. Out: CSV files with the unit in every
heading, the lab report table, charts, overlay pictures and one self-contained HTML page. Nothing is measured or
fitted here.
"""

from __future__ import annotations

from settlelab.report.html import write_report
from settlelab.report.lab import LabRow, lab_table
from settlelab.report.overlay import overlay, save_overlay
from settlelab.report.tables import write_csv

__all__ = ["LabRow", "lab_table", "overlay", "save_overlay", "write_csv", "write_report"]
