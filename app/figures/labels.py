"""Where the labels of a picture can stand: wholly inside the axes, and none upon another."""

from __future__ import annotations

from collections.abc import Callable, Iterable

from app.figures.picture import Label, Picture
from app.figures.ticks import span, to_drawing

Measure = Callable[[str], tuple[float, float]]
Box = tuple[float, float, float, float]

MARK_RADIUS = 7.0  # kept free around a mark [pt]
EDGE = 3.0  # least distance to the frame [pt]
SIDE_GAP = 5.0  # between a place and a text beside it [pt]
LIFT_GAP = 2.0  # between a place and a text over or under it [pt]


def place_labels(
    picture: Picture, width: float, height: float, measure: Measure
) -> tuple[tuple[Label, float, float], ...]:
    """Labels to be shown, each with its centre in points from the lower left corner of the axes.

    `width` and `height` are those of the axes [pt]; `measure` gives the size of a text [pt]. A label whose place is
    outside the axes is left out; one too near to the frame is moved inwards; one that would cover a mark or an
    earlier label is left out.
    """
    taken: list[Box] = []
    for mark in picture.marks:
        x, y = _place(picture, mark.x, mark.y, width, height)
        taken.append((x - MARK_RADIUS, y - MARK_RADIUS, x + MARK_RADIUS, y + MARK_RADIUS))
    shown = []
    for label in picture.labels:
        x, y = _place(picture, label.x, label.y, width, height)
        w, h = measure(label.text)
        x += label.side * (0.5 * w + (0.0 if label.lift else SIDE_GAP))
        y += label.lift * (0.5 * h + LIFT_GAP)
        if not (0.0 <= x <= width and 0.0 <= y <= height and w + 2 * EDGE <= width and h + 2 * EDGE <= height):
            continue
        x = min(max(x, 0.5 * w + EDGE), width - 0.5 * w - EDGE)
        y = min(max(y, 0.5 * h + EDGE), height - 0.5 * h - EDGE)
        box = (x - 0.5 * w, y - 0.5 * h, x + 0.5 * w, y + 0.5 * h)
        if not _meets(box, taken):
            taken.append(box)
            shown.append((label, x, y))
    return tuple(shown)


def _place(picture: Picture, x: float, y: float, width: float, height: float) -> tuple[float, float]:
    (left, right), (bottom, top) = span(picture.x), span(picture.y)
    return (
        (to_drawing(picture.x, x) - left) / (right - left) * width,
        (to_drawing(picture.y, y) - bottom) / (top - bottom) * height,
    )


def _meets(box: Box, others: Iterable[Box]) -> bool:
    return any(box[0] < o[2] and o[0] < box[2] and box[1] < o[3] and o[1] < box[3] for o in others)
