"""What a plan holds: one row per particle and setup, verdicts, and what was assumed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Aims", "Plan", "Planned", "SetupPlan", "Verdict"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Aims:
    """What the lab wants, and what only it can know before filming; None where it did not say."""

    target: float = 0.05  # relative expanded uncertainty (k = 2) of the mean drag coefficient of a particle
    scatter: float | None = None  # relative standard deviation of the velocity of replicate drops
    picture_height: int | None = None  # px along gravity


@dataclass(frozen=True, slots=True, kw_only=True)
class Planned:
    """What is expected of one particle in one setup; SI, nan where it cannot be told."""

    particle: str
    velocity: float  # m/s, in the column
    velocity_u: float  # of a single particle: spread of the laws and of grains about them, inputs
    reynolds: float
    regime: str  # "creeping", "intermediate", "Newton", or why there is none
    laws: str  # that the velocity rests on
    in_range: bool  # whether all laws are inside their ranges
    wall_factor: float
    run_up_time: float  # s, to 99 % of terminal velocity, margin included
    run_up_distance: float  # m
    size_px: float
    blur_px: float
    frames: float  # from entering the view to leaving it
    drag_coefficient: float
    drag_coefficient_u: float  # expected of one measured drop
    main_source: str  # of that uncertainty
    drops: float  # for the target; infinite where no number would do
    waiting_time: float  # s, until the fluid is at rest


@dataclass(frozen=True, slots=True)
class Verdict:
    """One question about a setup, how it stands, and what to change."""

    mark: Literal["good", "doubt", "bad"]
    topic: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class SetupPlan:
    """All particles dropped in one fluid before one camera in one column."""

    title: str
    recordings: tuple[str, ...]
    rows: pd.DataFrame  # columns of Planned
    verdicts: tuple[Verdict, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """A study before it is filmed."""

    name: str
    aims: Aims
    setups: tuple[SetupPlan, ...]
    assumed: tuple[str, ...]  # one sentence each
    doubts: tuple[str, ...]
