"""Arithmetic of views: zoomed, moved and boxed limits of a pair of axes.

A view is (x_low, x_high, y_low, y_high) in data. Shares run from 0 at the left or lower end of an axis to 1 at its
other end.
"""

from __future__ import annotations

from app.figures.picture import Axis, Picture
from app.figures.ticks import span, to_data, to_drawing

View = tuple[float, float, float, float]

SMALL_STEP = 0.0025  # of the width, for an arrow key
SMALL_LOG_STEP = 0.01  # decades, for an arrow key along a logarithmic axis
LARGE = 10.0  # times that, with Shift


def view_of(picture: Picture) -> View:
    """The view that a picture shows."""
    return picture.x.low, picture.x.high, picture.y.low, picture.y.high


def zoomed(picture: Picture, view: View, factor: float, x_share: float, y_share: float) -> View | None:
    """The view with widths times `factor`, the point at these shares staying where it is; None where nothing could be
    told apart. With a share below 0, beside the axes, that axis stays."""
    x_factor, y_factor = (factor if share >= 0.0 else 1.0 for share in (x_share, y_share))
    return _cut(picture, view, _about(x_share, x_factor), _about(y_share, y_factor))


def moved(picture: Picture, view: View, right: float, up: float) -> View | None:
    """The view moved by shares of its widths."""
    return _cut(picture, view, (right, 1.0 + right), (up, 1.0 + up))


def boxed(picture: Picture, view: View, x_shares: tuple[float, float], y_shares: tuple[float, float]) -> View | None:
    """The view cut to a box."""
    return _cut(picture, view, x_shares, y_shares)


def kept_within(picture: Picture, view: View, bounds: View) -> View:
    """The view moved, and where it is too wide cut, to lie within bounds."""
    x = _kept(picture.x, (view[0], view[1]), (bounds[0], bounds[1]))
    y = _kept(picture.y, (view[2], view[3]), (bounds[2], bounds[3]))
    return (*x, *y)


def stepped(axis: Axis, value: float, direction: int, large: bool) -> float:
    """A value moved by one key's step, kept on the axis."""
    if direction == 0:
        return value
    low, high = span(axis)
    step = (SMALL_LOG_STEP if axis.log else SMALL_STEP * (high - low)) * (LARGE if large else 1.0)
    return to_data(axis, min(max(to_drawing(axis, value) + direction * step, low), high))


def at_shares(picture: Picture, x_share: float, y_share: float) -> tuple[float, float]:
    """Data at shares of the axes that the picture shows, kept on them."""
    return _at(picture.x, x_share), _at(picture.y, y_share)


def _about(share: float, factor: float) -> tuple[float, float]:
    return share * (1.0 - factor), 1.0 - (1.0 - share) * (1.0 - factor)


def _at(axis: Axis, share: float) -> float:
    low, high = span(axis)
    return to_data(axis, low + min(max(share, 0.0), 1.0) * (high - low))


def _kept(axis: Axis, ends: tuple[float, float], bounds: tuple[float, float]) -> tuple[float, float]:
    if bounds[0] <= ends[0] and ends[1] <= bounds[1]:
        return ends
    low, high = (to_drawing(axis, end) for end in ends)
    least, most = (to_drawing(axis, end) for end in bounds)
    if high - low >= most - least:
        return bounds
    move = max(least - low, 0.0) + min(most - high, 0.0)
    return max(to_data(axis, low + move), bounds[0]), min(to_data(axis, high + move), bounds[1])


def _cut(picture: Picture, view: View, x_shares: tuple[float, float], y_shares: tuple[float, float]) -> View | None:
    x = _cut_axis(picture.x, view[0], view[1], *x_shares)
    y = _cut_axis(picture.y, view[2], view[3], *y_shares)
    return None if x is None or y is None else (*x, *y)


def _cut_axis(axis: Axis, low: float, high: float, first: float, last: float) -> tuple[float, float] | None:
    if (first, last) == (0.0, 1.0):
        return low, high
    start, end = to_drawing(axis, low), to_drawing(axis, high)
    new = start + first * (end - start), start + last * (end - start)
    if axis.log:
        shows = new[0] > -300.0 and new[1] < 300.0 and new[1] - new[0] > 1e-6
    else:
        largest = max(abs(new[0]), abs(new[1]))
        shows = largest < 1e300 and new[1] - new[0] > 1e-9 * largest
    return (to_data(axis, new[0]), to_data(axis, new[1])) if shows else None
