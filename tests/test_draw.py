"""The drawing of a vessel, as plain text."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc.tui.draw import ASCII, UNICODE, Band, Frame, Picture, fit, layer_rows, picture
from tankcalc.tui.labels import Label, place

UPRIGHT = [(-10.0, 0.0), (10.0, 0.0), (10.0, 15.0), (-10.0, 15.0)]
SLIM = [(-1.0, 0.0), (1.0, 0.0), (1.0, 8.0), (-1.0, 8.0)]
SPHERE = [(6 * math.cos(math.pi * k / 50), 6 + 6 * math.sin(math.pi * k / 50)) for k in range(100)]
CONE_UP = [(-10.0, 0.0), (0.0, 3.0), (10.0, 0.0), (10.0, 9.0), (-10.0, 9.0)]


def drawn(outline: list[tuple[float, float]], *bands: Band, **more: object) -> Picture:
    return picture(outline, bands, [], 30, 14, **more)  # type: ignore[arg-type]


def rows_of(made: Picture, layer: int) -> list[int]:
    return [row for row, classes in enumerate(made.classes) if str(layer) in classes]


def test_a_tank_is_drawn_with_walls_floor_roof_and_a_surface() -> None:
    label = Label(9.4, "9.400 m", 0)
    made = picture(UPRIGHT, [Band(0.0, 9.4)], [label], 30, 10, least_share=0.9)
    assert [row.rstrip() for row in made.rows] == [
        "",
        "▄▄▄▄▄▄▄▄▄▄▄▄▄▄",
        "▐            ▌",
        "▐            ▌",
        "▐▄▄▄▄▄▄▄▄▄▄▄▄▌ <9.400 m",
        "▐▓▓▓▓▓▓▓▓▓▓▓▓▌",
        "▐▓▓▓▓▓▓▓▓▓▓▓▓▌",
        "▐▓▓▓▓▓▓▓▓▓▓▓▓▌",
        "▐▓▓▓▓▓▓▓▓▓▓▓▓▌",
        "▀▀▀▀▀▀▀▀▀▀▀▀▀▀",
    ]


def test_ascii_mode_draws_the_same_shape_without_any_other_character() -> None:
    bands = [Band(0.0, 2.0), Band(2.0, 8.0)]
    made = picture(UPRIGHT, bands, [], 30, 10, ASCII, least_share=0.9)
    assert all(row.isascii() for row in made.rows)
    assert made.rows[-1].rstrip() == "##############"
    assert made.rows[-2].rstrip() == "#============#"
    assert made.rows[-4].rstrip() == "#------------#"


def test_every_row_and_its_classes_fill_the_width() -> None:
    made = picture(SPHERE, [Band(0.0, 7.0)], [Label(7.0, "7.000 m", 0)], 30, 14)
    assert {len(row) for row in made.rows} == {len(row) for row in made.classes} == {30}
    assert len(made.rows) == len(made.classes) == 14


def test_a_sphere_is_widest_in_the_middle_and_round() -> None:
    made = picture(SPHERE, [], [], 46, 24)
    spans = [len(row.strip()) for row in made.rows if row.strip()]
    assert max(spans) == spans[len(spans) // 2]
    assert max(spans) == pytest.approx(2 * len(spans), abs=2)  # a cell is twice as high as wide


def test_an_empty_or_unknown_vessel_shows_no_liquid() -> None:
    made = drawn(UPRIGHT)
    assert not any(ch.isdigit() for row in made.classes for ch in row)


def test_a_thin_layer_still_gets_a_row_between_its_neighbours() -> None:
    made = drawn(SLIM, Band(0.0, 4.0), Band(4.0, 4.001), Band(4.001, 5.0))
    assert len(rows_of(made, 1)) == 1
    assert max(rows_of(made, 2)) < rows_of(made, 1)[0] < min(rows_of(made, 0))


def test_a_thin_water_bottom_is_not_hidden_behind_the_floor() -> None:
    made = drawn(UPRIGHT, Band(0.0, 0.02), Band(0.02, 12.0))
    assert rows_of(made, 0) == [12]
    assert "▓" in made.rows[12]


def test_a_drop_of_liquid_is_still_seen() -> None:
    assert rows_of(drawn(UPRIGHT, Band(0.0, 0.001)), 0) == [12]


def test_a_bottom_that_points_up_parts_the_liquid() -> None:
    made = picture(CONE_UP, [Band(0.0, 1.0)], [], 60, 24)
    lowest = made.classes[-2]
    assert "0" in lowest[: len(lowest) // 3]
    assert lowest.strip("w ").count("w") > 2, "the cone stands between the two sides"


def test_a_low_long_vessel_is_stretched_so_that_its_level_can_be_read() -> None:
    low = [(0.0, 0.0), (20.0, 0.0), (20.0, 1.0), (0.0, 1.0)]
    assert fit(low, 14, 14) == (14, round(0.65 * 14))
    assert fit(SLIM, 14, 14)[0] == 9


@given(
    tops=st.lists(st.floats(0.01, 15.0), min_size=1, max_size=5, unique=True),
    height=st.integers(8, 40),
)
def test_layers_keep_their_order_and_none_is_lost(tops: list[float], height: int) -> None:
    tops.sort()
    bands = [Band(z0, z1) for z0, z1 in zip([0.0, *tops[:-1]], tops, strict=True)]
    frame = Frame.around(UPRIGHT, 14, height)
    owner, _ = layer_rows(bands, frame, range(1, height - 1))
    from_top = [owner[row] for row in sorted(owner)]
    assert from_top == sorted(from_top, reverse=True)
    assert set(from_top) == set(range(len(bands)))


@given(level=st.floats(0.0, 15.0))
def test_the_surface_lies_within_a_row_of_its_level(level: float) -> None:
    frame = Frame.around(UPRIGHT, 14, 24)
    owner, _ = layer_rows([Band(0.0, level)], frame, range(1, 23))
    highest = frame.z(2 * min(owner) + 0.5)
    assert abs(highest - level) <= 15.0 / 22 or min(owner) in (1, 22)


def test_labels_move_apart_and_keep_their_order() -> None:
    labels = [Label(5.0, "surface", 0), Label(4.9, "oil", 1), Label(4.8, "water", 1)]
    placed = place(labels, [6, 6, 6], 14)
    assert {row: label.text for row, label in placed.items()} == {
        6: "surface",
        7: "oil",
        8: "water",
    }


def test_the_surface_keeps_its_row_and_a_limit_gives_way() -> None:
    labels = [Label(9.0, "high-high", 2), Label(9.01, "9.010 m", 0)]
    placed = place(labels, [3, 3], 14)
    assert placed[3].text == "9.010 m"
    assert placed[4].text == "high-high"


def test_a_limit_without_room_is_left_out() -> None:
    labels = [Label(float(z), f"limit {z}") for z in range(10)]
    placed = place(labels, [2] * 10, 4)
    assert len(placed) <= 4
    elevations = [placed[row].elevation_m for row in sorted(placed)]
    assert elevations == sorted(elevations, reverse=True)


def test_a_label_wider_than_its_room_is_left_out_rather_than_cut() -> None:
    made = picture(UPRIGHT, [Band(0.0, 8.0)], [Label(8.0, "x" * 40, 0)], 30, 10)
    assert not any("x" in row for row in made.rows)


def test_glyph_sets_give_every_layer_its_own_character() -> None:
    for glyphs in (UNICODE, ASCII):
        assert len(set(glyphs.layers)) == len(glyphs.layers) >= 3
