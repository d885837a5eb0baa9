"""The graduation printed on a column, found in the still picture as evenly spaced marks one below the other."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.signal import find_peaks

from settlelab.video.model import FloatArray

FEWEST_MARKS = 5
STRIPS = 40  # upright strips of the picture, overlapping by half
CLOSEST = 6.0  # px between marks
CLEAR = 6.0  # times the usual bend from pixel to pixel along a strip: a mark
LIKE_THE_REST = 0.5  # of the usual height of a mark above what is around it
MARK_REACH = 3  # px on either side of its middle
OUT_OF_STEP = 0.15  # of the spacing: not a mark of the graduation
AGREEING = 0.7  # of the places where marks are due must show one


class Spacing(NamedTuple):
    """Marks of a graduation."""

    spacing: float  # px
    spacing_u: float  # px, standard uncertainty from the scatter of the marks about even spacing
    marks: int


def graduation_spacing(background: NDArray[np.floating]) -> Spacing | None:
    """Spacing of the marks along gravity, from the strip of the picture that shows most of them in step.

    Parameters
    ----------
    background : (H, W) array
        Turned so that y grows along gravity, grey levels.

    Returns
    -------
    Spacing or None
        None where no strip shows five evenly spaced marks.
    """
    width = background.shape[1]
    strip = max(4, 2 * width // STRIPS)
    best: Spacing | None = None
    for left in range(0, max(1, width - strip + 1), max(1, strip // 2)):
        profile = np.median(background[:, left : left + strip].astype(np.float64), axis=1)
        for marks in (_marks(profile), _marks(-profile)):
            found = _even(marks)
            if found is not None and (best is None or _better(found, best)):
                best = found
    return best


def _better(one: Spacing, other: Spacing) -> bool:
    return one.spacing_u / one.spacing < other.spacing_u / other.spacing


def _marks(profile: FloatArray) -> FloatArray:
    """Sub-pixel places of the dark marks along a strip: grey-weighted centres of what stands out."""
    rough = float(np.median(np.abs(np.diff(profile, 2)))) + 0.02
    peaks, shape = find_peaks(-profile, prominence=CLEAR * rough, distance=CLOSEST)
    if len(peaks) == 0:
        return np.array([])
    prominent = shape["prominences"] > LIKE_THE_REST * np.quantile(shape["prominences"], 0.8)
    places = []
    for peak, height in zip(peaks[prominent], shape["prominences"][prominent], strict=True):
        around = np.arange(max(0, int(peak) - MARK_REACH), min(len(profile), int(peak) + MARK_REACH + 1))
        weight = np.maximum(profile[peak] + 0.7 * height - profile[around], 0.0)
        places.append(float(weight @ around / weight.sum()))
    return np.array(places)


def _even(places: FloatArray) -> Spacing | None:
    """Straight line through the places against their number."""
    if len(places) < FEWEST_MARKS:
        return None
    step = float(np.median(np.diff(places)))
    if step < CLOSEST:
        return None
    start = places[np.argmin(np.abs(places - np.median(places)))]
    for _ in range(4):
        number = np.rint((places - start) / step)
        fair = np.abs(places - start - step * number) < OUT_OF_STEP * step
        if np.count_nonzero(fair) < FEWEST_MARKS or len(np.unique(number[fair])) < FEWEST_MARKS:
            return None
        step, start = (float(value) for value in np.polyfit(number[fair], places[fair], 1))
    due = number[fair].max() - number[fair].min() + 1
    in_step, seen = np.count_nonzero(fair), len(np.unique(number[fair]))
    if in_step < AGREEING * len(places) or seen < AGREEING * due:
        return None
    away = places[fair] - start - step * number[fair]
    scatter = float(np.sqrt(away @ away / (in_step - 2)))
    spread = number[fair] - number[fair].mean()
    return Spacing(step, max(scatter, 0.02) / float(np.sqrt(spread @ spread)), int(in_step))
