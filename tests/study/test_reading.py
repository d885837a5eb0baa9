"""A whole study: every key of the design, overrides, what is assumed, and every fault with its sentence."""

from __future__ import annotations

from pathlib import Path

import pytest

from settlelab.errors import InputFaults
from settlelab.study import read_study, study_summary
from settlelab.units import Quantity
from tests.study.folder import PARTICLES, faults_of, write_study


def test_every_part_in_si(tmp_path: Path) -> None:
    study = read_study(write_study(tmp_path))
    assert (study.name, study.date) == ("Upper lots", "2026-03-31")
    glycerol, polymer = study.fluids
    assert glycerol.mass_fraction == Quantity(0.62, 0.003)
    assert glycerol.temperature == Quantity(pytest.approx(294.55), pytest.approx(0.2))
    assert polymer.density == Quantity(1006.0, 0.5)
    assert polymer.rheology == "power-law"
    assert polymer.readings is not None
    assert polymer.readings.shear_rate.shape == (3,)
    assert [particle.name for particle in study.particles] == ["A-01", "A-02", "S-1"]
    assert study.particle("S-1").control
    assert study.particle("S-1").diameter == Quantity(pytest.approx(6e-3), pytest.approx(5e-6))
    first, second = study.recordings
    assert (first.name, first.video) == ("a1.mp4", tmp_path / "a1.mp4")
    assert first.particles == ("A-01", "A-02", "S-1")
    assert second.particles == ("A-02", "A-02")
    assert (first.fluid, second.fluid) == (glycerol, polymer)
    assert first.camera.metre_per_px == Quantity(pytest.approx(2.113e-4), pytest.approx(3e-7))
    assert first.camera.frame_rate == Quantity(120.0)
    assert first.column.inner_diameter == Quantity(0.19, 5e-4)
    assert first.column.height == Quantity(pytest.approx(1.2))
    assert study.calibration.descriptors == ("sphericity",)
    assert study.calibration.target == pytest.approx(0.1)
    assert (study.report.units, study.report.signatures) == ("field", ("Technician",))
    assert [path.name for path in study.inputs] == ["study.toml", "viscometer.csv", "particles.csv"]
    assert study.assumed == (
        'particles.csv: no uncertainty is stated for "long axis [mm]", "intermediate axis [mm]", "short axis [mm]"; '
        "taken as 0",
    )


def test_file_or_folder(tmp_path: Path) -> None:
    assert read_study(write_study(tmp_path) / "study.toml").file == read_study(tmp_path).file


def test_overrides_of_a_recording(tmp_path: Path) -> None:
    change = 'video = "b1.mp4"\ncamera.mm_per_px = 0.1874\ncolumn.inner_diameter = "100 ± 1 mm"'
    first, second = read_study(write_study(tmp_path, ('video = "b1.mp4"', change))).recordings
    assert second.camera.metre_per_px == Quantity(pytest.approx(1.874e-4))
    assert second.camera.frame_rate == first.camera.frame_rate
    assert second.column.inner_diameter == Quantity(pytest.approx(0.1), pytest.approx(1e-3))
    assert second.column.height == first.column.height


def test_another_way_of_giving_the_scale_replaces_that_of_the_study(tmp_path: Path) -> None:
    change = 'fluid = "polymer"\n[recording.camera]\nmarks = [[10, 20], [10.5, 980]]\nmarks_apart = "100.0 ± 0.1 mm"'
    _, second = read_study(write_study(tmp_path, ('fluid = "polymer"', change))).recordings
    assert second.camera.metre_per_px is None
    assert second.camera.marks == ((10.0, 20.0), (10.5, 980.0))


def test_another_section_of_the_column_replaces_its_dimensions(tmp_path: Path) -> None:
    change = 'fluid = "polymer"\n[recording.column]\nsection = "rectangular"\nwidth = "200 mm"\ndepth = "150 mm"'
    _, second = read_study(write_study(tmp_path, ('fluid = "polymer"', change))).recordings
    assert second.column.inner_diameter is None
    assert second.column.depth == Quantity(0.15)
    assert second.column.height == Quantity(pytest.approx(1.2))


@pytest.mark.parametrize(
    ("scale", "attribute"),
    [
        ('graduation = "10.00 ± 0.02 mm"', "graduation"),
        ('checkerboard = "board.png"\nsquare = "10 mm"', "checkerboard"),
        ('marks = [[412, 96], [415, 1010]]\nmarks_apart = "100.0 ± 0.1 mm"', "marks"),
    ],
)
def test_ways_of_giving_the_scale(tmp_path: Path, scale: str, attribute: str) -> None:
    (tmp_path / "board.png").write_bytes(b"")
    folder = write_study(tmp_path, ('mm_per_px = "0.2113 ± 0.0003 mm/px"', scale))
    assert getattr(read_study(folder).recordings[0].camera, attribute) is not None


