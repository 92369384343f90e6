"""The models of a cloud against each other: the condensed fraction of bosons, the chemical potential of fermions."""

from __future__ import annotations

import math

import numpy as np

from app.answers.models import ModelsAnswer
from app.figures.picture import Axis, Curve, Mark, Picture, Role
from app.language import translate as _
from app.model_words import LEAST_SUPERFLUID
from app.words import number
from physics.models import Model

_BOSON_ROLES = {
    Model.IDEAL: Role.CLASSICAL,
    Model.SEMI_IDEAL: Role.FIRST,
    Model.EXACT_LEVELS: Role.THIRD,
    Model.HARTREE_FOCK: Role.FOURTH,
}
# Mostly one lies on the other: a solid line shows through a broken one.
_FERMION_ROLES = {Model.IDEAL: Role.FIRST, Model.EXACT_LEVELS: Role.SECOND}


def models_picture(answer: ModelsAnswer) -> Picture:
    """A curve for each model that is done and can hold, and the cloud on that of the model in use."""
    return _bosons(answer) if answer.bosons else _fermions(answer)


def _bosons(answer: ModelsAnswer) -> Picture:
    x = Axis(label=_("T/Tc, ideal"), unit="", low=0.0, high=answer.reach)
    y = Axis(label=_("condensed fraction"), unit="", low=-0.02, high=1.02)
    curves = _curves(answer)
    if np.any(np.isfinite(answer.first_order)):
        first_order = Curve(
            name=_("first-order shifts"), role=Role.SECOND, x=answer.first_order_grid, y=answer.first_order
        )
        curves = (*curves[:1], first_order, *curves[1:])
    return Picture(
        title=_("condensed fraction by model"),
        x=x,
        y=y,
        curves=(*curves, *_upright(answer, y)),
        marks=_cloud(answer, x, y),
        summary=_("Condensed fraction against T/Tc by {count} models; the cloud is at {place}.").format(
            count=len(curves), place=number(answer.reduced_temperature)
        ),
        note=_note(answer, _("T/Tc")),
    )


def _fermions(answer: ModelsAnswer) -> Picture:
    lowest = min((float(np.nanmin(curve.value)) for curve in answer.curves), default=0.0)
    # the mark at T = 0 is seen whole
    x = Axis(label=_("T/TF"), unit="", low=-0.02 * answer.reach, high=answer.reach)
    y = Axis(label=_("chemical potential µ/EF"), unit="", low=min(-0.5, math.floor(2.0 * lowest) / 2.0), high=1.5)
    marks = _cloud(answer, x, y)
    curves = (*_curves(answer), *_upright(answer, y))
    if math.isfinite(answer.estimate) and y.low < answer.estimate < y.high:
        marks = (*marks, Mark(name=_("with interaction, T = 0"), role=Role.THRESHOLD, x=0.0, y=answer.estimate))
    if LEAST_SUPERFLUID < answer.superfluid < x.high:
        curves = (*curves, _line(_("superfluid below, estimate"), Role.THRESHOLD_SHIFTED, answer.superfluid, y))
    return Picture(
        title=_("chemical potential by model"),
        x=x,
        y=y,
        curves=curves,
        marks=marks,
        summary=_("Chemical potential against T/TF; the cloud is at {place}.").format(
            place=number(answer.reduced_temperature)
        ),
        note=_note(answer, _("T/TF")),
    )


def _curves(answer: ModelsAnswer) -> tuple[Curve, ...]:
    roles = _BOSON_ROLES if answer.bosons else _FERMION_ROLES
    return tuple(
        Curve(name=curve.model.label, role=roles[curve.model], x=curve.reduced_temperature, y=curve.value)
        for curve in answer.curves
    )


def _upright(answer: ModelsAnswer, y: Axis) -> tuple[Curve, ...]:
    if answer.reduced_temperature > answer.reach:
        return ()
    return (_line("", Role.CLOUD, answer.reduced_temperature, y),)


def _line(name: str, role: Role, place: float, y: Axis) -> Curve:
    return Curve(name=name, role=role, x=np.array([place, place]), y=np.array([y.low, y.high]))


def _cloud(answer: ModelsAnswer, x: Axis, y: Axis) -> tuple[Mark, ...]:
    if answer.reduced_temperature > x.high or not y.low <= answer.now <= y.high:
        return ()
    return (Mark(name=_("cloud"), role=Role.CLOUD, x=answer.reduced_temperature, y=answer.now),)


def _note(answer: ModelsAnswer, ratio: str) -> str:
    if answer.reduced_temperature <= answer.reach:
        return ""
    return _("the cloud is further right, at {ratio} = {place}").format(
        ratio=ratio, place=number(answer.reduced_temperature)
    )
