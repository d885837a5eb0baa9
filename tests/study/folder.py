"""An invented study folder that is right in every part; tests change one thing in it."""

from __future__ import annotations

from pathlib import Path

import pytest

from settlelab.errors import InputFaults
from settlelab.study import read_study

STUDY = """\
[study]
name = "Upper lots"
date = 2026-03-31

[[fluid]]
name = "glycerol"
liquid = "glycerol-water"
mass_fraction = "62 ± 0.3 %"
temperature = "21.4 ± 0.2 °C"

[[fluid]]
name = "polymer"
liquid = "measured"
density = "1006 ± 0.5 kg/m3"
viscometer = "viscometer.csv"
rheology = "power-law"
temperature = "22.0 ± 0.2 °C"

[column]
section = "round"
inner_diameter = "190.0 ± 0.5 mm"
height = "1200 mm"

[camera]
frame_rate = "120 Hz"
mm_per_px = "0.2113 ± 0.0003 mm/px"
gravity = "down"

[particles]
table = "particles.csv"

[[control]]
particle = "S-1"
diameter = "6.000 ± 0.005 mm"
density = "2210 ± 5 kg/m3"

[[recording]]
video = "a1.mp4"
particles = ["A-01", "A-02", "S-1"]
fluid = "glycerol"

[[recording]]
video = "b1.mp4"
particles = ["A-02", "A-02"]
fluid = "polymer"

[calibration]
descriptors = ["sphericity"]
target = "10 %"

[report]
units = "field"
title = "Settling of the upper lots"
signatures = ["Technician"]
"""
PARTICLES = """\
particle,lot,mass [mg],u(mass) [mg],density [kg/m3],long axis [mm],intermediate axis [mm],short axis [mm],roundness
A-01,A,12.4,0.1,2650 ± 5,3.1,2.4,1.6,0.31
A-02,A,15.0,0.1,2650 ± 5,3.3,2.2,1.9,0.28
"""
VISCOMETER = "speed [rpm],dial [deg]\n600,54.0 ± 0.5\n300,36.5 ± 0.5\n6,4.5 ± 0.5\n"


def write_study(folder: Path, *changes: tuple[str, str], particles: str = PARTICLES) -> Path:
    """The folder, with each change made once in study.toml."""
    text = STUDY
    for old, new in changes:
        assert text.count(old) >= 1, old
        text = text.replace(old, new, 1)
    (folder / "study.toml").write_text(text, encoding="utf-8")
    (folder / "particles.csv").write_text(particles, encoding="utf-8")
    (folder / "viscometer.csv").write_text(VISCOMETER, encoding="utf-8")
    for video in ("a1.mp4", "b1.mp4"):
        (folder / video).write_bytes(b"")
    return folder


def faults_of(folder: Path) -> list[str]:
    """The sentences about a study that is wrong."""
    with pytest.raises(InputFaults) as refused:
        read_study(folder)
    return str(refused.value).splitlines()
