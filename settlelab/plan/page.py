"""A plan as one page: on screen, and as Markdown and HTML."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Iterable, Sequence
from importlib.resources import files
from pathlib import Path

from jinja2 import Environment, PackageLoader, StrictUndefined

from settlelab.plan.model import Plan, SetupPlan
from settlelab.report.numbers import MISSING, significant
from settlelab.report.views import Show, TableView, table_view

__all__ = ["CAUTIONS", "plan_text", "write_plan"]

WIDTH = 100
MARKS = {"good": "ok", "doubt": "?", "bad": "NO"}
CAUTIONS = (
    "A fall through still fluid in a column is not a design for hole cleaning.",
    "Predicted velocities are for planning: they come from laws in print, not from these particles.",
    "Glass columns break, and test fluids may be hot, caustic or toxic: the laboratory's rules come first.",
)


def _whole(value: object) -> str:
    number = float(str(value))
    return "none" if math.isinf(number) else MISSING if math.isnan(number) else f"{number:.0f}"


def _two(value: object) -> str:
    return significant(float(str(value)), 2)


COLUMNS = (
    Show(heading="particle", field="particle"),
    Show(heading="V ± U, mm/s", field="velocity_mm", u="velocity_expanded", unit="1"),
    Show(heading="Re", field="reynolds", unit="1", form=_two),
    Show(heading="regime", field="regime"),
    Show(heading="wall %", field="wall", unit="1", form=_two),
    Show(heading="run-up mm", field="run_up_mm", unit="1", form=_two),
    Show(heading="s", field="run_up_time", unit="1", form=_two),
    Show(heading="size px", field="size_px", unit="1", form=_two),
    Show(heading="blur px", field="blur_px", unit="1", form=_two),
    Show(heading="frames", field="frames", unit="1", form=_whole),
    Show(heading="U(Cd) %", field="cd_percent", unit="1", form=_two),
    Show(heading="drops", field="drops", unit="1", form=_whole),
)
NOTE = (
    "U is the expanded uncertainty (k = 2): of V that of the prediction for a single particle, of Cd that of one "
    "measured drop. The run-up leads to 99 % of terminal velocity, margin of 1.5 included."
)


def plan_text(plan: Plan) -> str:
    """The plan for a screen 100 signs wide."""
    lines = [f"Plan of {plan.name}"]
    for setup in plan.setups:
        lines += ["", *_wrapped(f"{setup.title} ({', '.join(setup.recordings)})"), *_aligned(_table(setup))]
        for verdict in setup.verdicts:
            lines += _hanging(f"{MARKS[verdict.mark]:3} {verdict.topic:12}", verdict.text)
    lines += ["", *_wrapped(NOTE)]
    for title, sentences in _lists(plan):
        for number, sentence in enumerate(sentences):
            lines += _hanging(f"{title if number == 0 else '':10}", sentence)
    return "\n".join(lines)


def write_plan(plan: Plan, directory: Path) -> list[Path]:
    """Write `plan.md` and `plan.html` into a folder, made where missing; returns both paths."""
    directory.mkdir(parents=True, exist_ok=True)
    written = []
    for name, text in (("plan.md", _markdown(plan)), ("plan.html", _html(plan))):
        path = directory / name
        path.write_text(text, encoding="utf-8", newline="\n")
        written.append(path)
    return written


def _table(setup: SetupPlan) -> TableView:
    rows = setup.rows.assign(
        velocity_mm=1e3 * setup.rows["velocity"],
        velocity_expanded=2e3 * setup.rows["velocity_u"],
        wall=100 * (1 - setup.rows["wall_factor"]),
        run_up_mm=1e3 * setup.rows["run_up_distance"],
        cd_percent=200 * setup.rows["drag_coefficient_u"] / setup.rows["drag_coefficient"],
    )
    return table_view(rows, COLUMNS)


def _lists(plan: Plan) -> tuple[tuple[str, Sequence[str]], ...]:
    lists = (("Assumed", plan.assumed), ("Doubts", plan.doubts), ("Cautions", CAUTIONS))
    return tuple((title, sentences) for title, sentences in lists if sentences)


def _aligned(view: TableView) -> Iterable[str]:
    lines = [[cell.text for cell in cells] for cells in (view.headings, *view.rows)]
    widths = [max(len(line[column]) for line in lines) for column in range(len(view.headings))]
    for line in lines:
        cells = zip(line, widths, view.headings, strict=True)
        text = "  ".join(cell.rjust(width) if head.number else cell.ljust(width) for cell, width, head in cells)
        yield text.rstrip()


def _wrapped(text: str) -> list[str]:
    return _hanging("", text)


def _hanging(margin: str, text: str) -> list[str]:
    """Wrapped behind a margin; a number stays with its %."""
    lines = textwrap.wrap(
        text.replace(" %", "\N{NO-BREAK SPACE}%"),
        WIDTH,
        initial_indent=margin,
        subsequent_indent=" " * len(margin),
        break_on_hyphens=False,
    )
    return [line.replace("\N{NO-BREAK SPACE}%", " %") for line in lines]


def _markdown(plan: Plan) -> str:
    lines = [f"# Plan of {plan.name}"]
    for setup in plan.setups:
        view = _table(setup)
        lines += ["", f"## {setup.title}", "", f"Recordings: {', '.join(setup.recordings)}", ""]
        lines += ["| " + " | ".join(cell.text for cell in view.headings) + " |"]
        lines += ["|" + "|".join("---:" if cell.number else "---" for cell in view.headings) + "|"]
        lines += ["| " + " | ".join(cell.text for cell in row) + " |" for row in view.rows]
        lines += ["", *(f"- **{verdict.topic}** ({MARKS[verdict.mark]}): {verdict.text}" for verdict in setup.verdicts)]
    lines += ["", NOTE]
    for title, sentences in _lists(plan):
        lines += ["", f"## {title}", "", *(f"- {sentence}" for sentence in sentences)]
    return "\n".join(lines) + "\n"


def _html(plan: Plan) -> str:
    page = Environment(loader=PackageLoader("settlelab.plan"), autoescape=True, undefined=StrictUndefined)
    style = (files("settlelab.report") / "templates" / "report.css").read_text(encoding="utf-8")
    return page.get_template("plan.html.j2").render(
        plan=plan,
        setups=[(setup, _table(setup)) for setup in plan.setups],
        lists=_lists(plan),
        note=NOTE,
        style=style,
        signs={"good": "✓", "doubt": "?", "bad": "✗"},
    )
