"""The calibration card: read again, checked, used."""

from __future__ import annotations

import json
from importlib import resources
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from settlelab.calibrate import Calibration, Card, Origin, calibrate_drops, ladder, predict, read_card, write_card
from settlelab.calibrate.fluids import fluid_in_print, fluid_of_card
from settlelab.errors import InputFaults, SettlelabError
from settlelab.physics.drag import terminal_velocity
from settlelab.physics.rheology import Rheology
from settlelab.study.model import CalibrationChoice
from tests.calibrate.lots import Lots, draw, power_law_of_shape, published

OIL = Rheology(consistency=0.05)


@pytest.fixture(scope="module")
def calibration() -> Calibration:
    origin = Origin(title="Three invented lots", date="2031-05-02", by="nobody")
    return calibrate_drops(draw(power_law_of_shape(), Lots(), 3), origin=origin)


@pytest.fixture
def written(calibration: Calibration, tmp_path: Path) -> Path:
    return write_card(calibration.card, tmp_path / "calibration.json")


def changed(path: Path, *keys: str | int, value: object) -> Path:
    """The card with one value replaced, or removed where it is None."""
    content = json.loads(path.read_text(encoding="utf-8"))
    part = content
    for key in keys[:-1]:
        part = part[key]
    if value is None:
        del part[keys[-1]]
    else:
        part[keys[-1]] = value
    path.write_text(json.dumps(content), encoding="utf-8")
    return path


def test_a_card_read_again_is_the_same(calibration: Calibration, written: Path) -> None:
    assert read_card(written) == calibration.card


def test_a_card_can_be_used_without_settlelab(written: Path) -> None:
    """The formula as written on the card, typed here by hand, gives the check values."""
    card = json.loads(written.read_text(encoding="utf-8"))
    assert card["law"]["formula"].startswith("Cd = K2 F(Re K1 K2), K1 = x^a, K2 = x^-b, x = sphericity")
    assert "F(x) = 24/x (1 + 0.27 x)^0.43 + 0.47 (1 - exp(-0.04 x^0.38))" in card["law"]["formula"]
    a, b = (parameter["value"] for parameter in card["law"]["parameters"])
    for check in card["check_values"]:
        x = check["descriptors"]["sphericity"]
        k1, k2 = x**a, x**-b
        re = check["reynolds"] * k1 * k2
        cd = k2 * (24 / re * (1 + 0.27 * re) ** 0.43 + 0.47 * (1 - np.exp(-0.04 * re**0.38)))
        assert cd == pytest.approx(check["drag_coefficient"], rel=1e-5)


def test_the_schema_in_the_package_is_that_of_the_card(written: Path) -> None:
    schema = json.loads(resources.files("settlelab.calibrate").joinpath("card.schema.json").read_text(encoding="utf-8"))
    now = Card.model_json_schema()
    for part in (schema, now):
        part["$defs"]["Card"] = {key: part[key] for key in ("properties", "required")}
    assert set(schema["$defs"]) == set(now["$defs"])
    for name, described in schema["$defs"].items():
        assert set(described["properties"]) == set(now["$defs"][name]["properties"])
        assert set(described["required"]) == set(now["$defs"][name]["required"])
    assert set(json.loads(written.read_text(encoding="utf-8"))) == set(schema["properties"])


@pytest.mark.parametrize(
    ("keys", "value", "sentence"),
    [
        (("scatter",), None, "calibration.json, scatter: missing, expected as card.schema.json describes it"),
        (("law", "parameters", 0, "value"), "much", 'law.parameters.0.value: "much" is not a valid number'),
        (("data", "drops"), 0, 'data.drops: "0" is not greater than or equal to 1'),
        (("colour",), "blue", 'colour: "colour" is not a key of a calibration card'),
        (("law", "covariance"), [], "a covariance of 2 rows and columns, one for each parameter"),
        (("law", "parameters", 1, "value"), 3.9, "the formula of this version gives Cd"),
        (("law", "base"), "cheng-2090", '"cheng-2090" is not a published method on board (did you mean "cheng-2009"?)'),
        (("law", "kind"), "stokes-newton-powr", '"stokes-newton-powr" is not a calibrated form'),
    ],
)
def test_a_card_that_was_changed(written: Path, keys: tuple[str | int, ...], value: object, sentence: str) -> None:
    with pytest.raises(SettlelabError) as caught:
        read_card(changed(written, *keys, value=value))
    assert sentence in str(caught.value)


