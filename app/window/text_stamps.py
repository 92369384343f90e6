"""Texts as pixels, to be stamped on an Agg buffer.

To set and render a text anew takes a millisecond or more, to put kept glyphs side by side some ten microseconds. So a
text is made of glyphs; they are hinted, which gives them whole advances. Pairs are not kerned.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.patheffects import withStroke
from matplotlib.text import Text
from numpy.typing import NDArray

from app.figures.draw import HALO_WIDTH, text_size

Pixels = NDArray[np.uint8]
Renderer = Any  # an Agg renderer; Matplotlib ships no types for its backends

PAD = 3  # pixels around a stamp
_SPACING = 1.2  # of lines, as Matplotlib's


@dataclass(frozen=True, kw_only=True, eq=False)
class Stamp:
    """A line of text, bottom row first.

    pixels : RGBA, shape (rows, columns, 4)
    pen, baseline : column and row where the pen starts
    width : [pixels] the pen moves by
    height, depth : [pixels] of the line, at least those of a line of letters; `depth` is below the baseline
    """

    pixels: Pixels
    pen: int
    baseline: int
    width: float
    height: float
    depth: float


@dataclass(frozen=True, kw_only=True, eq=False)
class _Glyph:
    coverage: Pixels
    left: int
    bottom: int
    advance: float
    height: float
    depth: float


@lru_cache(maxsize=2048)
def stamp_of(text: str, size: float, colour: str, dpi: float, weight: str = "normal") -> Stamp:
    """A text of one line, of this type size [pt] and colour "#rrggbb"."""
    glyphs = [_glyph(letter, size, weight, dpi) for letter in text]
    pens, pen = [], 0.0
    for glyph in glyphs:
        pens.append(round(pen))
        pen += glyph.advance
    lefts = [at + glyph.left for at, glyph in zip(pens, glyphs, strict=True)]
    left = min([*lefts, 0])
    bottom = min([glyph.bottom for glyph in glyphs], default=0)
    right = max([at + glyph.coverage.shape[1] for at, glyph in zip(lefts, glyphs, strict=True)], default=left + 1)
    top = max([glyph.bottom + glyph.coverage.shape[0] for glyph in glyphs], default=bottom + 1)
    pixels = np.empty((max(top - bottom, 1), max(right - left, 1), 4), dtype=np.uint8)
    pixels[..., :3] = np.frombuffer(bytes.fromhex(colour[1:]), dtype=np.uint8)
    pixels[..., 3] = 0
    for at, glyph in zip(lefts, glyphs, strict=True):
        rows, columns = glyph.coverage.shape
        place = pixels[glyph.bottom - bottom : glyph.bottom - bottom + rows, at - left : at - left + columns, 3]
        np.maximum(place, glyph.coverage, out=place)
    usual = _metrics("lp", size, weight, dpi)
    above = max([glyph.height - glyph.depth for glyph in glyphs], default=0.0)
    below = max([glyph.depth for glyph in glyphs], default=0.0)
    return Stamp(
        pixels=pixels, pen=-left, baseline=-bottom, width=pen,
        height=max(above + below, usual[1]), depth=max(below, usual[2]),
    )  # fmt: skip


@lru_cache(maxsize=2048)
def _glyph(letter: str, size: float, weight: str, dpi: float) -> _Glyph:
    advance, height, depth = _metrics(letter, size, weight, dpi)
    room = int(np.ceil(size * dpi / 72.0)) + PAD
    renderer: Renderer = RendererAgg(3 * room, 3 * room, dpi)  # type: ignore[no-untyped-call]
    renderer.draw_text(renderer.new_gc(), room, 2 * room, letter, FontProperties(size=size, weight=weight), 0.0)
    coverage = np.asarray(renderer.buffer_rgba())[::-1, :, 3]
    rows, columns = (np.flatnonzero(coverage.any(axis=axis)) for axis in (1, 0))
    if not len(rows):  # a space
        return _Glyph(
            coverage=np.zeros((0, 0), np.uint8), left=0, bottom=0, advance=advance, height=height, depth=depth
        )  # fmt: skip
    return _Glyph(
        coverage=coverage[rows[0] : rows[-1] + 1, columns[0] : columns[-1] + 1].copy(),
        left=int(columns[0]) - room, bottom=int(rows[0]) - room, advance=advance, height=height, depth=depth,
    )  # fmt: skip


@lru_cache(maxsize=2048)
def _metrics(text: str, size: float, weight: str, dpi: float) -> tuple[float, float, float]:
    """Width, height and depth [pixels]."""
    renderer: Renderer = RendererAgg(1, 1, dpi)  # type: ignore[no-untyped-call]
    width, height, depth = renderer.get_text_width_height_descent(
        text, FontProperties(size=size, weight=weight), False
    )  # fmt: skip
    return float(width), float(height), float(depth)


def size_by_letters(text: str, size: float) -> tuple[float, float]:
    """Width and line height of a text [pt], as `app.figures.draw.text_size` has it but for the kerning: quick also for
    a text that was never met before."""
    return sum(text_size(letter, size)[0] for letter in text), text_size("", size)[1]


def put_line(
    renderer: Renderer,
    stamp: Stamp,
    x: float,
    y: float,
    share: float = 0.0,
) -> None:
    """Stamps a line of text whose letters stand on both sides of the height y; `share` of its width is left of x."""
    left = round(x - share * stamp.width) - stamp.pen
    bottom = round(y - 0.5 * (stamp.height - stamp.depth)) - stamp.baseline
    renderer.draw_image(renderer.new_gc(), left, bottom, stamp.pixels)


def put_upright(renderer: Renderer, stamps: list[Stamp], x: float, y: float) -> None:
    """Stamps lines of text that run upwards, about the middle (x, y)."""
    baselines: list[float] = []
    depth = 0.0
    for stamp in stamps:
        above = stamp.height - stamp.depth
        baselines.append(baselines[-1] + depth + _SPACING * above if baselines else above)
        depth = stamp.depth
    start = x - 0.5 * (baselines[-1] + depth)
    for stamp, baseline in zip(stamps, baselines, strict=True):
        turned = np.ascontiguousarray(np.rot90(stamp.pixels, -1))  # rows run upwards
        left = round(start + baseline) - (stamp.pixels.shape[0] - stamp.baseline)
        bottom = round(y - 0.5 * stamp.width) - stamp.pen
        renderer.draw_image(renderer.new_gc(), left, bottom, turned)


@lru_cache(maxsize=4)
def _figure_of(dpi: float) -> Figure:
    """What a text asks for the resolution."""
    return Figure(dpi=dpi)


@lru_cache(maxsize=512)
def text_in_halo(text: str, size: float, colour: str, halo: str, dpi: float) -> Pixels:
    """A text with a halo as RGBA pixels, bottom row first, the middle of the line in the middle."""
    width, height = (int(np.ceil(length * dpi / 72.0)) + 2 * PAD for length in text_size(text, size))
    renderer: Renderer = RendererAgg(width, height, dpi)  # type: ignore[no-untyped-call]
    drawn = Text(0.5 * width, 0.5 * height, text, size=size, color=colour, ha="center", va="center_baseline")
    drawn.set_figure(_figure_of(dpi))
    drawn.set_path_effects([withStroke(linewidth=HALO_WIDTH, foreground=halo, alpha=0.85)])
    drawn.draw(renderer)
    return np.ascontiguousarray(np.asarray(renderer.buffer_rgba())[::-1])
