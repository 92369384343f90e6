"""What a figure shows, as arrays and text: the one form in which plots travel.

A `Picture` is one pair of axes. Figure modules make it from an answer; `draw` puts it on Matplotlib axes for
export and reports, and the window's live canvas shows it by blitting. No plotting library is needed to build,
compare or test one.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum, auto

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


class Role(Enum):
    """What a curve or mark stands for. A theme gives each role its colour, width and dash, so that no two
    roles differ by colour alone."""

    TOTAL = auto()
    THERMAL = auto()
    CONDENSATE = auto()
    CLASSICAL = auto()
    THRESHOLD = auto()
    THRESHOLD_SHIFTED = auto()
    THRESHOLD_OF_MODEL = auto()
    DECADE = auto()
    FRACTION = auto()
    FIRST = auto()  # curves of unlike quantities, told apart by order
    SECOND = auto()
    THIRD = auto()
    FOURTH = auto()
    CLOUD = auto()  # the present cloud: a point, or a line at its place
    UNCERTAINTY = auto()
    STAGE = auto()  # where a stage of a ramp ends
    CURSOR = auto()  # the time that is read
    REFERENCE = auto()  # a ramp that was kept to compare with
    REST = auto()  # of a ramp, from a measured cloud on
    TRACK = auto()  # of a ramp on the map
    MEASURED = auto()
    SEEN = auto()  # numbers by how sure they are, see `app.sureness`
    COMPUTED = auto()
    RECALLED = auto()
    ASSUMED = auto()


@dataclass(frozen=True, kw_only=True)
class Axis:
    """One axis. Data are in `unit`; with `prefixed` the unit is a bare SI unit and tick labels carry the prefix
    ("100 nK"), which reads best over many decades; with `power` ticks count in that power of ten, which the title
    names, and data stay in `unit`; one that is not `titled` has no title beside it, where the picture's says enough.
    With `names` the places 0, 1, 2 ... are no numbers but things, and the tick labels name them."""

    label: str
    unit: str
    low: float
    high: float
    log: bool = False
    prefixed: bool = False
    power: int = 0
    titled: bool = True
    names: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        if not (np.isfinite(self.low) and np.isfinite(self.high) and self.low < self.high):
            raise ValueError(f"axis {self.label!r} must run from low to high, got {self.low:g} to {self.high:g}")
        if self.log and self.low <= 0.0:
            raise ValueError(f"logarithmic axis {self.label!r} must start above zero, got {self.low:g}")
        if self.power and (self.log or self.prefixed):
            raise ValueError(f"axis {self.label!r} must be linear and not prefixed to count in a power of ten")
        if self.names and self.log:
            raise ValueError(f"axis {self.label!r} must be linear to have names at its places")


@dataclass(frozen=True, kw_only=True, eq=False)
class Curve:
    """A line through points in data coordinates; NaN breaks it. An empty `name` keeps it out of the legend."""

    name: str
    role: Role
    x: Array
    y: Array


@dataclass(frozen=True, kw_only=True, eq=False)
class Field:
    """A colour field on a regular grid: regular in log10 along logarithmic axes, cell centres at x and y.

    `shade` (rows along y) runs from 0 to 1: the place in the theme's two-part colour scale, 0 to `split` one family of
    colours, `split` to 1 the other (split = 1: one family). `ticks` label the colour bar: (place in 0..1, text).
    """

    x: Array
    y: Array
    shade: Array
    split: float
    bar_label: str
    ticks: tuple[tuple[float, str], ...]


@dataclass(frozen=True, kw_only=True)
class Mark:
    """A point. `draggable` marks answer to the mouse; `outline` is a closed curve around it (an error ellipse)."""

    name: str
    role: Role
    x: float
    y: float
    draggable: bool = False
    outline: Curve | None = None


@dataclass(frozen=True, kw_only=True)
class Label:
    """A short text at a place in data coordinates, such as the value of a contour line: its middle is there; with a
    `side` of 1 it begins just right of the place, of -1 it ends just left of it; with a `lift` of 1 it stands just over
    the place, of -1 just under it."""

    text: str
    role: Role
    x: float
    y: float
    side: int = 0
    lift: int = 0


@dataclass(frozen=True, kw_only=True, eq=False)
class Picture:
    """One pair of axes and all that is on it. `summary` says in words what the plot shows, for readers who cannot
    see it; `note` is a short line on the plot itself, such as what is hidden or still being computed."""

    title: str
    x: Axis
    y: Axis
    curves: tuple[Curve, ...] = ()
    field: Field | None = None
    marks: tuple[Mark, ...] = ()
    labels: tuple[Label, ...] = ()
    summary: str = ""
    note: str = ""
