"""The viscometer table: flow-curve readings in SI."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from settlelab.errors import Fault
from settlelab.physics.rheology import SHEAR_RATE_PER_RPM, SHEAR_STRESS_PER_DEGREE
from settlelab.study.columns import Cells, cell_fault, near_heading, read_quantities
from settlelab.study.limits import ABOVE_ZERO, NOT_NEGATIVE, Limits
from settlelab.study.model import ViscometerReadings
from settlelab.study.table import Table

__all__ = ["read_viscometer"]

U_DIAL = 0.5  # degree, standard uncertainty of a dial that is read to the nearest half to one degree
U_STRESS = 0.01  # relative, of a viscometer that gives stresses
# column -> SI unit, limits, factor to shear rate or shear stress
RATES = {"speed": ("rpm", ABOVE_ZERO, SHEAR_RATE_PER_RPM), "shear_rate": ("1/s", ABOVE_ZERO, 1.0)}
STRESSES = {"dial": ("deg", NOT_NEGATIVE, SHEAR_STRESS_PER_DEGREE), "shear_stress": ("Pa", NOT_NEGATIVE, 1.0)}


def read_viscometer(table: Table, faults: list[Fault]) -> tuple[ViscometerReadings | None, tuple[str, ...]]:
    """Readings of a table with `speed` and `dial`, or `shear rate` and `shear stress`, and what was assumed.

    Speeds and dial readings are those of the oil-field rotor-bob geometry R1B1 (constants of `physics.rheology`).
    None where the table cannot be used; `faults` grows by the reasons.
    """
    before = len(faults)
    known = (*RATES, *STRESSES)
    strange = [column for column in table.columns if column.name not in known]
    faults.extend(fault for column in strange if (fault := near_heading(table, column, known)))
    rate = _one_of(table, RATES, "speed [rpm] or shear rate [1/s]", faults)
    stress = _one_of(table, STRESSES, "dial [deg] or shear stress [Pa]", faults)
    if len(faults) > before or rate is None or stress is None:
        return None, ()
    assumed = [f'{table.file.name}: column "{column.heading}" is not used' for column in strange]
    _, shear_rate = rate
    name, shear_stress = stress
    if np.any(shear_stress.u == 0.0):
        default = f"{U_DIAL:g} degree" if name == "dial" else f"{U_STRESS:.0%}"
        reading = name.replace("_", " ")
        assumed.append(f"{table.file.name}: each {reading} without an uncertainty is taken to have {default}")
    return ViscometerReadings(
        file=table.file,
        shear_rate=shear_rate.value,
        shear_stress=shear_stress.value,
        u_shear_stress=np.where(shear_stress.u > 0.0, shear_stress.u, _default_u(name, shear_stress.value)),
    ), (*table.notes, *assumed)


def _default_u(name: str, shear_stress: NDArray[np.float64]) -> NDArray[np.float64]:
    """Standard uncertainty [Pa] of stresses whose table states none."""
    if name == "dial":
        return np.full_like(shear_stress, U_DIAL * SHEAR_STRESS_PER_DEGREE)
    return U_STRESS * shear_stress


def _one_of(
    table: Table, choices: dict[str, tuple[str, Limits, float]], wanted: str, faults: list[Fault]
) -> tuple[str, Cells] | None:
    """The only one of the columns that the table has, times its factor, with its name."""
    present = [name for name in choices if table.column(name) is not None]
    if len(present) != 1:
        found = " and ".join(present) or None
        faults.append(Fault(file=table.file, found=found, accepted=f"one column {wanted}"))
        return None
    name = present[0]
    dimension, limits, factor = choices[name]
    cells, column = read_quantities(table, name, dimension, faults, limits), table.column(name)
    assert cells is not None
    assert column is not None
    faults.extend(cell_fault(table, column, i, "a reading") for i, cell in enumerate(column.cells) if not cell)
    return name, Cells(cells.value * factor, cells.u * factor)
