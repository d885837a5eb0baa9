"""Replicates in groups: components of variance, tests for outliers, and a drift common to all groups.

The statistics of ISO 5725-2 on plain arrays; what they mean for drops, particles and lots is in `lots`.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import stats

from settlelab.physics.constants import FloatArray

__all__ = ["Components", "Drift", "Suspect", "cochran", "drift", "grubbs", "one_way"]

LIMIT = 2.8  # repeatability limit over its standard deviation, 1.96 sqrt(2) rounded (ISO 5725-6)
STRAGGLER, OUTLIER = 0.05, 0.01  # significance (ISO 5725-2, 7.3)


@dataclass(frozen=True, slots=True, kw_only=True)
class Components:
    """One-way random effects; standard deviations in the unit of the values, nan where the data do not tell."""

    groups: int
    count: int
    mean: float  # of the means of the groups
    mean_u: float  # of it as an estimate for the population that the groups are drawn from
    within: float  # repeatability standard deviation
    between: float  # 0 where the means scatter no more than repeatability explains
    f_ratio: float
    p_value: float  # of the F ratio, if the groups did not differ

    @property
    def repeatability_limit(self) -> float:
        """Two single values of one group differ by more than this in 5 % of cases."""
        return LIMIT * self.within


@dataclass(frozen=True, slots=True)
class Suspect:
    """A test for an outlier: which one is suspected, the statistic, and the critical values."""

    index: int
    statistic: float
    critical_straggler: float
    critical_outlier: float

    @property
    def mark(self) -> str:
        """What to call it: "outlier" (1 %), "straggler" (5 %), or nothing."""
        if self.statistic > self.critical_outlier:
            return "outlier"
        return "straggler" if self.statistic > self.critical_straggler else ""


@dataclass(frozen=True, slots=True)
class Drift:
    """A slope common to all groups, with its standard uncertainty and the probability of it by chance."""

    slope: float
    u: float
    p_value: float


def one_way(values: ArrayLike, group: ArrayLike) -> Components:
    """Scatter within and between groups that need not be of equal size, by the analysis of variance.

    Parameters
    ----------
    values : (N,) array
        Measured values.
    group : (N,) array
        Names or numbers of their groups.

    Returns
    -------
    Components
        Without replicates `within` is nan, and `between` holds both scatters, as they cannot be told apart.

    References
    ----------
    JCGM 100:2008, H.5; ISO 5725-2:2019, 7.5. Groups of unequal size: Searle, Casella & McCulloch (1992), ch. 3.
    """
    y, cells, sizes = _cells(values, group)
    count, groups = len(y), len(sizes)
    means = np.bincount(cells, y - y[0]) / sizes + y[0]  # shifted: nearly equal values keep their digits
    degrees, mean = count - groups, float(means.mean())
    within_square = float(np.sum((y - means[cells]) ** 2) / degrees) if degrees > 0 else math.nan
    if groups < 2:
        alone = math.sqrt(within_square / count) if degrees > 0 else math.nan
        nothing = {"between": math.nan, "f_ratio": math.nan, "p_value": math.nan}
        return Components(
            groups=groups, count=count, mean=mean, mean_u=alone, within=math.sqrt(within_square), **nothing
        )
    grand = float(np.average(means, weights=sizes))
    between_square = float(np.sum(sizes * (means - grand) ** 2) / (groups - 1))
    typical_size = (count - float(np.sum(sizes**2)) / count) / (groups - 1)
    own = within_square if degrees > 0 else 0.0
    between = max((between_square - own) / typical_size, 0.0)
    f_ratio = between_square / own if own > 0 else math.nan
    return Components(
        groups=groups,
        count=count,
        mean=mean,
        mean_u=math.sqrt(between / groups + own * float(np.sum(1 / sizes)) / groups**2),
        within=math.sqrt(within_square),
        between=math.sqrt(between),
        f_ratio=f_ratio,
        p_value=float(stats.f.sf(f_ratio, groups - 1, degrees)) if own > 0 else math.nan,
    )


def _cells(values: ArrayLike, group: ArrayLike) -> tuple[FloatArray, NDArray[np.int64], FloatArray]:
    """Values, number of the group of each, and sizes of the groups."""
    _, cells, sizes = np.unique(np.asarray(group), return_inverse=True, return_counts=True)
    return np.asarray(values, dtype=np.float64), cells.reshape(-1), sizes.astype(np.float64)


def grubbs(values: ArrayLike) -> Suspect | None:
    """Grubbs' test for one outlying value on either side; None for fewer than 3 values or no scatter.

    Parameters
    ----------
    values : (N,) array
        Values that would be normal without the outlier.

    References
    ----------
    ISO 5725-2:2019, 7.3.4.
    """
    y = np.asarray(values, dtype=np.float64)
    if len(y) < 3 or np.ptp(y) == 0:
        return None
    score = np.abs(y - y.mean()) / y.std(ddof=1)
    suspect = int(np.argmax(score))
    straggler, outlier = (_grubbs_critical(len(y), significance) for significance in (STRAGGLER, OUTLIER))
    return Suspect(suspect, float(score[suspect]), straggler, outlier)


def _grubbs_critical(count: int, significance: float) -> float:
    t = float(stats.t.isf(significance / (2 * count), count - 2))
    return (count - 1) / math.sqrt(count) * math.sqrt(t**2 / (count - 2 + t**2))


def cochran(deviations: ArrayLike, replicates: int) -> Suspect | None:
    """Cochran's test of the largest variance of groups of equal size; None for one group or no scatter.

    Parameters
    ----------
    deviations : (P,) array
        Standard deviation of each group.
    replicates : int
        Values in each group, 2 or more.

    References
    ----------
    ISO 5725-2:2019, 7.3.3.
    """
    variance = np.asarray(deviations, dtype=np.float64) ** 2
    groups = len(variance)
    if groups < 2 or variance.sum() == 0:
        return None
    suspect = int(np.argmax(variance))
    straggler, outlier = (_cochran_critical(groups, replicates, level) for level in (STRAGGLER, OUTLIER))
    return Suspect(suspect, float(variance[suspect] / variance.sum()), straggler, outlier)


def _cochran_critical(groups: int, replicates: int, significance: float) -> float:
    degrees = replicates - 1
    f = float(stats.f.isf(significance / groups, degrees, (groups - 1) * degrees))
    return f / (f + groups - 1)


def drift(values: ArrayLike, order: ArrayLike, group: ArrayLike) -> Drift | None:
    """A linear change with the order in which values were taken, the same in all groups.

    Parameters
    ----------
    values : (N,) array
        Measured values.
    order : (N,) array
        Number or time of each.
    group : (N,) array
        Names or numbers of their groups; each has its own level.

    Returns
    -------
    Drift or None
        None where fewer than 2 degrees of freedom are left, or no group has values of different order.
    """
    y, cells, sizes = _cells(values, group)
    x = np.asarray(order, dtype=np.float64)
    x = x - (np.bincount(cells, x) / sizes)[cells]
    y = y - (np.bincount(cells, y - y[0]) / sizes + y[0])[cells]
    degrees, spread = len(y) - len(sizes) - 1, float(x @ x)
    if degrees < 2 or spread == 0:
        return None
    slope = float(x @ y) / spread
    u = math.sqrt(float(np.sum((y - slope * x) ** 2)) / degrees / spread)
    return Drift(slope, u, float(2 * stats.t.sf(abs(slope) / u, degrees)) if u > 0 else 0.0)
