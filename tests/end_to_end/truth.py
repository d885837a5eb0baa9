"""A study's drop table beside the truth about it, which the analysis never sees."""

from __future__ import annotations

from pathlib import Path

import pandas as pd
from click.testing import CliRunner, Result

from settlelab.cli import main
from settlelab.measure import Drop
from settlelab.units import from_headings

COVERAGE_FACTOR = 1.96  # of a 95 % interval, for a normal distribution


def settlelab(*arguments: object) -> Result:
    """The command line, as a user calls it; a traceback fails the test."""
    result = CliRunner().invoke(main, [str(argument) for argument in arguments])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


def drop_table(results: Path) -> pd.DataFrame:
    """`drops.csv` in SI; names stay text."""
    names = {name: str for name in ("recording", "particle", "lot", "flags", "fluid", "reason")}
    table = pd.read_csv(results / "drops.csv", dtype=names, keep_default_na=True)
    return from_headings(table.fillna(dict.fromkeys(names, "")), Drop)


def beside_truth(drops: pd.DataFrame, truth: pd.DataFrame) -> pd.DataFrame:
    """One row per drop: the measured columns, the true ones with the ending `_true`, deviation and score.

    Fails where drops are missing, too many, or given to another particle.
    """
    assert drops["particle"].tolist() == truth["particle"].tolist()
    both = drops.reset_index(drop=True).join(truth.reset_index(drop=True).add_suffix("_true"))
    both["deviation"] = both["velocity"] / both["velocity_true"] - 1
    both["score"] = (both["velocity"] - both["velocity_true"]) / both["velocity_u"]
    return both
