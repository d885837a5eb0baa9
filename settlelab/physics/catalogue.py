"""Everything on board in one place: the registries by their titles, and the reference page made from them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from settlelab.physics.constants import ZERO_CELSIUS
from settlelab.physics.crowding import CROWDING
from settlelab.physics.drag import DESCRIPTORS, DRAG, MUD, Method
from settlelab.physics.liquids import LIQUIDS, LiquidProperty
from settlelab.physics.other_walls import OTHER_WALLS
from settlelab.physics.registry import Entry
from settlelab.physics.walls import WALLS

BOARDS: Mapping[str, Mapping[str, Entry]] = {
    "Drag laws of spheres": {name: DRAG[name] for name in sorted(DRAG) if DRAG[name].diameter == "sphere"},
    "Drag laws of grains": {name: DRAG[name] for name in sorted(DRAG) if DRAG[name].diameter != "sphere"},
    "Laws made for mud, of spheres": MUD,
    "Wall factors of a round column": WALLS,
    "Other walls": OTHER_WALLS,
    "Crowding": CROWDING,
    "Liquids": LIQUIDS,
}

_DIAMETER = {"sphere": "diameter of the sphere", "volume-equivalent": "volume-equivalent diameter"}
UNCONFIRMED = "from memory or a single source, unconfirmed"
_SPOKEN = {
    "reynolds": "Reynolds number",
    "reynolds_unbounded": "Reynolds number in unbounded fluid",
    "dstar": "d*",
    "ratio": "diameter over bore",
    "nearness": "radius over distance from the wall",
    "side_ratio": "diameter over side",
    "bingham": "Bingham number",
    "corey_shape_factor": "Corey shape factor",
    "projected_area_ratio": "projected area",
    "powers_roundness": "Powers roundness",
}


def spoken(name: str) -> str:
    """The name of a quantity as it is spoken."""
    return _SPOKEN.get(name, name.replace("_", " "))


def stated_range(entry: Entry, quantity: str) -> str:
    """A validity range in words: "up to 800", "1 to 1e4", "0 to 40 °C"; "-" where none is stated."""
    if quantity not in entry.valid:
        return "-"
    low, high = entry.valid[quantity]
    if quantity == "temperature":
        return f"{low - ZERO_CELSIUS:g} to {high - ZERO_CELSIUS:g} °C"
    return f"up to {_short(high)}" if low == 0 else f"{_short(low)} to {_short(high)}"


def all_ranges(entry: Entry) -> str:
    """All validity ranges in one line."""
    return "; ".join(f"{spoken(quantity)} {stated_range(entry, quantity)}" for quantity in entry.valid)


def made_for(entry: Entry) -> str:
    """What a method that is no drag law of `DRAG` is for: a regime, a kind of fluid, or a property of a liquid."""
    if isinstance(entry, LiquidProperty):
        return f"{entry.quantity} of {entry.liquid}, ± {100 * entry.relative_u:.2g} %"
    return str(getattr(entry, "regime", "") or getattr(entry, "fluid", ""))


def facts(entry: Entry) -> Sequence[tuple[str, str]]:
    """What a reader must know about a method, by label; facts that it does not have are left out."""
    told = [("source", entry.source), ("as in", entry.where)]
    if isinstance(entry, Method):
        gives = "Cd by the Reynolds number" if entry.takes == "reynolds" else "terminal Reynolds number by d*"
        told += [("gives", f"{gives}, both on the {_DIAMETER[entry.diameter]}")]
        told += [("needs", f"{spoken(need)}: {DESCRIPTORS[need]}") for need in entry.needs]
    else:
        told += [("for", made_for(entry) + (" (standard uncertainty)" if isinstance(entry, LiquidProperty) else ""))]
    witness = "checked against a second source" if entry.confirmed else UNCONFIRMED
    told += [("range", all_ranges(entry)), ("note", entry.note), ("evidence", witness)]
    return [(label, text) for label, text in told if text]


def reference_page() -> str:
    """The reference page: every method with its formula, source and range, as Markdown."""
    parts = [
        "# Published methods on board",
        "Written by `settlelab methods --page FILE` from the entries themselves. Formulas stand as they are computed, "
        "in SI units; `dstar` is d* = Ar^(1/3), and a law in d* gives the Reynolds number at terminal velocity. "
        "A method outside its range still answers, and is marked. A column test in still fluid is no hole-cleaning "
        "design.",
    ]
    for title, board in BOARDS.items():
        parts.append(f"## {title}")
        parts += [_section(entry) for entry in board.values()]
    return "\n\n".join(parts) + "\n"


def _section(entry: Entry) -> str:
    lines = "\n".join(f"- **{label}**: {text}" for label, text in facts(entry))
    return f"### {entry.name}\n\n{entry.purpose}\n\n{lines}\n\n```text\n{entry.code}\n```"


def _short(number: float) -> str:
    return f"{number:.4g}" if 1000 <= number < 1e4 else f"{number:.3g}".replace("e+0", "e")