def test_a_folder_of_pictures_needs_the_frame_rate(tmp_path: Path) -> None:
    (tmp_path / "frames").mkdir()
    (tmp_path / "frames" / "0001.png").write_bytes(b"")
    change = ('video = "b1.mp4"', 'video = "frames"')
    assert read_study(write_study(tmp_path, change)).recordings[1].video == tmp_path / "frames"
    assert faults_of(write_study(tmp_path, change, ('frame_rate = "120 Hz"\n', ""))) == [
        'study.toml, recording 2, camera.frame_rate: missing, expected a frequency such as "120 Hz", as pictures have '
        "no clock"
    ]


def test_one_fluid_needs_no_name(tmp_path: Path) -> None:
    water = '[[fluid]]\nliquid = "water"\ntemperature = "20 ± 0.1 °C"\n'
    folder = write_study(tmp_path)
    text = (folder / "study.toml").read_text(encoding="utf-8")
    before, after = text[: text.index("[[fluid]]")], text[text.index("[column]") :]
    without = after.replace('fluid = "glycerol"\n', "").replace('fluid = "polymer"\n', "")
    (folder / "study.toml").write_text(before + water + without, encoding="utf-8")
    study = read_study(folder)
    assert [recording.fluid for recording in study.recordings] == [study.fluids[0]] * 2


def test_what_was_not_typed_is_told(tmp_path: Path) -> None:
    folder = write_study(
        tmp_path,
        ('gravity = "down"\n', ""),
        ('frame_rate = "120 Hz"\n', ""),
        ('rheology = "power-law"\n', ""),
        ("1006 ± 0.5 kg/m3", "1006 kg/m3"),
        ("190.0 ± 0.5 mm", "190 mm"),
    )
    assert [sentence for sentence in read_study(folder).assumed if sentence.startswith("study.toml")] == [
        "study.toml, fluid 2: density states no uncertainty; taken as 0",
        'study.toml, fluid 2: rheology not given; taken as "best"',
        'study.toml, camera: gravity not given; taken as "down"',
        "study.toml, column: inner_diameter states no uncertainty; taken as 0",
        "study.toml: no frame_rate for any recording; the clock of the video file is taken",
    ]


