"""What a camera will show of a fall, before there is a picture."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from settlelab.errors import RecordingError
from settlelab.measure.falls import silhouette_wander
from settlelab.measure.particle import Grain
from settlelab.study.model import Recording
from settlelab.video.clock import rate_u
from settlelab.video.optics import scale_of
from settlelab.video.source import open_recording

__all__ = ["Film", "film_of"]

HEIGHT = 1080  # px along gravity, where not stated
RATE = 30.0  # Hz, where not stated
# Centre of a silhouette from frame to frame: 0.01 to 0.1 px in practice, most of it correlated (lab reference, 8)
CENTRE_U = 0.1  # px


@dataclass(frozen=True, slots=True, kw_only=True)
class Film:
    """A camera as far as it is known; nan where it is not."""

    metre_per_px: float
    scale_u: float  # relative; 0 while the scale is unknown
    clock_u: float  # relative
    frame_rate: float  # Hz
    exposure: float  # s
    height: int  # px along gravity
    column_height: float  # m; infinite where not stated
    assumed: tuple[str, ...]

    @property
    def view(self) -> float:
        """Height of what is seen of the column [m]."""
        return min(self.height * self.metre_per_px, self.column_height) if self.metre_per_px > 0 else math.nan

    def size(self, diameter: float) -> float:
        """A length in the picture [px]."""
        return diameter / self.metre_per_px

    def blur(self, velocity: float) -> float:
        """How far a fall moves while the shutter is open [px]."""
        return velocity * self.exposure / self.metre_per_px

    def frames(self, velocity: float, diameter: float) -> float:
        """Frames that show the whole particle."""
        return max(self.view - diameter, 0.0) / velocity * self.frame_rate

    def track_u(self, velocity: float, grain: Grain) -> float:
        """Standard uncertainty of the fitted velocity [m/s]: noise of the centre, and turning of an angular grain.

        The slope of N equal steps over the time T has u² = 12 σ²/(N T²). The silhouette of a grain of unknown
        circularity is taken to wander as that of an angular one.
        """
        distance = self.view - grain.diameter
        frames = self.frames(velocity, grain.diameter)
        if not frames >= 2:
            return math.nan
        circularity = grain.circularity if math.isfinite(grain.circularity) else 0.0
        wander = 0.0 if grain.diameter_from == "typed" else silhouette_wander(grain.diameter, circularity)
        noise = CENTRE_U * self.metre_per_px * math.sqrt(12 / frames)
        return math.hypot(noise, wander) / distance * velocity


def _picture_height(recording: Recording) -> int | None:
    """Pixels along gravity of a recording that is there already and opens; else None."""
    if not recording.video.exists():
        return None
    try:
        width, height = open_recording(recording.video).size
    except RecordingError:
        return None  # `check` tells what is wrong with it
    return height if recording.camera.gravity in ("down", "up") else width


def film_of(recording: Recording, height: int | None) -> Film:
    """A camera before filming, with what had to be assumed of it.

    Parameters
    ----------
    recording : Recording
        As typed. Scale by graduation or checkerboard is unknown until there is a picture.
    height : int, optional
        Pixels of the picture along gravity; where left out that of the video, if there is one, else 1080 are assumed.
    """
    assumed = []
    camera, name = recording.camera, Path(recording.name).name
    height = height or _picture_height(recording)
    known = camera.metre_per_px is not None or (camera.marks is not None and camera.marks_apart is not None)
    scale, scale_u = math.nan, 0.0
    if known:
        quantity, _ = scale_of(camera, np.zeros((1, 1)), name)
        scale, scale_u = quantity.value, quantity.u / quantity.value
        if height is None:
            assumed.append(f"{name}: height of the picture not stated; {HEIGHT} px along gravity assumed")
    if camera.frame_rate is None:
        assumed.append(f"{name}: frame rate not stated; {RATE:.0f} Hz assumed")
    return Film(
        metre_per_px=scale,
        scale_u=scale_u,
        clock_u=rate_u(camera.frame_rate),
        frame_rate=camera.frame_rate.value if camera.frame_rate is not None else RATE,
        exposure=camera.exposure.value if camera.exposure is not None else math.nan,
        height=height or HEIGHT,
        column_height=recording.column.height.value if recording.column.height is not None else math.inf,
        assumed=tuple(assumed),
    )
