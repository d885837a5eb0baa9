"""Which flags refuse a drop and which only warn: the one place of this decision."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

__all__ = ["FLAGS", "Finding", "Flag", "finding", "near_wall", "verdict"]


@dataclass(frozen=True, slots=True)
class Flag:
    """What a flag means, and whether it refuses the drop."""

    refuses: bool
    meaning: str


FLAGS: Mapping[str, Flag] = {
    "unnamed": Flag(True, "the falls of the recording do not match its particle names"),
    "short-track": Flag(True, "seen too briefly for a velocity"),
    "rising": Flag(True, "it rises"),
    "accelerating": Flag(True, "terminal velocity not reached in view"),
    "near-wall": Flag(False, "off the axis by more than half the radius; its wall factor is less sure"),
    "neighbour": Flag(False, "another particle within reach of its wake"),
    "edge": Flag(False, "cut by the frame for a part of its fall"),
    "gap": Flag(False, "lost and found again"),
    "blurred": Flag(False, "exposure blurs it by more than a quarter of its size"),
    "wobbling": Flag(False, "it swings on its way"),
    "clock": Flag(False, "frame times are irregular"),
}

# A fall is too near the wall beyond this share of the radius, or nearer to the wall than so many of its diameters: the
# wall then acts at least a tenth more strongly than on the axis, and turns a grain.
TOO_FAR_OFF_AXIS = 0.8
TOO_FEW_DIAMETERS = 1.5
OFF_AXIS = 0.5  # the wall factor holds as it is up to here


@dataclass(frozen=True, slots=True)
class Finding:
    """A flag raised on one drop."""

    flag: str
    refuses: bool
    text: str


def finding(flag: str, text: str = "") -> Finding:
    """A flag with its default decision; `text` says what it means here instead of the general meaning."""
    return Finding(flag, FLAGS[flag].refuses, text or FLAGS[flag].meaning)


def near_wall(off_axis: float, diameters: float) -> Finding | None:
    """Whether a fall is near the wall, and whether too near.

    Parameters
    ----------
    off_axis : float
        Greatest distance from the axis over the radius, as the camera sees it [-]; nan where no wall is known.
    diameters : float
        Least distance of the centre from the nearer wall over the diameter of the particle [-]; may be nan.
    """
    percent = f"{100 * off_axis:.0f} % of the radius off the axis"
    if off_axis > TOO_FAR_OFF_AXIS:
        return Finding("near-wall", True, f"{percent}, more than {100 * TOO_FAR_OFF_AXIS:.0f} %")
    if diameters < TOO_FEW_DIAMETERS:
        return Finding("near-wall", True, f"its centre comes within {diameters:.1f} diameters of the wall")
    if off_axis > OFF_AXIS:
        return finding("near-wall", f"{percent}; its wall factor is less sure")
    return None


def verdict(findings: Iterable[Finding]) -> tuple[bool, str, str]:
    """Whether a drop is accepted, its flags joined by ";", and the reason: what refuses it first."""
    found = list({item.flag: item for item in findings}.values())
    found.sort(key=lambda item: not item.refuses)
    text = "; ".join(f"{item.flag}: {item.text}" for item in found)
    return not any(item.refuses for item in found), ";".join(item.flag for item in found), text
