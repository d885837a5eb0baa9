"""study.toml as text, and its sections validated one by one; every fault is kept, with the key where it stands."""

from __future__ import annotations

import copy
import json
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Generic, TypeVar

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from settlelab.errors import Fault, InputFaults, did_you_mean
from settlelab.study.keys import Keys

__all__ = ["Section", "Source", "load_toml", "several"]

AnyKeys = TypeVar("AnyKeys", bound=Keys)
BARE = '; text and quantities stand in quotes: key = "12.4 ± 0.1 mm"'
WANTED = {  # kind of pydantic error -> what would be accepted
    "string_type": "text in quotes",
    "bool_type": "true or false",
    "list_type": "a list in [ ]",
    "model_type": "a table of keys",
}


@dataclass(frozen=True, slots=True)
class Section(Generic[AnyKeys]):
    """A validated section: its usable keys, where it stands, and which keys were at fault."""

    keys: AnyKeys
    place: str
    at_fault: frozenset[str]  # dotted

    def lacks(self, key: str) -> bool:
        """Whether a key was not typed at all; one at fault has been reported already."""
        return getattr(self.keys, key) is None and key not in self.at_fault


@dataclass(slots=True)
class Source:
    """The study file with all that is found out about it while it is read."""

    file: Path
    before_filming: bool = False  # what only filming gives need not be there yet
    faults: list[Fault] = field(default_factory=list)
    assumed: list[str] = field(default_factory=list)
    inputs: list[Path] = field(default_factory=list)

    def fault(self, place: str, found: str | None, accepted: str) -> None:
        """Keep a fault of study.toml."""
        self.faults.append(Fault(file=self.file, key=place, found=found, accepted=accepted))

    def section(self, model: type[AnyKeys], raw: object, place: str) -> Section[AnyKeys]:
        """A section with the keys that are usable; the others are reported and left out."""
        usable = copy.deepcopy(raw) if isinstance(raw, dict) else {}
        if not isinstance(raw, dict):
            self.fault(place, _shown(raw), f"a table: write [{place}] on a line of its own")
        at_fault = set()
        try:
            return Section(model.model_validate(usable), place, frozenset())
        except ValidationError as error:
            for detail in error.errors():
                path = [part for part in detail["loc"] if isinstance(part, str)]
                self._translate(detail, path, place, model)
                at_fault.add(".".join(path))
                _drop(usable, path)
        return Section(model.model_validate(usable), place, frozenset(at_fault))

    def path(self, typed: str, place: str) -> Path | None:
        """A file named in study.toml, relative to it; a fault and None where there is none."""
        path = self.file.parent / typed
        if typed.strip() and path.is_file():
            return path
        near = [other.name for other in path.parent.iterdir()] if typed.strip() and path.parent.is_dir() else []
        self.fault(place, typed, f"a file that exists, beside {self.file.name}{did_you_mean(path.name, near)}")
        return None

    def _translate(self, detail: ErrorDetails, path: list[str], place: str, model: type[Keys]) -> None:
        kind, typed, context = detail["type"], detail["input"], detail.get("ctx", {})
        where = ", ".join([place, ".".join(path)])
        if kind == "extra_forbidden":
            known = _keys_at(model, path[:-1])
            hint = did_you_mean(path[-1], known) or f"; known: {', '.join(known)}"
            inside = ".".join(path[:-1]) or place.rstrip("0123456789 ")
            self.fault(", ".join([place, *path[:-1]]), path[-1], f"a key of [{inside}]{hint}")
        elif kind == "literal_error":
            self.fault(where, _shown(typed), str(context["expected"]).replace("'", '"') + _near(typed, context))
        elif kind == "value_error":
            self.fault(where, _shown(typed), str(context["error"]))
        else:
            self.fault(where, _shown(typed), WANTED.get(kind, detail["msg"]))


def load_toml(file: Path) -> dict[str, Any]:
    """The content of a TOML file.

    Raises
    ------
    InputFaults
        The file is missing, is not UTF-8 or not TOML.
    """
    try:
        data = file.read_bytes()
    except OSError as error:
        accepted = "a study file (settlelab new DIR writes one to fill in)"
        raise InputFaults([Fault(file=file, found=None, accepted=accepted)]) from error
    try:
        return tomllib.loads(data.decode("utf-8-sig"))
    except UnicodeDecodeError as error:
        row = data[: error.start].count(b"\n") + 1
        found = data[error.start : error.end].decode("latin-1")
        accepted = "UTF-8, the encoding of TOML: save the file as UTF-8"
        raise InputFaults([Fault(file=file, row=row, found=found, accepted=accepted)]) from error
    except tomllib.TOMLDecodeError as error:
        raise InputFaults([_syntax(file, data.decode("utf-8-sig"), str(error))]) from error


def several(raw: Mapping[str, Any], name: str) -> list[Any]:
    """The tables of a section in double brackets; a single one where single brackets were typed."""
    content = raw.get(name, [])
    return content if isinstance(content, list) else [content]


def _syntax(file: Path, text: str, message: str) -> Fault:
    """A fault of TOML's grammar, with the line where it stands."""
    reason, _, place = message.partition(" (at ")
    digits = "".join(sign if sign.isdigit() else " " for sign in place).split()
    lines = text.splitlines()
    row = int(digits[0]) if digits else max(len(lines), 1)
    found = lines[row - 1].strip() if row <= len(lines) else ""
    told = "the same key stands above it" if reason == "Cannot overwrite a value" else reason.lower()
    _, equals, value = found.partition("=")
    hint = BARE if equals and not value.strip().startswith(('"', "'", "[", "{")) else ""
    return Fault(file=file, row=row, found=found or "end of file", accepted=f"a line of TOML ({told}){hint}")


def _shown(typed: object) -> str | None:
    """A TOML value as it was typed; None for text that is still to be filled in."""
    if isinstance(typed, str):
        return typed.strip() or None
    if isinstance(typed, float):
        return repr(typed)
    return json.dumps(typed, default=str, ensure_ascii=False)


def _near(typed: object, context: Mapping[str, Any]) -> str:
    return did_you_mean(str(typed), str(context["expected"]).replace(" or ", ", ").replace("'", "").split(", "))


def _drop(usable: dict[str, Any], path: list[str]) -> None:
    """Take out the key at the end of a path; it may be gone already."""
    inner: Any = usable
    for part in path[:-1]:
        inner = inner.get(part, {})
    inner.pop(path[-1], None)


def _keys_at(model: type[Keys], path: list[str]) -> list[str]:
    """Names of the keys of a section, or of a table inside it."""
    for part in path:
        kinds = getattr(model.model_fields[part].annotation, "__args__", ())
        model = next(kind for kind in kinds if isinstance(kind, type) and issubclass(kind, Keys))
    return list(model.model_fields)
