"""Texts of kept glyphs against the texts that Matplotlib sets and renders as a whole."""

from __future__ import annotations

import numpy as np
import pytest
from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.font_manager import FontProperties

from app.window.text_stamps import put_line, put_upright, size_by_letters, stamp_of

INK = "#20252b"
ROOM = 80, 240  # rows, columns


def rendered(text: str, size: float, dpi: float, weight: str, x: int, y: int) -> np.ndarray:
    """Coverage, bottom row first, of a text whose pen starts at (x, y)."""
    renderer = RendererAgg(ROOM[1], ROOM[0], dpi)
    prop = FontProperties(size=size, weight=weight)
    renderer.draw_text(renderer.new_gc(), x, ROOM[0] - y, text, prop, 0.0)
    return np.asarray(renderer.buffer_rgba())[::-1, :, 3].astype(int)


def stamped(renderer: RendererAgg) -> np.ndarray:
    return np.asarray(renderer.buffer_rgba())[::-1, :, 3].astype(int)


def inked(coverage: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Without the empty rows and columns around it; and the rows and columns that are not empty."""
    rows, columns = (np.flatnonzero(coverage.any(axis=axis)) for axis in (1, 0))
    return coverage[rows[0] : rows[-1] + 1, columns[0] : columns[-1] + 1], rows, columns


@pytest.mark.parametrize("weight", ["normal", "bold"])
@pytest.mark.parametrize("dpi", [96.0, 192.0])
@pytest.mark.parametrize("text", ["0.5", "10⁻⁷", "−3.25 µK", "(12) pg", "5×10³", ""])
def test_a_text_of_glyphs_is_the_text_rendered_as_a_whole(text: str, dpi: float, weight: str) -> None:
    stamp = stamp_of(text, 8.5, INK, dpi, weight)
    found = np.zeros(ROOM, dtype=int)
    rows, columns = stamp.pixels.shape[:2]
    bottom, left = 20 - stamp.baseline, 20 - stamp.pen
    found[bottom : bottom + rows, left : left + columns] = stamp.pixels[..., 3]
    whole = rendered(text, 8.5, dpi, weight, 20, 20)
    # Glyphs that overlap, as they hardly do, add up in one and not in the other.
    assert np.abs(found - whole).max(initial=0) <= 40
    assert (np.abs(found - whole) > 2).mean() < 0.002
    assert bool(text) == bool(whole.any())
    prop = FontProperties(size=8.5, weight=weight)
    width, height, depth = RendererAgg(1, 1, dpi).get_text_width_height_descent(text or " ", prop, False)
    assert stamp.width == pytest.approx(width if text else 0.0, abs=1.0)
    assert stamp.height >= height
    assert stamp.depth >= depth


def test_the_colour_is_that_asked_for_and_the_stamp_is_kept() -> None:
    one = stamp_of("7", 9.0, "#b24a14", 96.0)
    assert {tuple(pixel) for pixel in one.pixels[..., :3].reshape(-1, 3).tolist()} == {(0xB2, 0x4A, 0x14)}
    assert stamp_of("7", 9.0, "#b24a14", 96.0) is one


@pytest.mark.parametrize(("share", "first", "last"), [(0.0, 100, None), (1.0, None, 100)])
def test_a_line_stands_where_it_is_aligned(share: float, first: int | None, last: int | None) -> None:
    renderer = RendererAgg(ROOM[1], ROOM[0], 96.0)
    stamp = stamp_of("H000H", 9.0, INK, 96.0)
    put_line(renderer, stamp, 100.0, 40.0, share)
    rows, columns = (np.flatnonzero(stamped(renderer).any(axis=axis)) for axis in (1, 0))
    assert 0.5 * (rows[0] + rows[-1] + 1) == pytest.approx(40.0, abs=1.0)
    if first is not None:
        assert columns[0] == pytest.approx(first, abs=2)
    if last is not None:
        assert columns[-1] == pytest.approx(last, abs=2)


def test_an_upright_text_reads_upwards_about_its_middle() -> None:
    renderer = RendererAgg(ROOM[1], ROOM[0], 96.0)
    stamp = stamp_of("Lp", 9.0, INK, 96.0)
    put_upright(renderer, [stamp], 100.0, 40.0)
    found, rows, columns = inked(stamped(renderer))
    assert 0.5 * (rows[0] + rows[-1] + 1) == pytest.approx(40.0, abs=1.5)
    assert 0.5 * (columns[0] + columns[-1] + 1) == pytest.approx(100.0, abs=2.0)
    expected, _, _ = inked(np.rot90(stamp.pixels[..., 3].astype(int), -1))  # rows run upwards in both
    assert np.abs(found - expected).max() <= 2  # as blending rounds


def test_two_lines_stand_side_by_side_the_first_on_the_left() -> None:
    renderer = RendererAgg(ROOM[1], ROOM[0], 96.0)
    stamps = [stamp_of(text, 9.0, INK, 96.0) for text in ("HHHHHH", "H")]
    put_upright(renderer, stamps, 100.0, 40.0)
    heights = stamped(renderer).any(axis=1), (stamped(renderer) > 0).sum(axis=0)
    columns = np.flatnonzero(heights[1])
    left, right = heights[1][columns[: len(columns) // 2]].sum(), heights[1][columns[len(columns) // 2 :]].sum()
    assert left > 3 * right


def test_sizes_by_letters_are_those_of_the_whole_text_but_for_kerning() -> None:
    from app.figures.draw import text_size

    for text in ("3.41 → 0.52 µK", "10⁻⁷", "values at or below zero", ""):
        assert size_by_letters(text, 8.5)[0] == pytest.approx(text_size(text, 8.5)[0], rel=0.03, abs=0.5)
        assert size_by_letters(text, 8.5)[1] == text_size(text, 8.5)[1]
