"""Filling in the calibration card."""

from __future__ import annotations

import hashlib
import json
from dataclasses import dataclass
from importlib.metadata import version

import numpy as np
import pandas as pd

from settlelab.calibrate.card import (
    Card,
    CardData,
    CardFluid,
    CardLaw,
    CardParameter,
    CardScatter,
    Range,
    check_values,
    six_digits,
)
from settlelab.calibrate.falls import published_law
from settlelab.calibrate.fit import LawFit
from settlelab.calibrate.model import CalibratedFit
from settlelab.calibrate.observations import Observations
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import Method

__all__ = ["CAUTIONS", "HOW_TO_USE", "Origin", "make_card"]

HOW_TO_USE = (
    "Solve V = sqrt(4 g d (rho_s - rho)/(3 rho Cd)) together with Re. d: diameter of the sphere of equal volume; "
    "rho_s, rho: density of particle and fluid; V: terminal velocity alone in unbounded fluid at rest; x: shape "
    "descriptor as its name says. Re = rho V d/mu in a Newtonian fluid. In others mu is the apparent viscosity at the "
    "shear rate V/d, and the Re that enters the formula is further divided by X, the creeping drag of a sphere over "
    "that at viscosity mu (power law: X = 1.00, 1.14, 1.26, 1.36, 1.43, 1.48 at n = 1, 0.9, 0.8, 0.7, 0.6, 0.5)."
)
CAUTIONS = (
    "A column test in still fluid is not a hole-cleaning design: the flow in an annulus, its inclination, the turning "
    "string and the crowd of other cuttings are not in these velocities.",
    "The law holds for particles and fluids like those of the calibration; outside its ranges it is an extrapolation.",
    "The diameter is that of the sphere of equal volume, not a sieve opening.",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Origin:
    """Who made a calibration, of what, and when, in the lab's own words."""

    title: str = ""
    date: str = ""
    by: str = ""


def make_card(
    chosen: CalibratedFit | None,
    published: Method,
    state: LawFit,
    ranking: pd.DataFrame,
    seen: Observations,
    origin: Origin,
) -> Card:
    """The card of the chosen form, or of the published method that is kept."""
    name = chosen.name if chosen else published.name
    row = ranking.set_index("method").loc[name]
    law = (
        chosen.form.law([six_digits(each.value) for each in chosen.parameters]) if chosen else published_law(published)
    )
    needs = chosen.form.needs if chosen else published.needs
    medians = {need: float(np.median(seen.falls.descriptors[need])) for need in needs if need != "lot"}
    return Card(
        title=origin.title,
        date=origin.date,
        by=origin.by,
        name=name,
        law=_calibrated(chosen) if chosen else _published(published),
        scatter=CardScatter(
            single_drop=six_digits(state.residual_scatter),
            between_particles=six_digits(float(np.sqrt(np.sum(state.scatter**2)))),
            repeatability=six_digits(state.repeatability),
            degrees_of_freedom=state.degrees,
            rms_percent=six_digits(float(row["rms_percent"])),
            cross_validated_rms_percent=six_digits(float(row["cv_rms_percent"])) if chosen else None,
        ),
        ranges=_ranges(seen),
        data=_data(seen),
        check_values=check_values(law, medians | ({"lot": 0.0} if "lot" in needs else {})),
        cautions=CAUTIONS,
        software={package: version(package) for package in ("settlelab", "lmfit", "numpy", "scipy")},
    )


def _published(method: Method) -> CardLaw:
    return CardLaw(
        kind="published",
        base=method.name,
        descriptor="",
        lots=(),
        needs=method.needs,
        formula=f"Cd of {method.name} as in print; see the check values",
        source=method.source,
        parameters=(),
        covariance=(),
        how_to_use=HOW_TO_USE,
    )


def _calibrated(fit: CalibratedFit) -> CardLaw:
    made_by = fit.form.recipe
    return CardLaw(
        kind=made_by.kind,
        base=made_by.base,
        descriptor=made_by.descriptor,
        expression=made_by.expression,
        lots=made_by.lots,
        needs=fit.form.needs,
        formula=fit.formula,
        source="calibrated on the drops of this card",
        parameters=tuple(
            CardParameter(
                name=each.name,
                value=six_digits(each.value),
                standard_uncertainty=None if each.at_bound else six_digits(each.u),
                interval_95=None if each.at_bound else (six_digits(each.low), six_digits(each.high)),
                meaning=each.meaning,
            )
            for each in fit.parameters
        ),
        covariance=tuple(tuple(map(six_digits, row)) for row in np.nan_to_num(fit.covariance).tolist()),
        how_to_use=HOW_TO_USE,
    )


def _ranges(seen: Observations) -> dict[str, Range]:
    falls = seen.falls
    apparent = falls.rheology.viscosity(seen.velocity / falls.diameter)
    ranges = {
        "reynolds": Range.of(seen.reynolds),
        "equivalent_diameter_mm": Range.of(falls.diameter, 1e3),
        "particle_density_kg_m3": Range.of(falls.particle_density),
        "fluid_density_kg_m3": Range.of(falls.fluid_density),
        "viscosity_mPa_s": Range.of(apparent, 1e3),
        "flow_index": Range.of(falls.flow_index),
        "yield_stress_Pa": Range.of(falls.yield_stress),
    }
    shapes = {name: Range.of(values) for name, values in falls.descriptors.items() if name != "lot"}
    return ranges | shapes


def _data(seen: Observations) -> CardData:
    falls, first = seen.falls, np.unique(seen.fluid, return_index=True)[1]
    return CardData(
        drops=len(seen.drop),
        particles=len(np.unique(seen.particle)),
        lots=tuple(dict.fromkeys(lot for lot in seen.lot.tolist() if lot)),
        fluids=tuple(
            CardFluid(
                name=str(seen.fluid_name[index]),
                density_kg_m3=six_digits(float(falls.fluid_density[index])),
                consistency_Pa_s_n=six_digits(float(falls.consistency[index])),
                flow_index=six_digits(float(falls.flow_index[index])),
                yield_stress_Pa=six_digits(float(falls.yield_stress[index])),
            )
            for index in first
        ),
        sha256=_hash(seen),
    )


def _hash(seen: Observations) -> str:
    falls = seen.falls
    columns: dict[str, FloatArray] = {
        "velocity_m_s": seen.velocity,
        "diameter_m": falls.diameter,
        "particle_density_kg_m3": falls.particle_density,
        "fluid_density_kg_m3": falls.fluid_density,
        "consistency_Pa_s_n": falls.consistency,
        "flow_index": falls.flow_index,
        "yield_stress_Pa": falls.yield_stress,
        **falls.descriptors,
    }
    table = {name: [f"{value:.6g}" for value in values.tolist()] for name, values in columns.items()}
    return hashlib.sha256(json.dumps(table, sort_keys=True).encode()).hexdigest()
