"""The scattering length against magnetic field, and the present field on the curve, to be dragged along it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from app.answers.profile import round_up
from app.answers.tuning import TuningAnswer
from app.engine import CloudAnswer
from app.figures.picture import Array, Axis, Curve, Label, Mark, Picture, Role
from app.language import translate as _
from app.tuning_words import length_sentence, length_text
from physics.constants import bohr_radius
from physics.scattering import WhyUnknown, scattering_length_at_field, tuning

GAUSS = 1e-4
_EVEN = 400
_EDGE = 0.98  # of the length axis: a mark further out would be cut


def tuning_picture(answer: TuningAnswer, cloud: CloudAnswer) -> Picture:
    """The curve of `answer` and on it the field of `cloud`; a typed length as a line across.

    Raises ValueError for a state without a curve.
    """
    curve = answer.curve
    if curve is None:
        raise ValueError(f"no field tunes {answer.state.key} {answer.state.name}: there is no curve to show")
    x = Axis(label=_("magnetic field B"), unit="G", low=curve.low / GAUSS, high=curve.high / GAUSS)
    reach = _reach(answer)
    y = Axis(label=_("scattering length a"), unit="a0", low=-reach, high=reach)
    lengths = curve.length / bohr_radius
    # Far outside the plot a steep curve would only cost ink.
    shown = np.clip(lengths, -3.0 * reach, 3.0 * reach)
    curves = [
        Curve(name="", role=Role.DECADE, x=np.array([x.low, x.high]), y=np.zeros(2)),
        *_poles(curve.poles, reach),
        Curve(name=_("scattering length"), role=Role.FIRST, x=curve.field / GAUSS, y=shown),
    ]
    labels = [
        _label(f"{pole / GAUSS:.6g} G", pole, 0.92 * reach, _clear_side(curve.field, lengths, pole))
        for pole in curve.poles
    ]
    labels += [_label(_("no data"), 0.5 * (low + high), 0.08 * reach) for low, high in curve.gaps]
    zeros = tuple(Mark(name=_("a = 0"), role=Role.THRESHOLD, x=zero / GAUSS, y=0.0) for zero in curve.zeros)
    ground = Picture(
        title=_("how a magnetic field tunes the scattering length"),
        x=x,
        y=y,
        curves=tuple(curves),
        marks=zeros,
        labels=tuple(labels),
    )
    return with_field(ground, cloud)


def with_field(ground: Picture, cloud: CloudAnswer) -> Picture:
    """The same curve with another field on it: what a drag changes, and nothing else."""
    still = tuple(curve for curve in ground.curves if curve.role is not Role.CLOUD)
    zeros = tuple(mark for mark in ground.marks if mark.role is not Role.CLOUD)
    typed, field = cloud.plan.species.scattering_length, cloud.plan.species.field
    y = ground.y
    if typed is not None:
        length = typed.value / bohr_radius
        if abs(length) > y.high:
            y = replace(y, low=-round_up(1.1 * abs(length)), high=round_up(1.1 * abs(length)))
        line = Curve(
            name=_("typed length"),
            role=Role.CLOUD,
            x=np.array([ground.x.low, ground.x.high]),
            y=np.array([length, length]),
        )
        return replace(ground, y=y, curves=(*still, line), marks=zeros, summary=length_sentence(cloud))
    if field is None:
        return replace(ground, curves=still, marks=zeros, summary=length_sentence(cloud))
    mark = Mark(
        name=_("present field"),
        role=Role.CLOUD,
        x=field.value / GAUSS,
        y=_height(cloud, y),
        draggable=True,
    )
    return replace(ground, curves=still, marks=(*zeros, mark), summary=length_sentence(cloud))


def _height(cloud: CloudAnswer, axis: Axis) -> float:
    """Where the mark of the field stands: at the length in use, or at the edge of the plot where that is beyond."""
    used, edge = cloud.scattering, _EDGE * axis.high
    if used.value is None:
        return edge if used.reason is WhyUnknown.AT_POLE else 0.0
    return min(max(used.value / bohr_radius, -edge), edge)


def _reach(answer: TuningAnswer) -> float:
    """Half of the length axis [a0]: the flat parts of the curve and the roots of its resonances."""
    assert answer.curve is not None
    curve = answer.curve
    even: Array = scattering_length_at_field(tuning(answer.state), np.linspace(curve.low, curve.high, _EVEN))
    known = np.abs(even[np.isfinite(even)]) / bohr_radius
    # Half of the fields in the inner part of the plot: a wing of a broad resonance is seen, and a narrow one on it.
    return round_up(max(4.0 * float(np.median(known)), 1.0)) if known.size else 1.0


def _poles(poles: tuple[float, ...], reach: float) -> tuple[Curve, ...]:
    """All poles as one broken line."""
    if not poles:
        return ()
    x = np.array([value for pole in poles for value in (pole / GAUSS, pole / GAUSS, np.nan)])
    y = np.array([-reach, reach, np.nan] * len(poles))
    return (Curve(name=_("resonance"), role=Role.CLASSICAL, x=x, y=y),)


def _label(text: str, field: float, height: float, side: int = 0) -> Label:
    return Label(text=text, role=Role.CLASSICAL, x=field / GAUSS, y=height, side=side)


def _clear_side(field: Array, length: Array, pole: float) -> int:
    """The side of a pole on which the curve does not go up, so that there is room at the top of the plot."""
    before = length[(field < pole) & np.isfinite(length)]
    return 1 if not before.size or before[-1] > 0.0 else -1


def length_there(answer: TuningAnswer, field: float) -> str:
    """What a pointer reads of the curve at a field [T]; empty where the data say nothing."""
    length = float(scattering_length_at_field(tuning(answer.state), field))
    return length_text(length) if np.isfinite(length) else ""
