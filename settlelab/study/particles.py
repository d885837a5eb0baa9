"""The particle table: one row for each particle, what was measured of it and how well."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np

from settlelab.errors import Fault
from settlelab.study.columns import Cells, cell_fault, is_numeric, near_heading, read_numbers, read_quantities
from settlelab.study.limits import ABOVE_ZERO, SHAPE, SOLID_DENSITY, Limits
from settlelab.study.model import Particle
from settlelab.study.table import Table

__all__ = ["MEASURED", "read_particles"]

# column -> SI unit and limits
MEASURED: dict[str, tuple[str, Limits]] = {
    "mass": ("kg", ABOVE_ZERO),
    "density": ("kg/m3", SOLID_DENSITY),
    "diameter": ("m", ABOVE_ZERO),
    "long_axis": ("m", ABOVE_ZERO),
    "intermediate_axis": ("m", ABOVE_ZERO),
    "short_axis": ("m", ABOVE_ZERO),
    "sphericity": ("1", SHAPE),
    "circularity": ("1", SHAPE),
}
AXES = ("long_axis", "intermediate_axis", "short_axis")
KNOWN = ("particle", "lot", *MEASURED)


def read_particles(table: Table, faults: list[Fault]) -> tuple[tuple[Particle, ...], tuple[str, ...]]:
    """Particles of a table in the order of its rows, and what was assumed about its columns.

    Parameters
    ----------
    table : Table
        Columns `particle`, `lot`, those of `MEASURED`; any further numeric column is a descriptor, kept as typed.
    faults : list of Fault
        Grows by everything that cannot be used; a row at fault is still a particle, without the value at fault.
    """
    names = _names(table, faults)
    if names is None:
        return (), ()
    measured = {
        name: cells
        for name, (dimension, limits) in MEASURED.items()
        if (cells := read_quantities(table, name, dimension, faults, limits)) is not None
    }
    _check_axes(table, measured, faults)
    descriptors, notes = _descriptors(table, faults)
    lot = table.column("lot")
    values: list[dict[str, Any]] = [
        {key: cells.quantity(index) for key, cells in measured.items()} for index in range(len(table.rows))
    ]
    particles = tuple(
        Particle(
            name=name,
            lot=lot.cells[index] if lot else "",
            row=table.rows[index],
            descriptors={key: q.value for key, cells in descriptors.items() if (q := cells.quantity(index))},
            **values[index],
        )
        for index, name in enumerate(names)
        if name
    )
    return particles, table.notes + notes + _without_uncertainty(table, measured) + _unknown(table, particles)


def _names(table: Table, faults: list[Fault]) -> tuple[str, ...] | None:
    column = table.column("particle")
    if column is None:
        near = [fault for each in table.columns if (fault := near_heading(table, each, ["particle"]))]
        missing = Fault(file=table.file, found=None, accepted='a column "particle" with the name of each particle')
        faults.extend(near or [missing])
        return None
    first: dict[str, int] = {}
    for index, name in enumerate(column.cells):
        if not name:
            faults.append(cell_fault(table, column, index, "the name of the particle"))
        elif name in first:
            faults.append(cell_fault(table, column, index, f"a new name: it stands in row {first[name]} too"))
        first.setdefault(name, table.rows[index])
    return column.cells


def _check_axes(table: Table, measured: dict[str, Cells], faults: list[Fault]) -> None:
    """Long >= intermediate >= short; an axis that is empty is left out of the comparison."""
    for index in range(len(table.rows)):
        known = [name for name in AXES if name in measured and measured[name].quantity(index) is not None]
        for longer, shorter in pairwise(known):
            if measured[shorter].value[index] > measured[longer].value[index]:
                column, other = table.column(shorter), table.column(longer)
                assert column is not None
                assert other is not None
                what = f'an axis of at most the {longer.replace("_", " ")}, "{other.cells[index]}"'
                faults.append(cell_fault(table, column, index, what))


def _descriptors(table: Table, faults: list[Fault]) -> tuple[dict[str, Cells], tuple[str, ...]]:
    """Numeric columns beyond the known ones, as typed; text columns and uncertainties of descriptors are noted."""
    descriptors, notes = {}, []
    for column in table.columns:
        if column.name in KNOWN:
            continue
        if near := near_heading(table, column, KNOWN):
            faults.append(near)
        elif column.is_uncertainty or not is_numeric(table, column):
            kind = "an uncertainty of a descriptor" if column.is_uncertainty else "text"
            notes.append(f'{table.file.name}: column "{column.heading}" is {kind} and not used')
        else:
            descriptors[column.name] = read_numbers(table, column, faults)
    return descriptors, tuple(notes)


def _unknown(table: Table, particles: tuple[Particle, ...]) -> tuple[str, ...]:
    """What cannot be known of a particle, from what was not measured."""
    notes = []
    without_density = [particle.name for particle in particles if particle.density is None]
    if without_density:
        what = "gives no density, so no drag coefficient, for"
        notes.append(f"{table.file.name}: {what} {', '.join(without_density)}")
    without_size = [
        particle.name
        for particle in particles
        if particle.diameter is None
        and (particle.mass is None or particle.density is None)
        and any(getattr(particle, axis) is None for axis in AXES)
    ]
    if without_size:
        notes.append(f"{table.file.name}: gives no size for {', '.join(without_size)}; that of the silhouette is taken")
    return tuple(notes)


def _without_uncertainty(table: Table, measured: dict[str, Cells]) -> tuple[str, ...]:
    """A sentence for the columns that state no uncertainty at all, and one for each that lacks it in some rows."""
    notes, never = [], []
    for name, cells in measured.items():
        without = [row for row, u in zip(table.rows, cells.u, strict=True) if u == 0.0]
        column = table.column(name)
        assert column is not None
        if without and len(without) == int(np.isfinite(cells.value).sum()):
            never.append(f'"{column.heading}"')
        elif without:
            where = f'column "{column.heading}", row {", ".join(map(str, without))}'
            notes.append(f"{table.file.name}, {where}: no uncertainty is stated; taken as 0")
    if never:
        notes.insert(0, f"{table.file.name}: no uncertainty is stated for {', '.join(never)}; taken as 0")
    return tuple(notes)
