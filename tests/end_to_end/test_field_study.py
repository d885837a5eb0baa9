"""The main job on the sample study, through the command line, against a truth that the analysis never reads."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pandas as pd
import pytest
from click.testing import Result

from settlelab.simulate import DropTruth
from settlelab.units import from_headings
from tests.end_to_end.truth import beside_truth, drop_table, settlelab

PROJECT = Path(__file__).parents[2]
STUDY = PROJECT / "sample_tables" / "study.toml"
PROMISED = (  # design: Results
    "tracks.csv",
    "drops.csv",
    "ranking.csv",
    "lab_table.csv",
    "calibration.json",
    "report.html",
    "provenance.json",
)
LAB_COLUMNS = [  # promised to users, in this order among others
    "particle",
    "lot",
    "drops",
    "accepted",
    "equivalent_diameter_mm",
    "velocity_mm_s",
    "velocity_expanded_u_mm_s",
    "wall_factor",
    "reynolds",
    "drag_coefficient",
    "drag_coefficient_expanded_u",
    "flags",
]


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("sample") / "results"


@pytest.fixture(scope="module")
def ran(results: Path) -> Result:
    result = settlelab("run", STUDY, "--out", results, "--workers", 2)
    assert result.exit_code == 0, result.output
    return result


@pytest.fixture(scope="module")
def drops(ran: Result, results: Path) -> pd.DataFrame:
    truth = from_headings(pd.read_csv(PROJECT / "tests" / "sample_truth.csv", dtype={"particle": str}), DropTruth)
    return beside_truth(drop_table(results), truth)


def test_writes_what_the_design_promises_and_tells_where(ran: Result, results: Path) -> None:
    for name in PROMISED:
        assert (results / name).stat().st_size > 0, name
        assert f"wrote {results / name}" in ran.output, name
    assert any((results / "figures").iterdir())
    videos = re.findall(r'video = "\.\./sample_videos/(\w+)\.mp4"', STUDY.read_text(encoding="utf-8"))
    assert sorted(path.stem for path in (results / "overlays").iterdir()) == sorted(videos)


def test_spheres_within_half_a_percent(drops: pd.DataFrame) -> None:
    spheres = drops[drops["control"]]
    assert len(spheres) >= 4
    assert spheres["deviation"].abs().max() < 0.005


def test_angular_grains_within_one_and_a_half_percent(drops: pd.DataFrame) -> None:
    grains = drops[~drops["control"]]
    assert grains["particle"].nunique() >= 12
    assert grains["lot"].nunique() == 3
    assert grains["deviation"].abs().max() < 0.015


def test_wall_correction_reynolds_and_drag_agree_with_the_truth(drops: pd.DataFrame) -> None:
    for name in ("unbounded_velocity", "reynolds", "drag_coefficient", "equivalent_diameter"):
        score = (drops[name] - drops[f"{name}_true"]) / drops[f"{name}_u"]
        assert (score.abs() < 4).all(), name
        assert (score.abs() < 2).mean() > 0.8, name


def test_the_one_drop_released_at_the_wall_is_refused_and_no_other(drops: pd.DataFrame) -> None:
    refused = drops[~drops["accepted"]]
    assert refused["flags"].tolist() == ["near-wall"]
    assert refused["reason"].str.len().min() > 10


def test_control_spheres_say_that_the_chain_is_under_control(ran: Result) -> None:
    assert "measuring chain: Under control" in ran.output


def test_lab_table_has_the_promised_columns(ran: Result, results: Path) -> None:
    columns = pd.read_csv(results / "lab_table.csv").columns.tolist()
    places = [columns.index(name) for name in LAB_COLUMNS]
    assert places == sorted(places)


def test_ranking_holds_published_and_at_least_two_calibrated_shape_forms(ran: Result, results: Path) -> None:
    ranking = pd.read_csv(results / "ranking.csv")
    calibrated = ranking[ranking["kind"] == "calibrated"]
    assert len(calibrated) >= 2
    assert calibrated["cv_rms_percent"].notna().all()
    published = set(ranking.loc[ranking["kind"] == "published", "method"])
    assert {"haider-levenspiel-1989", "ganser-1993", "chien-1994", "swamee-ojha-1991"} <= published


def test_provenance_names_every_input_by_its_hash_and_no_folder_of_this_machine(ran: Result, results: Path) -> None:
    text = (results / "provenance.json").read_text(encoding="utf-8")
    inputs = json.loads(text)["input files (SHA-256)"]
    assert {"study.toml", "particles.csv", "../sample_videos/a1.mp4"} <= set(inputs)
    assert all(re.fullmatch(r"[0-9a-f]{64}", digest) for digest in inputs.values())
    assert str(PROJECT) not in text
    assert str(PROJECT) not in (results / "report.html").read_text(encoding="utf-8")


def test_report_says_that_the_study_is_simulated(ran: Result, results: Path) -> None:
    assert "simulated" in (results / "report.html").read_text(encoding="utf-8").lower()


def test_a_second_run_tracks_nothing_again_and_gives_the_same_bytes(ran: Result, results: Path) -> None:
    archives = {path: path.stat().st_mtime_ns for path in (results / "tracked").iterdir()}
    before = {path: path.read_bytes() for path in results.rglob("*") if path.is_file()}
    again = settlelab("run", STUDY, "--out", results)
    assert again.exit_code == 0
    assert {path: path.stat().st_mtime_ns for path in (results / "tracked").iterdir()} == archives
    assert {path: path.read_bytes() for path in results.rglob("*") if path.is_file()} == before


def test_the_card_predicts(ran: Result, results: Path) -> None:
    told = settlelab("predict", results / "calibration.json", "--help")
    assert told.exit_code == 0


def test_the_drop_table_of_a_study_calibrates_to_the_same_ranking(ran: Result, results: Path, tmp_path: Path) -> None:
    told = settlelab("calibrate", results / "drops.csv", "--out", tmp_path)
    assert told.exit_code == 0, told.output
    ours, theirs = (pd.read_csv(folder / "ranking.csv") for folder in (results, tmp_path))
    assert theirs["method"].tolist() == ours["method"].tolist()
    # the table carries six digits
    assert theirs["rms_percent"].to_numpy() == pytest.approx(ours["rms_percent"].to_numpy(), rel=1e-3)
