"""The tables of the report page, built from what the rooms hand over."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from settlelab.measure.model import Measured
from settlelab.physics.oilfield import readings_of_the_fall
from settlelab.report.numbers import MISSING, percent, significant
from settlelab.report.views import Show, TableView, UnitSystem, quantity_text, table_view
from settlelab.study.model import Column, Fluid, Study
from settlelab.units import Quantity
from settlelab.video.model import TrackedRecording

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = [
    "budget_shares",
    "budget_view",
    "controls_view",
    "drops_view",
    "fluids_view",
    "lab_view",
    "ranking_view",
    "recordings_view",
    "viscosities_view",
]

OUTPUTS = {
    "velocity": "velocity",
    "unbounded_velocity": "unbounded velocity",
    "reynolds": "Reynolds number",
    "drag_coefficient": "drag coefficient",
}


def _share(value: object) -> str:
    """A fraction in percent, to a tenth."""
    share = 100 * float(str(value))
    if math.isnan(share):
        return MISSING
    return f"{share:.1f}" if share >= 0.05 else ("–" if share == 0 else "< 0.1")


def _percent(value: object) -> str:
    return percent(float(str(value)))


def _plain_percent(value: object) -> str:
    return significant(float(str(value)), 3)


def _three_decimals(value: object) -> str:
    factor = float(str(value))
    return f"{factor:.3f}" if math.isfinite(factor) else MISSING


def _whole_percent(value: object) -> str:
    return f"{float(str(value)):.0f}"


LAB = (
    Show(heading="lot", field="lot"),
    Show(heading="particle", field="particle"),
    Show(heading="fluid", field="fluid"),
    Show(heading="drops accepted", field="drops_accepted"),
    Show(heading="equivalent diameter", field="equivalent_diameter", unit="mm"),
    Show(heading="density", field="density", unit="kg/m3"),
    Show(heading="shape", field="shape", unit="1", digits=3),
    Show(heading="velocity in the column ± U", field="velocity", u="velocity_expanded_u", unit="mm/s"),
    Show(heading="scatter, %", field="velocity_scatter", unit="1", form=_share),
    Show(heading="wall factor", field="wall_factor", unit="1", form=_three_decimals),
    Show(heading="unbounded velocity ± U", field="unbounded_velocity", u="unbounded_velocity_expanded_u", unit="mm/s"),
    Show(heading="Re ± U", field="reynolds", u="reynolds_expanded_u", unit="1"),
    Show(heading="Cd ± U", field="drag_coefficient", u="drag_coefficient_expanded_u", unit="1"),
    Show(heading="flags", field="flags"),
)
DROPS = (
    Show(heading="drop", field="drop", unit="1"),
    Show(heading="recording", field="recording"),
    Show(heading="particle", field="particle"),
    Show(heading="lot", field="lot"),
    Show(heading="velocity", field="velocity", u="velocity_u", unit="mm/s"),
    Show(heading="share of terminal, %", field="fraction_of_terminal", unit="1", form=_share),
    Show(heading="equivalent diameter", field="equivalent_diameter", u="equivalent_diameter_u", unit="mm"),
    Show(heading="wall factor", field="wall_factor", u="wall_factor_u", unit="1"),
    Show(heading="unbounded velocity", field="unbounded_velocity", u="unbounded_velocity_u", unit="mm/s"),
    Show(heading="Re", field="reynolds", u="reynolds_u", unit="1"),
    Show(heading="Cd", field="drag_coefficient", u="drag_coefficient_u", unit="1"),
    Show(heading="accepted", field="accepted"),
    Show(heading="flags and what they mean", field="remark"),
)
CONTROLS = (
    Show(heading="drop", field="drop", unit="1"),
    Show(heading="recording", field="recording"),
    Show(heading="sphere", field="particle"),
    Show(heading="expected velocity", field="expected_velocity", u="expected_velocity_u", unit="mm/s"),
    Show(heading="measured velocity", field="velocity", u="velocity_u", unit="mm/s"),
    Show(heading="Eₙ", field="en", unit="1", form=lambda value: percent(float(str(value)), 2)),
    Show(heading="agrees", field="passed"),
)
VISCOSITIES = (
    Show(heading="fluid", field="fluid"),
    Show(heading="control drops", field="drops", unit="1"),
    Show(heading="viscosity by the falling spheres", field="viscosity", u="viscosity_u", unit="mPa s"),
    Show(heading="viscosity as stated", field="stated_viscosity", u="stated_viscosity_u", unit="mPa s"),
    Show(heading="most of the uncertainty from", field="source"),
)
RANKING = (
    Show(heading="correlation", field="method"),
    Show(heading="kind", field="kind"),
    Show(heading="drops", field="drops", unit="1"),
    Show(heading="inside its range, %", field="in_range_percent", unit="1", form=_whole_percent),
    Show(heading="bias, %", field="bias_percent", unit="1", form=_percent),
    Show(heading="root mean square, %", field="rms_percent", unit="1", form=_plain_percent),
    Show(heading="cross-validated, %", field="cv_rms_percent", unit="1", form=_plain_percent),
    Show(heading="largest, %", field="max_percent", unit="1", form=_percent),
    Show(heading="within 10 %", field="within_10_percent", unit="1", form=_whole_percent),
    Show(heading="within 20 %", field="within_20_percent", unit="1", form=_whole_percent),
    Show(heading="as good as the best of its kind", field="as_good_as_best"),
    Show(heading="source", field="source"),
)


def lab_view(lab: pd.DataFrame, system: UnitSystem) -> TableView:
    """The lab report table; the fluid has a column where there are several, a law where it predicts."""
    rows = lab.assign(drops_accepted=[f"{a} of {n}" for a, n in zip(lab["accepted"], lab["drops"], strict=True)])
    rows["particle"] = [
        name or f"mean of {count}" for name, count in zip(rows["particle"], rows["particles"], strict=True)
    ]
    columns = [show for show in LAB[:-1] if show.field != "fluid" or lab["fluid"].nunique() > 1]
    columns = [replace(show, heading=_shape_heading(lab)) if show.field == "shape" else show for show in columns]
    columns += [
        Show(heading=f"{kind} law (deviation)", field=f"{kind}_velocity", unit="mm/s", deviation=f"{kind}_deviation")
        for kind in ("published", "calibrated")
        if set(lab[f"{kind}_method"]) - {""}
    ]
    lots = set(lab.index[lab["particle"] == ""])
    return table_view(rows, [*columns, LAB[-1]], system, lambda row: "lot" if row.name in lots else "")


def _shape_heading(lab: pd.DataFrame) -> str:
    measures = sorted(set(lab["shape_measure"]) - {""})
    return measures[0].replace("_", " ") if len(measures) == 1 else "shape"


def drops_view(drops: pd.DataFrame, system: UnitSystem) -> TableView:
    """Every fall that was given to a drop, accepted or not."""
    remark = [reason or flags for reason, flags in zip(drops["reason"], drops["flags"], strict=True)]
    return table_view(drops.assign(remark=remark), DROPS, system, lambda row: "" if row["accepted"] else "refused")


def controls_view(controls: pd.DataFrame, system: UnitSystem) -> TableView:
    """Control spheres: expected against measured velocity."""
    return table_view(controls, CONTROLS, system)


def viscosities_view(viscosities: pd.DataFrame, system: UnitSystem) -> TableView:
    """Falling-ball viscosities beside those that the study states."""
    return table_view(viscosities, VISCOSITIES, system)


def ranking_view(calibration: Calibration) -> TableView:
    """The ranking, the best published method and the chosen form in bold, unconfirmed laws marked at their source."""
    chosen = calibration.chosen.name if calibration.chosen else None
    best = {calibration.best_published, chosen}
    mark = calibration.ranking["confirmed"].map({True: "", False: " (unconfirmed)"})
    ranking = calibration.ranking.assign(source=calibration.ranking["source"] + mark)
    return table_view(ranking, RANKING, kind=lambda row: "best" if row["method"] in best else "")


def budget_shares(measured: Measured) -> pd.DataFrame:
    """Mean share of each input (column) in the variance of each output (row), over accepted drops, largest first."""
    accepted = measured.drops.loc[measured.drops["accepted"].astype(bool), "drop"]
    rows = measured.budget[measured.budget["drop"].isin(accepted)]
    totals = rows.groupby(["output", "input"])["share"].sum().unstack("input")
    counted = rows.groupby("output")["drop"].nunique()
    shares = totals.div(counted, axis="index").reindex(list(OUTPUTS)).dropna(how="all")
    shares = shares.astype(np.float64).fillna(0.0)
    largest = shares.max().sort_values(ascending=False, kind="stable").index
    return shares[largest].rename(index=OUTPUTS).rename_axis(index=None, columns=None)


def budget_view(shares: pd.DataFrame) -> TableView:
    """Shares in percent, one row per input."""
    table = shares.T.reset_index(names="source")
    columns = [Show(heading=f"{name}, %", field=name, unit="1", form=_share) for name in shares.index]
    return table_view(table, [Show(heading="source", field="source"), *columns])


def fluids_view(study: Study, drops: pd.DataFrame, system: UnitSystem) -> TableView:
    """The fluids as the drops saw them."""
    rows = [_fluid_row(fluid, drops[drops["fluid"] == fluid.name], system) for fluid in study.fluids]
    names = ("fluid", "liquid", "temperature", "density", "viscosity at the falls", "flow curve")
    return table_view(pd.DataFrame(rows, columns=names), [Show(heading=name, field=name) for name in names])


def _fluid_row(fluid: Fluid, drops: pd.DataFrame, system: UnitSystem) -> tuple[str, ...]:
    temperature = _quantity(fluid.temperature, "°C", system)
    drops = drops.dropna(subset=["viscosity"])
    if len(drops) == 0:
        return fluid.name, fluid.liquid, temperature, "", "", "no drop in it"
    first = drops.iloc[0]
    density = quantity_text(first["fluid_density"], first["fluid_density_u"], "kg/m3", system)
    thin, thick = drops.loc[drops["viscosity"].idxmin()], drops.loc[drops["viscosity"].idxmax()]
    viscosity = quantity_text(thin["viscosity"], thin["viscosity_u"], "mPa s", system)
    if thick["viscosity"] > 1.001 * thin["viscosity"]:
        viscosity += f" to {quantity_text(thick['viscosity'], thick['viscosity_u'], 'mPa s', system)}"
    curve = _flow_curve(first) + _readings_used(fluid, drops)
    return fluid.name, fluid.liquid, temperature, density, viscosity, curve


def _readings_used(fluid: Fluid, drops: pd.DataFrame) -> str:
    """Which viscometer readings the falls rest on: those at shear rates around theirs."""
    if fluid.readings is None:
        return ""
    rates = fluid.readings.shear_rate
    used = rates[readings_of_the_fall(rates, drops["unbounded_velocity"], drops["equivalent_diameter"])]
    sheared = drops["unbounded_velocity"] / drops["equivalent_diameter"]
    low, high = significant(float(sheared.min()), 2), significant(float(sheared.max()), 2)
    outside = sheared.min() < rates.min() or sheared.max() > rates.max()
    rest = "extrapolated from" if outside else "bracketed by"
    return (
        f"; the falls shear at {low} to {high} 1/s, {rest} {len(used)} of {len(rates)} readings,"
        f" {significant(float(used.min()), 2)} to {significant(float(used.max()), 2)} 1/s"
    )


def _flow_curve(row: pd.Series) -> str:
    if row["flow_index"] == 1.0 and row["yield_stress"] == 0.0:
        return "Newtonian"
    curve = f"consistency {significant(row['consistency'])} Pa·sⁿ, flow index {significant(row['flow_index'])}"
    return curve + (f", yield stress {significant(row['yield_stress'])} Pa" if row["yield_stress"] > 0 else "")


def recordings_view(study: Study, tracked: Sequence[TrackedRecording], system: UnitSystem) -> TableView:
    """The recordings with clock, scale, column and what was seen in them."""
    rows = [
        (
            recording.name,
            recording.fluid.name,
            column_text(recording.column, system),
            str(seen.frame_count),
            f"{significant(seen.clock.frame_rate)} Hz, {'as stated' if seen.clock.source == 'stated' else 'container'}",
            quantity_text(seen.scale.value, seen.scale.u, "mm/px"),
            f"{len(recording.particles)} named, {len(seen.falls)} followed, {len(seen.refused)} other objects",
        )
        for recording, seen in zip(study.recordings, tracked, strict=True)
    ]
    names = ("recording", "fluid", "column", "frames", "frame rate", "scale", "falls")
    return table_view(pd.DataFrame(rows, columns=names), [Show(heading=name, field=name) for name in names])


def column_text(column: Column, system: UnitSystem) -> str:
    """The column in words."""
    if column.section == "round":
        return f"round, bore {_quantity(column.inner_diameter, 'mm', system) or 'unknown'}"
    sides = [_quantity(side, "mm", system) or "unknown" for side in (column.width, column.depth)]
    return f"rectangular, {' × '.join(sides)}"


def _quantity(quantity: Quantity | None, unit: str, system: UnitSystem) -> str:
    return "" if quantity is None else quantity_text(quantity.value, quantity.u or np.nan, unit, system)
