"""The test fluids of a study: what each liquid needs, and what may not be mixed."""

from __future__ import annotations

from typing import Any

from settlelab.study.keys import FluidKeys
from settlelab.study.limits import WATER
from settlelab.study.model import Fluid, ViscometerReadings
from settlelab.study.source import Section, Source
from settlelab.study.table import scan_table
from settlelab.study.viscometer import read_viscometer
from settlelab.units import show, wanted

__all__ = ["read_fluids"]

NEEDS = {"water": ("temperature",), "glycerol-water": ("mass_fraction", "temperature"), "measured": ("density",)}
MAY = {"water": (), "glycerol-water": (), "measured": ("temperature", "viscosity", "viscometer", "rheology")}
TYPED = {
    "temperature": wanted("K"),
    "mass_fraction": 'the glycerol mass fraction such as "62 ± 0.3 %"',
    "density": wanted("kg/m3"),
}


def read_fluids(source: Source, raw: list[Any]) -> dict[str, Fluid]:
    """Fluids by name, in the order of study.toml; also those whose other keys are at fault."""
    sections = [source.section(FluidKeys, typed, f"fluid {number}") for number, typed in enumerate(raw, start=1)]
    if not sections:
        source.fault("[[fluid]]", None, "at least one test fluid")
    fluids: dict[str, Fluid] = {}
    for section in sections:
        name = section.keys.name or ("" if len(sections) > 1 else "fluid")
        if section.lacks("name") and not name:
            source.fault(f"{section.place}, name", None, "a name, as there are several fluids")
        if name in fluids:
            source.fault(f"{section.place}, name", name, "a name that no other fluid has")
        fluids[name or section.place] = _fluid(source, section, name)
    return fluids


def _fluid(source: Source, section: Section[FluidKeys], name: str) -> Fluid:
    keys, place = section.keys, section.place
    if section.lacks("liquid"):
        source.fault(f"{place}, liquid", None, '"water", "glycerol-water" or "measured"')
    if keys.liquid is not None:
        _check_needs(source, section, keys.liquid)
    readings = _readings(source, f"{place}, viscometer", keys.viscometer) if keys.viscometer is not None else None
    for key in ("temperature", "mass_fraction", "density", "viscosity"):
        quantity = getattr(keys, key)
        if quantity is not None and not quantity.u:
            source.assumed.append(f"{source.file.name}, {place}: {key} states no uncertainty; taken as 0")
    if readings is not None and keys.rheology is None:
        source.assumed.append(f'{source.file.name}, {place}: rheology not given; taken as "best"')
    return Fluid(
        name=name,
        liquid=keys.liquid or "measured",
        temperature=keys.temperature,
        mass_fraction=keys.mass_fraction,
        density=keys.density,
        viscosity=keys.viscosity,
        readings=readings,
        rheology=keys.rheology or ("best" if keys.viscosity is None else "newtonian"),
    )


def _check_needs(source: Source, section: Section[FluidKeys], liquid: str) -> None:
    keys, place = section.keys, section.place
    for key in NEEDS[liquid]:
        if section.lacks(key):
            source.fault(f"{place}, {key}", None, TYPED[key])
    for key in sorted(keys.model_fields_set - {"name", "liquid", *NEEDS[liquid], *MAY[liquid]}):
        source.fault(place, key, f'a key for liquid = "{liquid}"; what was measured belongs to liquid = "measured"')
    if liquid == "measured":
        _check_flow_curve(source, section)
    elif keys.temperature is not None:
        try:
            WATER.check(keys.temperature, "K")
        except ValueError as error:
            source.fault(f"{place}, temperature", show(keys.temperature, "°C"), str(error))


def _check_flow_curve(source: Source, section: Section[FluidKeys]) -> None:
    """A measured liquid has one viscosity or viscometer readings, and a model that can be had from them."""
    keys, place = section.keys, section.place
    wanted_keys = 'viscosity = "42.0 ± 0.8 mPa s" or viscometer = "viscometer.csv"'
    if section.lacks("viscosity") and section.lacks("viscometer"):
        source.fault(place, None, wanted_keys)
    if keys.viscosity is not None and keys.viscometer is not None:
        source.fault(place, "viscosity and viscometer", f"one of the two: {wanted_keys}")
    if keys.viscosity is not None and keys.viscometer is None and keys.rheology not in (None, "newtonian", "best"):
        source.fault(
            f"{place}, rheology", keys.rheology, 'possible with one viscosity: give viscometer = "viscometer.csv"'
        )


def _readings(source: Source, place: str, typed: str) -> ViscometerReadings | None:
    path = source.path(typed, place)
    if path is None:
        return None
    table, faults = scan_table(path)
    source.inputs.append(path)
    readings, assumed = read_viscometer(table, faults) if table is not None else (None, ())
    source.faults.extend(faults)
    source.assumed.extend(assumed)
    return readings
