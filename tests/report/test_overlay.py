from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from settlelab.report import overlay, save_overlay
from tests.report.invented import drop, invented_drops, measured_of, tracked_of


def words(figure: object) -> str:
    texts = list(figure.texts)  # type: ignore[attr-defined]
    for ax in figure.axes:  # type: ignore[attr-defined]
        texts += ax.texts
    return "\n".join(text.get_text() for text in texts)


def test_falls_carry_drop_particle_velocity_and_flags() -> None:
    drops = measured_of(
        [
            drop(4, particle="A-01", velocity=0.0953, velocity_u=0.0006),
            drop(5, particle="A-02", velocity=0.1012, velocity_u=0.0006, flags="accelerating;edge", accepted=False),
            drop(6, particle="", velocity=np.nan),
        ]
    ).drops
    told = words(overlay(tracked_of(), drops))
    assert "4  A-01 · 95.30 ± 0.60 mm/s\n" in told
    assert "5  A-02 · 101.20 ± 0.60 mm/s · accelerating, edge · not accepted" in told
    assert "\n6\n" in f"{told}\n"


def test_without_drop_table_falls_are_numbered() -> None:
    assert "fall 3" in words(overlay(tracked_of()))


def test_other_objects_are_grouped_by_their_reason() -> None:
    told = words(overlay(tracked_of()))
    assert "×  a  not counted: rising: a bubble" in told
    assert "×  b  not counted (2 objects): shorter than 10 frames" in told


def test_a_crowd_of_specks_is_counted_but_not_lettered() -> None:
    specks = tuple(replace(tracked_of().refused[0], reason="too short") for _ in range(7))
    told = words(overlay(replace(tracked_of(), refused=(*specks, *tracked_of().refused))))
    assert "·  not counted (7 objects): too short" in told
    assert "×  a  not counted: rising: a bubble" in told


def test_head_tells_clock_scale_and_time_step() -> None:
    told = words(overlay(tracked_of("a/b1.mp4")))
    assert "b1.mp4" in told
    assert "960 frames, 120.0 Hz as stated · 0.2113 mm/px · one mark every 0.1 s" in told
    container = replace(tracked_of(), clock=replace(tracked_of().clock, source="container"))
    assert "120.0 Hz from the container's clock" in words(overlay(container))


def test_marks_stand_at_equal_steps_of_time() -> None:
    chart = overlay(tracked_of(falls=1)).axes[1]
    marks = next(line for line in chart.lines if line.get_linestyle() == "None")
    assert np.diff(marks.get_xdata()) == pytest.approx(0.1, abs=1 / 120)
    line = next(line for line in chart.lines if line.get_linestyle() == "-")
    slope = np.polyfit(line.get_xdata(), line.get_ydata(), 1)[0]
    assert slope == pytest.approx(420 * 0.2113, rel=1e-6)  # px/s times mm/px


def test_still_is_in_millimetres_with_its_walls() -> None:
    still = overlay(tracked_of()).axes[0]
    assert still.get_xlim() == pytest.approx((0, 360 * 0.2113))
    assert still.get_ylim() == pytest.approx((960 * 0.2113, 0))  # y grows along gravity
    walls = [line.get_xdata()[0] for line in still.lines if list(line.get_ydata()) == [0, 1]]
    assert walls == pytest.approx([20 * 0.2113, 340 * 0.2113])


@pytest.mark.parametrize("size", [(360, 960), (1920, 1080)])
def test_picture_keeps_the_shape_of_the_still_and_stays_handy(size: tuple[int, int]) -> None:
    figure = overlay(tracked_of(size=size))
    box = figure.axes[0].get_position()
    width, height = figure.get_size_inches()
    assert box.width * width / (box.height * height) == pytest.approx(size[0] / size[1])
    assert width <= 14


def test_equal_pictures_give_equal_bytes(tmp_path: Path) -> None:
    drops = measured_of(invented_drops()).drops
    first, second = (save_overlay(overlay(tracked_of(), drops), tmp_path / f"{n}.png").read_bytes() for n in (1, 2))
    assert first == second
    assert first.startswith(b"\x89PNG")


def test_recording_without_falls_or_walls() -> None:
    empty = replace(tracked_of(), falls=(), refused=(), walls=None)
    assert "not counted" not in words(overlay(empty))


def test_many_kinds_of_refusal_all_get_a_letter() -> None:
    refused = tuple(replace(tracked_of().refused[0], reason=f"reason {n}") for n in range(30))
    told = words(overlay(replace(tracked_of(), refused=refused)))
    assert "reason 29" in told