def test_all_faults_of_a_card_at_once(written: Path) -> None:
    changed(written, "scatter", value=None)
    changed(written, "data", "drops", value=0)
    with pytest.raises(InputFaults) as caught:
        read_card(written)
    assert len(caught.value.faults) == 2


def test_no_card(tmp_path: Path) -> None:
    with pytest.raises(SettlelabError, match=r"none\.json cannot be read as a calibration card"):
        read_card(tmp_path / "none.json")
    broken = tmp_path / "broken.json"
    broken.write_text('{"card": ', encoding="utf-8")
    with pytest.raises(SettlelabError, match=r"broken\.json is not JSON"):
        read_card(broken)


def test_prediction_is_the_true_law_within_its_interval(calibration: Calibration) -> None:
    sizes = np.array([1.5e-3, 3e-3, 6e-3])
    shape = {"sphericity": np.full(3, 0.7)}
    liquid = Rheology(consistency=0.006)
    found = predict(
        calibration.card, diameter=sizes, particle_density=2600, fluid_density=1150, rheology=liquid, descriptors=shape
    )
    truth = terminal_velocity(
        lambda reynolds: power_law_of_shape()(reynolds, shape),
        diameter=sizes,
        particle_density=2600.0,
        fluid_density=1150.0,
        rheology=liquid,
    ).velocity
    assert np.all((found["confidence_low"] < truth) & (truth < found["confidence_high"]))
    assert np.all(found["prediction_low"] < found["confidence_low"])
    assert np.all(found["confidence_high"] < found["prediction_high"])
    assert found["in_range"].all()


@pytest.mark.slow
def test_prediction_intervals_hold_a_new_particle() -> None:
    """95 % intervals for single drops of new particles, over 60 calibrations of 24 particles."""
    inside = []
    for seed in range(60):
        card = calibrate_drops(
            draw(power_law_of_shape(), Lots(particles=24), seed), CalibrationChoice(forms=("stokes-newton-power",))
        ).card
        new = draw(power_law_of_shape(), Lots(particles=30, replicates=1, diameter_u=0.0), 1000 + seed)
        for _, drop in new.iterrows():
            row = predict(
                card,
                diameter=drop["equivalent_diameter"],
                particle_density=2600.0,
                fluid_density=drop["fluid_density"],
                rheology=Rheology(consistency=drop["viscosity"]),
                descriptors={"sphericity": drop["sphericity"]},
            ).iloc[0]
            inside.append(row["prediction_low"] <= drop["unbounded_velocity"] <= row["prediction_high"])
    assert 0.92 <= np.mean(inside) <= 0.98


def test_outside_the_calibration_is_marked(calibration: Calibration) -> None:
    found = predict(
        calibration.card,
        diameter=[3e-3, 30e-3],
        particle_density=2600,
        fluid_density=1100,
        rheology=OIL,
        descriptors={"sphericity": [0.7, 0.3]},
    )
    assert found["in_range"].tolist() == [True, False]
    assert found["outside"].tolist() == ["", "equivalent_diameter_mm;sphericity"]


def test_a_yield_stress_can_hold_the_particle(calibration: Calibration) -> None:
    mud = Rheology(consistency=0.5, flow_index=0.7, yield_stress=20.0)
    shape = {"sphericity": 0.7}
    found = predict(
        calibration.card, diameter=3e-3, particle_density=2600, fluid_density=1100, rheology=mud, descriptors=shape
    )
    assert found["velocity"].tolist() == [0.0]
    assert found["prediction_high"].tolist() == [0.0]


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({"descriptors": {}}, "the card needs the sphericity of the particles"),
        ({"descriptors": {"sphericity": 1.2}}, "the sphericity must be at most 1"),
        ({"diameter": -1e-3}, "the diameter must be above 0"),
        ({"particle_density": 900}, "a particle that is not denser than the fluid does not settle in it"),
        ({"rheology": Rheology(consistency=0.0)}, "the viscosity or consistency must be above 0"),
        ({"rheology": Rheology(consistency=0.1, yield_stress=-1.0)}, "the yield stress must be 0 or above"),
    ],
)
def test_nonsense_is_refused(calibration: Calibration, given: dict[str, object], sentence: str) -> None:
    plain: dict[str, object] = {
        "diameter": 3e-3,
        "particle_density": 2600,
        "fluid_density": 1100,
        "rheology": OIL,
        "descriptors": {"sphericity": 0.7},
    }
    with pytest.raises(SettlelabError) as caught:
        predict(calibration.card, **(plain | given))  # type: ignore[arg-type]
    assert str(caught.value) == sentence


