"""`settlelab plan`: before filming."""

from __future__ import annotations

from pathlib import Path

import click

from settlelab.cli import console

PERCENT = click.FloatRange(min=0, max=100, min_open=True)


@click.command("plan")
@click.argument("study", type=click.Path(path_type=Path))
@click.option("--target", type=PERCENT, default=5.0, show_default=True, help="U(Cd) aimed at, k = 2, %.")
@click.option("--scatter", type=PERCENT, help="Scatter of replicate drops, % in velocity [assumed where left out].")
@click.option(
    "--pixels",
    type=click.IntRange(min=16),
    help="Height of the picture along gravity, px [of the video if there, else assumed].",
)
@click.option("--out", type=click.Path(path_type=Path, file_okay=False), help="Folder for plan.md and plan.html.")
def command(study: Path, target: float, scatter: float | None, pixels: int | None, out: Path | None) -> None:
    """Tell before filming what a study will show, how well, and what to change. Its videos need not exist yet."""
    from settlelab.plan import Aims, plan_study, plan_text, write_plan
    from settlelab.study import read_study
    from settlelab.units import to_si

    aims = Aims(
        target=to_si(target, "%"),
        scatter=None if scatter is None else to_si(scatter, "%"),
        picture_height=pixels,
    )
    plan = plan_study(read_study(study, before_filming=True), aims)
    click.echo(plan_text(plan))
    if out is not None:
        console.written(write_plan(plan, out))
