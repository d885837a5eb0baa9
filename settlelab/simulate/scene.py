"""What a simulated recording shows: camera, lamp, column, liquid, what is dropped, and what disturbs the picture.

Lengths are metres. The view has its origin at the middle of its top edge: x runs across, y along gravity, z towards the
camera. The picture is drawn with gravity pointing down and turned last, if the camera was mounted otherwise.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from settlelab.physics.drag import DRAG, scaled_drag
from settlelab.physics.rheology import Rheology
from settlelab.simulate.grains import Body

FloatArray = NDArray[np.float64]
Gravity = Literal["down", "up", "left", "right"]
Descriptor = Literal["corey_shape_factor", "sphericity"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Camera:
    """A camera that looks straight at the plane of fall through a flat wall."""

    width: int = 544  # px, with gravity down
    height: int = 800  # px
    metre_per_px: float = 2e-4
    frame_rate: float = 100.0  # Hz, true capture rate; frame k is taken at k / frame_rate, mid-exposure
    container_rate: float | None = None  # Hz, what the file claims; None: the true rate
    exposure: float = 1e-3  # s
    softness: float = 0.7  # px, standard deviation of the optical blur
    gravity: Gravity = "down"  # where gravity points in the picture as recorded
    electrons_per_grey: float = 120.0  # sets the shot noise: variance = grey / electrons_per_grey
    read_noise: float = 0.4  # grey levels


@dataclass(frozen=True, slots=True, kw_only=True)
class Lamp:
    """The light behind the column; `level` in grey levels, everything else relative to it."""

    level: float = 205.0
    tilt: tuple[float, float] = (0.06, -0.10)  # change from edge to edge, across and down
    vignette: float = 0.10  # loss in the corners
    flicker: float = 0.004  # amplitude
    flicker_rate: float = 100.0  # Hz: mains light, aliased by the frame rate
    drift: float = 0.002  # change per second


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """A round column in front of the lamp."""

    bore: float = 0.100
    wall: float = 0.004  # thickness
    axis: float = 0.0  # x of the axis in the view
    surface: float = -0.10  # y of the liquid surface; negative: above the view
    bottom: float | None = None  # y of the bottom; None: below the view
    graduation: float | None = 0.010  # spacing of the marks; None: no marks
    release_tube: bool = False  # a dark tube that ends at the first release point, to drop particles through


@dataclass(frozen=True, slots=True, kw_only=True)
class Liquid:
    """The test fluid."""

    density: float  # kg/m3
    rheology: Rheology


@dataclass(frozen=True, slots=True, kw_only=True)
class ShapeLaw:
    """The drag law that every simulated particle obeys: Cd = k_N F(Re k_N / k_S), with a sphere law F.

    The drag ratios are power laws of one descriptor, k_S = descriptor**-stokes_exponent in creeping flow and
    k_N = descriptor**-newton_exponent at high Reynolds number; a sphere (descriptor 1) keeps F.
    """

    descriptor: Descriptor = "corey_shape_factor"
    stokes_exponent: float = 0.30
    newton_exponent: float = 1.60
    base: str = "clift-gauvin-1971"

    def drag_ratios(self, body: Body) -> tuple[float, float]:
        """Drag ratios k_S and k_N of a body."""
        value = corey_shape_factor(body) if self.descriptor == "corey_shape_factor" else body.sphericity
        return float(value**-self.stokes_exponent), float(value**-self.newton_exponent)

    def drag(self, body: Body, scatter: float = 1.0) -> Callable[[FloatArray], FloatArray]:
        """Reynolds number to drag coefficient for a body, times `scatter`."""
        stokes, newton = (np.asarray(ratio) for ratio in self.drag_ratios(body))
        base = DRAG[self.base].drag_coefficient

        def law(reynolds: FloatArray) -> FloatArray:
            return scatter * scaled_drag(reynolds, 1 / stokes, newton, base)

        return law


def corey_shape_factor(body: Body) -> float:
    """Short axis over the geometric mean of the other two."""
    long, intermediate, short = body.axes
    return float(short / np.sqrt(long * intermediate))


@dataclass(frozen=True, slots=True, kw_only=True)
class Particle:
    """One particle of the lab: a body with its density and its own deviation from the drag law."""

    name: str
    body: Body
    density: float  # kg/m3
    lot: str = ""
    scatter: float = 1.0  # factor on the drag coefficient of this particle
    transmission: float = 0.05  # share of the lamp's light that comes through


@dataclass(frozen=True, slots=True, kw_only=True)
class Drop:
    """One particle let go from rest."""

    particle: Particle
    time: float  # s after the first frame; may be negative
    x: float = 0.0  # release point
    y: float = 0.0
    z: float = 0.0
    drift: float = 0.0  # sideways way over way fallen
    tilt: tuple[float, float, float] = (1.0, 0.0, 0.0)  # axis of the first turn and of the tumbling, unit vector
    angle: float = 0.0  # rad, at release
    turns_per_metre: float = 0.0  # tumbling
    scatter: float = 1.0  # factor on the drag coefficient in this drop, as its attitude differs from drop to drop


@dataclass(frozen=True, slots=True, kw_only=True)
class Bubble:
    """An air bubble on its way up, or standing on the wall where `speed` is 0."""

    diameter: float
    x: float
    y: float  # at the first frame
    speed: float  # m/s, upward
    sway: float = 0.0  # m, amplitude sideways


@dataclass(frozen=True, slots=True, kw_only=True)
class Nuisances:
    """What disturbs a recording besides noise."""

    bubbles: tuple[Bubble, ...] = ()
    dust: int = 0  # specks that hang in the liquid
    dust_speed: float = 5e-4  # m/s, their slow drift
    ripple: float = 2e-4  # m, amplitude of the waves on the liquid surface


@dataclass(frozen=True, slots=True, kw_only=True)
class Scene:
    """Everything that a recording shows."""

    liquid: Liquid
    drops: tuple[Drop, ...]
    duration: float  # s
    camera: Camera = Camera()
    lamp: Lamp = Lamp()
    column: Column = Column()
    nuisances: Nuisances = Nuisances()
    law: ShapeLaw = field(default_factory=ShapeLaw)

    @property
    def times(self) -> FloatArray:
        """Times [s] of the frames (N,)."""
        count = round(self.duration * self.camera.frame_rate)
        return np.arange(count) / self.camera.frame_rate
