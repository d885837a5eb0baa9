from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from html.parser import HTMLParser
from pathlib import Path

import pandas as pd
import pytest

from settlelab.calibrate import Calibration
from settlelab.measure import scatter_of
from settlelab.measure.model import Measured
from settlelab.report import write_report
from settlelab.study.model import ReportChoice
from tests.report.invented import calibration_of, drop, invented_drops, measured_of, study_of, tracked_of

SECTIONS = ("glance", "lab-table", "overlays", "drag", "predictions", "ranking", "calibration", "controls", "budget")
SECTIONS += ("repeatability", "drops", "setup", "origin", "cautions", "provenance")
VOID = {"meta", "img", "br", "link"}


class Page(HTMLParser):
    """What a test asks of a page: its text by section, its addresses, and whether its tags are balanced."""

    def __init__(self, path: Path) -> None:
        super().__init__(convert_charrefs=True)
        self.sections: dict[str, str] = {}
        self.addresses: list[str] = []
        self.tags: list[str] = []
        self.open: list[str] = []
        self.source = path.read_text(encoding="utf-8")
        self.feed(self.source)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        named = dict(attrs)
        if tag == "section":
            self.sections[str(named["id"])] = ""
        self.addresses += [str(named[name]) for name in ("src", "href", "srcset", "action") if name in named]
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if "section" in self.open:
            self.sections[list(self.sections)[-1]] += " ".join(data.split()) + " "


Write = Callable[..., Page]


def write_page(directory: Path, measured: Measured, calibration: Calibration | None, **study: object) -> Page:
    told = study_of(**({"recordings": study_of().recordings[:1]} | study))
    tracked = [tracked_of(recording.name, size=(120, 320), falls=4) for recording in told.recordings]
    provenance = {"Input files": {"study.toml": "sha256 ab12"}, "Versions": {"settlelab": "0.1.0"}}
    path = write_report(
        directory, study=told, measured=measured, calibration=calibration, tracked=tracked, provenance=provenance
    )
    return Page(path)


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("results")


@pytest.fixture(scope="module")
def page(results: Path) -> Page:
    """The page of the whole invented study."""
    measured = measured_of(invented_drops())
    return write_page(results, measured, calibration_of(measured), recordings=study_of().recordings[:3])


@pytest.fixture
def write(tmp_path: Path) -> Write:
    """The page of other drops, without calibration unless one is given."""

    def written(measured: Measured, calibration: Calibration | None = None, **study: object) -> Page:
        return write_page(tmp_path, measured, calibration, **study)

    return written


def test_page_is_whole_and_needs_nothing_else(page: Page) -> None:
    assert page.open == []
    assert tuple(page.sections) == SECTIONS
    assert "script" not in page.tags
    assert page.addresses
    assert all(address.startswith("data:image/") for address in page.addresses)
    assert "@import" not in page.source
    assert "url(" not in page.source


def test_every_picture_is_in_the_page_and_kept_as_a_file(page: Page, results: Path) -> None:
    names = ["a1", "a2", "b1"]
    assert sorted(path.name for path in (results / "overlays").iterdir()) == [f"{name}.png" for name in names]
    charts = ["budget.svg", "calibrated.svg", "drag.svg", "published.svg", "ranking.svg"]
    assert sorted(path.name for path in (results / "figures").iterdir()) == charts
    assert page.tags.count("img") == len(names) + len(charts)


def test_same_input_gives_the_same_bytes(page: Page, write: Write) -> None:
    measured = measured_of(invented_drops())
    again = write(measured, calibration_of(measured), recordings=study_of().recordings[:3])
    assert again.source == page.source


def test_head_and_sections_tell_what_they_should(page: Page) -> None:
    assert "Under control: both control drops agree" in page.sections["glance"]
    assert "kehlenbeck-difelice-1999" in page.sections["lab-table"]
    assert "Tested by" in page.sections["lab-table"]
    assert "velocity-power of sphericity is used" in page.sections["calibration"]
    assert "exponent of sphericity" in page.sections["calibration"]
    assert "viscosity, mPa·s" in page.sections["calibration"]
    assert "swamee-ojha-1991 needs corey shape factor" in page.sections["ranking"]
    assert "gravity 9.80665" in page.sections["origin"]
    assert "3 falls for 2 names" in page.sections["origin"]
    assert "not a design for hole cleaning" in page.sections["cautions"]
    assert "licensed practice" in page.sections["cautions"]
    assert "sha256 ab12" in page.sections["provenance"]
    assert "only 91 % of terminal velocity in view" in page.sections["drops"]


