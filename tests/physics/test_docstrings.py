"""The parameters that a docstring describes are those of the signature, and public things say what they return."""

from __future__ import annotations

import inspect
import pkgutil
import re
from collections.abc import Callable, Iterator
from importlib import import_module
from typing import Any

import pytest

import settlelab.physics


def public_functions() -> Iterator[tuple[str, Callable[..., Any]]]:
    for module in pkgutil.walk_packages(settlelab.physics.__path__, "settlelab.physics."):
        for name, thing in vars(import_module(module.name)).items():
            if inspect.isfunction(thing) and thing.__module__ == module.name and not name.startswith("_"):
                yield f"{module.name}.{name}", thing


FUNCTIONS = dict(public_functions())
DESCRIBED = [name for name, thing in FUNCTIONS.items() if "Parameters\n---" in (inspect.getdoc(thing) or "")]


@pytest.mark.parametrize("name", FUNCTIONS)
def test_says_what_it_is(name: str) -> None:
    assert (inspect.getdoc(FUNCTIONS[name]) or "").partition("\n")[0].endswith((".", ":"))


@pytest.mark.parametrize("name", DESCRIBED)
def test_parameters_match_the_signature(name: str) -> None:
    doc = inspect.getdoc(FUNCTIONS[name]) or ""
    section = doc.partition("Parameters\n----------\n")[2]
    section = re.split(r"\n\n\w+\n-{3,}\n", section)[0]
    described = [
        word.strip()
        for line in section.splitlines()
        if re.match(r"\w.* : ", line)
        for word in line.split(" : ")[0].split(",")
    ]
    assert described == list(inspect.signature(FUNCTIONS[name]).parameters)


def test_enough_is_described() -> None:
    assert len(DESCRIBED) >= 25
