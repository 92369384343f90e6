"""A trap of beams and coils along controls near those at which it was surveyed, without new surveys: for drafts.

Minimum, frequencies and the way out are followed from the nearest survey to the new potential, which takes a
millisecond. How much more room there is than in the harmonic trap of these frequencies is interpolated, and the shape
of the volume curve is that of the nearest survey. A way out that another one has meanwhile undercut is not noticed.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import NamedTuple

import numpy as np

from physics.checks import Floats
from physics.ramps import Control
from physics.surveyed_path import Setting, SurveyedPath, setting_of
from physics.trap_path import PathAround, TrapPoint
from physics.traps.boundary import Exit, arm_end_passes, knife_passes, wall_passes
from physics.traps.charts import charts_of
from physics.traps.descent import settle
from physics.traps.escape import Escape
from physics.traps.heating import heating_of, light_shares
from physics.traps.modes import modes_of
from physics.traps.potential import NoPotential, Potential, potential_of
from physics.traps.stationary import cusp_at
from physics.traps.surveyed_well import SurveyedWell

_STEPS = 20
_NEIGHBOURS = 6
_WEIGHT = 4.0
"""Power of one over the distance by which surveys count, as far as there are so many neighbours."""


@dataclass(frozen=True, kw_only=True)
class FollowedPath(PathAround):
    """The trap where it was surveyed, and what follows from the nearest survey elsewhere.

    Attributes
    ----------
    path : SurveyedPath. What it knows when this is made is what is followed.
    """

    path: SurveyedPath
    _made: dict[Setting, TrapPoint] = field(default_factory=dict, init=False, repr=False, compare=False)

    @property
    def able(self) -> bool:
        """Whether there is a survey to follow."""
        return any(point.depth is not None for point in self.path.known.values())

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        key = setting_of(controls)
        known = self.path.known.get(key)
        if known is not None:
            return known
        if key not in self._made:
            self._made[key] = self._followed(key, controls)
        return self._made[key]

    def _followed(self, key: Setting, controls: Mapping[Control, float]) -> TrapPoint:
        near = self._near(key)
        if not near:
            return self.path.at(controls)
        try:
            potential = potential_of(self.path.trap_at(controls), self.path.state)
        except NoPotential as refusal:
            return TrapPoint(depth=None, reason=str(refusal))
        point = _moved(near[0].point, potential)
        if point.depth is None:
            return point
        weights = np.array([one.distance**-_WEIGHT for one in near])
        rooms = np.array([_room(one.point) for one in near])
        room = math.exp(float(weights @ rooms / np.sum(weights)))
        return replace(point, volume=room * point.volume / math.exp(_room(point)))

    def _near(self, key: Setting) -> list[_Known]:
        """The nearest surveys of traps that hold atoms, the nearest first."""
        names = [control for control, _ in key]
        found = [
            (setting, point)
            for setting, point in self.path.known.items()
            if point.depth is not None and point.well is not None and [control for control, _ in setting] == names
        ]
        if not found:
            return []
        values = np.array([[value for _, value in setting] for setting in (key, *(setting for setting, _ in found))])
        # Of controls that may vanish or change their sign the share of their range counts.
        ranges = np.maximum(np.ptp(values, axis=0), 1e-300)
        positive = np.all(values > 0.0, axis=0)
        scaled = np.where(positive, np.log(np.where(positive, values, 1.0)), values / ranges)
        away = np.linalg.norm(scaled[1:] - scaled[0], axis=1)
        order = np.argsort(away, kind="stable")[:_NEIGHBOURS]
        return [_Known(max(float(away[k]), 1e-12), found[k][1]) for k in order]


class _Known(NamedTuple):
    distance: float
    point: TrapPoint


def _moved(point: TrapPoint, potential: Potential) -> TrapPoint:
    """A surveyed trap in a potential that is a little different."""
    well = point.well
    assert isinstance(well, SurveyedWell)
    assert point.depth is not None
    basin = well.basin
    gone = replace(point, depth=None, reason="the trap no longer holds atoms", well=None)
    if basin.minimum.cusp:
        zeros = potential.cusps()
        place = min(zeros, key=lambda zero: float(np.linalg.norm(zero - well.minimum)), default=None)
    else:
        place = settle(potential, well.minimum, potential.length, 10.0 * potential.length)
    if place is None:
        return gone
    bottom, _, curvature = potential.hessian(place)
    top = _way_out(basin.escape, potential, place, well)
    # What is held of the depth: less than all where free space is the way out.
    depth = (top - float(bottom)) * point.depth / basin.depth
    if not depth > 0.0:
        return gone
    frequencies, axes = point.frequencies, point.axes
    if point.frequencies is not None:
        modes = modes_of(curvature, potential.mass)
        if modes is None:
            return gone
        x, y, z = (float(f) for f in modes.frequencies)
        frequencies, axes = (x, y, z), tuple(tuple(row) for row in modes.axes.tolist())
    x, y, z = (float(coordinate) for coordinate in place)
    minimum = replace(basin.minimum, position=place, energy=float(bottom), curvature=curvature)
    if basin.minimum.cusp:
        minimum = cusp_at(potential, place)
    shift = minimum.energy - basin.minimum.energy
    there = replace(
        basin,
        minimum=minimum,
        escape=replace(basin.escape, energy=top),
        inner_passes=tuple(energy + shift for energy in basin.inner_passes if energy + shift < top),
    )
    shares = None
    if frequencies is not None and point.light_shares is not None:
        a, b, c = (float(share) for share in light_shares(potential, place, np.array(axes)))
        shares = a, b, c
    zero_force = point.zero_force
    if basin.minimum.cusp and potential.coils is not None:
        now, before = (abs(p.zeeman_slope * (p.coils.gradient or 0.0)) for p in (potential, well.potential) if p.coils)
        zero_force = zero_force * now / before if before > 0.0 else zero_force
    return replace(
        point,
        depth=depth,
        frequencies=frequencies,
        axes=axes,
        minimum=(x, y, z),
        light_heating=float(heating_of(potential, place).power),
        light_shares=shares,
        zero_force=zero_force,
        well=SurveyedWell(potential=replace(potential, lights={}), basin=there, wall=well.wall),
    )


def _way_out(escape: Escape, potential: Potential, minimum: Floats, well: SurveyedWell) -> float:
    """Energy of the way out that was the lowest. [J]"""
    if escape.kind is Exit.OPEN_SPACE:
        outside = potential.level_outside
        return math.inf if outside is None else outside
    assert escape.position is not None
    if escape.kind is Exit.PASS:
        return _pass_energy(potential, escape.position)
    edges = {
        Exit.KNIFE: lambda: knife_passes(potential, minimum, well.wall),
        Exit.WALL: lambda: wall_passes(potential, well.wall),
        Exit.ARM_END: lambda: arm_end_passes(potential, charts_of(potential, well.wall)),
    }[escape.kind]()
    return min((edge.energy for edge in edges), default=float(potential.energy(escape.position)))


def _pass_energy(potential: Potential, place: Floats) -> float:
    """Energy of the pass that is near a place: by Newton's steps, or where these stray, at the place itself, which is
    wrong in second order of how far the pass has moved."""
    r, length = place, potential.length
    for _ in range(_STEPS):
        energy, gradient, hessian = potential.hessian(r)
        try:
            step = np.linalg.solve(hessian, -gradient)
        except np.linalg.LinAlgError:
            break
        size = float(np.linalg.norm(step))
        if size < 1e-6 * length and int(np.sum(np.linalg.eigvalsh(hessian) < 0.0)) == 1:
            return float(energy)
        r = r + step * min(1.0, length / max(size, 1e-300))
        if np.linalg.norm(r - place) > 5.0 * length:
            break
    return float(potential.energy(place))


def _room(point: TrapPoint) -> float:
    """ln of the volume at the depth over that of the power law of the bottom, up to a constant."""
    assert point.depth is not None
    if point.frequencies is not None:
        return math.log(point.volume) - 1.5 * math.log(point.depth) + math.log(math.prod(point.frequencies))
    bottom = 3.0 * math.log(point.zero_force) if point.zero_force > 0.0 else 0.0
    return math.log(point.volume) - point.curve.exponent * math.log(point.depth) + bottom
