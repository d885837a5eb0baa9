"""Studies as files: complete, readable, the same every time, the truth apart."""

from __future__ import annotations

import tomllib
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from settlelab.simulate import (
    Camera,
    Column,
    DropTruth,
    Manner,
    Nuisances,
    Particle,
    Scene,
    SimulatedStudy,
    Sphere,
    Take,
    cuttings,
    draw_study,
    field_study,
    glycerol_water,
    polymer,
    random_study,
    truth,
    with_drops,
    write_truth,
)
from settlelab.simulate.falls import settle
from settlelab.simulate.lots import LIMESTONE
from settlelab.study import read_study
from settlelab.units import from_headings

PROJECT = Path(__file__).parents[2]


@pytest.fixture(scope="module")
def small_study() -> SimulatedStudy:
    """Two recordings of a few frames each, with all that can differ between them."""
    rng = np.random.default_rng(11)
    mixture, mud = glycerol_water("mixture", 0.6, 295.0, rng), polymer("mud", 1003.0, 0.1, 0.7, 295.0)
    grains = cuttings(LIMESTONE, 2, rng)
    ball = Particle(name="K", body=Sphere(3e-3), density=2500.0)
    camera = Camera(width=160, height=160, frame_rate=50.0)
    turned = replace(camera, gravity="up", frame_rate=60.0, metre_per_px=3e-4, exposure=5e-4)
    manner = Manner(depth=-0.2, pause=0.05)
    first = Scene(liquid=mixture.liquid, drops=(), duration=1.0, camera=camera, column=Column(bore=0.05, surface=-0.2))
    second = replace(first, liquid=mud.liquid, camera=turned, column=Column(bore=0.04, wall=0.002, surface=-0.2))
    return SimulatedStudy(
        name="Small",
        fluids=(mixture, mud),
        cuttings=grains,
        spheres=(ball,),
        takes=(
            Take(video="one.mp4", fluid="mixture", scene=with_drops(first, [grains[0], ball], rng, manner)),
            Take(video="two.mp4", fluid="mud", scene=with_drops(second, [grains[1]], rng, manner), scale="marks"),
        ),
    )


def test_study_is_read_as_it_was_meant(small_study: SimulatedStudy, tmp_path: Path) -> None:
    drawn, written = draw_study(small_study, tmp_path / "tables", tmp_path / "videos", 3)
    assert sorted(path.name for path in written) == [
        "one.mp4", "particles.csv", "study.toml", "two.mp4", "viscometer_mud.csv",
    ]  # fmt: skip
    study = read_study(tmp_path / "tables")
    assert "Simulated" in study.notes
    assert [recording.name for recording in study.recordings] == ["../videos/one.mp4", "../videos/two.mp4"]
    assert [recording.particles for recording in study.recordings] == [("C-01", "K"), ("C-02",)]
    first, second = study.recordings
    assert first.camera.frame_rate is not None
    assert first.camera.frame_rate.value == 50.0
    assert (second.camera.gravity, second.fluid.name, second.column.wall_thickness.value) == ("up", "mud", 0.002)
    assert second.camera.metre_per_px is None
    assert second.camera.marks is not None
    (x1, y1), (x2, y2) = second.camera.marks
    assert second.camera.marks_apart.value / np.hypot(x2 - x1, y2 - y1) == pytest.approx(3e-4, rel=0.02)
    assert y1 > y2  # gravity up: the picture stands on its head
    assert study.particle("K").control
    assert list(drawn["recording"]) == ["../videos/one.mp4", "../videos/one.mp4", "../videos/two.mp4"]


def test_bench_values_miss_the_truth_by_their_uncertainty(small_study: SimulatedStudy, tmp_path: Path) -> None:
    drawn, _ = draw_study(small_study, tmp_path, tmp_path, 3)
    study = read_study(tmp_path)
    for row in drawn.itertuples():
        particle = study.particle(row.particle)
        if particle.control:
            continue
        for name in ("long_axis", "intermediate_axis", "short_axis"):
            typed = getattr(particle, name)
            assert abs(typed.value - getattr(row, name)) < 4 * typed.u
        mass = row.particle_density * np.pi / 6 * row.equivalent_diameter**3
        assert abs(particle.mass.value - mass) < 4 * particle.mass.u
        assert abs(particle.density.value - row.particle_density) < 4 * particle.density.u
    camera = study.recordings[0].camera
    assert abs(camera.metre_per_px.value - 2e-4) < 4 * camera.metre_per_px.u