def test_a_published_law_that_is_kept_has_a_card(tmp_path: Path) -> None:
    kept = calibrate_drops(draw(published("ganser-1993"), Lots(scatter=0.11), 2))
    assert kept.chosen is None
    card = read_card(write_card(kept.card, tmp_path / "card.json"))
    assert card.law.kind == "published"
    assert card.law.parameters == ()
    found = predict(
        card, diameter=3e-3, particle_density=2600, fluid_density=1100, rheology=OIL, descriptors={"sphericity": 0.7}
    ).iloc[0]
    assert found["confidence_low"] == found["velocity"] == found["confidence_high"]
    # two and a bit standard deviations of 11 %
    assert np.log(found["prediction_high"] / found["velocity"]) == pytest.approx(2.05 * 0.11, rel=0.3)


def test_a_card_of_lots(tmp_path: Path) -> None:
    choice = CalibrationChoice(forms=("effective-sphericity",))
    drops = draw(published("ganser-1993"), Lots(scatter=0.02), 1).drop(columns="sphericity")
    slow = drops["lot"].map({"north": 1.0, "south": 0.6, "east": 0.4})
    found = calibrate_drops(drops.assign(unbounded_velocity=slow * drops["unbounded_velocity"]), choice)
    card = read_card(write_card(found.card, tmp_path / "card.json"))
    assert card.law.lots == ("north", "south", "east")
    velocity = predict(
        card, diameter=3e-3, particle_density=2600, fluid_density=1100, rheology=OIL, descriptors={"lot": [0, 1, 2]}
    )["velocity"]
    assert velocity.is_monotonic_decreasing


def test_the_ladder_is_sieves_around_the_calibration(calibration: Calibration) -> None:
    """Against the openings of ASTM E11-17 in the reference."""
    source = Path(__file__).parents[3] / "shared" / "reference" / "sieves.csv"
    if not source.exists():
        pytest.skip("the reference table of sieves is not beside the repository")
    table = pd.read_csv(source)
    openings = table.loc[table["in_astm_e11"] == "yes", "opening_mm"].to_numpy()
    found = 1e3 * ladder(calibration.card)
    sizes = calibration.card.ranges["equivalent_diameter_mm"]
    expected = np.sort(openings[(openings >= sizes.low / 1.5) & (openings <= 1.5 * sizes.high)])
    np.testing.assert_allclose(found, expected)


def test_fluids_of_the_card(calibration: Calibration) -> None:
    assert fluid_of_card(calibration.card, "fluid 2").density == pytest.approx(1150.0)
    with pytest.raises(SettlelabError, match='"fluid 9" is not a fluid of the card'):
        fluid_of_card(calibration.card, "fluid 9")
    with pytest.raises(SettlelabError, match="the card was made in several fluids: name one of"):
        fluid_of_card(calibration.card)


def test_fluids_in_print() -> None:
    """At 20 °C: water 998.2 kg/m3, 1.0016 mPa s (IAPWS); glycerol 50 % 1126 kg/m3, 6.0 mPa s (handbook, memory)."""
    water, glycerol = fluid_in_print("water", 293.15), fluid_in_print("glycerol-water", 293.15, 0.5)
    assert water.density == pytest.approx(998.2, abs=0.05)
    assert float(water.rheology.viscosity(1.0)) == pytest.approx(1.0016e-3, rel=2e-4)
    assert glycerol.density == pytest.approx(1126.3, rel=2e-3)
    assert float(glycerol.rheology.viscosity(1.0)) == pytest.approx(6.0e-3, rel=0.03)