FAULTS = {
    "missing video": (
        'video = "a1.mp4"',
        'video = "a1.mp"',
        'recording 1, video: "a1.mp" is not a file that exists, beside study.toml (did you mean "a1.mp4"?)',
    ),
    "the same video twice": (
        'video = "b1.mp4"',
        'video = "a1.mp4"',
        'recording 2, video: "a1.mp4" is not a recording that stands only once',
    ),
    "particle that the table lacks": (
        '"A-01", "A-02"',
        '"A-01", "A-2"',
        'recording 1, particles: "A-2" is not a particle of the particle table or a [[control]] (did you mean "A-02"?)',
    ),
    "control named like a particle": (
        'particle = "S-1"',
        'particle = "A-01"\ndiameter = "5 ± 0.1 mm"\ndensity = "2 ± 0.1 g/cm3"\n\n[[control]]\nparticle = "S-1"',
        'control 1, particle: "A-01" is not a name that no other particle has',
    ),
    "unknown fluid": (
        'fluid = "glycerol"',
        'fluid = "glycerin"',
        'recording 1, fluid: "glycerin" is not a fluid of this study (did you mean "glycerol"?)',
    ),
    "no fluid among several": (
        'fluid = "polymer"',
        "",
        'recording 2, fluid: missing, expected one of the fluids: "glycerol", "polymer"',
    ),
    "unknown key": ("gravity =", "gravty =", 'camera: "gravty" is not a key of [camera] (did you mean "gravity"?)'),
    "unknown key of an override": (
        'fluid = "polymer"',
        'fluid = "polymer"\ncamera.gravty = "up"',
        'recording 2, camera: "gravty" is not a key of [camera] (did you mean "gravity"?)',
    ),
    "wrong choice": (
        'gravity = "down"',
        'gravity = "downwards"',
        'camera, gravity: "downwards" is not "down", "up", "left" or "right" (did you mean "down"?)',
    ),
    "unknown unit": (
        '"1200 mm"',
        '"1200 mn"',
        'column, height: "1200 mn" is not a length such as "12.4 ± 0.1 mm" (unit "mn" is unknown; known here: mm, cm, '
        "m, um, in, ft)",
    ),
    "no unit": (
        '"1200 mm"',
        "1200",
        'column, height: "1200" is not a length such as "12.4 ± 0.1 mm" (its unit is missing)',
    ),
    "negative length": ('"1200 mm"', '"-1200 mm"', 'column, height: "-1200 mm" is not a length above 0'),
    "more than all of it": (
        '"62 ± 0.3 %"',
        '"162 ± 0.3 %"',
        'fluid 1, mass_fraction: "162 ± 0.3 %" is not a number between 0 and 100 %',
    ),
    "boiling": (
        '"21.4 ± 0.2 °C"',
        '"101 ± 0.2 °C"',
        'fluid 1, temperature: "101.00 ± 0.20 °C" is not a temperature between 0 and 100 °C, where water is liquid',
    ),
    "grams for kilograms": (
        '"1006 ± 0.5 kg/m3"',
        '"1.006 ± 0.0005 kg/m3"',
        'fluid 2, density: "1.006 ± 0.0005 kg/m3" is not a density between 400 and 14000 kg/m3, as a liquid has',
    ),
    "infinite": ('"10 %"', "inf", 'calibration, target: "inf" is not a number such as "0.82 ± 0.01"'),
    "two scales": (
        'gravity = "down"',
        'graduation = "10 mm"',
        'camera: "mm_per_px and graduation" is not one way of giving the scale: keep one of them',
    ),
    "no scale": (
        'mm_per_px = "0.2113 ± 0.0003 mm/px"',
        "",
        "camera: missing, expected a scale: mm_per_px, marks with marks_apart, graduation, or checkerboard with square",
    ),
    "half a scale": (
        'mm_per_px = "0.2113 ± 0.0003 mm/px"',
        "marks = [[412, 96], [415, 1010]]",
        'camera, marks_apart: missing, expected a length such as "12.4 ± 0.1 mm"',
    ),
    "marks that are no points": (
        'mm_per_px = "0.2113 ± 0.0003 mm/px"',
        'marks = [[412, 96]]\nmarks_apart = "100 mm"',
        'camera, marks: "[[412, 96]]" is not two different points in px such as [[412, 96], [415, 1010]]',
    ),
    "round without diameter": (
        'inner_diameter = "190.0 ± 0.5 mm"',
        "",
        'column, inner_diameter: missing, expected a length such as "12.4 ± 0.1 mm"',
    ),
    "round with a width": (
        'height = "1200 mm"',
        'width = "1200 mm"',
        'column: "width" is not a dimension of a round column (that is inner_diameter)',
    ),
    "water with a density": (
        "mass_fraction =",
        'density = "1 g/cm3"\nmass_fraction =',
        'fluid 1: "density" is not a key for liquid = "glycerol-water"; what was measured belongs to liquid = '
        '"measured"',
    ),
    "mixture without its share": (
        'mass_fraction = "62 ± 0.3 %"',
        "",
        'fluid 1, mass_fraction: missing, expected the glycerol mass fraction such as "62 ± 0.3 %"',
    ),
    "measured without flow": (
        'viscometer = "viscometer.csv"',
        "",
        'fluid 2: missing, expected viscosity = "42.0 ± 0.8 mPa s" or viscometer = "viscometer.csv"',
    ),
    "viscosity and readings": (
        'viscometer = "viscometer.csv"',
        'viscometer = "viscometer.csv"\nviscosity = "42 mPa s"',
        'fluid 2: "viscosity and viscometer" is not one of the two: viscosity = "42.0 ± 0.8 mPa s" or viscometer = '
        '"viscometer.csv"',
    ),
    "power law from one viscosity": (
        'viscometer = "viscometer.csv"',
        'viscosity = "42 mPa s"',
        'fluid 2, rheology: "power-law" is not possible with one viscosity: give viscometer = "viscometer.csv"',
    ),
    "missing table": (
        'table = "particles.csv"',
        'table = "particle.csv"',
        'particles, table: "particle.csv" is not a file that exists, beside study.toml (did you mean "particles.csv"?)',
    ),
    "unknown section": ("[report]", "[raport]", '"raport" is not a section of a study (did you mean "report"?)'),
    "single brackets": (
        "[[control]]",
        "[control]",
        '"[control]" is not [[control]] in double brackets, as there may be several',
    ),
    "number for a text": ('name = "Upper lots"', "name = 7", 'study, name: "7" is not text in quotes'),
    "no names": (
        'particles = ["A-02", "A-02"]',
        "particles = []",
        "recording 2, particles: missing, expected the names of the particles in order of release, such as "
        '["A-01", "A-02"]',
    ),
}


