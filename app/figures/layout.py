"""Where the parts of a picture stand on a page: axes, title, legend, ticks, colour bar, note.

Lengths are in points (1/72 inch) from the lower left corner. The legend runs in rows under the title, never over data.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from app.figures.picture import Field, Picture, Role
from app.figures.theme import Theme
from app.figures.ticks import Ticks, frame_title, span, ticks_of

Measure = Callable[[str, float], tuple[float, float]]
"""Width and line height [pt] of a text at a type size [pt]."""

PAD = 6.0
LINE = 1.45  # line height over type size
TICK, TICK_GAP = 3.5, 3.0
MINOR_TICK = 2.0
BAR_GAP, BAR_WIDTH = 10.0, 9.0
SAMPLE, MARK_SAMPLE, SAMPLE_GAP, ENTRY_GAP = 24.0, 10.0, 5.0, 14.0  # of the legend
SMALLEST = 24.0  # of the axes; below it the surroundings give way


@dataclass(frozen=True)
class LegendEntry:
    """One sample with its name."""

    name: str
    role: Role
    is_mark: bool

    @property
    def sample(self) -> float:
        """Width of the sample [pt]."""
        return MARK_SAMPLE if self.is_mark else SAMPLE


def legend_entries(picture: Picture) -> tuple[LegendEntry, ...]:
    """What the legend names, each once: curves, then marks and their outlines."""
    outlines = [mark.outline for mark in picture.marks if mark.outline is not None]
    entries = [LegendEntry(c.name, c.role, False) for c in (*picture.curves, *outlines) if c.name]
    entries += [LegendEntry(mark.name, mark.role, True) for mark in picture.marks if mark.name]
    return tuple(dict.fromkeys(entries))


def shortened(text: str, size: float, width: float, measure: Measure) -> str:
    """The text, its end cut off with an ellipsis where it is wider than `width` [pt]."""
    if measure(text, size)[0] <= width:
        return text
    while text and measure(text + "…", size)[0] > width:
        text = text[:-1]
    return text.rstrip() + "…" if text else ""


@dataclass(frozen=True, kw_only=True)
class Layout:
    """Places [pt] from the lower left corner of the figure: axes (left, bottom, width, height), rows of the legend."""

    left: float
    bottom: float
    width: float
    height: float
    title_left: float
    right_end: float
    title_y: float | None
    legend: tuple[tuple[LegendEntry, float, float], ...]
    x_ticks: Ticks
    y_ticks: Ticks
    y_title: str


def title_size(picture: Picture, theme: Theme) -> float:
    """Type size of the title [pt]; that of a small multiple leaves room for its note."""
    return theme.title_size if picture.y.titled else theme.font_size


def lay_out(picture: Picture, theme: Theme, room: tuple[float, float, float, float], measure: Measure) -> Layout:
    """Fits axes and all around them into `room` (left, bottom, width, height) [pt]."""
    left, bottom, width, height = room
    line = theme.font_size * LINE
    below = PAD + (line if frame_title(picture.x) else 0.0) + TICK_GAP + theme.small_size * LINE + TICK
    entries = legend_entries(picture)
    title_height = title_size(picture, theme) * LINE + 2.0 if picture.title else 0.0
    rows = _legend_rows(entries, theme, width - 2.0 * PAD, measure)
    if height - below - title_height - len(rows) * line < 4.0 * SMALLEST:
        rows = ()
    # A small multiple has nothing but its title to say what it shows.
    if height - below - title_height < (2.0 if picture.y.titled else 1.1) * SMALLEST:
        title_height = 0.0
    above = PAD + title_height + len(rows) * line + (6.0 if rows else 2.0)
    inner_height = max(height - below - above, SMALLEST)
    room_of_tick = (1.3 if picture.y.names else 2.6 if picture.y.titled else 1.6) * theme.small_size
    y_ticks = ticks_of(picture.y, max(2, int(inner_height / room_of_tick)))
    # Title and legend stand above the axes from the left edge on: what is taller than the axes would run into them.
    tallest = inner_height + 6.0
    y_title = "\n".join(
        shortened(part, theme.font_size, tallest, measure)
        for part in _broken(frame_title(picture.y), theme.font_size, tallest, measure).split("\n")
    )
    tick_width = widest(y_ticks.texts, theme.small_size, measure)
    # whole steps of 4 pt: the axes do not twitch with each new tick text
    beside = (1 + y_title.count("\n")) * line + TICK_GAP if y_title else 0.0
    before = 4.0 * np.ceil((PAD + beside + tick_width + TICK_GAP + TICK) / 4.0)
    after = PAD + 12.0 if picture.field is None else bar_room(picture.field, theme, measure)
    inner_width = max(width - before - after, SMALLEST)
    x_ticks = _fitting_ticks(picture, theme, inner_width, measure)
    legend = []
    y = bottom + height - PAD - title_height - 0.5 * line
    for row in rows:
        legend += [(entry, left + PAD + x, y) for entry, x in row]
        y -= line
    return Layout(
        left=left + before, bottom=bottom + below, width=inner_width, height=inner_height,
        title_left=left + PAD, right_end=left + width - PAD,
        title_y=bottom + height - PAD - 0.5 * title_size(picture, theme) * LINE if title_height else None,
        legend=tuple(legend), x_ticks=x_ticks, y_ticks=y_ticks, y_title=y_title,
    )  # fmt: skip


def _legend_rows(
    entries: Sequence[LegendEntry], theme: Theme, width: float, measure: Measure
) -> tuple[tuple[tuple[LegendEntry, float], ...], ...]:
    rows: list[list[tuple[LegendEntry, float]]] = []
    x = np.inf
    for entry in entries:
        needed = entry.sample + SAMPLE_GAP + measure(entry.name, theme.small_size)[0]
        if x + needed > width:
            rows.append([])
            x = 0.0
        rows[-1].append((entry, x))
        x += needed + ENTRY_GAP
    return tuple(tuple(row) for row in rows)


def _fitting_ticks(picture: Picture, theme: Theme, width: float, measure: Measure) -> Ticks:
    for most in (9, 8, 7, 6, 5, 4, 3, 2):
        ticks = ticks_of(picture.x, most)
        low, high = span(picture.x)
        gaps = np.diff(ticks.places) * width / (high - low)
        if not len(gaps) or gaps.min() >= widest(ticks.texts, theme.small_size, measure) + 8.0:
            break
    return ticks


def bar_ticks(field: Field, theme: Theme, height: float) -> tuple[tuple[float, str], ...]:
    """Ticks of a colour bar as far as they do not touch each other; that of the split goes first."""
    shown: list[tuple[float, str]] = []
    for place, text in sorted(field.ticks, key=lambda tick: tick[0] != field.split):
        if all(abs(place - other) * height >= 1.15 * theme.small_size for other, _ in shown):
            shown.append((place, text))
    return tuple(shown)


def bar_room(field: Field, theme: Theme, measure: Measure) -> float:
    texts = widest([text for _, text in field.ticks], theme.small_size, measure)
    return BAR_GAP + BAR_WIDTH + TICK + TICK_GAP + texts + TICK_GAP + theme.font_size * LINE + PAD


def widest(texts: Sequence[str], size: float, measure: Measure) -> float:
    return max((measure(text, size)[0] for text in texts), default=0.0)


def _broken(text: str, size: float, width: float, measure: Measure) -> str:
    """The text in two lines, broken at the space nearest to its middle, where it is wider than `width`."""
    spaces = [i for i, c in enumerate(text) if c == " "]
    if measure(text, size)[0] <= width or not spaces:
        return text
    middle = min(spaces, key=lambda i: abs(i - len(text) / 2))
    return text[:middle] + "\n" + text[middle + 1 :]


def note_place(picture: Picture, layout: Layout, theme: Theme, note: str, measure: Measure) -> tuple[str, float, float]:
    """The note as far as there is room for it, its right end and its middle [pt]: in the row of the title, or
    in the lower right corner of the axes where the title has given way."""
    if layout.title_y is None:
        right, middle = layout.left + layout.width - PAD, layout.bottom + PAD + 0.5 * theme.small_size * LINE
        return shortened(note, theme.small_size, layout.width - 2.0 * PAD, measure), right, middle
    # bold type is up to a fifth wider than what is measured
    room = (
        layout.right_end - layout.title_left - 1.2 * measure(picture.title, title_size(picture, theme))[0] - ENTRY_GAP
    )
    return shortened(note, theme.small_size, room, measure), layout.right_end, layout.title_y
