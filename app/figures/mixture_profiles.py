"""The two clouds of a mixture along the vertical: where each lies, how wide it is, where both meet."""

from __future__ import annotations

import numpy as np

from app.answers.mixture_profiles import MixtureProfiles
from app.figures.picture import Array, Axis, Curve, Label, Picture, Role
from app.language import translate as _
from app.units import best_unit, factor, format_quantity

_RIGHT = 1.05
"""End of the axis of densities, which are 1 at their peaks."""

_ROLES = (Role.FIRST, Role.SECOND)
_OFF = 0.07  # of the axis, that a name stands off its curve
_SMALLEST = 0.01  # of the axis: minima that are closer are one


def mixture_picture(profiles: MixtureProfiles, names: tuple[str, str]) -> Picture:
    """Heights upwards, densities over their peaks to the right, and the product of both, which is where they collide.

    names : of the first species and the passenger
    """
    reach = float(profiles.heights[-1])
    unit = best_unit(reach, ("nm", "µm", "mm"))
    scale = factor(unit)
    heights = profiles.heights / scale
    shapes = [density / np.max(density) for density in profiles.densities]
    product = shapes[0] * shapes[1]
    curves = [Curve(name=_("where they meet, n₁ n₂"), role=Role.FRACTION, x=product, y=heights)]
    labels = []
    apart = (profiles.centres[1] - profiles.centres[0]) / scale
    if abs(apart) > _SMALLEST * reach / scale:
        curves += [_level(centre / scale) for centre in profiles.centres]
        labels.append(_distance(profiles, unit, scale))
    upper = 1 if apart >= 0.0 else 0
    for place, (shape, role) in enumerate(zip(shapes, _ROLES, strict=True)):
        curves.append(Curve(name="", role=role, x=shape, y=heights))
        peak = format_quantity(profiles.peaks[place], "1/cm^3", digits=3).replace("1/cm^3", "cm⁻³")
        x, y = _flank(shape, heights, upper=place == upper)
        y += _OFF * (heights[-1] - heights[0]) * (1.0 if place == upper else -1.0)
        text = names[place] if np.isnan(profiles.peaks[place]) else f"{names[place]}, peak {peak}"
        labels.append(Label(text=text, role=role, x=x, y=y, side=1))
    return Picture(
        title=_("the two clouds along the vertical"),
        x=Axis(label=_("density over its peak"), unit="", low=0.0, high=_RIGHT),
        y=Axis(label=_("height"), unit=unit, low=float(heights[0]), high=float(heights[-1])),
        curves=tuple(curves),
        labels=tuple(labels),
        summary=_("{first} and {second} along the vertical, their minima {distance} apart.").format(
            first=names[0], second=names[1], distance=_length(abs(apart) * scale)
        ),
    )


def _level(height: float) -> Curve:
    return Curve(name="", role=Role.STAGE, x=np.array([0.0, _RIGHT]), y=np.array([height, height]))


def _distance(profiles: MixtureProfiles, unit: str, scale: float) -> Label:
    """How far the minima are apart, beside the upper one."""
    upper = max(profiles.centres) / scale
    text = _("minima {distance} apart").format(distance=_length(abs(profiles.centres[1] - profiles.centres[0])))
    above = 0.05 * 2.0 * float(profiles.heights[-1]) / scale
    return Label(text=text, role=Role.STAGE, x=0.1, y=upper + above, side=1)


def _flank(shape: Array, heights: Array, *, upper: bool) -> tuple[float, float]:
    """Where a curve has fallen to half on one side, to name it there."""
    beyond = np.flatnonzero(shape >= 0.5)
    place = int(beyond[-1] if upper else beyond[0])
    return float(shape[place]), float(heights[place])


def _length(value: float) -> str:
    return format_quantity(value, best_unit(value, ("nm", "µm", "mm")), digits=3) if value > 0.0 else "0 µm"