@pytest.mark.parametrize("case", FAULTS)
def test_a_fault_has_one_clear_sentence(tmp_path: Path, case: str) -> None:
    old, new, sentence = FAULTS[case]
    place = ": " if case in ("unknown section", "single brackets") else ", "
    assert faults_of(write_study(tmp_path, (old, new))) == [f"study.toml{place}{sentence}"]


def test_all_faults_of_a_study_and_its_tables_in_one_go(tmp_path: Path) -> None:
    folder = write_study(
        tmp_path,
        ("gravity =", "gravty ="),
        ('"1200 mm"', '"1200 mn"'),
        ('video = "b1.mp4"', 'video = "c1.avi"'),
        particles=PARTICLES.replace("12.4,", "-12.4,").replace("3.3,2.2", "2.2,3.3"),
    )
    (folder / "viscometer.csv").write_text("speed [rpm],dial [grad]\n600,54\n", encoding="utf-8")
    found = [fault.partition(":")[0] for fault in faults_of(folder)]
    assert found == [
        "study.toml, column, height",
        "study.toml, camera",
        "study.toml, recording 2, video",
        "viscometer.csv, row 1",
        'particles.csv, row 2, column "mass [mg]"',
        'particles.csv, row 3, column "intermediate axis [mm]"',
    ]


def test_a_particle_at_fault_is_not_reported_as_unknown_too(tmp_path: Path) -> None:
    faults = faults_of(write_study(tmp_path, particles=PARTICLES.replace("A-02,A,15.0", "A-02,A,heavy")))
    assert len(faults) == 1


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        (
            b"[column]\nheight = 12.4 mm\n",
            'study.toml, line 2: "height = 12.4 mm" is not a line of TOML (expected newline or end of document after a '
            'statement); text and quantities stand in quotes: key = "12.4 ± 0.1 mm"',
        ),
        (
            b'section = "round"\nsection = "round"\n',
            'study.toml, line 2: "section = "round"" is not a line of TOML (the same key stands above it)',
        ),
        (
            'temperature = "21.4 °C"\n'.encode("cp1252"),
            'study.toml, line 1: "°" is not UTF-8, the encoding of TOML: save the file as UTF-8',
        ),
    ],
)
def test_a_file_that_is_no_toml(tmp_path: Path, content: bytes, sentence: str) -> None:
    (tmp_path / "study.toml").write_bytes(content)
    assert faults_of(tmp_path) == [sentence]


def test_a_byte_order_mark_does_no_harm(tmp_path: Path) -> None:
    file = write_study(tmp_path) / "study.toml"
    file.write_bytes(b"\xef\xbb\xbf" + file.read_bytes())
    assert read_study(tmp_path).name == "Upper lots"


def test_no_study_at_all(tmp_path: Path) -> None:
    sentence = r"study.toml: missing, expected a study file \(settlelab new DIR writes one to fill in\)"
    with pytest.raises(InputFaults, match=sentence):
        read_study(tmp_path)


def test_an_empty_study_says_what_it_needs(tmp_path: Path) -> None:
    (tmp_path / "study.toml").write_bytes(b"")
    assert faults_of(tmp_path) == [
        "study.toml, [[fluid]]: missing, expected at least one test fluid",
        'study.toml, column, section: missing, expected "round" or "rectangular"',
        "study.toml, camera: missing, expected a scale: mm_per_px, marks with marks_apart, graduation, or checkerboard "
        "with square",
        "study.toml, [[recording]]: missing, expected at least one recording",
    ]


def test_summary_names_what_will_be_used(tmp_path: Path) -> None:
    summary = study_summary(read_study(write_study(tmp_path)))
    assert summary["Fluids"] == (
        "glycerol: glycerol-water, 62.00 ± 0.30 % glycerol by mass, 21.40 ± 0.20 °C",
        "polymer: measured, 1006.00 ± 0.50 kg/m3, 3 viscometer readings from 10.21 to 1021 1/s, rheology: power-law, "
        "22.00 ± 0.20 °C",
    )
    assert summary["Particles"][0] == "2 in 1 lot: A 2"
    assert summary["Particles"][2] == "descriptors: roundness 2"
    assert summary["Controls"] == ("S-1, 6.0000 ± 0.0050 mm, 2210.0 ± 5.0 kg/m3",)
    assert summary["Recordings"] == (
        "a1.mp4: 3 drops in glycerol: A-01, A-02, S-1",
        "  column: round, inner diameter 190.00 ± 0.50 mm, height 1200 mm",
        "  camera: 120 Hz, scale 0.21130 ± 0.00030 mm/px, gravity down",
        "b1.mp4: 2 drops in polymer: A-02, A-02",
    )
