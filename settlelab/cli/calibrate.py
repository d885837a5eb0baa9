"""`settlelab calibrate`: ranking and calibration from a drop table alone."""

from __future__ import annotations

import textwrap
from pathlib import Path
from typing import TYPE_CHECKING

import click

from settlelab.cli import console

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

WIDTH = 100
SHOWN = 5  # published methods printed; ranking.csv has them all


@click.command("calibrate")
@click.argument("table", type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path, file_okay=False), required=True, help="Folder for the results.")
@click.option("--descriptor", "descriptors", multiple=True, help="Shape descriptor to calibrate on; may be repeated.")
@click.option(
    "--form",
    "forms",
    multiple=True,
    help='Calibrated form to fit, or one of your own such as "formula: a/Re + b*exp(-5*sphericity); a=30" with values '
    "to start from; may be repeated [default: all on board].",
)
@click.option("--title", default="", help="For the card: what was tested.")
@click.option("--date", default="", help="For the card: when.")
@click.option("--by", default="", help="For the card: by whom.")
def command(
    table: Path, out: Path, descriptors: tuple[str, ...], forms: tuple[str, ...], title: str, date: str, by: str
) -> None:
    """Rank and calibrate drag laws on a drop table. Writes the ranking, predictions and the calibration card.

    TABLE is drops.csv of a study, or a table typed by hand with columns such as velocity [mm/s], equivalent
    diameter [mm], particle density [kg/m3], fluid density [kg/m3], viscosity [mPa s], sphericity.
    """
    from settlelab.calibrate import Origin, as_measured, assumptions, calibrate_drops, read_drop_table
    from settlelab.report.pictures import save_charts
    from settlelab.study.model import CalibrationChoice

    drops = read_drop_table(table)
    choice = CalibrationChoice(descriptors=descriptors, forms=forms)
    calibration = calibrate_drops(drops, choice, origin=Origin(title=title or table.name, date=date, by=by))
    _show(calibration)
    written = _write(calibration, out)
    console.written([*written, *save_charts(out / "figures", as_measured(drops), calibration).values()])
    console.doubts([*assumptions(drops), *calibration.notes[1:]])


def _write(calibration: Calibration, out: Path) -> list[Path]:
    from settlelab.calibrate import PredictedDrop, write_card
    from settlelab.report import write_csv

    return [
        write_csv(calibration.ranking, None, out / "ranking.csv"),
        write_csv(calibration.ranking_by_group, None, out / "ranking_by_group.csv"),
        write_csv(calibration.predictions, PredictedDrop, out / "predictions.csv"),
        write_card(calibration.card, out / "calibration.json"),
    ]


def _show(calibration: Calibration) -> None:
    """The best rows of the ranking, the coefficients of the chosen form, and the verdict."""
    ranking = calibration.ranking
    best = ranking[ranking["kind"] == "published"].head(SHOWN)
    shown = ranking[(ranking["kind"] == "calibrated") | ranking["method"].isin(best["method"])]
    width = max(len(name) for name in shown["method"])
    click.echo(f"deviation in velocity, %{'':{max(width - 22, 0)}}   bias    rms  left out  within 20 %  in range")
    for row in shown.to_dict("records"):
        cross = "" if row["kind"] == "published" else f"{row['cv_rms_percent']:.1f}"
        mark = "*" if row["kind"] == "calibrated" else " "
        doubt = "" if row["confirmed"] else "  unconfirmed"
        click.echo(
            f"{mark} {row['method']:{width}}  {row['bias_percent']:+6.1f} {row['rms_percent']:6.1f}  {cross:>8}"
            f"  {row['within_20_percent']:9.0f} %  {row['in_range_percent']:6.0f} %{doubt}"
        )
    hidden = int((ranking["kind"] == "published").sum()) - len(best)
    click.echo("* fitted to these drops; left out: rms on particles that were left out of the fit")
    if hidden:
        click.echo(f"{hidden} more published methods stand in ranking.csv")
    if calibration.chosen is not None:
        click.echo(f"\n{textwrap.fill(calibration.chosen.formula, WIDTH)}")
        for each in calibration.chosen.parameters:
            interval = "at a bound, no uncertainty" if each.at_bound else f"95 %: {each.low:.4g} to {each.high:.4g}"
            click.echo(f"  {each.name} = {each.value:.4g}  ({interval})  {each.meaning}")
    click.echo(f"\n{textwrap.fill(calibration.notes[0], WIDTH)}\n")