def test_simulated_studies_say_so(page: Page, write: Write) -> None:
    assert "Simulated: drawn by settlelab" in page.source
    assert "Simulated: drawn by settlelab" not in write(measured_of([drop(1)]), notes="Second shift.").source


def test_report_choices(write: Write) -> None:
    choice = ReportChoice(units="field", title="Well 7, upper lots", signatures=("Analyst", "Company man"))
    page = write(measured_of(invented_drops()), report=choice)
    assert "<h1>Well 7, upper lots</h1>" in page.source
    assert "velocity in the column ± U, ft/min" in page.sections["lab-table"]
    assert "density, lbm/gal" in page.sections["lab-table"]
    assert "Company man" in page.sections["lab-table"]
    assert "Tested by" not in page.sections["lab-table"]


def test_names_are_text_not_markup(write: Write) -> None:
    nasty = '<script>alert("1")</script> & <b>'
    drops = [drop(1, particle=nasty, lot="<i>", reason="a < b", flags="edge")]
    page = write(measured_of(drops, doubts=(nasty,)), name=nasty, operator=nasty)
    assert "script" not in page.tags
    assert nasty in page.sections["drops"]
    assert nasty in page.sections["origin"]


def test_without_calibration(write: Write) -> None:
    page = write(measured_of(invented_drops()))
    assert "No drop could be compared." in page.sections["ranking"]
    assert "No drop could be compared." in page.sections["calibration"]


def test_replicates_and_falling_ball_viscosity(write: Write) -> None:
    measured = measured_of(invented_drops())
    row = {"fluid": "glycerol", "drops": 2, "viscosity": 0.0113, "viscosity_u": 0.0004, "stated_viscosity": 0.0111}
    viscosities = pd.DataFrame([row | {"stated_viscosity_u": 0.0002, "source": "drag law"}])
    page = write(replace(measured, scatter=scatter_of(measured.drops), viscosities=viscosities))
    assert "repeatability limit r, %" in page.sections["repeatability"]
    assert "No drop and no particle stands out" in page.sections["repeatability"]
    assert "11.30 ± 0.40" in page.sections["controls"]


def test_published_law_kept(write: Write) -> None:
    measured = measured_of(invented_drops())
    page = write(measured, calibration_of(measured, chosen=None, notes=("ganser-1993 is kept.", "A second note.")))
    assert "ganser-1993 is kept." in page.sections["glance"]
    assert "A second note." in page.sections["calibration"]
    assert "chien-1994" in page.sections["ranking"]


def test_without_controls(write: Write) -> None:
    page = write(measured_of([row for row in invented_drops() if not row["control"]]))
    assert "No control sphere was dropped." in page.sections["controls"]


def test_single_drop(write: Write) -> None:
    page = write(measured_of([drop(1, particle="A-01", lot="A")]))
    assert "Accepted: the one drop." in page.sections["glance"]
    assert "A-01" in page.sections["lab-table"]


def test_no_accepted_drop(write: Write) -> None:
    drops = [drop(1, particle="A-01", lot="A", accepted=False, flags="blurred", reason="out of focus")]
    page = write(measured_of(drops))
    assert "None of 1 drops is accepted. Refused: 1 blurred." in page.sections["glance"]
    assert "out of focus" in page.sections["drops"]
    assert "No accepted drop." in page.sections["budget"]


def test_no_fall_at_all(write: Write) -> None:
    page = write(measured_of([]))
    assert "No fall was found" in page.sections["glance"]
    assert tuple(page.sections) == SECTIONS


def test_recordings_of_one_name_in_two_folders_keep_their_own_overlay(write: Write, tmp_path: Path) -> None:
    recording = study_of().recordings[0]
    names = ("day1/a.mp4", "day2/a.mp4", "a.mp4", "a.avi")
    write(measured_of([]), recordings=tuple(replace(recording, name=name) for name in names))
    assert len(list((tmp_path / "overlays").iterdir())) == 4
