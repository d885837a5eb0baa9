"""Particle and viscometer tables: values, descriptors, what is assumed, what is refused."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from settlelab.errors import Fault
from settlelab.study import read_table
from settlelab.study.model import Particle, ViscometerReadings
from settlelab.study.particles import read_particles
from settlelab.study.viscometer import read_viscometer
from settlelab.units import Quantity


def particles_of(folder: Path, content: str) -> tuple[tuple[Particle, ...], tuple[str, ...], list[str]]:
    """Particles, what was assumed, sentences."""
    path = folder / "particles.csv"
    path.write_text(content, encoding="utf-8")
    faults: list[Fault] = []
    particles, assumed = read_particles(read_table(path), faults)
    return particles, assumed, [str(fault) for fault in faults]


def test_everything_that_can_be_measured(tmp_path: Path) -> None:
    particles, assumed, faults = particles_of(
        tmp_path,
        "Particle;Lot;mass [mg];density [g/cm³];diameter [mm];long axis [mm];intermediate axis [mm];short axis [mm];"
        "sphericity;circularity;roundness [µm];remark\n"
        "007;A;12,4 ± 0,1;2,65 ± 0,01;1 ± 0,1;3 ± 0,1;2 ± 0,1;1 ± 0,1;0,8 ± 0,1;0,9 ± 0,1;0,31;wet\n",
    )
    assert faults == []
    assert assumed == ('particles.csv: column "remark" is text and not used',)

    def near(value: float, u: float) -> Quantity:
        return Quantity(pytest.approx(value), pytest.approx(u))

    assert particles == (
        Particle(
            name="007",
            lot="A",
            row=2,
            mass=near(12.4e-6, 1e-7),
            density=near(2650.0, 10.0),
            diameter=near(1e-3, 1e-4),
            long_axis=near(3e-3, 1e-4),
            intermediate_axis=near(2e-3, 1e-4),
            short_axis=near(1e-3, 1e-4),
            sphericity=near(0.8, 0.1),
            circularity=near(0.9, 0.1),
            descriptors={"roundness": 0.31},
        ),
    )


def test_what_is_assumed_is_said(tmp_path: Path) -> None:
    _, assumed, faults = particles_of(
        tmp_path,
        "particle,mass [mg],density [g/cm3],roundness,u(roundness)\nA-01,3 ± 1,2.65,0.3,0.1\nA-02,4,,0.2,0.1\n",
    )
    assert faults == []
    assert assumed == (
        'particles.csv: column "u(roundness)" is an uncertainty of a descriptor and not used',
        'particles.csv: no uncertainty is stated for "density [g/cm3]"; taken as 0',
        'particles.csv, column "mass [mg]", row 3: no uncertainty is stated; taken as 0',
        "particles.csv: gives no density, so no drag coefficient, for A-02",
        "particles.csv: gives no size for A-02; that of the silhouette is taken",
    )


def test_all_faults_of_a_table_in_one_go(tmp_path: Path) -> None:
    particles, _, faults = particles_of(
        tmp_path,
        "particle,mass [mg],sphericity,long axis [mm],intermediate axis [mm],short axis [mm],roundness\n"
        "A-01,-12.4,1.2,3,2,1,0.3\n"
        "A-01,12.4,0.8,3,4,1,x\n"
        ",12.4,0.8,3,2,2.5,0.2\n"
        "A-04,12.4,0.8,3,,3.5,\n",
    )
    assert sorted(faults) == [
        'particles.csv, row 2, column "mass [mg]": "-12.4" is not a mass above 0',
        'particles.csv, row 2, column "sphericity": "1.2" is not a number above 0 and at most 1, as this shape '
        "descriptor is",
        'particles.csv, row 3, column "intermediate axis [mm]": "4" is not an axis of at most the long axis, "3"',
        'particles.csv, row 3, column "particle": "A-01" is not a new name: it stands in row 2 too',
        'particles.csv, row 3, column "roundness": "x" is not a number such as "0.82 ± 0.01"',
        'particles.csv, row 4, column "particle": missing, expected the name of the particle',
        'particles.csv, row 4, column "short axis [mm]": "2.5" is not an axis of at most the intermediate axis, "2"',
        'particles.csv, row 5, column "short axis [mm]": "3.5" is not an axis of at most the long axis, "3"',
    ]
    assert [particle.name for particle in particles] == ["A-01", "A-01", "A-04"]


@pytest.mark.parametrize(
    ("heading", "meant"),
    [("mas [mg]", "mass"), ("densty [g/cm3]", "density"), ("long [mm]", "long axis"), ("lots", "lot")],
)
def test_a_wrong_heading(tmp_path: Path, heading: str, meant: str) -> None:
    _, _, faults = particles_of(tmp_path, f"particle,{heading}\nA-01,1\n")
    sentence = f'"{heading}" is not a heading of this table (did you mean "{meant}"?)'
    assert faults == [f"particles.csv, row 1: {sentence}"]


def test_a_table_without_names(tmp_path: Path) -> None:
    assert particles_of(tmp_path, "mass [mg]\n1\n")[2] == [
        'particles.csv: missing, expected a column "particle" with the name of each particle'
    ]
    assert particles_of(tmp_path, "partical,mass [mg]\nA,1\n")[2] == [
        'particles.csv, row 1: "partical" is not a heading of this table (did you mean "particle"?)'
    ]


def readings_of(folder: Path, content: str) -> tuple[ViscometerReadings | None, tuple[str, ...], list[str]]:
    """Readings, what was assumed, sentences."""
    path = folder / "viscometer.csv"
    path.write_text(content, encoding="utf-8")
    faults: list[Fault] = []
    readings, assumed = read_viscometer(read_table(path), faults)
    return readings, assumed, [str(fault) for fault in faults]


# constants of the R1B1 geometry: ../shared/reference/check_values_lab.csv, VR-01 and VR-02
def test_dial_readings(tmp_path: Path) -> None:
    readings, assumed, faults = readings_of(tmp_path, "speed [rpm],dial [deg]\n600,54\n300,36.5 ± 0.2\n")
    assert faults == []
    assert assumed == ("viscometer.csv: each dial without an uncertainty is taken to have 0.5 degree",)
    assert readings is not None
    np.testing.assert_allclose(readings.shear_rate, [600 * 1.7023, 300 * 1.7023])
    np.testing.assert_allclose(readings.shear_stress, [54 * 0.5107, 36.5 * 0.5107])
    np.testing.assert_allclose(readings.u_shear_stress, [0.5 * 0.5107, 0.2 * 0.5107])


def test_stress_readings(tmp_path: Path) -> None:
    content = "shear rate [1/s];shear stress [mPa];u(shear stress) [mPa]\n10;500;\n100;2500;10\n"
    readings, assumed, faults = readings_of(tmp_path, content)
    assert faults == []
    assert assumed == ("viscometer.csv: each shear stress without an uncertainty is taken to have 1%",)
    assert readings is not None
    np.testing.assert_allclose(readings.shear_rate, [10, 100])
    np.testing.assert_allclose(readings.shear_stress, [0.5, 2.5])
    np.testing.assert_allclose(readings.u_shear_stress, [0.005, 0.01])


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        ("speed [rpm]\n600\n", "viscometer.csv: missing, expected one column dial [deg] or shear stress [Pa]"),
        (
            "speed [rpm],shear rate [1/s],dial [deg]\n600,1021,54\n",
            'viscometer.csv: "speed and shear_rate" is not one column speed [rpm] or shear rate [1/s]',
        ),
        (
            "speed [rpm],dial [deg]\n600,54\n300,\n",
            'viscometer.csv, row 3, column "dial [deg]": missing, expected a reading',
        ),
        (
            "speed [rpm],dial [deg]\n0,1\n",
            'viscometer.csv, row 2, column "speed [rpm]": "0" is not a turning speed above 0',
        ),
        (
            "speed [1/s],dial [deg]\n10,1\n",
            'viscometer.csv, row 1: "speed [1/s]" is not a heading with a unit of turning speed, such as [rpm] '
            '(unit "1/s" does not fit; known here: rpm)',
        ),
    ],
)
def test_what_is_wrong_with_readings(tmp_path: Path, content: str, sentence: str) -> None:
    readings, _, faults = readings_of(tmp_path, content)
    assert readings is None
    assert faults == [sentence]
