"""Drop tables that no run of settlelab measured: typed by hand, from a paper, or an old spreadsheet of the lab."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd

from settlelab.calibrate.completion import AXES, TAKEN_AS_UNBOUNDED, completed, corrected
from settlelab.errors import Fault, InputFaults
from settlelab.measure.model import Drop, Measured
from settlelab.physics.constants import BoolArray
from settlelab.study import Column, Table, read_table
from settlelab.study.columns import Cells, cell_fault, is_numeric, near_heading, read_quantities
from settlelab.study.limits import ABOVE_ZERO, NOT_NEGATIVE, SHAPE, Limits

__all__ = ["as_measured", "assumptions", "read_drop_table"]

# column -> SI unit and limits; None where a refused drop of a study may hold anything
QUANTITIES: dict[str, tuple[str, Limits | None]] = {
    "drop": ("1", ABOVE_ZERO),
    "velocity": ("m/s", None),
    "unbounded_velocity": ("m/s", None),
    "equivalent_diameter": ("m", ABOVE_ZERO),
    "mass": ("kg", ABOVE_ZERO),
    "long_axis": ("m", ABOVE_ZERO),
    "intermediate_axis": ("m", ABOVE_ZERO),
    "short_axis": ("m", ABOVE_ZERO),
    "particle_density": ("kg/m3", ABOVE_ZERO),
    "fluid_density": ("kg/m3", ABOVE_ZERO),
    "viscosity": ("Pa s", ABOVE_ZERO),
    "consistency": ("Pa s^n", ABOVE_ZERO),
    "flow_index": ("1", ABOVE_ZERO),
    "yield_stress": ("Pa", NOT_NEGATIVE),
    "column_diameter": ("m", ABOVE_ZERO),
    "sphericity": ("1", SHAPE),
    "corey_shape_factor": ("1", SHAPE),
    "flatness": ("1", SHAPE),
    "elongation": ("1", SHAPE),
    "circularity": ("1", SHAPE),
    "aspect_ratio": ("1", None),
    "first_time": ("s", None),
    "last_time": ("s", None),
    "frames": ("1", None),
    "fraction_of_terminal": ("1", None),
    "projected_diameter": ("m", None),
    "wall_factor": ("1", None),
    "reynolds": ("1", None),
    "drag_coefficient": ("1", None),
}
SAME = {  # other names of a column
    "density": "particle_density",
    "diameter": "equivalent_diameter",
    "volume_equivalent_diameter": "equivalent_diameter",
    "terminal_velocity": "velocity",
    "settling_velocity": "velocity",
    "consistency_index": "consistency",
    "flow_behaviour_index": "flow_index",
    "corey": "corey_shape_factor",
    "bore": "column_diameter",
}
TEXT = ("particle", "lot", "recording", "fluid", "flags", "reason")
FROM = ("equivalent_diameter_from", "sphericity_from", "wall_method")
SWITCHES = {"accepted": True, "control": False}  # with what an absent column means
_NEEDED = {
    "velocity": 'a column "velocity [mm/s]"',
    "particle_density": 'a column "particle density [kg/m3]"',
    "fluid_density": 'a column "fluid density [kg/m3]"',
}
_RHEOLOGY = 'a column "viscosity [mPa s]", or "consistency [Pa s^n]" with "flow index [-]"'
_SIZE = 'a column "equivalent diameter [mm]", the columns "long axis", "intermediate axis" and "short axis", or "mass"'


def read_drop_table(path: Path) -> pd.DataFrame:
    """A table of drops with their velocities, completed to the columns of `Drop`.

    Parameters
    ----------
    path : Path
        CSV or XLSX. Needed: velocity, particle density, fluid density, viscosity (or consistency and flow index), and a
        size: equivalent diameter, mass, or three axes. The velocity is that measured; with a column diameter it is
        corrected for the wall, without it is taken as unbounded (`assumptions` says so). `drops.csv` of a study is
        such a table, and keeps its own unbounded velocity. Any further numeric column is a descriptor.

    Returns
    -------
    DataFrame
        Columns of `Drop` in SI, then the further descriptors; one row per row of the file.

    Raises
    ------
    InputFaults
        All that cannot be used: headings, cells, columns that are missing, particles wider than their column.
    """
    table = _with_usual_names(read_table(path))
    faults: list[Fault] = []
    cells = {
        name: found
        for name, (dimension, limits) in QUANTITIES.items()
        if (found := read_quantities(table, name, dimension, faults, limits)) is not None
    }
    unknown = Cells(*np.full((2, len(table.rows)), np.nan))
    drops = pd.DataFrame(index=range(len(table.rows)))
    for name in QUANTITIES:
        drops[name], drops[f"{name}_u"] = cells.get(name, unknown).value, cells.get(name, unknown).u
    for name in (*TEXT, *FROM):
        column = table.column(name)
        drops[name] = column.cells if column else ""
    for name, absent in SWITCHES.items():
        drops[name] = _switch(table, name, absent, faults)
    for name, descriptor in _descriptors(table, faults).items():
        drops[name] = descriptor.value
    _check_columns(table, cells, faults)
    if not faults:
        _check_rows(table, cells, drops["accepted"].to_numpy(dtype=np.bool_), faults)
    if not faults:
        drops = completed(drops)
        _check_fit(table, cells, drops, faults)
    if faults:
        raise InputFaults(faults)
    drops = corrected(drops, cells)
    drops["drop"] = drops["drop"].fillna(pd.Series(range(1, len(drops) + 1))).astype(np.int64)
    first = [name for name in Drop.__dataclass_fields__ if name in drops.columns]
    working = {*QUANTITIES, *(f"{name}_u" for name in QUANTITIES)}
    return drops[[*first, *(name for name in drops.columns if name not in working and name not in first)]]


def assumptions(drops: pd.DataFrame) -> tuple[str, ...]:
    """What was computed or taken for granted in a table that `read_drop_table` completed, one sentence each."""
    told = []
    if (drops["wall_method"] == TAKEN_AS_UNBOUNDED).any():
        told.append(
            "No column diameter is given: velocities are taken as those in unbounded fluid, which in a narrow column "
            "they are not."
        )
    corrected = drops[~drops["wall_method"].isin(["", TAKEN_AS_UNBOUNDED])]
    if len(corrected):
        low, high = corrected["wall_factor"].min(), corrected["wall_factor"].max()
        told.append(f"Velocities are corrected for the wall of the column: wall factor {low:.3f} to {high:.3f}.")
    for route, words in (
        ("mass and density", "Equivalent diameters are computed from mass and density."),
        (
            "calipers",
            "Equivalent diameters are those of the ellipsoid of the three axes, too large for angular grains.",
        ),
    ):
        if (drops["equivalent_diameter_from"] == route).any():
            told.append(words)
    if (drops["sphericity_from"] == "ellipsoid of the axes").any():
        told.append("Sphericities are those of the ellipsoid of the three axes.")
    return tuple(told)


def as_measured(drops: pd.DataFrame) -> Measured:
    """A typed table in the place of a measurement, for charts: without budget and control spheres."""
    return Measured(
        drops=drops,
        budget=pd.DataFrame(columns=["drop", "output", "input", "share"]),
        controls=pd.DataFrame(columns=["drop", "recording", "particle", "en", "passed"]),
        assumed=assumptions(drops),
        doubts=(),
    )


def _with_usual_names(table: Table) -> Table:
    """Other names of a column replaced, unless the usual one stands there as well."""
    usual = {(column.name, column.is_uncertainty) for column in table.columns}

    def renamed(column: Column) -> Column:
        name = SAME.get(column.name, column.name)
        return column if (name, column.is_uncertainty) in usual else replace(column, name=name)

    return replace(table, columns=tuple(renamed(column) for column in table.columns))


def _switch(table: Table, name: str, absent: bool, faults: list[Fault]) -> list[bool]:
    column = table.column(name)
    if column is None:
        return [absent] * len(table.rows)
    words = {"true": True, "yes": True, "1": True, "false": False, "no": False, "0": False, "": absent}
    found = []
    for index, cell in enumerate(column.cells):
        if cell.lower() not in words:
            faults.append(cell_fault(table, column, index, "true or false"))
        found.append(words.get(cell.lower(), absent))
    return found


def _descriptors(table: Table, faults: list[Fault]) -> dict[str, Cells]:
    """Numeric columns beyond the known ones, as typed."""
    known = {*QUANTITIES, *SAME, *TEXT, *FROM, *SWITCHES, *Drop.__dataclass_fields__}
    found = {}
    for column in table.columns:
        if column.name in known or column.is_uncertainty:
            continue
        if near := near_heading(table, column, {*QUANTITIES, *TEXT, *SWITCHES}):
            faults.append(near)
        elif is_numeric(table, column):
            plain = replace(table, columns=(replace(column, unit=None),))
            cells = read_quantities(plain, column.name, "1", faults)
            assert cells is not None
            found[column.name] = cells
    return found


def _check_columns(table: Table, cells: Mapping[str, Cells], faults: list[Fault]) -> None:
    """Whether what a comparison needs is there at all."""
    missing = [accepted for name, accepted in _NEEDED.items() if name not in cells]
    if "viscosity" not in cells and not {"consistency", "flow_index"} <= set(cells):
        missing.append(_RHEOLOGY)
    if not ({"equivalent_diameter", "mass"} & set(cells) or set(AXES) <= set(cells)):
        missing.append(_SIZE)
    faults.extend(Fault(file=table.file, found=None, accepted=accepted) for accepted in missing)


def _check_rows(table: Table, cells: Mapping[str, Cells], accepted: BoolArray, faults: list[Fault]) -> None:
    """Cells that an accepted drop cannot do without. A row of a study's own table says itself what it lacks."""
    if "unbounded_velocity" in cells:
        return
    for name in _NEEDED:
        column = table.column(name)
        assert column is not None
        for index in np.flatnonzero(np.isnan(cells[name].value) & accepted):
            faults.append(cell_fault(table, column, int(index), f"the {name.replace('_', ' ')} of this drop"))
    speed, column = cells["velocity"].value, table.column("velocity")
    assert column is not None
    for index in np.flatnonzero((speed <= 0) & accepted):
        faults.append(cell_fault(table, column, int(index), "a velocity above 0"))


def _check_fit(table: Table, cells: Mapping[str, Cells], drops: pd.DataFrame, faults: list[Fault]) -> None:
    """Whether each particle fits into its column."""
    column = table.column("column_diameter")
    if column is None or "unbounded_velocity" in cells:
        return
    too_wide = drops["equivalent_diameter"].to_numpy() >= cells["column_diameter"].value
    for index in np.flatnonzero(too_wide):
        size = 1e3 * float(drops["equivalent_diameter"].iloc[index])
        faults.append(cell_fault(table, column, int(index), f"wider than the particle of {size:.3g} mm"))
