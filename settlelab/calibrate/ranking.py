"""Published methods and calibrated forms side by side: how far each is from the measured velocities.

A deviation is predicted over measured unbounded velocity, less 1. Every particle counts once, however often it was
dropped. Intervals come from a bootstrap that draws whole particles.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Annotated

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike

from settlelab.calibrate.falls import Law, published_law, settle
from settlelab.calibrate.observations import Observations
from settlelab.measure.model import MillimetrePerSecond
from settlelab.physics.constants import BoolArray, FloatArray
from settlelab.physics.drag import DESCRIPTORS, Method
from settlelab.units import Unit

__all__ = [
    "Contender",
    "PredictedDrop",
    "by_particle",
    "particle_draws",
    "predictions",
    "published_contender",
    "rank",
    "rank_by_group",
    "squared_error",
]

DRAWS, SEED = 1000, 20250  # of the bootstrap; a fixed seed, so that the same drops give the same table
WITHIN = (10, 20, 30)  # percent
FEWEST_DRAWN = 5  # particles of a group; of fewer the bootstrap tells no interval


@dataclass(frozen=True, slots=True, kw_only=True)
class Contender:
    """A published method or a fitted form with its deviations from N drops; `facts` are further ranking columns.

    `cv_deviation` is that of a fit without the particle, `cv_lot_deviation` without its lot; None where not fitted.
    """

    name: str
    kind: str  # "published" or "calibrated"
    deviation: FloatArray
    in_range: BoolArray
    cv_deviation: FloatArray | None = None
    cv_lot_deviation: FloatArray | None = None
    facts: dict[str, object]

    def take(self, chosen: BoolArray) -> Contender:
        """The same for some of the drops."""
        names = ("deviation", "in_range", "cv_deviation", "cv_lot_deviation")
        arrays = {name: getattr(self, name) for name in names}
        return replace(self, **{name: values[chosen] for name, values in arrays.items() if values is not None})


@dataclass(frozen=True, slots=True, kw_only=True)
class PredictedDrop:
    """One row of the predictions: what a method says of a drop."""

    drop: int
    method: str
    kind: str
    predicted_velocity: MillimetrePerSecond  # unbounded
    deviation: Annotated[float, Unit("%")]  # predicted over measured, less 1
    cv_deviation: Annotated[float, Unit("%")]  # of a fit without the particle
    in_range: bool


def published_contender(method: Method, seen: Observations) -> Contender:
    """A published method against the drops; a descriptor that is not known keeps no range."""
    shapes: dict[str, ArrayLike] = {**dict.fromkeys(DESCRIPTORS, np.nan), **seen.falls.descriptors}
    return Contender(
        name=method.name,
        kind="published",
        deviation=deviation(published_law(method), seen),
        in_range=method.within(reynolds=seen.reynolds, **shapes),
        facts={
            "needs": ";".join(method.needs),
            "confirmed": method.confirmed,
            "source": method.source,
        },
    )


def deviation(law: Law, seen: Observations) -> FloatArray:
    """Predicted over measured velocity, less 1."""
    return np.asarray(settle(law, seen.falls).velocity / seen.velocity - 1)


def rank(contenders: Sequence[Contender], seen: Observations) -> pd.DataFrame:
    """The columns of ranking.csv, best first: by the root mean square, of calibrated forms the cross-validated one.

    `as_good_as_best` marks methods of a kind that the drops cannot tell apart from the best of that kind: the 95 %
    bootstrap interval of the difference in mean squared deviation reaches 0.
    """
    share = by_particle(seen, np.eye(len(seen.drop)))  # (particles, drops), rows sum to 1
    draws = particle_draws(share.shape[0])
    table = pd.DataFrame([_row(contender, share, draws) | contender.facts for contender in contenders])
    squares = np.column_stack([share @ squared_error(contender) for contender in contenders])
    merit = squares.mean(axis=0)
    table["as_good_as_best"] = False
    for kind in dict.fromkeys(table["kind"]):
        of_kind = np.flatnonzero(table["kind"] == kind)
        best = of_kind[np.argmin(merit[of_kind])]
        gap = draws @ (squares[:, of_kind] - squares[:, [best]])
        table.loc[of_kind, "as_good_as_best"] = np.quantile(gap, 0.025, axis=0) <= 0
    return table.iloc[np.argsort(merit, kind="stable")].reset_index(drop=True)


def rank_by_group(contenders: Sequence[Contender], seen: Observations) -> pd.DataFrame:
    """How far each method is from the drops of each lot, and of each decade of the Reynolds number.

    Columns `by` ("lot" or "reynolds") and `group` (its name, or such as "1 to 10"), then the measures of the ranking,
    best first within a group. A lot without a name is none. Intervals are missing where a group has fewer than five
    particles.
    """
    decade = np.floor(np.log10(seen.reynolds)).astype(np.int64)
    groups = [("lot", lot, seen.lot == lot) for lot in dict.fromkeys(seen.lot.tolist()) if lot]
    groups += [("reynolds", f"{10.0**low:g} to {10.0 ** (low + 1):g}", decade == low) for low in np.unique(decade)]
    return pd.concat([_rank_group(by, name, mask, contenders, seen) for by, name, mask in groups], ignore_index=True)


def _rank_group(
    by: str, name: str, mask: BoolArray, contenders: Sequence[Contender], seen: Observations
) -> pd.DataFrame:
    part = seen.take(mask)
    share = by_particle(part, np.eye(len(part.drop)))
    draws = particle_draws(share.shape[0])
    table = pd.DataFrame([{"by": by, "group": name} | _row(each.take(mask), share, draws) for each in contenders])
    if share.shape[0] < FEWEST_DRAWN:
        table.loc[:, [column for column in table if column.endswith(("_low_percent", "_high_percent"))]] = np.nan
    merit = table["cv_rms_percent"].fillna(table["rms_percent"])
    return table.iloc[np.argsort(merit, kind="stable")]


def squared_error(contender: Contender) -> FloatArray:
    """Squared deviation of each drop, cross-validated where the method was fitted."""
    chosen = contender.deviation if contender.cv_deviation is None else contender.cv_deviation
    return np.asarray(chosen**2)


def by_particle(seen: Observations, values: FloatArray) -> FloatArray:
    """Mean over the drops of each particle; rows of `values` are drops."""
    belongs = (np.unique(seen.particle)[:, None] == seen.particle).astype(np.float64)
    return np.asarray(belongs @ values / belongs.sum(axis=1, keepdims=values.ndim > 1))


def particle_draws(particles: int) -> FloatArray:
    """(draws, particles) weights of the bootstrap; each row sums to 1."""
    equal = np.full(particles, 1 / particles)
    return np.random.default_rng(SEED).multinomial(particles, equal, size=DRAWS) / particles


def _row(contender: Contender, share: FloatArray, draws: FloatArray) -> dict[str, object]:
    """The measures of a contender; `share` weighs its drops to particles, `draws` particles to bootstrap samples."""
    weight = share.mean(axis=0)
    off = 100 * contender.deviation
    bias, square = share @ off, share @ off**2
    row: dict[str, object] = {
        "method": contender.name,
        "kind": contender.kind,
        "drops": share.shape[1],
        "particles": share.shape[0],
        "in_range_percent": 100 * float(weight @ contender.in_range),
        "bias_percent": float(bias.mean()),
        "rms_percent": float(np.sqrt(square.mean())),
        "max_percent": float(np.abs(off).max()),
    }
    for limit in WITHIN:
        row[f"within_{limit}_percent"] = 100 * float(weight @ (np.abs(off) <= limit))
    row["cv_rms_percent"] = _rms(contender.cv_deviation, weight)
    row["cv_lot_rms_percent"] = _rms(contender.cv_lot_deviation, weight)
    for name, drawn in (("bias", draws @ bias), ("rms", np.sqrt(draws @ square))):
        row[f"{name}_low_percent"], row[f"{name}_high_percent"] = np.quantile(drawn, (0.025, 0.975)).tolist()
    return row


def _rms(deviations: FloatArray | None, weight: FloatArray) -> float:
    return float("nan") if deviations is None else 100 * float(np.sqrt(weight @ deviations**2))


def predictions(contenders: Sequence[Contender], seen: Observations) -> pd.DataFrame:
    """Each method's unbounded velocity [m/s] for each drop, with its deviation as a fraction."""
    return pd.concat(
        [
            pd.DataFrame(
                {
                    "drop": seen.drop,
                    "method": contender.name,
                    "kind": contender.kind,
                    "predicted_velocity": seen.velocity * (1 + contender.deviation),
                    "deviation": contender.deviation,
                    "cv_deviation": np.nan if contender.cv_deviation is None else contender.cv_deviation,
                    "in_range": contender.in_range,
                }
            )
            for contender in contenders
        ],
        ignore_index=True,
    )
