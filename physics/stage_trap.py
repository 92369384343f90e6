"""The trap along one stretch of a ramp: a smooth function of time between a few points of its path."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import NamedTuple

import numpy as np

from physics.checks import Floats
from physics.kinetic_tables import Averages, kinetic_table
from physics.ramp_shapes import Course
from physics.ramps import Control
from physics.spline import Spline
from physics.trap_path import TrapPath, TrapPoint, points_between


class TrapNow(NamedTuple):
    """The trap at one time. Rates of change are of the logarithms. [SI]"""

    place: float
    speed: float
    depth: float
    level_volume: float
    highest: float
    log_frequencies: tuple[float, float, float]
    light_heating: float
    noise_share: float
    zero_force: float
    depth_rate: float
    volume_rate: float
    frequency_rates: tuple[float, float, float]

    @property
    def levels_rate(self) -> float:
        """d ln S/dt of the number of levels below the depth. [1/s]"""
        return 1.5 * self.depth_rate + self.volume_rate

    def moving(self, speed: float) -> TrapNow:
        """The same trap at another speed than the one, not 0, at which it moves."""
        share = speed / self.speed
        x, y, z = self.frequency_rates
        return self._replace(
            speed=speed,
            depth_rate=share * self.depth_rate,
            volume_rate=share * self.volume_rate,
            frequency_rates=(share * x, share * y, share * z),
        )


class TrapCurve:
    """The trap between points along one line of its controls, a smooth function of the place on that line.

    Attributes
    ----------
    low, high : float. Range of places.
    bottom_exponent : float. d of the volume curve at the bottom of the trap.
    """

    def __init__(self, places: Floats, points: Sequence[TrapPoint]) -> None:
        # Along a falling control the places fall: turned round, so that they increase.
        if len(places) > 1 and places[1] < places[0]:
            places, points = places[::-1], points[::-1]
        self._spline = Spline(places, np.array([_numbers(point) for point in points]))
        self._table = kinetic_table(places, [point.curve for point in points])
        self.bottom_exponent = points[0].curve.exponent
        self.low, self.high = float(places[0]), float(places[-1])

    def at(self, place: float, speed: float) -> TrapNow:
        """The trap at a place, moving along the line at a speed per second."""
        # A rounding beyond the ends.
        place = min(max(place, self.low), self.high)
        values, slopes = self._spline.both(place)
        depth, volume, top, x, y, z, light, noise, force = values
        d_depth, d_volume, _, dx, dy, dz, *_ = slopes
        return TrapNow(
            place,
            speed,
            math.exp(depth),
            math.exp(volume),
            top,
            (x, y, z),
            light,
            noise,
            force,
            d_depth * speed,
            d_volume * speed,
            (dx * speed, dy * speed, dz * speed),
        )

    def averages(self, now: TrapNow, share: float) -> Averages | None:
        """Averages of a cloud whose mean energy is a share of the depth; None where no cut cloud has so much."""
        excess = now.highest / share - 1.0
        return self._table.averages(now.place, math.log(excess)) if excess > 0.0 else None


class StageTrap:
    """A trap while its controls follow their courses over a stretch without corners.

    Attributes
    ----------
    begin, end : float. [s] Within the stage. The end is that of the stretch, or where the trap holds nothing any more.
    held : bool. Whether the trap holds atoms to the end of the stretch; `reason` says why not.
    places, points : where along the stretch, and the traps there, between which all is interpolated.
    """

    def __init__(self, courses: Mapping[Control, Course], path: TrapPath, begin: float, end: float) -> None:
        self.courses = {control: course.within(begin, end) for control, course in courses.items()}
        self.begin, self.end = begin, end
        self._constant: TrapNow | None = None
        moving = [course for course in self.courses.values() if not course.still]
        self._single = moving[0] if len(moving) == 1 else None
        single = self._single
        self._logarithmic = single is not None and min(single.value(begin), single.value(end)) > 0.0
        count = sum(points_between(path.nodes, course.value(begin), course.value(end)) for course in moving)
        times = self._times(moving, begin, end, count)
        points: list[TrapPoint] = []
        for time in times:
            point = path.at({control: course.value(time) for control, course in self.courses.items()})
            if point.depth is None:
                break
            points.append(point)
        self.held = len(points) == len(times)
        self.reason = "" if self.held else point.reason
        if not points:
            self.end = begin
            return
        if not self.held:
            self.end = float(times[len(points) - 1])
        self.places: Floats = np.array([self._place(t)[0] for t in times[: len(points)]])
        self.points = tuple(points)
        self._curve = TrapCurve(self.places, points)
        self.bottom_exponent = self._curve.bottom_exponent
        if not moving:
            self._constant = self._curve.at(self._curve.low, 0.0)

    def _times(self, moving: list[Course], begin: float, end: float, nodes: int) -> Floats:
        """Times of the points: even steps of one moving control, of all logarithms together where several move."""
        if not moving:
            return np.array([begin])
        fine = np.linspace(begin, end, 20 * nodes + 1)
        path = np.zeros(len(fine))
        for course in moving:
            values = course.values(fine)
            # Of a control that may vanish or change its sign the share of its range counts.
            scaled = np.log(values) if np.all(values > 0.0) else values / np.ptp(values)
            path[1:] += np.cumsum(np.abs(np.diff(scaled)))
        even: Floats = np.interp(np.linspace(0.0, path[-1], nodes), path, fine)
        even[0], even[-1] = begin, end
        return even

    def _place(self, time: float) -> tuple[float, float]:
        """Where along the stretch, and how fast that changes: ln of a single control, itself, or the time."""
        course = self._single
        if course is None:
            return time, 1.0
        value, slope = course.value(time), course.slope(time)
        return (math.log(value), slope / value) if self._logarithmic else (value, slope)

    def now(self, time: float) -> TrapNow:
        """The trap at a time within the stage."""
        if self._constant is not None:
            return self._constant
        return self._curve.at(*self._place(time))

    def averages(self, now: TrapNow, share: float) -> Averages | None:
        """As of `TrapCurve`."""
        return self._curve.averages(now, share)


def _numbers(point: TrapPoint) -> tuple[float, ...]:
    assert point.depth is not None
    frequencies = (math.nan,) * 3 if point.frequencies is None else tuple(math.log(f) for f in point.frequencies)
    return (
        math.log(point.depth),
        math.log(point.level_volume),
        point.curve.highest_energy,
        *frequencies,
        point.light_heating,
        point.noise_share,
        point.zero_force,
    )
