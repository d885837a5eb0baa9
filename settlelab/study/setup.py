"""Camera and column: the study's sections, the overrides of a recording on top, and the rules that join the keys."""

from __future__ import annotations

from typing import TypeVar

from settlelab.study.keys import CameraKeys, ColumnKeys, Keys
from settlelab.study.model import Camera, Column
from settlelab.study.source import Section, Source
from settlelab.units import wanted

__all__ = ["camera_of", "check_camera", "check_column", "column_of", "overridden"]

AnyKeys = TypeVar("AnyKeys", bound=Keys)
SCALES = (("mm_per_px",), ("marks", "marks_apart"), ("graduation",), ("checkerboard", "square"))
SCALE_KEYS = frozenset(key for way in SCALES for key in way)
GEOMETRY = {"round": ("inner_diameter",), "rectangular": ("width", "depth")}
GEOMETRY_KEYS = frozenset({"section", "inner_diameter", "width", "depth"})
TYPED = {
    "marks": "two points in px such as [[412, 96], [415, 1010]]",
    "checkerboard": 'a picture of the board, such as "board.png"',
}


def overridden(base: Section[AnyKeys], over: AnyKeys | None, place: str, at_fault: frozenset[str]) -> Section[AnyKeys]:
    """The study's section with the keys of a recording on top.

    A recording that gives a scale, or the section of the column, replaces all that says the same in the study.
    """
    if over is None and not at_fault:
        return base
    typed = {key: getattr(over, key) for key in over.model_fields_set} if over is not None else {}
    given = typed.keys() | at_fault
    replaced = (SCALE_KEYS if given & SCALE_KEYS else set()) | (GEOMETRY_KEYS if "section" in given else set())
    keys = base.keys.model_copy(update=dict.fromkeys(replaced) | typed)
    return Section(keys, place, base.at_fault - replaced | at_fault)


def check_camera(source: Source, section: Section[CameraKeys]) -> None:
    """Exactly one way of giving the scale, and that one complete; before filming, at most one."""
    keys, place = section.keys, section.place
    begun = [way for way in SCALES if any(getattr(keys, key) is not None or key in section.at_fault for key in way)]
    if not begun and not source.before_filming:
        accepted = "a scale: mm_per_px, marks with marks_apart, graduation, or checkerboard with square"
        source.fault(place, None, accepted)
    elif len(begun) > 1:
        source.fault(place, " and ".join(way[0] for way in begun), "one way of giving the scale: keep one of them")
    for key in (key for way in begun for key in way if section.lacks(key)):
        source.fault(f"{place}, {key}", None, TYPED.get(key, wanted("m")))
    if keys.checkerboard is not None and not source.before_filming:
        source.path(keys.checkerboard, f"{place}, checkerboard")
    for key in sorted(SCALE_KEYS - TYPED.keys()):
        _assume_certain(source, section, key)


def check_column(source: Source, section: Section[ColumnKeys]) -> None:
    """The dimensions that belong to the section, and no others."""
    keys, place = section.keys, section.place
    if section.lacks("section"):
        source.fault(f"{place}, section", None, '"round" or "rectangular"')
    if keys.section is None:
        return
    needed = GEOMETRY[keys.section]
    for key in needed:
        if section.lacks(key):
            source.fault(f"{place}, {key}", None, wanted("m"))
        _assume_certain(source, section, key)
    for key in sorted(GEOMETRY_KEYS - {"section", *needed}):
        if getattr(keys, key) is not None:
            source.fault(place, key, f"a dimension of a {keys.section} column (that is {' and '.join(needed)})")


def camera_of(source: Source, keys: CameraKeys) -> Camera:
    """The camera in SI."""
    return Camera(
        frame_rate=keys.frame_rate,
        metre_per_px=keys.mm_per_px,
        marks=keys.marks,
        marks_apart=keys.marks_apart,
        graduation=keys.graduation,
        checkerboard=source.file.parent / keys.checkerboard if keys.checkerboard is not None else None,
        square=keys.square,
        gravity=keys.gravity or "down",
        exposure=keys.exposure,
        distance=keys.distance,
    )


def column_of(keys: ColumnKeys) -> Column:
    """The column in SI."""
    return Column(
        section=keys.section or "round",
        inner_diameter=keys.inner_diameter,
        width=keys.width,
        depth=keys.depth,
        height=keys.height,
        wall_thickness=keys.wall_thickness,
        wall_index=keys.wall_index.value if keys.wall_index is not None else None,
        viewing_box=bool(keys.viewing_box),
        fluid_index=keys.fluid_index.value if keys.fluid_index is not None else None,
    )


def _assume_certain(source: Source, section: Section[CameraKeys] | Section[ColumnKeys], key: str) -> None:
    quantity = getattr(section.keys, key)
    if quantity is not None and not quantity.u:
        source.assumed.append(f"{source.file.name}, {section.place}: {key} states no uncertainty; taken as 0")
