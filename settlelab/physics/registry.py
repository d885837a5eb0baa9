"""What every published method carries, whatever it computes: its name, where it comes from, and where it holds.

An entry is the whole truth about a method: the inputs it needs are the parameters of its formula, read from the
signature, so that tables, tests and messages are all derived from it.
"""

from __future__ import annotations

import ast
import inspect
import re
import textwrap
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Generic, TypeVar

import numpy as np
from numpy.typing import ArrayLike

from settlelab.errors import SettlelabError, did_you_mean
from settlelab.physics.constants import BoolArray, FloatArray

Formula = Callable[..., FloatArray]


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One published method: its formula and what a reader must know about it."""

    name: str
    source: str  # authors (year), journal, volume, pages
    formula: Formula
    valid: Mapping[str, tuple[float, float]]  # quantity -> closed range that the source states, SI
    where: str = ""  # equation, table, or the later work whose reading was taken
    note: str = ""  # what was taken where print and physics differ, and what to beware of
    confirmed: bool = True  # False: coefficients from memory or a single witness

    @property
    def purpose(self) -> str:
        """What it gives, in one line: the first of the formula's docstring."""
        return (inspect.getdoc(self.formula) or "").partition("\n")[0]

    @property
    def code(self) -> str:
        """The formula as it is computed: the body of the function, and functions of the room that it calls."""
        _, body = _without_docstring(self.formula)
        helpers = [part for helper in _helpers(self.formula) for part in ("", *_without_docstring(helper))]
        return "\n".join([textwrap.dedent(body), *helpers])

    @property
    def citation(self) -> str:
        """Authors and year."""
        return re.split(r"(?<=\d\)),", self.source)[0]

    @property
    def parameters(self) -> tuple[str, ...]:
        """Names of all inputs of the formula."""
        return tuple(inspect.signature(self.formula).parameters)

    def evaluate(self, **inputs: ArrayLike) -> FloatArray:
        """The formula at these inputs; inputs that it does not use are passed over.

        Raises
        ------
        ValueError
            An input that the formula needs was not given, or arrays whose shapes do not fit together.
        """
        taken = self._taken(self.parameters, inputs)
        self._common_shape(taken)
        return np.asarray(self.formula(**taken), dtype=np.float64)

    def within(self, **inputs: ArrayLike) -> BoolArray:
        """Where every range that the source states is kept; an unknown (nan) input does not keep it.

        Only stated ranges are checked: a law for spheres states none for shape, and `diameter` tells that it is one.

        Raises
        ------
        ValueError
            An input of the formula, or a quantity with a stated range, was not given.
        """
        known = self._taken({**dict.fromkeys(self.parameters), **dict.fromkeys(self.valid)}, inputs)
        inside = np.ones(self._common_shape(known), dtype=np.bool_)
        for name, (low, high) in self.valid.items():
            inside = inside & (known[name] >= low) & (known[name] <= high)
        return inside

    def _taken(self, names: Iterable[str], inputs: Mapping[str, ArrayLike]) -> dict[str, FloatArray]:
        missing = [name for name in names if name not in inputs]
        if missing:
            raise ValueError(f"{self.name} needs {' and '.join(missing)}")
        return {name: np.asarray(inputs[name], dtype=np.float64) for name in names}

    def _common_shape(self, inputs: Mapping[str, FloatArray]) -> tuple[int, ...]:
        try:
            return np.broadcast_shapes(*(value.shape for value in inputs.values()))
        except ValueError:
            shapes = ", ".join(f"{name} {value.shape}" for name, value in inputs.items())
            raise ValueError(f"{self.name}: arrays of these shapes do not fit together: {shapes}") from None


def _without_docstring(function: Formula) -> tuple[str, str]:
    """Head and body of a function as source, decorators left out."""
    source = textwrap.dedent(inspect.getsource(function))
    tree = ast.parse(source).body[0]
    assert isinstance(tree, ast.FunctionDef)
    first, lines = tree.body[0], source.splitlines()
    described = isinstance(first, ast.Expr) and isinstance(first.value, ast.Constant)
    start = (first.end_lineno or 0) if described else first.lineno - 1
    return "\n".join(lines[tree.lineno - 1 : first.lineno - 1]), "\n".join(lines[start:])


def _helpers(formula: Formula) -> list[Formula]:
    """Functions of this package that a formula calls, each once, callers before the called."""
    found: dict[str, Formula] = {}
    names = list(formula.__code__.co_names)
    for name in names:
        helper = formula.__globals__.get(name)
        if name not in found and inspect.isfunction(helper) and helper.__module__.startswith("settlelab."):
            found[name] = helper
            found |= {inner.__name__: inner for inner in _helpers(helper) if inner.__name__ not in found}
    return list(found.values())


E = TypeVar("E", bound=Entry)


class Registry(Mapping[str, E], Generic[E]):
    """Published methods by name, in the order in which they were entered."""

    def __init__(self, entry: type[E]) -> None:
        self._entry = entry
        self._entries: dict[str, E] = {}

    def published(self, name: str, **facts: Any) -> Callable[[Formula], Formula]:  # noqa: ANN401 (fields of the entry)
        """Enter a formula under its name, with the facts about it (the fields of the entry class)."""

        def enter(formula: Formula) -> Formula:
            if name in self._entries:
                raise ValueError(f"{name} is entered twice")
            self._entries[name] = self._entry(name=name, formula=formula, **facts)
            return formula

        return enter

    def __getitem__(self, name: str) -> E:
        return self._entries[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self._entries)

    def __len__(self) -> int:
        return len(self._entries)


def find(name: str, *registries: Mapping[str, Entry]) -> Entry:
    """The method of that name in any of the registries.

    Raises
    ------
    SettlelabError
        No such method; the nearest name is offered.
    """
    known = {key: entry for registry in registries for key, entry in registry.items()}
    if name not in known:
        hint = did_you_mean(name, known) or f"; on board are {', '.join(known)}"
        raise SettlelabError(f'"{name}" is not a published method on board{hint}')
    return known[name]
