from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from settlelab.report import lab_table, sections
from settlelab.report.origin import origin
from settlelab.report.views import TableView
from settlelab.study.model import Camera, Column, Fluid, ViscometerReadings
from settlelab.units import Quantity
from tests.report.invented import budget_of, calibration_of, drop, invented_drops, measured_of, study_of, tracked_of


def texts(view: TableView) -> list[dict[str, str]]:
    """Rows as a reader sees them, by heading."""
    names = [cell.text for cell in view.headings]
    return [dict(zip(names, (cell.text for cell in row), strict=True)) for row in view.rows]


def test_lab_view_names_shape_and_lots() -> None:
    view = sections.lab_view(lab_table(measured_of(invented_drops()), None), "lab")
    rows = texts(view)
    assert rows[2]["drops accepted"] == "1 of 2"
    assert rows[-1]["particle"] == "mean of 4"
    assert view.kinds[-3:] == ("lot", "lot", "lot")
    assert "sphericity" in rows[0]
    assert "fluid" not in rows[0]  # there is only one


def test_lab_view_of_several_fluids_and_shapes() -> None:
    other = {"fluid": "polymer", "sphericity": float("nan"), "corey_shape_factor": 0.6}
    drops = [drop(1, particle="A-01", lot="A"), drop(2, particle="A-02", lot="A", **other)]
    row = texts(sections.lab_view(lab_table(measured_of(drops), None), "lab"))[1]
    assert (row["fluid"], row["shape"]) == ("polymer", "0.600")


def test_drops_view_tells_why() -> None:
    view = sections.drops_view(measured_of(invented_drops()).drops, "lab")
    rows = texts(view)
    assert rows[5]["flags and what they mean"] == "only 91 % of terminal velocity in view"
    assert rows[9]["flags and what they mean"] == "wobbling"
    assert view.kinds[5] == "refused"
    assert rows[0]["share of terminal, %"] == "99.9"


def test_budget_is_the_mean_over_accepted_drops() -> None:
    drops = [drop(1), drop(2), drop(3, accepted=False)]
    shares_of_drops = [(1, "track", 1.0), (2, "track", 0.5), (2, "scale", 0.5), (3, "clock", 1.0)]
    budget = pd.DataFrame(shares_of_drops, columns=["drop", "input", "share"]).assign(output="velocity")
    shares = sections.budget_shares(measured_of(drops, budget=budget))
    assert shares.loc["velocity"].to_dict() == {"track": 0.75, "scale": 0.25}
    assert texts(sections.budget_view(shares))[0] == {"source": "track", "velocity, %": "75.0"}


def test_output_that_few_drops_have_is_averaged_over_those() -> None:
    drops = [drop(1), drop(2)]
    budget = budget_of(drops)
    budget = budget[(budget["drop"] == 1) | (budget["output"] == "velocity")]
    assert sections.budget_shares(measured_of(drops, budget=budget)).sum(axis=1).to_numpy() == pytest.approx(1.0)


def test_fluids_as_the_drops_saw_them() -> None:
    polymer = Fluid(name="polymer", liquid="measured")
    study = study_of(fluids=(*study_of().fluids, polymer, Fluid(name="spare", liquid="water")))
    thin = {"fluid": "polymer", "consistency": 0.5, "flow_index": 0.6, "viscosity": 0.08, "viscosity_u": 0.002}
    drops = measured_of([drop(1), drop(2, **thin), drop(3, **(thin | {"viscosity": 0.12}))]).drops
    glycerol, power_law, spare = texts(sections.fluids_view(study, drops, "field"))
    assert (glycerol["temperature"], glycerol["flow curve"]) == ("21.40 ± 0.20 °C", "Newtonian")
    assert glycerol["density"] == "9.6389 ± 0.0083 lbm/gal"  # 1155 kg/m3 over 119.8264
    assert power_law["viscosity at the falls"] == "80.0 ± 2.0 cP to 120.0 ± 2.0 cP"
    assert power_law["flow curve"] == "consistency 0.5000 Pa·sⁿ, flow index 0.6000"
    assert spare["flow curve"] == "no drop in it"


