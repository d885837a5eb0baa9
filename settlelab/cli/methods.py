"""`settlelab methods`: the published methods on board."""

from __future__ import annotations

import textwrap
from collections.abc import Collection, Iterable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import click

from settlelab.cli import console

if TYPE_CHECKING:
    from settlelab.physics.drag import Method
    from settlelab.physics.liquids import LiquidProperty
    from settlelab.physics.registry import Entry
    from settlelab.physics.walls import WallMethod

_WIDTH = 100
_ABSOLUTE_ZERO = 273.15  # K in 0 °C, for showing ranges


@click.command("methods")
@click.argument("name", required=False)
@click.option(
    "--for",
    "table",
    type=click.Path(path_type=Path, exists=True, dir_okay=False),
    help="A particle or drop table: which drag laws its columns allow, and why the others are left out.",
)
def command(name: str | None, table: Path | None) -> None:
    """List the published methods on board. With NAME, one of them in full."""
    if name is not None and table is not None:
        raise click.UsageError("give either a method or --for, not both")
    if table is not None:
        _show_usable(table)
    elif name is not None:
        _show_in_full(name)
    else:
        _show_all()


def _show_all() -> None:
    from settlelab.physics.drag import DRAG
    from settlelab.physics.liquids import LIQUIDS
    from settlelab.physics.walls import WALLS

    click.echo("Drag laws\n")
    _aligned([_DRAG_HEAD, *map(_drag_row, DRAG.values())])
    click.echo("\nWall factors of a round column\n")
    _aligned([("name", "made for", "diameter/bore", "Re", "source"), *map(_wall_row, WALLS.values())])
    click.echo("\nLiquids\n")
    head = ("name", "gives", "temperature", "standard uncertainty", "source")
    _aligned([head, *map(_liquid_row, LIQUIDS.values())])
    click.echo("\n* from memory or a single source, unconfirmed")
    click.echo("settlelab methods NAME shows one in full; a law outside its range still answers, and is marked.")


_DRAG_HEAD = ("name", "for", "needs", "Re", "source")


def _drag_row(method: Method) -> tuple[str, ...]:
    use = "spheres" if method.diameter == "sphere" else "grains"
    needs = ", ".join(map(_spoken, method.needs)) or "-"
    return _starred(method), use, needs, _range(method, "reynolds"), method.citation


def _wall_row(method: WallMethod) -> tuple[str, ...]:
    return (
        _starred(method),
        method.regime,
        _range(method, "ratio"),
        _range(method, "reynolds_unbounded"),
        method.citation,
    )


def _liquid_row(entry: LiquidProperty) -> tuple[str, ...]:
    gives = f"{entry.quantity} of {entry.liquid}"
    return _starred(entry), gives, _range(entry, "temperature"), f"{100 * entry.relative_u:.2g} %", entry.citation


def _show_in_full(name: str) -> None:
    from settlelab.physics.drag import DESCRIPTORS, DRAG
    from settlelab.physics.liquids import LIQUIDS
    from settlelab.physics.registry import find
    from settlelab.physics.walls import WALLS

    entry = find(name, DRAG, WALLS, LIQUIDS)
    click.echo(textwrap.fill(f"{entry.name}: {entry.purpose}", _WIDTH) + "\n")
    ranges = [f"{_spoken(quantity)} {_range(entry, quantity)}" for quantity in entry.valid]
    facts = [("source", entry.source), ("as in", entry.where)]
    if name in DRAG:
        method = DRAG[name]
        facts += [("diameter", f"{method.diameter}: Re and Cd are built on it")]
        facts += [("needs", f"{_spoken(need)}: {DESCRIPTORS[need]}") for need in method.needs]
    if name in LIQUIDS:
        facts += [("accuracy", f"{100 * LIQUIDS[name].relative_u:.2g} % standard uncertainty")]
    witness = "checked against a second source" if entry.confirmed else "from memory or a single source, unconfirmed"
    facts += [("range", "; ".join(ranges)), ("note", entry.note), ("evidence", witness)]
    for label, text in facts:
        if text:
            body = textwrap.wrap(text, _WIDTH - 12)
            click.echo("\n".join(f"  {label if i == 0 else '':10}{line}" for i, line in enumerate(body)))


def _show_usable(path: Path) -> None:
    from settlelab.physics.drag import DRAG, available_descriptors, usable_methods
    from settlelab.study import read_table

    table = read_table(path)
    filled = [column.name for column in table.columns if any(column.cells) and not column.is_uncertainty]
    known = available_descriptors(filled)
    usable, left_out = usable_methods(known)
    told = ", ".join(f"{_spoken(name)} ({how})" for name, how in known.items()) or "none"
    click.echo(textwrap.fill(f"{path.name}: {len(table.rows)} rows; descriptors known: {told}", _WIDTH))
    click.echo("\nusable\n")
    _aligned([_DRAG_HEAD, *map(_drag_row, usable)])
    if left_out:
        click.echo("\nleft out\n")
        rows = [
            (_starred(DRAG[name]), " ".join(map(_spoken, reason.split())), _remedy(DRAG[name], known))
            for name, reason in left_out.items()
        ]
        _aligned([("name", "because it", "columns that would give it"), *rows])
    console.doubts(table.notes)


def _remedy(method: Method, known: Collection[str]) -> str:
    """Which columns would make a law usable."""
    from settlelab.physics.drag import DERIVED

    missing = [need for need in method.needs if need not in known]
    measured = dict.fromkeys(column for need in missing for column in DERIVED.get(need, ((need,),))[0])
    columns = ", ".join(map(_spoken, measured))
    return f"{_spoken(missing[0])}; or {columns}" if len(missing) == 1 else columns


def _starred(entry: Entry) -> str:
    return entry.name if entry.confirmed else f"{entry.name} *"


def _spoken(name: str) -> str:
    """A parameter name as it is spoken."""
    words = {
        "reynolds": "Reynolds number",
        "reynolds_unbounded": "Reynolds number in unbounded fluid",
        "ratio": "diameter over bore",
        "corey_shape_factor": "Corey shape factor",
    }
    return words.get(name, name.replace("_", " "))


def _range(entry: Entry, quantity: str) -> str:
    """A validity range in words: up to 800, 1 to 1e4, 0 to 40 °C."""
    if quantity not in entry.valid:
        return "-"
    low, high = entry.valid[quantity]
    if quantity == "temperature":
        return f"{low - _ABSOLUTE_ZERO:g} to {high - _ABSOLUTE_ZERO:g} °C"
    return f"up to {_short(high)}" if low == 0 else f"{_short(low)} to {_short(high)}"


def _short(number: float) -> str:
    return f"{number:.4g}".replace("e+0", "e")


def _aligned(rows: Iterable[Sequence[str]]) -> None:
    """Print rows in columns; the first row is the heading."""
    lines = [tuple(row) for row in rows]
    widths = [max(len(line[i]) for line in lines) for i in range(len(lines[0]))]
    for number, line in enumerate(lines):
        click.echo("  " + "  ".join(f"{cell:{width}}" for cell, width in zip(line, widths, strict=True)).rstrip())
        if number == 0:
            click.echo("  " + "  ".join("-" * width for width in widths))