def test_same_seed_same_files(small_study: SimulatedStudy, tmp_path: Path) -> None:
    for folder in ("one", "two"):
        draw_study(small_study, tmp_path / folder, tmp_path / folder, 3)
    for path in sorted((tmp_path / "one").iterdir()):
        assert path.read_bytes() == (tmp_path / "two" / path.name).read_bytes(), path.name


def test_truth_table_comes_back_from_its_file(small_study: SimulatedStudy, tmp_path: Path) -> None:
    table = truth(small_study.takes[0].scene)
    path = write_truth(table, tmp_path / "deep" / "truth.csv")
    back = from_headings(pd.read_csv(path, dtype=str, keep_default_na=False), DropTruth)
    assert path.read_text(encoding="utf-8").startswith("drop,particle,lot,released_at_s,")
    for name in ("velocity", "equivalent_diameter", "reynolds", "viscosity"):
        assert back[name].astype(float).to_numpy() == pytest.approx(table[name].to_numpy(), rel=1e-6)


def test_random_study_is_complete_and_its_drops_are_good_ones(tmp_path: Path) -> None:
    drawn = random_study(tmp_path, 4, recordings=1, drops=1)
    study = read_study(tmp_path)
    assert len(study.recordings) == drawn["recording"].nunique() == 1
    assert sum((recording.particles for recording in study.recordings), ()) == tuple(drawn["particle"])
    assert (drawn["fraction_of_terminal"] > 0.998).all()
    assert (drawn["last_frame"] - drawn["first_frame"] >= 40).all()
    assert not list(tmp_path.glob("*truth*"))


@pytest.fixture(scope="module")
def dropped() -> pd.DataFrame:
    """What the sample study drops, as the code has it now: terminal states only, the falls take longer to compute."""
    rows = []
    for take in field_study().takes:
        for drop in take.scene.drops:
            state = settle(drop.particle, take.scene, drop.scatter)
            velocity = state.unbounded_velocity * state.wall_factor
            rows.append((drop.particle.name, take.fluid, velocity, state.reynolds))
    return pd.DataFrame(rows, columns=["particle", "fluid", "velocity", "reynolds"])


def test_sample_study_is_what_the_issue_asks_for(dropped: pd.DataFrame) -> None:
    study = field_study()
    assert len(study.takes) >= 8
    assert len(study.cuttings) >= 12
    assert len({particle.lot for particle in study.cuttings}) == 3
    assert len(study.spheres) == 4
    assert (dropped.groupby("particle").size() >= 2).all()
    assert set(dropped["particle"]) == {particle.name for particle in (*study.cuttings, *study.spheres)}
    assert dropped["reynolds"].min() < 1
    assert dropped["reynolds"].max() > 300
    assert (dropped.groupby(["particle", "fluid"]).size() > 1).sum() >= 2  # replicates
    assert all(take.scene.nuisances != Nuisances() for take in study.takes)


def test_sample_on_disk_is_the_one_that_the_code_draws(dropped: pd.DataFrame) -> None:
    stored = pd.read_csv(PROJECT / "tests" / "sample_truth.csv")
    assert list(stored["particle"]) == list(dropped["particle"])
    assert stored["velocity_mm_s"].to_numpy() == pytest.approx(dropped["velocity"].to_numpy() * 1e3, rel=1e-6)
    videos = sorted((PROJECT / "sample_videos").glob("*.mp4"))
    assert [video.name for video in videos] == sorted(take.video for take in field_study().takes)
    assert max(video.stat().st_size for video in videos) < 3e6
    assert sum(video.stat().st_size for video in videos) < 20e6
    for readme in ("sample_videos/README.md", "sample_tables/README.md"):
        assert "imulated" in (PROJECT / readme).read_text(encoding="utf-8")
    assert "Simulated" in (PROJECT / "sample_tables" / "study.toml").read_text(encoding="utf-8")


def test_truth_stays_out_of_the_sample_folders() -> None:
    names = [path.name for folder in ("sample_videos", "sample_tables") for path in (PROJECT / folder).iterdir()]
    assert not [name for name in names if "truth" in name]
    with (PROJECT / "sample_tables" / "study.toml").open("rb") as file:
        typed = tomllib.load(file)
    assert "truth" not in str(typed)