@pytest.mark.parametrize(
    ("rates", "told"),
    [
        ([5.0, 20.0, 50.0, 200.0], "shear at 26 to 26 1/s, bracketed by 2 of 4 readings, 20 to 50 1/s"),
        ([100.0, 200.0, 500.0], "shear at 26 to 26 1/s, extrapolated from 1 of 3 readings, 100 to 100 1/s"),
    ],
)
def test_the_readings_that_the_falls_rest_on_are_told(rates: list[float], told: str) -> None:
    stress = 0.5 * np.array(rates) ** 0.6
    readings = ViscometerReadings(
        file=Path("v.csv"), shear_rate=np.array(rates), shear_stress=stress, u_shear_stress=0.01 * stress
    )
    study = study_of(fluids=(Fluid(name="polymer", liquid="measured", readings=readings),))
    drops = measured_of([drop(1, fluid="polymer", consistency=0.5, flow_index=0.6)]).drops  # 0.104 m/s over 4 mm
    assert told in texts(sections.fluids_view(study, drops, "lab"))[0]["flow curve"]


def test_recordings_and_columns_as_used() -> None:
    duct = Column(section="rectangular", width=Quantity(0.2, 0.001), depth=Quantity(0.1))
    recording = replace(study_of().recordings[0], column=duct)
    row = texts(sections.recordings_view(study_of(recordings=(recording,)), [tracked_of()], "lab"))[0]
    assert row["column"] == "rectangular, 200.0 ± 1.0 mm × 100.0 mm"
    assert row["falls"] == "1 named, 3 followed, 3 other objects"
    assert row["scale"] == "0.21130 ± 0.00030 mm/px"


def test_measured_typed_and_assumed_are_told_apart() -> None:
    rows = [drop(1), drop(2, equivalent_diameter_from="silhouette", sphericity_from="")]
    told = origin(study_of(), measured_of(rows), [tracked_of()])
    assert "equivalent diameter of 1 drop, from the silhouette" in told.measured
    assert "equivalent diameter of 1 drop: mass and density" in told.typed
    assert "fluid glycerol: mass fraction, temperature" in told.typed
    assert "true frame rate of the camera" in told.typed
    assert "scale: millimetres per pixel" in told.typed
    assert told.assumed == (
        "gravity 9.80665 m/s²",
        "glycerol: viscosity from mass fraction and temperature, not measured",
    )


def test_a_scale_found_in_the_picture_is_measured() -> None:
    recording = replace(study_of().recordings[0], camera=Camera(graduation=Quantity(0.01)))
    told = origin(study_of(recordings=(recording,)), measured_of([drop(1)]), [])
    assert "scale, from marks of known spacing found in the picture" in told.measured
    assert not any(text.startswith("scale") for text in told.typed)


def test_falling_ball_viscosities_stand_beside_those_stated() -> None:
    row = {"fluid": "glycerol", "drops": 2, "viscosity": 0.0113, "viscosity_u": 0.0004, "stated_viscosity": 0.0111}
    row |= {"stated_viscosity_u": 0.0002, "source": "drag law"}
    (shown,) = texts(sections.viscosities_view(pd.DataFrame([row]), "lab"))
    assert shown["viscosity by the falling spheres, mPa·s"] == "11.30 ± 0.40"
    assert shown["viscosity as stated, mPa·s"] == "11.10 ± 0.20"
    assert shown["most of the uncertainty from"] == "drag law"


def test_unconfirmed_laws_are_marked_in_the_ranking() -> None:
    calibration = calibration_of(measured_of(invented_drops()))
    ranking = calibration.ranking.assign(confirmed=calibration.ranking["method"] != calibration.best_published)
    rows = texts(sections.ranking_view(replace(calibration, ranking=ranking)))
    marked = [row["correlation"] for row in rows if row["source"].endswith("(unconfirmed)")]
    assert marked == [calibration.best_published]
