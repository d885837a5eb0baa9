"""`settlelab methods`: the published methods on board."""

from __future__ import annotations

import re
import textwrap
from collections.abc import Collection, Iterable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import click

from settlelab.cli import console
from settlelab.errors import SettlelabError

if TYPE_CHECKING:
    from settlelab.physics.drag import Method
    from settlelab.physics.registry import Entry

_WIDTH = 100


@click.command("methods")
@click.argument("name", required=False)
@click.option(
    "--for",
    "table",
    type=click.Path(path_type=Path, exists=True, dir_okay=False),
    help="A particle or drop table: which drag laws its columns allow, and why the others are left out.",
)
@click.option("--plot", type=click.Path(path_type=Path, dir_okay=False), help="Picture of the drag law NAME (PNG).")
@click.option(
    "--page", type=click.Path(path_type=Path, dir_okay=False), help="Write all methods in full as a page (Markdown)."
)
def command(name: str | None, table: Path | None, plot: Path | None, page: Path | None) -> None:
    """List the published methods on board. With NAME, one of them in full."""
    if sum(asked is not None for asked in (name, table, page)) > 1:
        raise click.UsageError("give only one of a method, --for and --page")
    if plot is not None and name is None:
        raise click.UsageError("--plot needs the name of a drag law")
    if table is not None:
        _show_usable(table)
    elif page is not None:
        _write_page(page)
    elif name is not None:
        _show_in_full(name)
        if plot is not None:
            _draw(name, plot)
    else:
        _show_all()


def _show_all() -> None:
    from settlelab.physics.catalogue import BOARDS, UNCONFIRMED

    for title, board in BOARDS.items():
        click.echo(f"{title}\n")
        entries = list(board.values())
        rows = [_drag_row(entry) or _other_row(entry) for entry in entries]
        _aligned([_DRAG_HEAD if _drag_row(entries[0]) else _OTHER_HEAD, *rows])
        click.echo()
    click.echo(f"* {UNCONFIRMED}")
    click.echo("settlelab methods NAME shows one in full; a law outside its range still answers, and is marked.")


_DRAG_HEAD = ("name", "Re", "needs", "source")
_OTHER_HEAD = ("name", "for", "range", "source")


def _drag_row(entry: Entry) -> tuple[str, ...] | None:
    """Columns of a drag law; None for another method."""
    from settlelab.physics.catalogue import spoken, stated_range
    from settlelab.physics.drag import Method

    if not isinstance(entry, Method):
        return None
    needs = ", ".join(map(spoken, entry.needs)) or "-"
    reach = stated_range(entry, "reynolds")
    return _starred(entry), f"d* {stated_range(entry, 'dstar')}" if reach == "-" else reach, needs, _authors(entry)


# Quantities of the ranges that the list shows, with their signs.
_BRIEF = {
    "ratio": "d/D ",
    "reynolds_unbounded": "Re ",
    "reynolds": "Re ",
    "nearness": "nearness ",
    "side_ratio": "d/W ",
    "temperature": "",
    "bingham": "Bi ",
    "flow_index": "n ",
}


def _other_row(entry: Entry) -> tuple[str, ...]:
    from settlelab.physics.catalogue import made_for, stated_range

    ranges = [f"{sign}{stated_range(entry, key)}" for key, sign in _BRIEF.items() if key in entry.valid]
    return _starred(entry), made_for(entry), ", ".join(ranges[:2]), _authors(entry)


def _show_in_full(name: str) -> None:
    from settlelab.physics.catalogue import BOARDS, facts
    from settlelab.physics.registry import find

    entry = find(name, *BOARDS.values())
    click.echo(textwrap.fill(f"{entry.name}: {entry.purpose}", _WIDTH) + "\n")
    for label, text in facts(entry):
        body = textwrap.wrap(text, _WIDTH - 12)
        click.echo("\n".join(f"  {label if i == 0 else '':10}{line}" for i, line in enumerate(body)))
    click.echo("\n" + textwrap.indent(entry.code, "    "))


def _draw(name: str, path: Path) -> None:
    from settlelab.physics.drag import DRAG

    if name not in DRAG:
        raise SettlelabError(f"only drag laws are drawn, and {name} is none")
    from settlelab.cli.method_chart import law_chart
    from settlelab.report import drawing

    path.write_bytes(drawing.picture(law_chart(DRAG[name]), "png"))
    console.written([path])


def _write_page(path: Path) -> None:
    from settlelab.physics.catalogue import reference_page

    path.write_text(reference_page(), encoding="utf-8", newline="\n")
    console.written([path])


def _show_usable(path: Path) -> None:
    from settlelab.physics.catalogue import spoken
    from settlelab.physics.drag import DRAG, available_descriptors, usable_methods
    from settlelab.study import read_table

    table = read_table(path)
    filled = [column.name for column in table.columns if any(column.cells) and not column.is_uncertainty]
    known = available_descriptors(filled)
    usable, left_out = usable_methods(known)
    told = ", ".join(f"{spoken(name)} ({how})" for name, how in known.items()) or "none"
    click.echo(textwrap.fill(f"{path.name}: {len(table.rows)} rows; descriptors known: {told}", _WIDTH))
    for title, spheres in (("usable, made for grains", False), ("usable, made for spheres", True)):
        click.echo(f"\n{title}\n")
        some = sorted((law for law in usable if (law.diameter == "sphere") == spheres), key=lambda law: law.name)
        _aligned([_DRAG_HEAD, *filter(None, map(_drag_row, some))])
    if left_out:
        click.echo("\nleft out\n")
        rows = [
            (_starred(DRAG[name]), " ".join(map(spoken, reason.split())), _remedy(DRAG[name], known))
            for name, reason in left_out.items()
        ]
        _aligned([("name", "because it", "columns that would give it"), *rows])
    console.doubts(table.notes)


def _remedy(method: Method, known: Collection[str]) -> str:
    """Which columns would make a law usable."""
    from settlelab.physics.catalogue import spoken
    from settlelab.physics.drag import DERIVED

    missing = [need for need in method.needs if need not in known]
    measured = dict.fromkeys(column for need in missing for column in DERIVED.get(need, ((need,),))[0])
    columns = ", ".join(map(spoken, measured))
    derived = len(missing) == 1 and missing[0] in DERIVED
    return f"{spoken(missing[0])}; or {columns}" if derived else columns


def _authors(entry: Entry) -> str:
    """Authors and year, of three and more the first."""
    return re.sub(r"^([^,(]+), [^(]+& [^(]+ \(", r"\1 et al. (", entry.citation)


def _starred(entry: Entry) -> str:
    return entry.name if entry.confirmed else f"{entry.name} *"


def _aligned(rows: Iterable[Sequence[str]]) -> None:
    """Print rows in columns; the first row is the heading."""
    lines = [tuple(row) for row in rows]
    widths = [max(len(line[i]) for line in lines) for i in range(len(lines[0]))]
    for number, line in enumerate(lines):
        click.echo("  " + "  ".join(f"{cell:{width}}" for cell, width in zip(line, widths, strict=True)).rstrip())
        if number == 0:
            click.echo("  " + "  ".join("-" * width for width in widths))
