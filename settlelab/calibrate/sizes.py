"""Which particles to predict for: a ladder of sieve openings, or a table."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd

from settlelab.calibrate.card import Card
from settlelab.errors import Fault, InputFaults
from settlelab.physics.constants import FloatArray
from settlelab.study import read_table
from settlelab.study.columns import Cells, read_quantities
from settlelab.study.limits import ABOVE_ZERO, SHAPE

__all__ = ["ladder", "read_sizes"]

# Openings of ASTM E11-17 [mm].
ASTM_E11 = (
    125, 106, 100, 90, 75, 63, 53, 50, 45, 37.5, 31.5, 26.5, 25, 22.4, 19, 16, 13.2, 12.5, 11.2, 9.5, 8, 6.7, 6.3, 5.6,
    4.75, 4, 3.35, 2.8, 2.36, 2, 1.7, 1.4, 1.18, 1, 0.85, 0.71, 0.6, 0.5, 0.425, 0.355, 0.3, 0.25, 0.212, 0.18, 0.15,
    0.125, 0.106, 0.09, 0.075, 0.063, 0.053, 0.045, 0.038, 0.032, 0.025, 0.02,
)  # fmt: skip
REACH = 1.5  # how far the ladder goes beyond the sizes of the calibration


def ladder(card: Card) -> FloatArray:
    """Sieve openings [m] around the sizes of the calibration, the smallest first."""
    sizes = card.ranges["equivalent_diameter_mm"]
    openings = np.array(ASTM_E11[::-1], dtype=np.float64)
    return 1e-3 * openings[(openings >= sizes.low / REACH) & (openings <= sizes.high * REACH)]


def read_sizes(path: Path, needs: tuple[str, ...]) -> pd.DataFrame:
    """A table of particles: `diameter` or `equivalent diameter`, optional `particle density`, and descriptors.

    Parameters
    ----------
    path : Path
        CSV or XLSX.
    needs : tuple of str
        Descriptors to read, as the card needs them.

    Returns
    -------
    DataFrame
        `equivalent_diameter` [m], and `particle_density` [kg/m3] and descriptors where the table has them.

    Raises
    ------
    InputFaults
        All that cannot be used; no size, or an empty cell.
    """
    table = read_table(path)
    faults: list[Fault] = []
    name = "equivalent_diameter" if table.column("equivalent_diameter") else "diameter"
    wanted = {name: ("m", ABOVE_ZERO)}
    if table.column("particle_density"):
        wanted["particle_density"] = ("kg/m3", ABOVE_ZERO)
    wanted |= {need: ("1", SHAPE if need == "sphericity" else ABOVE_ZERO) for need in needs if table.column(need)}
    read: dict[str, Cells] = {}
    for column, (dimension, limits) in wanted.items():
        cells = read_quantities(table, column, dimension, faults, limits)
        if cells is None:
            faults.append(Fault(file=path, found=None, accepted='a column "diameter [mm]"'))
            continue
        read[column] = cells
    for column, cells in read.items():
        empty = [index for index in np.flatnonzero(np.isnan(cells.value)) if not faults]
        words = f"the {column.replace('_', ' ')} of this particle"
        faults += [Fault(file=path, row=table.rows[index], found=None, accepted=words) for index in empty]
    if faults:
        raise InputFaults(faults)
    frame = pd.DataFrame({column: cells.value for column, cells in read.items()})
    return frame.rename(columns={name: "equivalent_diameter"})
