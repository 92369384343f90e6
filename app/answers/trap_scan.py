"""What becomes of a trap while one of its controls is turned: frequencies, depth and sag, surveyed point by point."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.trap import trap_of
from app.answers.trap_controls import Control, controls
from physics.species import load_species
from physics.traps import Trap

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.traps.survey import Survey

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]

SCAN_POINTS = 33
"""2^n + 1: the points halve the gaps between those before."""


@dataclass(frozen=True, kw_only=True, eq=False)
class TrapScan:
    """A trap along values of a control.

    Attributes
    ----------
    control : Control
    now : where it stands, in its SI unit
    values : (points,) rising
    frequencies : (points, 3) [Hz] NaN where there are none, as are the others
    depth : (points,) [J]
    sag : (points,) [m]
    trapped, done : (points,) whether atoms are held; whether that was looked at already
    """

    control: Control
    now: float
    values: Array
    frequencies: Array
    depth: Array
    sag: Array
    trapped: Flags
    done: Flags

    @property
    def complete(self) -> bool:
        """Whether all points are there."""
        return bool(np.all(self.done))


def trap_scan(
    plan: Plan,
    control: Control,
    factors: tuple[float, float],
    deliver: Callable[[TrapScan], object] = lambda _scan: None,
    tick: Callable[[float], bool] = lambda _share: True,
    points: int = SCAN_POINTS,
) -> TrapScan | None:
    """Survey the plan's trap along a control, from the least to the largest of two factors on where it stands.

    `deliver` is given what is there after each point, `tick` the share that is done; a false answer of it stops the
    work, which gives None.

    Raises ValueError for a trap that is given by its frequencies, or without that control.
    """
    from physics.traps.survey import survey

    trap = trap_of(plan)
    if not isinstance(trap, Trap) or control not in controls(plan.trap):
        raise ValueError(f"this trap has no {control.kind.value} that could be scanned")
    state = load_species(plan.species.key).state(plan.species.state)
    now = control.now(trap)
    scan = _empty(control, now, np.sort(now * np.geomspace(*factors, points)))
    for count, place in enumerate(_coarse_first(points)):
        if not tick(count / points):
            return None
        scan = _with(scan, place, survey(control.turned(trap, float(scan.values[place])), state))
        if count + 1 < points:
            deliver(scan)
    return scan


def _coarse_first(points: int) -> list[int]:
    """Places in an order that spreads over all of them, and fills the gaps in turns."""
    order: list[int] = []
    step = points - 1
    while step >= 1:
        order += [place for place in range(0, points, step) if place not in order]
        step //= 2
    return order


def _empty(control: Control, now: float, values: Array) -> TrapScan:
    nothing = np.full(values.shape, np.nan)
    no = np.zeros(values.shape, dtype=bool)
    return TrapScan(
        control=control,
        now=now,
        values=values,
        frequencies=np.full((*values.shape, 3), np.nan),
        depth=nothing,
        sag=nothing,
        trapped=no,
        done=no,
    )


def _with(scan: TrapScan, place: int, found: Survey) -> TrapScan:
    """The scan with one more point; what was handed out before stays as it was."""
    frequencies, depth, sag = scan.frequencies.copy(), scan.depth.copy(), scan.sag.copy()
    trapped, done = scan.trapped.copy(), scan.done.copy()
    done[place], trapped[place] = True, found.trapped
    if found.frequencies is not None:
        frequencies[place] = found.frequencies
    depth[place] = np.nan if found.depth is None else found.depth
    sag[place] = np.nan if found.sag is None else found.sag
    return replace(scan, frequencies=frequencies, depth=depth, sag=sag, trapped=trapped, done=done)
